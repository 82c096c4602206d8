"""From a run file to its checked content, or to every fault in it with its line.

Knows units in keys and how a fault is told; does not open the spectra or materials that the file names.
"""

import hashlib
import tomllib
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path
from typing import Any

from pydantic import BaseModel, ValidationError
from pydantic_core import ErrorDetails

from filmfit.errors import Faults, FilmfitError, RunFileError, nearest
from filmfit.runfile.keys import LATER_KEYS, LATER_VALUES, Content
from filmfit.runfile.lines import lines_of
from filmfit.runfile.process import PROCESSES, process_word
from filmfit.units import SUFFIXES

Key = tuple[str | int, ...]

# Quantities that the trade writes in several units, by table.
UNIT_KEYS = {"run": ("time", "pressure"), "layer": ("thickness", "time"), "electrical": (), "substrate": ()}
INSIDE = {"time": "time_s", "pressure": "pressure_Pa", "thickness": "thickness_nm"}
UNITS = {"time": ("s", "min"), "pressure": ("Pa", "mTorr", "mbar"), "thickness": ("nm", "um", "A")}


@dataclass(frozen=True)
class RunFile:
    """A run file as read: content, path, text, and where each key stands."""

    content: Content
    path: Path
    text: str

    @property
    def sha256(self) -> str:
        """Checksum of the file's text."""
        return hashlib.sha256(self.text.encode()).hexdigest()

    @cached_property
    def _lines(self) -> dict[Key, int]:
        return lines_of(self.text)

    def where(self, *key: str | int) -> str:
        """Return "file:line: key" for a key's path, as errors name it."""
        return _place(self.path, self._lines, key)

    def resolve(self, name: str) -> Path:
        """Return a path that the file names, relative to the file."""
        return self.path.parent / name


def load_run_file(path: str | Path) -> RunFile:
    """Return a run file's content.

    Args:
        path: the TOML file.

    Raises:
        Faults: everything that is wrong with it, each fault with file, line and key.
    """
    path = Path(path)
    text = _text(path)
    try:
        raw = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise Faults([RunFileError(str(path), f"not TOML: {error}", do="mend the syntax")]) from error
    reader = _Reader(path, text)
    reader.units(raw)
    reader.processes(raw)
    try:
        content = Content.model_validate(raw)
    except ValidationError as error:
        reader.faults += [reader.fault(detail) for detail in _told_once(error.errors(include_url=False))]
    if reader.faults:
        raise Faults(reader.faults)
    return RunFile(content, path, text)


def _text(path: Path) -> str:
    """Return the file's text or say why it cannot be read."""
    where = str(path)
    if path.is_dir():
        raise Faults([RunFileError(where, "is a folder", do="name the run file in it")])
    if not path.exists():
        near = nearest(path.name, [p.name for p in path.parent.glob("*.toml")]) if path.parent.is_dir() else ""
        raise Faults([RunFileError(where, "no such file", do=near or "write one with 'filmfit new'")])
    try:
        return path.read_text(encoding="utf-8-sig")
    except UnicodeDecodeError as error:
        raise Faults([RunFileError(where, "is not UTF-8 text", do="save it as UTF-8")]) from error
    except OSError as error:
        raise Faults([RunFileError(where, f"cannot be read: {error.strerror}")]) from error


def _place(path: Path, lines: dict[Key, int], key: Key) -> str:
    """Return "file:line: key", the line of the nearest table that stands in the file."""
    at = key
    while at and at not in lines:
        at = at[:-1]
    line = f":{lines[at]}" if at else ""
    return f"{path.name}{line}: {_spoken(key)}" if key else f"{path.name}{line}"


def _spoken(key: Key) -> str:
    """Return a key's path as a person writes it: layer[1].thickness_nm, elements counted from 1."""
    words = ""
    for part in key:
        words += f"[{part + 1}]" if isinstance(part, int) else f".{part}" if words else part
    return words


