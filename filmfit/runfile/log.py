"""A laboratory's log, one run a row: delimited text with a heading of run-file keys, or with a map of its own headings.

Knows cells and columns; what a run may hold is checked by keys.py. Every fault has its line and column.
"""

import csv
import hashlib
import io
from collections.abc import Iterator
from dataclasses import dataclass, field
from datetime import date, datetime
from pathlib import Path
from typing import Any, Final

from pydantic import ValidationError

from filmfit.errors import Faults, FilmfitError, RunFileError, nearest
from filmfit.runfile.keys import Run
from filmfit.runfile.log_map import LogMap
from filmfit.runfile.spelled import inside_units, one_process, spellings
from filmfit.runfile.told import told
from filmfit.units import SUFFIXES

MOST_FAULTS: Final = 20
LARGEST_BYTES: Final = 500_000_000
DEPTHS: Final = ("thickness", "thickness_sigma", "thickness_common_sigma")
TEXTS: Final = ("id", "film", "chamber", "source", "process", "recipe", "kind", "target_mode", "time_from", "sample",
                "state")  # fmt: skip
WORKBOOKS: Final = (b"PK\x03\x04", b"\xd0\xcf\x11\xe0")


@dataclass(frozen=True)
class LogRow:
    """A run of a log: its conditions as a run file would hold them, and its thickness where there is one."""

    conditions: dict[str, Any]
    thickness_nm: float | None
    sigma_nm: float | None
    common_nm: float | None


@dataclass(frozen=True)
class Log:
    """A log as read: its rows, the checksum of its bytes, the columns that are kept as the lab's own."""

    rows: tuple[LogRow, ...]
    sha256: str
    own: tuple[str, ...]
    notes: tuple[str, ...] = field(default=())


def known_columns() -> list[str]:
    """Return the headings that need no map."""
    depths = [f"{stem}_{unit}" for stem in DEPTHS for unit in ("nm", "um", "A")]
    return [*Run.model_fields, *spellings("run"), "sample", "state", *depths]


def read_log(path: Path, layout: LogMap) -> Log:
    """Return the runs of a log.

    Args:
        path: the file.
        layout: which column is what.

    Raises:
        Faults: everything that is wrong with it, up to twenty faults, each with its line and column.
    """
    raw = _bytes(path)
    text, notes = _text(raw)
    sample = text[: text.find("\n")] if "\n" in text else text
    delimiter = layout.delimiter or max(";\t,|", key=lambda sign: (sample.count(sign), sign == ","))
    lines = csv.reader(io.StringIO(text, newline=""), delimiter=delimiter)
    headings = [one.strip() for one in next(lines, [])]
    keys = _columns(path, headings, layout)
    rows: list[LogRow] = []
    seen: dict[tuple[str, ...], int] = {}
    faults: list[FilmfitError] = []
    for cells in lines:
        if not any(cell.strip() for cell in cells):
            continue
        try:
            rows.append(_row(f"{path.name}:{lines.line_num}", cells, keys, layout, seen, lines.line_num))
        except Faults as error:
            faults += error.errors
        if len(faults) >= MOST_FAULTS:
            break
    if faults:
        raise Faults(faults[:MOST_FAULTS])
    if not rows:
        raise Faults([RunFileError(path.name, "holds no run", do="a heading, then one run a line")])
    own = tuple(key for key in keys if key.startswith("other."))
    known = known_columns()
    for name in (key.removeprefix("other.") for key in own):
        hint = nearest(name, known) if name not in layout.columns.values() else ""
        notes += [f"column '{name}' is kept as the lab's own" + (f"; {hint}" if hint else "")]
    return Log(tuple(rows), hashlib.sha256(raw).hexdigest(), own, tuple(notes))


