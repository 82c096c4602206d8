"""A coated plate as an ideal instrument would see it: R or T and its derivatives.

Knows the order of layers and the plate's geometry; does not know laws, parameters or the instrument's errors.
Layers are listed from the substrate up, as in a run file; leading batch axes stand between layer and wavelength.
"""

from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from filmfit.optics.thick import plate

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


@dataclass(frozen=True)
class Beam:
    """How light meets the plate: angle of incidence in air, polarization, side it comes from, rear face."""

    quantity: Literal["R", "T"]
    angle_deg: float
    polarization: Literal["mean", "s", "p"]
    side: Literal["film", "substrate"]
    back: Literal["bare", "blackened", "rough", "index-matched"]


@dataclass(frozen=True)
class Optics:
    """Dielectric functions on one wavelength grid, with their slopes in wavelength.

    Args:
        wavelength_nm: (W,), or (N, ..., W) where an instrument averages over nodes.
        epsilon: layers from the substrate up, (L, ..., W).
        epsilon_slope: d epsilon / d wavelength in 1/nm, (L, ..., W).
        substrate: dielectric function of the plate, broadcastable to (..., W).
        substrate_slope: its slope in 1/nm.
    """

    wavelength_nm: FloatArray
    epsilon: ComplexArray
    epsilon_slope: ComplexArray
    substrate: ComplexArray
    substrate_slope: ComplexArray

    def spread(self, by_nm: FloatArray) -> "Optics":
        """Return the functions at wavelengths longer by each of (N, ..., 1), to first order, N as leading axis."""
        return Optics(
            self.wavelength_nm + by_nm,
            self.epsilon[:, None] + by_nm * self.epsilon_slope[:, None],
            self.epsilon_slope[:, None],
            self.substrate + by_nm * self.substrate_slope,
            self.substrate_slope,
        )


@dataclass(frozen=True)
class Ideal:
    """R or T of a plate and its derivatives; complex ones mean dX = Re(derivative * d epsilon)."""

    value: FloatArray
    d_epsilon: ComplexArray
    d_thickness: FloatArray
    d_substrate: ComplexArray
    d_wavelength: FloatArray


def ideal(
    optics: Optics, thickness_nm: FloatArray, substrate_mm: float, beam: Beam, plate_slopes: bool = True
) -> Ideal:
    """Return R or T of a coated plate as an ideal instrument would measure it.

    Args:
        optics: dielectric functions on the wavelength grid (W,).
        thickness_nm: layers from the substrate up, (L, ...).
        substrate_mm: thickness of the plate in mm.
        beam: quantity and geometry.
        plate_slopes: False leaves the derivative to the plate's dielectric function out (zero).

    Returns:
        value (..., W), fraction; derivatives to each layer's dielectric function (L, ..., W) and thickness
        (L, ..., W, per nm), to the plate's (..., W), and to the wavelength (..., W, per nm).

    Reference: Abeles, Ann. Phys. 12, 596 (1950); tests/against/test_optics_against_tmm.py.

    Holds when: the plate's own interference is averaged out by the slit.
    """
    (got,) = plate(
        (beam.quantity,),
        optics.wavelength_nm,
        optics.epsilon[::-1],
        thickness_nm[::-1],
        optics.substrate,
        substrate_mm * 1e6,
        beam.angle_deg,
        beam.polarization,
        beam.side,
        beam.back,
        plate_slopes=plate_slopes,
    )
    d_epsilon, d_thickness = got.d_epsilon[::-1], got.d_thickness[::-1]
    # Phases hold thickness / wavelength alone, so a longer wavelength acts as a thinner layer with other constants.
    stretch = np.einsum("l...w,l...->...w", d_thickness, thickness_nm) / optics.wavelength_nm
    d_wavelength = np.sum((d_epsilon * optics.epsilon_slope).real, axis=0) - stretch
    d_wavelength = d_wavelength + (got.d_substrate * optics.substrate_slope).real
    return Ideal(got.value, d_epsilon, d_thickness, got.d_substrate, d_wavelength)
