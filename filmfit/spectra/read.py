"""A spectrum file read: which column, which units, percent or fraction; what was understood is noted.

Knows headings and units; this is where percent becomes a fraction. Does not know the sample.
"""

import hashlib
import re
from pathlib import Path
from typing import Literal

import numpy as np

from filmfit.errors import SpectrumError, nearest
from filmfit.spectra.blocks import SPOKEN, Block, find_block
from filmfit.spectra.spectrum import Spectrum
from filmfit.spectra.text import decode, read_bytes
from filmfit.units import HC_EV_NM, PERCENT

LARGEST_FRACTION = 1.5  # an ordinate without a unit that goes beyond is in percent
LOWEST_ALLOWED, HIGHEST_ALLOWED = -0.05, 1.5
FEWEST_POINTS = 5
SUM_LIMIT, SUM_SHARE = 1.05, 0.05
X_UNITS = {
    "nm": r"(?<![a-z])nm(?![a-z])|nanomet",
    "um": r"(?<![a-z])[uµμ]m(?![a-z])|micron|micromet",
    "cm-1": r"cm\s*\^?[-−]\s*1|1/cm|wavenumber",
    "eV": r"(?<![a-z])ev(?![a-z])",
}


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
    at = _column(block, column, quantity, path.name, where)
    pairs = [(row[0], row[at]) for row in block.rows]
    kept = np.array([pair for pair in pairs if None not in pair], dtype=float).reshape(-1, 2)
    if len(kept) < FEWEST_POINTS:
        raise SpectrumError(where, f"'{path.name}' has {len(kept)} points in column '{block.headings[at]}'",
                            f"at least {FEWEST_POINTS}")  # fmt: skip
    wavelength, x_note = _wavelength(kept[:, 0], block.headings[0], path.name, where)
    values, y_note = _fraction(kept[:, 1], block.headings[at])
    _refuse_impossible(wavelength, values, path.name, where)
    wavelength, values, repeats = _ascending(wavelength, values)
    notes = [f"{SPOKEN[block.delimiter]}-delimited, decimal '{block.decimal}', from line {block.first_line}", x_note,
             y_note]  # fmt: skip
    if len(pairs) > len(kept):
        notes.append(f"{len(pairs) - len(kept)} gaps left out")
    if repeats:
        notes.append(f"{repeats} repeated wavelengths averaged")
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


def _column(block: Block, column: str | int | None, quantity: str, name: str, where: str) -> int:
    """Return the position of the wanted ordinate."""
    there = ", ".join(f"'{heading}'" for heading in block.headings[1:])
    if isinstance(column, int):
        if not 2 <= column <= len(block.headings):
            raise SpectrumError(where, f"no column {column} in '{name}'", f"2 to {len(block.headings)}")
        return column - 1
    if column is None:
        if len(block.headings) == 2:
            return 1
        matches = [at for at, heading in enumerate(block.headings) if at and _stem(heading) == quantity]
        if len(matches) == 1:
            return matches[0]
        raise SpectrumError(where, f"'{name}' holds {len(block.headings) - 1} spectra", there, "name one as column")
    exact = [at for at, heading in enumerate(block.headings) if at and heading == column]
    if not exact:
        exact = [at for at, heading in enumerate(block.headings) if at and _stem(heading) == column.strip()]
    if len(exact) == 1:
        return exact[0]
    if exact:
        raise SpectrumError(where, f"{len(exact)} columns '{column}' in '{name}'", do="give its number instead")
    raise SpectrumError(where, f"no column '{column}' in '{name}'", there, nearest(column, block.headings[1:]))


def _stem(heading: str) -> str:
    """Return a heading without its unit: "R" of "R (%)", "T" of "%T"."""
    return re.sub(r"[(\[].*?[)\]]|%", "", heading).strip()


def _wavelength(x: np.ndarray, heading: str, name: str, where: str) -> tuple[np.ndarray, str]:
    """Return wavelengths in nm from the first column, by its heading's unit or, unstated, by its range."""
    unit = next((unit for unit, words in X_UNITS.items() if re.search(words, heading.lower())), None)
    stated = f"'{heading}'" if unit else "its range"
    if unit is None:
        low, high = float(x.min()), float(x.max())
        readings = [
            one
            for one, fits in (
                ("nm", low >= 150 and high <= 60_000 and high / low < 60),
                ("um", low >= 0.15 and high <= 60 and not low >= 150),
            )
            if fits
        ]
        if len(readings) != 1:
            raise SpectrumError(where, f"'{name}' does not say the unit of its first column ({low:g} to {high:g})",
                                "nm, um, cm-1 or eV in its heading")  # fmt: skip
        unit = readings[0]
    if unit in ("cm-1", "eV") and x.min() <= 0:
        raise SpectrumError(where, f"'{name}' has {x.min():g} {unit}", "positive numbers")
    scaled = x * {"nm": 1.0, "um": 1e3, "cm-1": 1e-7, "eV": 1.0 / HC_EV_NM}[unit]
    wavelength = scaled if unit in ("nm", "um") else 1.0 / scaled
    return wavelength, f"first column in {unit} by {stated}"


def _fraction(y: np.ndarray, heading: str) -> tuple[np.ndarray, str]:
    """Return the ordinate as a fraction: in percent by its heading or, without a unit, by its size."""
    if "%" in heading or "percent" in heading.lower():
        return y * PERCENT, f"'{heading}' in percent"
    if float(y.max()) > LARGEST_FRACTION:
        return y * PERCENT, f"'{heading}' in percent, by its size"
    return y, f"'{heading}' as a fraction"


def _refuse_impossible(wavelength: np.ndarray, values: np.ndarray, name: str, where: str) -> None:
    """Refuse numbers that cannot be R or T against wavelength."""
    if float(wavelength.min()) <= 0:
        raise SpectrumError(where, f"'{name}' has a wavelength of {wavelength.min():g} nm", "positive wavelengths")
    for value in (float(values.min()), float(values.max())):
        if not LOWEST_ALLOWED <= value <= HIGHEST_ALLOWED:
            raise SpectrumError(where, f"'{name}' holds {value:.4g} as a fraction of 1",
                                f"{LOWEST_ALLOWED:g} to {HIGHEST_ALLOWED:g}", "check column and unit")  # fmt: skip


def _ascending(wavelength: np.ndarray, values: np.ndarray) -> tuple[np.ndarray, np.ndarray, int]:
    """Return the points by ascending wavelength, repeated ones averaged, and how many were repeated."""
    unique, inverse, counts = np.unique(wavelength, return_inverse=True, return_counts=True)
    mean = np.bincount(inverse, weights=values) / counts
    return unique, mean, int(wavelength.size - unique.size)
