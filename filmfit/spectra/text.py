"""From a file's bytes to its text, or to what kind of file it is instead.

Knows encodings and a few magic numbers; does not know tables.
"""

import re
from pathlib import Path

from filmfit.errors import SpectrumError, nearest

ENCODINGS = ("cp1252", "cp932", "gb18030", "euc_kr")
BYTE_ORDER_MARKS = ((b"\xef\xbb\xbf", "utf-8-sig"), (b"\xff\xfe", "utf-16"), (b"\xfe\xff", "utf-16"))
WORKBOOKS = (b"PK\x03\x04", b"\xd0\xcf\x11\xe0")
LARGEST_BYTES = 50_000_000
SAMPLE_BYTES = 100_000


def read_bytes(path: Path, where: str) -> bytes:
    """Return a file's bytes.

    Raises:
        SpectrumError: no such file, not a plain file, too large, or not readable.
    """
    try:
        if path.is_dir():
            raise SpectrumError(where, f"'{path.name}' is a folder", do="name the file in it")
        if not path.exists():
            near = nearest(path.name, [p.name for p in path.parent.iterdir()]) if path.parent.is_dir() else ""
            raise SpectrumError(where, f"no file '{path.name}' in {path.parent}", do=near)
        if not path.is_file():
            raise SpectrumError(where, f"'{path.name}' is no plain file", do="save the spectrum to a file")
        if path.stat().st_size > LARGEST_BYTES:
            raise SpectrumError(where, f"'{path.name}' is over 50 MB", do="export the spectra alone")
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
    stated = next((encoding for mark, encoding in BYTE_ORDER_MARKS if content.startswith(mark)), _two_bytes(content))
    if stated is not None:
        text = _strict(content, stated, name, where)
    else:
        try:
            text = content.decode("utf-8")
        except UnicodeDecodeError:
            text = _guessed(content, name, where)
    if "\0" in text:
        raise SpectrumError(where, f"'{name}' is not a text file", do="export the spectrum as delimited text")
    if re.match(r"[\s\ufeff]*##\s*TITLE", text, re.IGNORECASE):
        raise SpectrumError(where, f"'{name}' is JCAMP-DX: not supported yet", do="export it as delimited text")
    return text


def _two_bytes(content: bytes) -> str | None:
    """Return the UTF-16 that a text without a mark is in: every other byte of plain letters and digits is 0."""
    sample = content[: SAMPLE_BYTES // 2 * 2]
    for first, encoding in ((1, "utf-16-le"), (0, "utf-16-be")):
        zeros, letters = sample[first::2], sample[1 - first :: 2]
        if zeros and zeros.count(0) > 0.9 * len(zeros) and not letters.count(0):
            return encoding
    return None


def _strict(content: bytes, encoding: str, name: str, where: str) -> str:
    """Return the text in the encoding that the file itself names."""
    try:
        return content.decode(encoding)
    except UnicodeDecodeError as error:
        raise SpectrumError(where, f"'{name}' says it is {encoding} but is not", do="export it again") from error


def _guessed(content: bytes, name: str, where: str) -> str:
    """Return the text in the likeliest of the encodings that laboratory software writes."""
    from charset_normalizer import from_bytes

    sample = content[:SAMPLE_BYTES].rpartition(b"\n")[0] or content[:SAMPLE_BYTES]
    if sample.isascii():
        sample = b"\n".join(line for line in content.splitlines() if not line.isascii())[:SAMPLE_BYTES]
    best = from_bytes(sample, cp_isolation=list(ENCODINGS)).best()
    if best is None:
        raise SpectrumError(where, f"'{name}' is not a text file", do="export the spectrum as delimited text")
    return content.decode(best.encoding, errors="replace")