def _bytes(path: Path) -> bytes:
    """Return the file's bytes, or say why not."""
    try:
        if path.is_dir():
            raise Faults([RunFileError(str(path), "is a folder", do="name the log in it")])
        if not path.exists():
            near = nearest(path.name, [p.name for p in path.parent.iterdir()]) if path.parent.is_dir() else ""
            raise Faults([RunFileError(str(path), "no such file", do=near)])
        raw = path.read_bytes()
    except OSError as error:
        raise Faults([RunFileError(str(path), f"cannot be read: {error.strerror}")]) from error
    if raw.startswith(WORKBOOKS):
        raise Faults([RunFileError(str(path), "is a workbook: not supported yet", do="save the sheet as CSV")])
    if len(raw) > LARGEST_BYTES or b"\0" in raw[:4096]:
        raise Faults([RunFileError(str(path), "is no delimited text", do="save the sheet as CSV (UTF-8)")])
    return raw


def _text(raw: bytes) -> tuple[str, list[str]]:
    """Return the text, and a note where it is not UTF-8."""
    try:
        return raw.decode("utf-8-sig"), []
    except UnicodeDecodeError:
        return raw.decode("cp1252", "replace"), ["not UTF-8: read as Windows-1252"]


def _columns(path: Path, headings: list[str], layout: LogMap) -> list[str]:
    """Return the key of each column; a column that is none is the lab's own, other.NAME.

    Raises:
        Faults: a heading that stands twice, or a column that must be there and is not.
    """
    by_heading = {heading: key for key, heading in layout.columns.items()}
    known = set(known_columns())
    where = f"{path.name}:1"
    faults: list[FilmfitError] = []
    keys = []
    for number, heading in enumerate(headings):
        key = by_heading.get(heading) or (
            heading if heading in known or heading.startswith(("flows_sccm.", "other.")) else f"other.{heading}"
        )
        if key in keys:
            faults.append(RunFileError(where, f"two columns for '{key.removeprefix('other.')}'", do="keep one of them"))
        keys.append("" if not heading else key)
        if not heading and number < len(headings) - 1:
            faults.append(RunFileError(where, f"column {number + 1} has no heading", do="give it one"))
    for key, heading in layout.columns.items():
        if heading not in headings:
            hint = nearest(heading, headings)
            faults.append(RunFileError(where, f"no column '{heading}', which the map names for {key}", do=hint))
    for needed in ("id", "date", "film"):
        if needed not in keys and needed not in layout.constants and not faults:
            hint = nearest(needed, headings)
            faults.append(RunFileError(where, f"no column '{needed}'", do=hint or "name it, or give a map with --map"))
    if faults:
        raise Faults(faults)
    return keys


def _row(
    where: str, cells: list[str], keys: list[str], layout: LogMap, seen: dict[tuple[str, ...], int], line: int
) -> LogRow:
    """Return one run.

    Raises:
        Faults: what is wrong with its cells.
    """
    if any(cell.strip() for cell in cells[len(keys) :]):
        more = f"{len(cells)} cells under {len(keys)} headings"
        raise Faults([RunFileError(where, more, do="quote a cell that holds the delimiter")])
    given: dict[str, Any] = dict(layout.constants)
    faults: list[FilmfitError] = []
    for key, cell in zip(keys, (one.strip() for one in cells), strict=False):
        if cell and key:
            try:
                given[key] = _value(key, cell, layout)
            except ValueError as error:
                faults.append(RunFileError(f"{where}: {key}", f"'{cell}'", str(error)))
    if faults:
        raise Faults(faults)
    row = _checked(where, given)
    name = (str(given.get("id")), str(given.get("sample", "-")), str(given.get("state", "as-deposited")))
    if name in seen:
        raise Faults([RunFileError(f"{where}: id", f"'{name[0]}' stands in line {seen[name]} too",
                                   do="give each run its own id")])  # fmt: skip
    seen[name] = line
    return row


