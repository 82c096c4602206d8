"""Drude's free carriers.

Knows the unscreened plasma energy and one damping; does not know the effective mass (quantities/carriers.py does).
"""

import numpy as np

from filmfit.dispersion.law import ComplexArray, FloatArray, Law, Parameter, stacked


def drude(energy_eV: FloatArray, values: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Return epsilon = -Ep^2 / (E^2 + i E G) and its derivatives; Ep is not screened by the bound electrons.

    Args:
        energy_eV: (E,).
        values: plasma_eV Ep, damping_eV G, (2,) or (2, ..., 1).

    Reference: Drude, Ann. Phys. 306, 566 (1900); tests/published/test_dispersion_values.py.
    """
    plasma, damping = values
    per_denominator = 1.0 / (energy_eV**2 + 1j * energy_eV * damping)
    epsilon = -(plasma**2) * per_denominator
    by_damping = -epsilon * per_denominator * (1j * energy_eV)
    return epsilon, stacked(epsilon.shape, -2.0 * plasma * per_denominator, by_damping)


DRUDE = Law(
    "drude",
    "epsilon",
    (
        Parameter("plasma_eV", 0.0, np.inf, "unscreened plasma energy"),
        Parameter("damping_eV", 1e-5, np.inf, "damping, hbar over the scattering time"),
    ),
    drude,
    causal=True,
    reference="Drude, Ann. Phys. 306, 566 (1900)",
)
