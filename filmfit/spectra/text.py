"""From a file's bytes to its text, or to what kind of file it is instead.

Knows encodings and a few magic numbers; does not know tables.
"""

from pathlib import Path

from filmfit.errors import SpectrumError, nearest

ENCODINGS = ("cp1252", "cp932", "gb18030", "euc_kr")
BYTE_ORDER_MARKS = ((b"\xef\xbb\xbf", "utf-8-sig"), (b"\xff\xfe", "utf-16"), (b"\xfe\xff", "utf-16"))
WORKBOOKS = (b"PK\x03\x04", b"\xd0\xcf\x11\xe0")
LARGEST_BYTES = 500_000_000


def read_bytes(path: Path, where: str) -> bytes:
    """Return a file's bytes.

    Raises:
        SpectrumError: no such file, a folder, too large, or not readable.
    """
    if path.is_dir():
        raise SpectrumError(where, f"'{path.name}' is a folder", do="name the file in it")
    if not path.exists():
        near = nearest(path.name, [p.name for p in path.parent.iterdir()]) if path.parent.is_dir() else ""
        raise SpectrumError(where, f"no file '{path.name}' in {path.parent}", do=near)
    try:
        if path.stat().st_size > LARGEST_BYTES:
            raise SpectrumError(where, f"'{path.name}' is over 500 MB", do="export the spectra alone")
        return path.read_bytes()
    except OSError as error:
        raise SpectrumError(where, f"'{path.name}' cannot be read: {error.strerror}") from error


def decode(content: bytes, name: str, where: str) -> str:
    """Return the text of a delimited-text file.

    Args:
        content: the file's bytes.
        name: the file's name, for errors.
        where: where the file was named, for errors.

    Raises:
        SpectrumError: a workbook, a JCAMP-DX file, or bytes that are no text.
    """
    if content.startswith(WORKBOOKS):
        raise SpectrumError(where, f"'{name}' is a workbook: not supported yet", do="save the sheet as CSV")
    for mark, encoding in BYTE_ORDER_MARKS:
        if content.startswith(mark):
            return _strict(content, encoding, name, where)
    try:
        text = content.decode("utf-8")
    except UnicodeDecodeError:
        text = _guessed(content, name, where)
    if "\0" in text:
        raise SpectrumError(where, f"'{name}' is not a text file", do="export the spectrum as delimited text")
    if text.lstrip().upper().startswith("##TITLE"):
        raise SpectrumError(where, f"'{name}' is JCAMP-DX: not supported yet", do="export it as delimited text")
    return text


def _strict(content: bytes, encoding: str, name: str, where: str) -> str:
    """Return the text in the encoding that the file itself names."""
    try:
        return content.decode(encoding)
    except UnicodeDecodeError as error:
        raise SpectrumError(where, f"'{name}' says it is {encoding} but is not", do="export it again") from error


def _guessed(content: bytes, name: str, where: str) -> str:
    """Return the text in the likeliest of the encodings that laboratory software writes."""
    from charset_normalizer import from_bytes

    best = from_bytes(content[:100_000], cp_isolation=list(ENCODINGS)).best()
    if best is None:
        raise SpectrumError(where, f"'{name}' is not a text file", do="export the spectrum as delimited text")
    return content.decode(best.encoding, errors="replace")
