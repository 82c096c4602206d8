"""Cauchy's index of a clear material: n = a + b / lambda^2 + c / lambda^4, lambda in um.

Knows clear materials only; does not absorb.
"""

import numpy as np

from filmfit.dispersion.law import ComplexArray, FloatArray, Law, Parameter, stacked
from filmfit.units import HC_EV_NM

UM_PER_NM = 1e-3


def cauchy(energy_eV: FloatArray, values: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Return Cauchy's index and its derivatives.

    Args:
        energy_eV: (E,).
        values: a, b_um2, c_um4, (3,) or (3, ..., 1).

    Reference: Cauchy, Memoire sur la dispersion de la lumiere (1836); tests/published/test_dispersion_values.py.

    Holds when: the material is clear and far from resonance.
    """
    a, b, c = values
    per_square = (energy_eV / (HC_EV_NM * UM_PER_NM)) ** 2
    index = a + b * per_square + c * per_square**2 + 0j
    return index, stacked(index.shape, 1.0, per_square, per_square**2)


CAUCHY = Law(
    "cauchy",
    "index",
    (
        Parameter("a", 0.0, np.inf, "index at long wavelengths"),
        Parameter("b_um2", -np.inf, np.inf, "first dispersion coefficient"),
        Parameter("c_um4", -np.inf, np.inf, "second dispersion coefficient"),
    ),
    cauchy,
    causal=False,
    reference="Cauchy, Memoire sur la dispersion de la lumiere (1836)",
)
