"""The same plate by the independent package `tmm`, one wavelength at a time: slow, and therefore only a check.

Knows how to ask tmm; does not compute anything itself.
"""

from contextlib import redirect_stdout
from io import StringIO
from typing import Literal

import numpy as np
import tmm
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


def plate_by_tmm(
    wavelength_nm: FloatArray,
    index: ComplexArray,
    thickness_nm: FloatArray,
    substrate_index: ComplexArray,
    substrate_nm: float,
    angle_deg: float,
    polarization: Literal["mean", "s", "p"],
    side: Literal["film", "substrate"],
) -> tuple[FloatArray, FloatArray]:
    """Return R and T (W,) of layers on a bare thick plate by tmm's incoherent sum.

    Args:
        wavelength_nm: (W,).
        index: n + ik of the layers from the air side down to the plate, (L, W).
        thickness_nm: layers, (L,).
        substrate_index: n + ik of the plate, broadcastable to (W,).
        substrate_nm: thickness of the plate.
        angle_deg: angle of incidence in air.
        polarization: "s", "p" or their "mean".
        side: where the light comes from.

    Reference: S. J. Byrnes, Multilayer optical calculations, arXiv:1603.02720.
    """
    slab = np.broadcast_to(np.asarray(substrate_index, complex), wavelength_nm.shape)
    coherence = ["i", *("c" for _ in thickness_nm), "i", "i"]
    thicknesses = [np.inf, *(float(d) for d in thickness_nm), substrate_nm, np.inf]
    polarizations = ("s", "p") if polarization == "mean" else (polarization,)
    found = np.zeros((2, wavelength_nm.size))
    for number, wavelength in enumerate(wavelength_nm):
        indices = [1.0, *index[:, number], slab[number], 1.0]
        order = slice(None) if side == "film" else slice(None, None, -1)
        for one in polarizations:
            with redirect_stdout(StringIO()):  # tmm prints its remark on opaque layers there
                got = tmm.inc_tmm(
                    one, indices[order], thicknesses[order], coherence[order], np.radians(angle_deg), float(wavelength)
                )
            found[:, number] += np.array([got["R"], got["T"]]) / len(polarizations)
    return found[0], found[1]
