"""Where the numbers stand in a delimited text: the longest block of rows whose first column runs one way.

Knows delimiters and decimal signs, and judges them together; does not know what the columns mean.
"""

import re
from dataclasses import dataclass

from filmfit.errors import SpectrumError

DELIMITERS = ("\t", ";", ",", "|", " ")
GAPS = frozenset({"", "-", "--", "---", "nan", "n/a", "na", "over", "under", "overflow", "####", "*", "?"})
NUMBER = {
    ".": re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?"),
    ",": re.compile(r"[+-]?(\d+,?\d*|,\d+)([eE][+-]?\d+)?"),
}
FEWEST_ROWS = 5
SPOKEN = {"\t": "tab", ";": "semicolon", ",": "comma", "|": "bar", " ": "blank"}


@dataclass(frozen=True)
class Block:
    """A table of numbers: headings, rows (None where a cell is a gap), and how it was understood."""

    headings: tuple[str, ...]
    rows: tuple[tuple[float | None, ...], ...]
    first_line: int
    delimiter: str
    decimal: str


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
            if delimiter == decimal:
                continue
            found = _longest(cells, delimiter, decimal)
            if found is not None and (best is None or _size(found) > _size(best)):
                best = found
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
    cells = (
        line.split() if delimiter == " " else [cell.strip().strip('"') for cell in line.strip("\r\n").split(delimiter)]
    )
    if delimiter != " " and len(cells) > 2 and cells[-1] == "":
        cells.pop()
    return cells


def _row(cells: list[str], decimal: str) -> tuple[float | None, ...] | None:
    """Return a row's numbers, None where it is no row of numbers."""
    if len(cells) < 2:
        return None
    row: list[float | None] = []
    for position, cell in enumerate(cells):
        if NUMBER[decimal].fullmatch(cell):
            row.append(float(cell.replace(",", ".")))
        elif position and cell.lower() in GAPS:
            row.append(None)
        else:
            return None
    return tuple(row)


def _longest(cells: list[list[str]], delimiter: str, decimal: str) -> Block | None:
    """Return the longest run of number rows of one width whose first column is monotone."""
    best: tuple[int, int] = (0, 0)
    start, rows = 0, [_row(line, decimal) for line in cells]
    direction = 0.0
    for number in range(len(rows) + 1):
        row = rows[number] if number < len(rows) else None
        before = rows[number - 1] if number > start else None
        if row is not None and before is not None and len(row) == len(before):
            step = (row[0] or 0.0) - (before[0] or 0.0)
            if step * direction >= 0 or direction == 0:
                direction = direction or step
                continue
        if number - start > best[1] - best[0]:
            best = (start, number)
        start, direction = number + (row is None), 0.0
    if best[1] == best[0]:
        return None
    block = tuple(row for row in rows[best[0] : best[1]] if row is not None)
    headings = _headings(cells, best[0], len(block[0]))
    return Block(headings, block, best[0] + 1, delimiter, decimal)


def _headings(cells: list[list[str]], first: int, width: int) -> tuple[str, ...]:
    """Return the headings above a block: the nearest line of its width, else numbers."""
    for line in reversed(cells[max(0, first - 3) : first]):
        if len(line) == width and any(re.search(r"[^\W\d]", cell) for cell in line):
            return tuple(line)
    return tuple(str(number + 1) for number in range(width))


def _refuse_two_readings(block: Block, lines: list[str], name: str, where: str) -> None:
    """Refuse a comma that may part columns or decimals: fewer headings than cells tell of it."""
    if block.delimiter != "," or block.headings[0] != "1":
        return
    above = next((line for line in reversed(lines[: block.first_line - 1]) if line.strip()), "")
    headings, cells = len(above.split(",")), len(block.rows[0])
    if 2 <= headings < cells:
        row = lines[block.first_line - 1].strip()
        raise SpectrumError(
            f"{where}: {name}:{block.first_line}",
            f"'{row}' under {headings} headings is {cells} numbers, or {headings} with a decimal comma",
            do="export it with semicolons or a decimal point",
        )
