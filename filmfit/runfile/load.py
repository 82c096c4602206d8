"""From a run file to its checked content, or to every fault in it with its line.

Knows the order of the checks and where a key stands; does not open the spectra or materials that the file names.
"""

import hashlib
import re
import tomllib
from collections.abc import Iterable
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from filmfit.errors import Faults, RunFileError, nearest
from filmfit.runfile.consistency import contradictions
from filmfit.runfile.fault import Fault, Key
from filmfit.runfile.keys import Content
from filmfit.runfile.spelled import inside_units, one_process
from filmfit.runfile.told import told

LARGEST_BYTES = 10_000_000


@dataclass(frozen=True)
class RunFile:
    """A run file as read: its content, its path as the user gave it, its text, the checksum of its bytes."""

    content: Content
    path: Path
    text: str
    sha256: str

    def where(self, *key: str | int) -> str:
        """Return "file:line: key" for a key's path, as errors name it."""
        return _place(self.path, self._lines, key)

    def resolve(self, name: str) -> Path:
        """Return a path that the file names, relative to the file."""
        return self.path.parent / name

    @cached_property
    def _lines(self) -> dict[Key, int]:
        return _lines(self.text)


def load_run_file(path: str | Path) -> RunFile:
    """Return a run file's content.

    Args:
        path: the TOML file.

    Raises:
        Faults: everything that is wrong with it, each fault with file, line and key.
    """
    path = Path(path)
    content = _bytes(path)
    text = _text(content, path)
    raw = _toml(text, path)
    written, found = inside_units(raw)
    found += [*one_process(raw), *contradictions(raw)]
    try:
        checked = Content.model_validate(raw)
    except ValidationError as error:
        found += told(error.errors(include_url=False), written)
    if found:
        raise Faults(_located(found, path, text))
    return RunFile(checked, path, text, hashlib.sha256(content).hexdigest())


def _bytes(path: Path) -> bytes:
    """Return the file's bytes or say why it cannot be read."""
    where = str(path)
    try:
        if path.is_dir():
            raise Faults([RunFileError(where, "is a folder", do="name the run file in it")])
        if not path.exists():
            near = nearest(path.name, [p.name for p in path.parent.glob("*.toml")]) if path.parent.is_dir() else ""
            raise Faults([RunFileError(where, "no such file", do=near or "write one with 'filmfit new'")])
        with path.open("rb") as file:
            content = file.read(LARGEST_BYTES + 1)
    except OSError as error:
        raise Faults([RunFileError(where, f"cannot be read: {error.strerror}")]) from error
    if len(content) > LARGEST_BYTES:
        raise Faults([RunFileError(where, "is over 10 MB", do="name the run file, not the data")])
    return content


def _text(content: bytes, path: Path) -> str:
    """Return the file's text with plain line ends."""
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise Faults([RunFileError(str(path), "is not UTF-8 text", do="save it as UTF-8")]) from error
    return text.replace("\r\n", "\n").replace("\r", "\n")


def _toml(text: str, path: Path) -> dict[str, Any]:
    """Return the file's tables."""
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        said = re.fullmatch(r"(.*) \(at (?:line (\d+), column (\d+)|end of document)\)", str(error), re.DOTALL)
        words, line, column = said.groups() if said else (str(error), None, None)
        place = f"{path.name}:{line or text.count(chr(10)) + 1}"
        at = f" at column {column}" if column else ""
        fault = RunFileError(place, f"not TOML{at}: {words[:1].lower()}{words[1:]}", do="mend the syntax")
        raise Faults([fault]) from error
    except (ValueError, RecursionError) as error:  # a number of thousands of digits, lists in lists without end
        fault = RunFileError(path.name, "not TOML that can be read", do="look for an endless number or nesting")
        raise Faults([fault]) from error


def _lines(text: str) -> dict[Key, int]:
    """Return where each key stands; the parser for it is loaded only once a place is asked for."""
    from filmfit.runfile.lines import lines_of

    return lines_of(text)


def _located(faults: Iterable[Fault], path: Path, text: str) -> list[RunFileError]:
    """Return the faults with their places, in the order of the file."""
    lines = _lines(text)
    ordered = sorted(dict.fromkeys(faults), key=lambda fault: _line(lines, fault.key))
    return [RunFileError(_place(path, lines, one.key), one.found, one.allowed, one.do) for one in ordered]


def _line(lines: dict[Key, int], key: Key) -> int:
    """Return the line of the nearest table that stands in the file, 0 where there is none."""
    while key and key not in lines:
        key = key[:-1]
    return lines.get(key, 0)


def _place(path: Path, lines: dict[Key, int], key: Key) -> str:
    """Return "file:line: key" as errors name it, elements of arrays counted from 1."""
    line = _line(lines, key)
    words = "".join(f"[{part + 1}]" if isinstance(part, int) else f".{part}" for part in key).removeprefix(".")
    place = f"{path.name}:{line}" if line else path.name
    return f"{place}: {words}" if words else place
