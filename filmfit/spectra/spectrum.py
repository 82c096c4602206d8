"""A measured spectrum as it was read.

Knows wavelengths, values as fractions, and what was understood; does not know what it was measured on.
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray


@dataclass(frozen=True)
class Spectrum:
    """R or T against wavelength.

    Args:
        quantity: "R" or "T".
        wavelength_nm: ascending, (W,).
        values: fractions, (W,).
        file: name of the file.
        column: heading of the column, or its number.
        sha256: checksum of the file's bytes.
        notes: what was understood, one sentence each.
    """

    quantity: Literal["R", "T"]
    wavelength_nm: NDArray[np.float64]
    values: NDArray[np.float64]
    file: str
    column: str
    sha256: str
    notes: tuple[str, ...]