def _value(key: str, cell: str, layout: LogMap) -> Any:
    """Return a cell's value.

    Raises:
        ValueError: what would be allowed.
    """
    if key == "date":
        try:
            if layout.date_format:
                return datetime.strptime(cell, layout.date_format).date()
            return date.fromisoformat(cell[:10]) if len(cell) > 10 and cell[10] in " T" else date.fromisoformat(cell)
        except ValueError as error:
            raise ValueError(f"a date as {layout.date_format or '2026-04-17'}") from error
    if key in TEXTS:
        return cell
    try:
        return int(cell) if key == "passes" else _number(cell, layout.decimal)
    except ValueError:
        if key.startswith("other."):
            return cell
        words = "a whole number" if key == "passes" else "a number"
        hint = ', or decimal = "," in the map' if "," in cell and layout.decimal == "." else ""
        raise ValueError(words + hint) from None


def _number(cell: str, decimal: str) -> float:
    """Return a finite number.

    Raises:
        ValueError: it is none.
    """
    if "_" in cell or (decimal == "," and "." in cell):
        raise ValueError(cell)
    number = float(cell.replace(",", ".") if decimal == "," else cell)
    if number != number or number in (float("inf"), -float("inf")):
        raise ValueError(cell)
    return number


def _checked(where: str, given: dict[str, Any]) -> LogRow:
    """Return a row whose conditions a run file could hold.

    Raises:
        Faults: what it could not.
    """
    depths = dict(_depths(where, given))
    tables: dict[str, dict[str, Any]] = {"run": {}, "other": {}, "sample": {}}
    for key, value in given.items():
        if key.startswith("flows_sccm."):
            tables["run"].setdefault("flows_sccm", {})[key.removeprefix("flows_sccm.")] = value
        elif key.startswith("other."):
            tables["other"][key.removeprefix("other.")] = value
        elif key in ("sample", "state"):
            tables["sample"]["name" if key == "sample" else key] = value
        elif not key.startswith("thickness"):
            tables["run"][key] = value
    run = checked_run(where, tables["run"])
    conditions: dict[str, Any] = {"format": 1, "run": run}
    conditions |= {name: tables[name] for name in ("other", "sample") if tables[name]}
    return LogRow(conditions, *(depths.get(stem) for stem in DEPTHS))


def checked_run(where: str, keys: dict[str, Any]) -> dict[str, Any]:
    """Return the keys of [run] in inside units and words, as plain JSON types.

    Args:
        where: what the faults name.
        keys: as a user wrote them.

    Raises:
        Faults: what a run file could not hold.
    """
    given = dict(keys)
    if isinstance(given.get("date"), str):
        try:
            given["date"] = date.fromisoformat(given["date"])
        except ValueError as error:
            raise Faults([RunFileError(f"{where}: date", f"'{keys['date']}'", "a date as 2026-04-17")]) from error
    tables = {"run": given}
    written, faults = inside_units(tables)
    faults += one_process(tables)
    try:
        checked = Run.model_validate(given)
    except ValidationError as error:
        details = error.errors(include_url=False)
        faults += told([{**one, "loc": ("run", *one["loc"])} for one in details], written)
        raise Faults(_placed(where, faults)) from error
    if faults:
        raise Faults(_placed(where, faults))
    record: dict[str, Any] = checked.model_dump(mode="json", exclude_unset=True)
    return record


def _placed(where: str, faults: list[Any]) -> list[FilmfitError]:
    """Return faults of keys with the line they stand in."""
    return [RunFileError(f"{where}: {'.'.join(str(part) for part in one.key[1:])}", one.found, one.allowed, one.do)
            for one in faults]  # fmt: skip


def _depths(where: str, given: dict[str, Any]) -> Iterator[tuple[str, float]]:
    """Yield the thickness and its uncertainties in nm.

    Raises:
        Faults: one that is not positive, stands twice, or has no thickness.
    """
    for stem in DEPTHS:
        keys = [key for key in given if key.startswith("thickness") and key.rpartition("_")[0] == stem]
        if len(keys) > 1:
            raise Faults([RunFileError(f"{where}: {keys[1]}", f"{keys[0]} stands here too", do="keep one of them")])
        for key in keys:
            if not given[key] > 0:
                raise Faults([RunFileError(f"{where}: {key}", f"{given[key]:g}", "more than 0")])
            yield stem, given[key] * SUFFIXES[key.rpartition("_")[2]].factor
