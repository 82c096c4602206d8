"""One fault of a run file before it has a line, and how a value is shown in it.

Knows the user's spelling of values; does not know who finds a fault.
"""

from datetime import date, time
from typing import NamedTuple

Key = tuple[str | int, ...]

LARGEST_SHOWN = 10**15


class Fault(NamedTuple):
    """What is wrong: the key's path, what was found, what is allowed, what to do."""

    key: Key
    found: str
    allowed: str = ""
    do: str = ""


def shown(given: object) -> str:
    """Return a value as the user wrote it, cut where it is long."""
    if isinstance(given, bool):
        return "true" if given else "false"
    if isinstance(given, int) and abs(given) > LARGEST_SHOWN:
        return "a number beyond 1e15"
    if isinstance(given, date | time):
        return given.isoformat()
    if isinstance(given, dict):
        return "a table"
    if isinstance(given, list):
        return "a list" if given else "an empty list"
    words = repr(given)
    return words if len(words) <= 60 else words[:57] + "..."
