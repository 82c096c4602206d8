"""The deposition processes by one word each, and the spellings that laboratories use for them.

Knows the trade's words; does not know what a process does to a film.
"""

import re

PROCESSES = (
    "dc sputter", "pulsed dc sputter", "rf sputter", "mf sputter", "thermal evaporation", "e-beam evaporation",
    "pyrolytic", "other",
)  # fmt: skip


def process_word(given: str) -> str | None:
    """Return the one word for a process in any usual spelling, None where it is not understood.

    Args:
        given: for example "DC magnetron sputtering", "e-beam", "spray pyrolysis".
    """
    words = re.sub(r"[^a-z]+", " ", given.lower()).split()
    text = " ".join(words)
    if text in ("other", ""):
        return "other" if text else None
    if "pyroly" in text:
        return "pyrolytic"
    if "evap" in text or text in ("thermal", "e beam", "ebeam", "electron beam", "boat"):
        return "e-beam evaporation" if re.search(r"\be ?beam|electron", text) else "thermal evaporation"
    if "sputter" in text or text in ("dc", "rf", "mf", "pulsed dc", "dc magnetron", "rf magnetron"):
        if "pulse" in text:
            return "pulsed dc sputter"
        if re.search(r"\brf\b|radio", text):
            return "rf sputter"
        if re.search(r"\bmf\b|mid|dual|bipolar", text):
            return "mf sputter"
        if re.search(r"\bdc\b|direct", text):
            return "dc sputter"
    return None
