"""Where the numbers stand in a delimited text: the longest run of rows whose first column goes one way.

Knows delimiters and decimal signs, and judges them together; does not know what the columns mean.
"""

import csv
import math
import re
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from filmfit.errors import SpectrumError
from filmfit.spectra.headings import headings_above

DELIMITERS: Final = ("\t", ";", ",", "|", " ")
GAP: Final = re.compile(r"[-*#?.]*|nan|n/a|#n/a|na|null|none|over|under|overflow|overrange|ovr|[+-]?inf|[+-]?1\.#\w+")
NUMBER: Final = {
    ".": re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eEdD][+-]?\d+)?", re.ASCII),
    ",": re.compile(r"[+-]?(\d+,?\d*|,\d+)([eEdD][+-]?\d+)?", re.ASCII),
}
FEWEST_ROWS: Final = 5
SPOKEN: Final = {"\t": "tab", ";": "semicolon", ",": "comma", "|": "bar", " ": "blank"}

Row = tuple[float | None, ...]


@dataclass
class Run:
    """Rows one after the other whose first column goes one way; lines are counted from 0."""

    rows: list[Row]
    first: int
    turned: bool  # the row before it stands right above, in the other direction


@dataclass(frozen=True)
class Block:
    """A table of numbers: headings, rows (None where a cell is a gap), how it was understood, what else there is."""

    headings: tuple[str, ...]
    rows: tuple[Row, ...]
    first_line: int
    delimiter: str
    decimal: str
    others: tuple[int, ...]  # lines where further tables begin
    turns_at: int | None  # line where the first column turns round, where that leaves a table's worth of rows out


def find_block(text: str, name: str, where: str) -> Block:
    """Return the largest table of numbers in a text.

    Args:
        text: the file's text.
        name: the file's name, for errors.
        where: where the file was named, for errors.

    Raises:
        SpectrumError: no such table, or one that can be read in two ways.
    """
    lines = text.splitlines()
    if not any(line.strip() for line in lines):
        raise SpectrumError(where, f"'{name}' is empty", do="export the spectrum again")
    best: Block | None = None
    for delimiter in DELIMITERS:
        cells = [_split(line, delimiter) for line in lines]
        for decimal in (".", ","):
            if delimiter == decimal and '"' not in text:  # one comma for both is read only where quotes part them
                continue
            found = _largest(lines, cells, delimiter, decimal)
            if found is not None and (best is None or _size(found) > _size(best)):
                best = found
    if best is not None and best.turns_at is not None:
        raise SpectrumError(
            f"{where}: {name}:{best.turns_at}", "the first column turns round here", "ascending or descending",
            "sort the rows, or export each scan to its own file",
        )  # fmt: skip
    if best is None or len(best.rows) < FEWEST_ROWS:
        raise SpectrumError(
            where, f"'{name}' holds no table of numbers with at least {FEWEST_ROWS} rows",
            "a wavelength column and columns of R or T", "export the spectrum as delimited text",
        )  # fmt: skip
    _refuse_two_readings(best, lines, name, where)
    return best


def _size(block: Block) -> tuple[int, int]:
    """Return what makes one reading better than another: rows, then columns."""
    return len(block.rows), len(block.rows[0])


def _split(line: str, delimiter: str) -> list[str]:
    """Return a line's cells; blanks count in groups, one delimiter at the end is no further cell."""
    if delimiter == " ":
        return line.split()
    cells = line.split(delimiter)
    if '"' in line:
        try:
            cells = next(csv.reader([line], delimiter=delimiter, skipinitialspace=True), [])
        except csv.Error:  # a cell beyond what csv takes: no table of numbers
            return []
    cells = [cell.strip() for cell in cells]
    if len(cells) > 2 and cells[-1] == "":
        cells.pop()
    return cells


def _row(cells: Sequence[str], decimal: str) -> Row | None:
    """Return a row's numbers, None where it is no row of numbers."""
    if len(cells) < 2:
        return None
    row: list[float | None] = []
    for position, cell in enumerate(cells):
        if NUMBER[decimal].fullmatch(cell):
            number = float(re.sub("[dD]", "e", cell.replace(",", ".")))
            if not math.isfinite(number):
                return None
            row.append(number)
        elif position and GAP.fullmatch(cell.lower()):
            row.append(None)
        else:
            return None
    return tuple(row)


def _runs(lines: Sequence[str], cells: Sequence[list[str]], decimal: str) -> list[Run]:
    """Return the runs of rows; an empty line ends one unless the next row goes on in its direction."""
    runs: list[Run] = []
    open_run, blank, direction = False, False, 0.0
    for number, line in enumerate(cells):
        row = _row(line, decimal)
        if row is None:
            open_run = open_run and not lines[number].strip()
            blank = True
            continue
        width_holds = open_run and len(row) == len(runs[-1].rows[-1])
        if width_holds:
            step = (row[0] or 0.0) - (runs[-1].rows[-1][0] or 0.0)
            on = step * direction > 0 or (direction == 0 and step != 0)
            if on or (step == 0 and not blank):
                direction = direction or step
                runs[-1].rows.append(row)
                blank = False
                continue
        turned = width_holds and not blank
        if turned and len(runs[-1].rows) == 2:  # a lone row above a table that goes the other way
            runs.append(Run([runs[-1].rows.pop(), row], number - 1, True))
            direction = step
        else:
            runs.append(Run([row], number, turned))
            direction = 0.0
        open_run, blank = True, False
    return runs


def _largest(lines: Sequence[str], cells: Sequence[list[str]], delimiter: str, decimal: str) -> Block | None:
    """Return the longest run as a block, with its headings and what stands beside it."""
    runs = _runs(lines, cells, decimal)
    if not runs:
        return None
    at = max(range(len(runs)), key=lambda number: len(runs[number].rows))
    first, last = at, at
    while runs[first].turned:
        first -= 1
    while last + 1 < len(runs) and runs[last + 1].turned:
        last += 1
    beside = sum(len(one.rows) for one in runs[first : last + 1]) - len(runs[at].rows)
    turn = runs[min(first + 1, last)].first
    best = runs[at]
    others = tuple(
        one.first + 1 for number, one in enumerate(runs) if len(one.rows) >= FEWEST_ROWS and not first <= number <= last
    )
    return Block(
        headings_above(lines, cells, best.first, len(best.rows[0]), delimiter), tuple(best.rows), best.first + 1,
        delimiter, decimal, others, turn + 1 if beside >= FEWEST_ROWS else None,
    )  # fmt: skip


def _refuse_two_readings(block: Block, lines: Sequence[str], name: str, where: str) -> None:
    """Refuse a comma that may part columns or decimals: too few headings, or whole numbers without headings, tell."""
    cells = len(block.rows[0])
    if block.delimiter != "," or cells < 3 or block.headings[0] != "1":
        return
    above = next((line for line in reversed(lines[: block.first_line - 1]) if line.strip()), "")
    headings = len(above.split(","))
    row = lines[block.first_line - 1].strip()
    there = [line for line in lines[block.first_line - 1 :] if line.strip()][: len(block.rows)]
    if 2 <= headings < cells:
        under, other = f"under {headings} headings ", f"{headings}"
    elif all(re.fullmatch(r"[-+\d,\s]*", line) for line in there):
        under, other = "", "fewer"
    else:
        return
    raise SpectrumError(
        f"{where}: {name}:{block.first_line}", f"'{row}' {under}is {cells} numbers, or {other} with a decimal comma",
        do="export it with semicolons or a decimal point",
    )  # fmt: skip
