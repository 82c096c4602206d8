"""Lorentz's damped oscillator.

Knows one resonance; does not know a gap.
"""

import numpy as np

from filmfit.dispersion.law import ComplexArray, FloatArray, Law, Parameter, stacked


def lorentz(energy_eV: FloatArray, values: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Return epsilon = A E0^2 / (E0^2 - E^2 - i C E) and its derivatives.

    Args:
        energy_eV: (E,).
        values: strength A, peak_eV E0, width_eV C, (3,) or (3, ..., 1).

    Reference: Lorentz, The Theory of Electrons (1909), ch. IV; tests/published/test_dispersion_values.py.
    """
    strength, peak, width = values
    per_denominator = 1.0 / (peak**2 - energy_eV**2 - 1j * width * energy_eV)
    shape = peak**2 * per_denominator
    epsilon = strength * shape
    by_peak = epsilon * (2.0 / peak - 2.0 * peak * per_denominator)
    return epsilon, stacked(epsilon.shape, shape, by_peak, epsilon * per_denominator * (1j * energy_eV))


LORENTZ = Law(
    "lorentz",
    "epsilon",
    (
        Parameter("strength", 0.0, np.inf, "its share of the static dielectric constant"),
        Parameter("peak_eV", 1e-3, np.inf, "resonance energy"),
        Parameter("width_eV", 1e-4, np.inf, "full width of the absorption at half height"),
    ),
    lorentz,
    causal=True,
    reference="Lorentz, The Theory of Electrons (1909)",
)
