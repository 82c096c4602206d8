"""Two materials mixed finer than the wavelength: the dielectric function of the whole.

Knows Bruggeman's effective medium; does not know layers.
"""

import numpy as np

from filmfit.optics.coherent import ComplexArray


def bruggeman(epsilon: ComplexArray, other: complex, share: float) -> tuple[ComplexArray, ComplexArray]:
    """Return the dielectric function of a mixture of spheres, and its derivative to the first one's.

    Args:
        epsilon: dielectric function of the first material, (..., W).
        other: of the second one, as 1 for voids.
        share: volume fraction of the first, 0 to 1.

    Returns:
        epsilon of the mixture and d epsilon / d (first epsilon), each (..., W), complex.

    Reference: Bruggeman, Ann. Phys. 24, 636 (1935); the root with Im >= 0, and of two real ones the positive;
        tests/published/test_mixing_values.py.

    Holds when: grains are much smaller than the wavelength.
    """
    by_b, other_by_b = 3.0 * share - 1.0, 2.0 - 3.0 * share
    b = by_b * epsilon + other_by_b * other
    root = np.sqrt(b**2 + 8.0 * epsilon * other + 0j)
    plus, minus = 0.25 * (b + root), 0.25 * (b - root)
    wrong = (plus.imag < 0) | ((plus.imag == 0) & (plus.real < 0))
    root = np.where(wrong, -root, root)
    mixed = np.where(wrong, minus, plus)
    slope: ComplexArray = 0.25 * (by_b + (b * by_b + 4.0 * other) / root)
    return mixed, slope
