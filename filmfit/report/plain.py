"""What may be written to a terminal: printable characters, one line a line.

Knows that run files and logs may hold anything; does not know what is written.
"""


def plain(text: str) -> str:
    """Return a text as one line without control characters.

    Args:
        text: any text; blanks of all kinds become spaces, what cannot be printed becomes '?'.
    """
    return "".join(sign if sign.isprintable() else " " if sign.isspace() else "?" for sign in text)
