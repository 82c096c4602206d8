"""The same plate by the independent package `tmm`, one wavelength at a time: slow, and therefore only a check.

Knows how to ask tmm; computes nothing itself but the loss of one passage through the plate.
"""

import logging
from contextlib import redirect_stdout
from io import StringIO
from typing import Literal

import numpy as np
import tmm
from numpy.typing import NDArray

log = logging.getLogger("filmfit.optics")

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
    back: Literal["bare", "blackened", "rough", "index-matched"] = "bare",
) -> tuple[FloatArray, FloatArray]:
    """Return R and T of layers on a thick plate: tmm's incoherent sum, or its half-space if nothing returns.

    What tmm prints (once a process, that it makes an opaque layer let 1e-30 pass) goes to the log as information.

    Args:
        wavelength_nm: (W,).
        index: n + ik of the layers from the air side down to the plate, (L, W).
        thickness_nm: layers, (L,).
        substrate_index: n + ik of the plate, broadcastable to (W,).
        substrate_nm: thickness of the plate.
        angle_deg: angle of incidence in air.
        polarization: "s", "p" or their "mean".
        side: where the light comes from.
        back: the rear face, as in `filmfit.optics.thick.plate`.

    Returns:
        R and T, fractions, each (W,).

    Raises:
        ValueError: light on a rear face that lets none in.
        ArithmeticError: tmm refuses the stack (one reason: a plate with k < 0) or leaves the range of its numbers.

    Reference: S. J. Byrnes, Multilayer optical calculations, arXiv:1603.02720;
        tests/against/test_optics_against_tmm.py.

    Holds when: the plate's k < 1e-4, else fluxes inside it do not add up.
    """
    if side == "substrate" and back != "bare":
        raise ValueError(f"light from the substrate side needs a bare rear face, not '{back}'")
    slab = np.broadcast_to(np.asarray(substrate_index, complex), wavelength_nm.shape)
    thicknesses = [float(d) for d in thickness_nm]
    polarizations = ("s", "p") if polarization == "mean" else (polarization,)
    found = np.zeros((2, wavelength_nm.size))
    with redirect_stdout(StringIO()) as said:
        for number, wavelength in enumerate(wavelength_nm):
            stack = ([*index[:, number]], thicknesses, slab[number], substrate_nm)
            for one in polarizations:
                try:
                    got = _one(float(wavelength), *stack, np.radians(angle_deg), one, side, back)
                except (AssertionError, ValueError) as refusal:
                    raise ArithmeticError(f"tmm refuses the stack at {wavelength:g} nm: {refusal}") from refusal
                if not np.all(np.isfinite(got)):
                    raise ArithmeticError(f"tmm leaves the range of its numbers at {wavelength:g} nm")
                found[:, number] += np.array(got) / len(polarizations)
    if said.getvalue():
        log.info("tmm: %s", said.getvalue().strip())
    return found[0], found[1]


def _one(
    wavelength: float,
    index: list[complex],
    thickness: list[float],
    slab: complex,
    slab_nm: float,
    angle: float,
    polarization: str,
    side: str,
    back: str,
) -> tuple[float, float]:
    """Return R and T at one wavelength and polarization; `angle` in radians."""
    if back == "bare":
        order = slice(None) if side == "film" else slice(None, None, -1)
        indices, thicknesses = [1.0, *index, slab, 1.0], [np.inf, *thickness, slab_nm, np.inf]
        coherence = ["i", *("c" for _ in thickness), "i", "i"]
        got = tmm.inc_tmm(polarization, indices[order], thicknesses[order], coherence[order], angle, wavelength)
        return got["R"], got["T"]
    got = tmm.coh_tmm(polarization, [1.0, *index, slab], [np.inf, *thickness, np.inf], angle, wavelength)
    if back != "index-matched":
        return got["R"], 0.0
    inside = slab * np.cos(tmm.snell(1.0, slab, angle))
    return got["R"], got["T"] * np.exp(-4.0 * np.pi * inside.imag * slab_nm / wavelength)
