"""What an instrument writes for a plate: slit and wedge average the fringes, the wavelength is off, the scale is off.

Knows the instrument's errors and their derivatives; does not know laws, priors or files.
"""

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np

from filmfit.stack import Beam, ComplexArray, FloatArray, Optics, ideal

# Two-point quadrature: exact to third order, so the fringe contrast is right while the phase spread stays below ~1 rad.
TRIANGLE_SIGMA_PER_FWHM = 6.0**-0.5  # a triangular slit of full width B at half height has the variance B^2/6
UNIFORM_SIGMA_PER_HALF_WIDTH = 3.0**-0.5  # a wedge of +-w has the variance w^2/3


class Errors(NamedTuple):
    """The instrument's and the sample's own errors, as the fit has them at the moment.

    `scale` multiplies the ideal value; `slit_nm` is the full width at half height of a triangular slit; `wedge` the
    half width of the thickness variation over the spot, as a fraction of the thickness.
    """

    scale: float | FloatArray
    slit_nm: float
    wedge: float


@dataclass(frozen=True)
class Observed:
    """What the instrument writes, and the derivatives of it that the fit needs (shapes as in `stack.Ideal`)."""

    value: FloatArray
    d_epsilon: ComplexArray
    d_thickness: FloatArray
    d_substrate: ComplexArray
    d_wavelength: FloatArray
    d_scale: FloatArray
    d_slit: FloatArray
    d_wedge: FloatArray


def observe(
    optics: Optics,
    thickness_nm: FloatArray,
    substrate_mm: float,
    beam: Beam,
    errors: Errors,
    plate_slopes: bool = True,
) -> Observed:
    """Return what an instrument with the given errors writes for a coated plate.

    Args:
        optics: dielectric functions at the true wavelengths, (W,).
        thickness_nm: layers from the substrate up, (L, ...).
        substrate_mm: thickness of the plate in mm.
        beam: quantity and geometry.
        errors: scale, slit and wedge; a batched scale has shape (..., 1).
        plate_slopes: False leaves the derivative to the plate's dielectric function out (zero).

    Returns:
        Value and derivatives, batch axes first, wavelength last.

    Reference: fringe contrast under a slit and a wedge: Swanepoel, J. Phys. E 17, 896 (1984);
        tests/published/test_fringe_contrast.py.
    """
    shift_nm = errors.slit_nm * TRIANGLE_SIGMA_PER_FWHM
    spread = errors.wedge * UNIFORM_SIGMA_PER_HALF_WIDTH
    has_fringes = optics.epsilon.shape[0] > 0
    slit = _signs(has_fringes and shift_nm > 0)
    wedge = _signs(has_fringes and spread > 0)
    slit_sign, wedge_sign = np.repeat(slit, wedge.size), np.tile(wedge, slit.size)
    # all nodes in one pass through the layers, as a leading batch axis
    batch = (1,) * (thickness_nm.ndim - 1)
    stretch = (1.0 + wedge_sign * spread).reshape(-1, *batch)
    nodes = optics.spread((slit_sign * shift_nm).reshape(-1, *batch, 1))
    seen = ideal(nodes, thickness_nm[:, None] * stretch, substrate_mm, beam, plate_slopes)
    by_wedge = np.einsum("ln...w,l...->n...w", seen.d_thickness, thickness_nm)
    k = errors.scale / slit_sign.size
    value = seen.value.sum(axis=0)
    return Observed(
        value=k * value,
        d_epsilon=k * seen.d_epsilon.sum(axis=1),
        d_thickness=k * (seen.d_thickness * stretch[..., None]).sum(axis=1),
        d_substrate=k * seen.d_substrate.sum(axis=0),
        d_wavelength=k * seen.d_wavelength.sum(axis=0),
        d_scale=value / slit_sign.size,
        d_slit=(k * TRIANGLE_SIGMA_PER_FWHM) * np.tensordot(slit_sign, seen.d_wavelength, 1),
        d_wedge=(k * UNIFORM_SIGMA_PER_HALF_WIDTH) * np.tensordot(wedge_sign, by_wedge, 1),
    )


def _signs(spread: bool) -> FloatArray:
    """Return the places of the quadrature's nodes in standard deviations."""
    return np.array([-1.0, 1.0]) if spread else np.zeros(1)
