"""Sellmeier's three-term dielectric function of a clear glass.

Knows clear materials only; does not absorb.
"""

import numpy as np

from filmfit.dispersion.law import ComplexArray, FloatArray, Law, Parameter, stacked
from filmfit.units import HC_EV_NM

UM_PER_NM = 1e-3


def sellmeier(energy_eV: FloatArray, values: FloatArray) -> tuple[ComplexArray, ComplexArray]:
    """Return epsilon = 1 + sum b_j l^2 / (l^2 - c_j^2), l in um, and its derivatives.

    Args:
        energy_eV: (E,).
        values: b1, b2, b3, c1_um, c2_um, c3_um, (6,) or (6, ..., 1).

    Reference: Sellmeier, Ann. Phys. 219, 272 (1871); tests/published/test_dispersion_values.py.

    Holds when: no c_j lies inside the energies asked for.
    """
    b, c = values[:3], values[3:]
    square = (HC_EV_NM * UM_PER_NM / energy_eV) ** 2
    shares = [square / (square - cj**2) for cj in c]
    epsilon = 1.0 + b[0] * shares[0] + b[1] * shares[1] + b[2] * shares[2] + 0j
    slopes = [bj * share * 2 * cj / (square - cj**2) for bj, cj, share in zip(b, c, shares, strict=True)]
    return epsilon, stacked(epsilon.shape, *shares, *slopes)


SELLMEIER = Law(
    "sellmeier",
    "epsilon",
    (
        *(Parameter(f"b{j}", -np.inf, np.inf, f"strength of resonance {j}") for j in (1, 2, 3)),
        *(Parameter(f"c{j}_um", 0.0, np.inf, f"wavelength of resonance {j}") for j in (1, 2, 3)),
    ),
    sellmeier,
    causal=False,
    reference="Sellmeier, Ann. Phys. 219, 272 (1871)",
)