class _Reader:
    """Collects the faults of one file."""

    def __init__(self, path: Path, text: str) -> None:
        self.path = path
        self.lines = lines_of(text)
        self.faults: list[FilmfitError] = []
        self.written: dict[Key, tuple[Key, Any]] = {}  # inside key -> key and value as the user wrote them

    def add(self, key: Key, found: str, allowed: str = "", do: str = "") -> None:
        self.faults.append(RunFileError(_place(self.path, self.lines, key), found, allowed, do))

    def units(self, raw: dict[str, Any]) -> None:
        """Turn every quantity with a choice of units into its inside unit, in place."""
        for table, at in _tables(raw):
            for stem in UNIT_KEYS.get(str(at[0]), ()):
                given = [f"{stem}_{unit}" for unit in UNITS[stem] if f"{stem}_{unit}" in table]
                if len(given) > 1:
                    self.add((*at, given[1]), f"{given[0]} stands here too", do="keep one of them")
                for key in given[:1]:
                    value = table.pop(key)
                    table[INSIDE[stem]] = _scaled(value, SUFFIXES[key.rpartition("_")[2]].factor)
                    self.written[(*at, INSIDE[stem])] = ((*at, key), value)
                for key in given[1:]:
                    table.pop(key)

    def processes(self, raw: dict[str, Any]) -> None:
        """Turn the usual spellings of a process into the one word of each, in place."""
        for table, at in _tables(raw):
            given = table.get("process")
            if at[0] in ("run", "layer") and isinstance(given, str):
                word = process_word(given)
                if word is None:
                    self.add((*at, "process"), f"'{given}'", ", ".join(PROCESSES), nearest(given.lower(), PROCESSES))
                else:
                    table["process"] = word

    def fault(self, detail: ErrorDetails) -> FilmfitError:
        """Return one fault of the content's check as a located sentence."""
        key = tuple(part for part in detail["loc"] if not _is_type(part))
        key, given = self.written.get(key, (key, detail["input"]))
        last = str(key[-1]) if key else ""
        place = _place(self.path, self.lines, key)
        kind = detail["type"]
        if kind == "missing":
            return RunFileError(place, "is missing", do=f"add {last}")
        if kind == "extra_forbidden":
            if last in LATER_KEYS:
                return RunFileError(place, "is not supported yet", do="leave it out")
            known = _known_keys(key[:-1])
            return RunFileError(place, "unknown key", "" if nearest(last, known) else ", ".join(known),
                                nearest(last, known))  # fmt: skip
        if kind == "literal_error":
            if given in LATER_VALUES.get(last, ()):
                return RunFileError(place, f"'{given}' is not supported yet", str(detail["ctx"]["expected"]))
            return RunFileError(place, f"{given!r}", str(detail["ctx"]["expected"]))
        if kind == "string_pattern_mismatch":
            return RunFileError(place, f"{_short(given)}", "letters, digits, '.', '_' and '-', a letter or digit first")
        if kind == "value_error":
            return RunFileError(place, detail["msg"].removeprefix("Value error, "))
        return RunFileError(place, f"{_short(given)}", detail["msg"].removeprefix("Input should be ").lower())


def _short(given: object) -> str:
    """Return a value as the user wrote it, cut where it is long."""
    words = repr(given)
    return words if len(words) <= 60 else words[:57] + "..."


def _is_type(part: str | int) -> bool:
    """Say whether a piece of pydantic's location names a type of a union rather than a key."""
    return isinstance(part, str) and (part in ("float", "Value", "str", "int", "bool") or part.startswith("function-"))


def _told_once(details: list[ErrorDetails]) -> list[ErrorDetails]:
    """Return the faults without those that only repeat another: the other arm of a union, a list left empty by one."""
    return [
        detail
        for detail in details
        if not (detail["type"] == "float_type" and isinstance(detail["input"], dict))
        and not (detail["type"] in ("model_type", "dict_type") and not isinstance(detail["input"], dict | list))
        and not (detail["type"] == "too_short" and detail["input"])
    ]


def _tables(raw: dict[str, Any]) -> list[tuple[dict[str, Any], Key]]:
    """Return the file's tables with their paths, elements of arrays of tables one by one."""
    found: list[tuple[dict[str, Any], Key]] = []
    for name, value in raw.items():
        if isinstance(value, dict):
            found.append((value, (name,)))
        elif isinstance(value, list):
            found += [(one, (name, number)) for number, one in enumerate(value) if isinstance(one, dict)]
    return found


def _scaled(value: Any, factor: float) -> Any:
    """Return a number, or each number of a table, in the inside unit; anything else as it is, to be refused later."""
    if isinstance(value, dict):
        return {key: _scaled(one, factor) for key, one in value.items()}
    if isinstance(value, bool) or not isinstance(value, int | float):
        return value
    return value if factor == 1 else value * factor


def _known_keys(at: Key) -> list[str]:
    """Return the keys that a table may hold, with the units that load.py understands."""
    model: type[BaseModel] = Content
    for part in at:
        if isinstance(part, int):
            continue
        field = model.model_fields.get(part)
        found = _model_of(field.annotation) if field is not None else None
        if found is None:
            return []
        model = found
    known = list(model.model_fields)
    for stem in UNIT_KEYS.get(str(at[0]) if at else "", ()):
        known += [f"{stem}_{unit}" for unit in UNITS[stem] if f"{stem}_{unit}" not in known]
    return known


def _model_of(annotation: Any) -> type[BaseModel] | None:
    """Return the table's model inside an annotation such as tuple[Layer, ...] or float | Value."""
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return annotation
    for inner in getattr(annotation, "__args__", ()):
        found = _model_of(inner)
        if found is not None:
            return found
    return None
