"""A spectrum file read, from its bytes to wavelengths and fractions; what was understood is noted.

Knows the order of the steps and which numbers cannot be R or T; does not know the sample.
"""

import hashlib
from pathlib import Path
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from filmfit.errors import SpectrumError
from filmfit.spectra.blocks import SPOKEN, Block, find_block
from filmfit.spectra.headings import abscissa, ordinate
from filmfit.spectra.scale import fractions, wavelengths
from filmfit.spectra.spectrum import Spectrum
from filmfit.spectra.text import decode, read_bytes

Array = NDArray[np.float64]

LOWEST_ALLOWED, HIGHEST_ALLOWED = -0.05, 1.5
FEWEST_POINTS = 5
SUM_LIMIT, SUM_SHARE = 1.05, 0.05
REPEAT_LIMIT = 0.05  # two readings at one wavelength further apart are of two things (common practice, no source)


def read_spectrum(
    path: str | Path, quantity: Literal["R", "T"], column: str | int | None = None, where: str = ""
) -> Spectrum:
    """Return one spectrum of a delimited-text file.

    Args:
        path: the file.
        quantity: "R" or "T".
        column: heading (exact, or the name before its unit), or number from 1; needed where the file holds several.
        where: where the file was named (run file, line, key), for errors.

    Raises:
        SpectrumError: the file or its numbers cannot be used.
    """
    path = Path(path)
    where = where or path.name
    content = read_bytes(path, where)
    block = find_block(decode(content, path.name, where), path.name, where)
    at = ordinate(block.headings, column, quantity, path.name, where)
    x_at = abscissa(block.headings, at)
    pairs = [(row[x_at], row[at]) for row in block.rows]
    kept = np.array([pair for pair in pairs if None not in pair], dtype=float).reshape(-1, 2)
    if len(kept) < FEWEST_POINTS:
        raise SpectrumError(where, f"'{path.name}' has {len(kept)} points in column '{block.headings[at]}'",
                            f"at least {FEWEST_POINTS}")  # fmt: skip
    wavelength, x_note = wavelengths(kept[:, 0], block.headings[x_at], path.name, where)
    values, y_note = fractions(kept[:, 1], block.headings[at], _heights(block, at), path.name, where)
    _refuse_impossible(values, path.name, where)
    wavelength, values, repeats = _ascending(wavelength, values, path.name, where)
    notes = [f"{SPOKEN[block.delimiter]}-delimited, decimal '{block.decimal}', from line {block.first_line}", x_note,
             y_note]  # fmt: skip
    if len(block.rows) > len(kept):
        notes.append(f"{len(block.rows) - len(kept)} gaps left out")
    if repeats:
        notes.append(f"{repeats} repeated wavelengths averaged")
    notes += [f"a further table from line {line} left out" for line in block.others]
    return Spectrum(quantity, wavelength, values, path.name, block.headings[at],
                    hashlib.sha256(content).hexdigest(), tuple(notes))  # fmt: skip


def check_sum(R: Spectrum, T: Spectrum, where: str) -> None:
    """Refuse R and T of one side that do not overlap or that add up to far more than 1.

    Raises:
        SpectrumError: no common wavelengths, or R + T > 1.05 on more than 5 % of the common points.
    """
    low = max(R.wavelength_nm[0], T.wavelength_nm[0])
    high = min(R.wavelength_nm[-1], T.wavelength_nm[-1])
    common = T.wavelength_nm[(T.wavelength_nm >= low) & (T.wavelength_nm <= high)]
    if common.size < FEWEST_POINTS:
        raise SpectrumError(
            where,
            f"R ({R.wavelength_nm[0]:g}-{R.wavelength_nm[-1]:g} nm) and T "
            f"({T.wavelength_nm[0]:g}-{T.wavelength_nm[-1]:g} nm) do not overlap",
            do="measure both over one range",
        )
    total = np.interp(common, R.wavelength_nm, R.values) + np.interp(common, T.wavelength_nm, T.values)
    share = float(np.mean(total > SUM_LIMIT))
    if share > SUM_SHARE:
        raise SpectrumError(
            where, f"R + T is above {SUM_LIMIT} on {100 * share:.0f} % of the points, up to {total.max():.2f}",
            f"at most {100 * SUM_SHARE:.0f} %", "check units, columns and the 100 % line",
        )  # fmt: skip


def _heights(block: Block, at: int) -> dict[str, float]:
    """Return the largest value of each other column, by its heading."""
    heights = {}
    for number, heading in enumerate(block.headings):
        column = [row[number] for row in block.rows]
        if number not in (0, at):
            heights[heading] = max((value for value in column if value is not None), default=0.0)
    return heights


def _refuse_impossible(values: Array, name: str, where: str) -> None:
    """Refuse numbers that cannot be R or T."""
    for value in (float(values.min()), float(values.max())):
        if not LOWEST_ALLOWED <= value <= HIGHEST_ALLOWED:
            raise SpectrumError(where, f"'{name}' holds {value:.4g} as a fraction of 1",
                                f"{LOWEST_ALLOWED:g} to {HIGHEST_ALLOWED:g}", "check column and unit")  # fmt: skip


def _ascending(wavelength: Array, values: Array, name: str, where: str) -> tuple[Array, Array, int]:
    """Return the points by ascending wavelength, repeated ones averaged, and how many were repeated."""
    order = np.argsort(wavelength, kind="stable")
    unique, starts, counts = np.unique(wavelength[order], return_index=True, return_counts=True)
    values = values[order]
    apart = np.maximum.reduceat(values, starts) - np.minimum.reduceat(values, starts)
    worst = int(np.argmax(apart))
    if apart[worst] > REPEAT_LIMIT:
        raise SpectrumError(
            where, f"'{name}' has {counts[worst]} values at {unique[worst]:g} nm that differ by {apart[worst]:.3g}",
            f"at most {REPEAT_LIMIT:g}", "export each scan to its own column or file",
        )  # fmt: skip
    if unique.size < FEWEST_POINTS:
        raise SpectrumError(where, f"'{name}' has {unique.size} different wavelengths", f"at least {FEWEST_POINTS}")
    return unique, np.add.reduceat(values, starts) / counts, int(wavelength.size - unique.size)
