"""Units of a spectrum's columns: to nanometres, and from percent to a fraction. Here, and only here, percent ends.

Knows units in headings and which ranges speak for one; does not know files.
"""

import re
from collections.abc import Mapping
from typing import Final

import numpy as np
from numpy.typing import NDArray

from filmfit.errors import SpectrumError
from filmfit.spectra.headings import stem
from filmfit.units import HC_EV_NM, PERCENT

Array = NDArray[np.float64]

LARGEST_FRACTION: Final = 1.5  # an ordinate without a unit that goes beyond is in percent
NM_RANGE: Final = (150.0, 3500.0)  # an abscissa without a unit inside is in nm, as bench instruments write it
UM_RANGE: Final = (0.15, 60.0)  # one that is called a wavelength, and lies inside, is in um
KNOWN_RANGE_NM: Final = (100.0, 100_000.0)
X_UNITS: Final = {
    "nm": r"(?<![a-z])nm(?![a-z])|nanomet",
    "um": r"(?<![a-z])[uµμ]m(?![a-z])|micron|micromet",
    "angstrom": r"å|angstr|[(\[]a[)\]]",
    "cm-1": r"cm\s*\^?\s*[-−⁻]\s*[1¹]|1/cm|wave ?number",
    "eV": r"(?<![a-z])ev(?![a-z])|^photon energy$|^energy$",
}
FACTOR_NM: Final = {"nm": 1.0, "um": 1e3, "angstrom": 0.1, "cm-1": 1e7, "eV": HC_EV_NM}
R_OR_T: Final = re.compile(r"[RT](\d+|[ _-].*)?|[Rr]efl.*|[Tt]rans.*")


def wavelengths(x: Array, heading: str, name: str, where: str) -> tuple[Array, str]:
    """Return wavelengths in nm, by the heading's unit or, unstated, by the range; and how the unit was told.

    Args:
        x: abscissa as read, (W,).
        heading: its heading.
        name: the file's name, for errors.
        where: where the file was named, for errors.

    Returns:
        wavelength in nm, (W,), in the order of x; one sentence.

    Raises:
        SpectrumError: the unit is not told, or the wavelengths are none of light.
    """
    low, high = float(x.min()), float(x.max())
    unit = next((unit for unit, words in X_UNITS.items() if re.search(words, heading.lower())), None)
    told = f"'{heading}'" if unit else "its range"
    if unit is None:
        if NM_RANGE[0] <= low and high <= NM_RANGE[1]:
            unit = "nm"
        elif UM_RANGE[0] <= low and high <= UM_RANGE[1] and re.match("wave ?length|lambda|λ", heading.lower()):
            unit = "um"
        else:
            raise SpectrumError(where, f"'{name}' does not say the unit of its first column ({low:g} to {high:g})",
                                "nm, um, cm-1 or eV in its heading")  # fmt: skip
    if low <= 0:
        raise SpectrumError(where, f"'{name}' has {low:g} {unit}", "positive numbers")
    with np.errstate(over="ignore"):
        found = FACTOR_NM[unit] / x if unit in ("cm-1", "eV") else FACTOR_NM[unit] * x
    shortest, longest = float(found.min()), float(found.max())
    if not (KNOWN_RANGE_NM[0] <= shortest and longest <= KNOWN_RANGE_NM[1]):
        raise SpectrumError(
            where, f"'{name}' has wavelengths of {shortest:g} to {longest:g} nm, read in {unit} by {told}",
            "{:g} to {:g} nm".format(*KNOWN_RANGE_NM), "check the unit of its first column",
        )  # fmt: skip
    return found, f"first column in {unit} by {told}"


def fractions(y: Array, heading: str, others: Mapping[str, float], name: str, where: str) -> tuple[Array, str]:
    """Return the ordinate as a fraction of 1: in percent by its heading or, without a unit, by its size.

    Args:
        y: ordinate as read, (W,).
        heading: its heading.
        others: the largest value of each other column of the table, by heading.
        name: the file's name, for errors.
        where: where the file was named, for errors.

    Returns:
        fractions, (W,); one sentence.

    Raises:
        SpectrumError: it could be either, since another column beside it is in percent.
    """
    if _in_percent(heading):
        return y * PERCENT, f"'{heading}' in percent"
    largest = float(y.max())
    if largest > LARGEST_FRACTION:
        return y * PERCENT, f"'{heading}' in percent, by its size"
    for other, height in others.items():
        if height > LARGEST_FRACTION and R_OR_T.fullmatch(stem(other)) and not _in_percent(other):
            raise SpectrumError(
                where,
                f"'{heading}' in '{name}' goes to {largest:g} and '{other}' to {height:g}: one in percent, one not",
                do="state '%' in the headings of columns in percent",
            )
    return y, f"'{heading}' as a fraction, by its size"


def _in_percent(heading: str) -> bool:
    """Say whether a heading states percent."""
    return "%" in heading or "percent" in heading.lower()
