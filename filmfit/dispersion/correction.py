"""A small free correction to a law: piecewise-linear absorption and the dispersion that causality demands of it.

Knows the Kramers-Kronig partner of a hat function in epsilon2; does not know how large a correction may be.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

FloatArray = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]


def hat_epsilon(energy_eV: FloatArray, knots_eV: FloatArray) -> ComplexArray:
    """Return the dielectric functions whose epsilon2 are unit hats on the inner knots.

    Integrating the Kramers-Kronig relation by parts leaves, for a piecewise-linear epsilon2 (odd in energy),
    epsilon1 = (1/pi) sum over knots of the change of slope times [f(Ek - E) + f(Ek + E)] with f(x) = x ln|x|.

    Args:
        energy_eV: photon energies (E,), eV.
        knots_eV: ascending knots (K + 2,), eV; the first and last are where the outer hats end.

    Returns:
        (K, E) complex.

    Reference: piecewise representation of epsilon2 with analytic epsilon1: Johs and Hale, Phys. Status Solidi A 205,
        715 (2008) (from memory); tests/against/test_kramers_kronig.py integrates the relation numerically.
    """
    terms = _x_log_x(knots_eV[:, None] - energy_eV) + _x_log_x(knots_eV[:, None] + energy_eV)
    rise = 1.0 / np.diff(knots_eV)
    left, right = rise[:-1, None], rise[1:, None]
    epsilon1 = (left * terms[:-2] - (left + right) * terms[1:-1] + right * terms[2:]) / np.pi
    epsilon2 = np.minimum((energy_eV - knots_eV[:-2, None]) * left, (knots_eV[2:, None] - energy_eV) * right)
    return epsilon1 + 1j * np.maximum(epsilon2, 0.0)


def _x_log_x(x: FloatArray) -> FloatArray:
    """Return x ln|x|, 0 at 0."""
    safe = np.where(x == 0, 1.0, np.abs(x))
    product: FloatArray = x * np.log(safe)
    return product


@dataclass(frozen=True)
class Correction:
    """A sum of given functions of energy with free coefficients.

    Args:
        energy_eV: ascending grid (G,) on which the functions are tabulated, eV.
        functions: (K, G) complex, epsilon per unit coefficient.
    """

    energy_eV: FloatArray
    functions: ComplexArray

    @property
    def size(self) -> int:
        """Number of coefficients."""
        return len(self.functions)

    def at(self, energy_eV: FloatArray) -> ComplexArray:
        """Return the functions (K, E) interpolated at the energies."""
        right = np.clip(np.searchsorted(self.energy_eV, energy_eV), 1, self.energy_eV.size - 1)
        left = right - 1
        share = (energy_eV - self.energy_eV[left]) / (self.energy_eV[right] - self.energy_eV[left])
        below, above = self.functions[:, left], self.functions[:, right]
        return below + share * (above - below)
