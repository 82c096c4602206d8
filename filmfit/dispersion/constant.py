"""The constant part of a dielectric function: transitions far above the measured range.

Knows one number; does not know where those transitions lie.
"""

import numpy as np

from filmfit.dispersion.law import ComplexArray, FloatArray, Law, Parameter, stacked


def constant(energy_eV: FloatArray, values: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Return epsilon = values[0] and its derivative.

    Args:
        energy_eV: (E,).
        values: epsilon, (1,) or (1, ..., 1).

    Reference: high-frequency dielectric constant, any textbook; tests/published/test_dispersion_values.py.
    """
    epsilon = values[0] + np.zeros(energy_eV.shape, complex)
    return epsilon, stacked(epsilon.shape, 1.0)


CONSTANT = Law(
    "constant",
    "epsilon",
    (Parameter("epsilon", 0.0, np.inf, "dielectric constant of all transitions far above the data"),),
    constant,
    causal=False,
    reference="common practice, no source",
)
