"""The headings above a table of numbers, and what they say.

Knows how columns are named; does not know the numbers under them.
"""

import re
from collections.abc import Sequence
from typing import Final

from filmfit.errors import SpectrumError, nearest

LINES_ABOVE: Final = 3
UNIT_CELL: Final = re.compile(r"[(\[]?(nm|[uµμ]m|cm\^?-1|1/cm|ev|å|%|1|-|a\.?u\.?|)[)\]]?", re.IGNORECASE)
ABSCISSA: Final = re.compile(r"(wave ?length|lambda|λ|wellenl|wave ?number|photon energy|energy|nm$)")
ABSORBANCE: Final = re.compile(r"\b(abs|absorbance|extinction|optical density)\b")


def headings_above(
    lines: Sequence[str], cells: Sequence[Sequence[str]], first: int, width: int, delimiter: str
) -> tuple[str, ...]:
    """Return the headings of a table: the nearest line above with a word in it and as many cells, else numbers.

    Args:
        lines: the file's lines.
        cells: the lines parted by the delimiter.
        first: the table's first line, counted from 0.
        width: the table's number of columns.
        delimiter: what parts the cells.
    """
    rows = []
    for number in [at for at in range(first - 1, -1, -1) if lines[at].strip()][:LINES_ABOVE]:
        row = _cells(lines[number], cells[number], width, delimiter)
        if row is not None and any(re.search(r"[^\W\d]|%", cell) for cell in row):
            rows.append(row)
    if not rows:
        return tuple(str(number + 1) for number in range(width))
    nearest_row = rows[0]
    if len(rows) > 1 and all(UNIT_CELL.fullmatch(cell) for cell in nearest_row):
        pairs = zip(rows[1], (cell.strip("()[]") for cell in nearest_row), strict=True)
        return tuple(f"{name} ({unit})" if unit else name for name, unit in pairs)
    return tuple(nearest_row)


def _cells(line: str, cells: Sequence[str], width: int, delimiter: str) -> Sequence[str] | None:
    """Return a line's headings where there are as many as columns; blanks may part words or columns."""
    if len(cells) == width:
        return cells
    if delimiter != " ":
        return None
    bare = line.strip().lstrip("#").strip()
    for pattern in (r"\S+", r"\S(?:\s?\S)*", r"[^\s(\[]+(?:\s*[(\[][^)\]]*[)\]])?"):
        found = re.findall(pattern, bare)
        if len(found) == width:
            return found
    return None


def stem(heading: str) -> str:
    """Return a heading without its unit: "R" of "R (%)", "T" of "%T"."""
    return re.sub(r"[(\[].*?[)\]]|%", "", heading).strip()


def ordinate(headings: Sequence[str], column: str | int | None, quantity: str, name: str, where: str) -> int:
    """Return the position of the wanted ordinate, counted from 0.

    Args:
        headings: the table's headings, that of the abscissa first.
        column: heading (exact, or the name before its unit), number from 1, or None where the file holds one.
        quantity: "R" or "T".
        name: the file's name, for errors.
        where: where the file was named, for errors.

    Raises:
        SpectrumError: no such column, several, or one that holds something else.
    """
    places = [at for at, heading in enumerate(headings) if at and not ABSCISSA.match(heading.lower())]
    there = ", ".join(f"'{headings[at]}'" for at in places)
    if isinstance(column, int):
        if not 2 <= column <= len(headings):
            raise SpectrumError(where, f"no column {column} in '{name}'", f"2 to {len(headings)}")
        at = column - 1
    elif column is None:
        at = _only(headings, places, quantity, name, where)
    else:
        exact = [at for at in places if headings[at] == column]
        found = exact or [at for at in places if stem(headings[at]) == column.strip()]
        if not found:
            hint = nearest(column, [headings[at] for at in places])
            raise SpectrumError(where, f"no column '{column}' in '{name}'", there, hint)
        if len(found) > 1:
            raise SpectrumError(where, f"{len(found)} columns '{column}' in '{name}'", do="give its number instead")
        at = found[0]
    if ABSORBANCE.search(headings[at].lower()):
        raise SpectrumError(where, f"'{headings[at]}' in '{name}' is absorbance: not supported yet",
                            do="export it as R or T")  # fmt: skip
    return at


def _only(headings: Sequence[str], places: Sequence[int], quantity: str, name: str, where: str) -> int:
    """Return the one ordinate, or the one of several that is named by its quantity."""
    matches = [at for at in places if stem(headings[at]) == quantity]
    if len(matches) == 1:
        return matches[0]
    there = ", ".join(f"'{headings[at]}'" for at in places)
    if len(places) != 1:
        raise SpectrumError(where, f"'{name}' holds {len(places)} spectra", there, "name one as column")
    if stem(headings[places[0]]) in ("R", "T"):
        raise SpectrumError(where, f"'{name}' holds {there}, not {quantity}", do="set the quantity, or name the column")
    return places[0]


def abscissa(headings: Sequence[str], at: int) -> int:
    """Return the position of the abscissa of an ordinate: the nearest one to its left.

    Args:
        headings: the table's headings.
        at: the ordinate's position, counted from 0.
    """
    return max((one for one in range(1, at) if ABSCISSA.match(headings[one].lower())), default=0)
