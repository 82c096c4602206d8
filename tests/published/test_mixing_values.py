"""Bruggeman's effective medium against values computed once in extended precision from his formula.

Bruggeman, Ann. Phys. 24, 636 (1935): epsilon = (b +- sqrt(b^2 + 8 e1 e2)) / 4, b = (3 f1 - 1) e1 + (3 f2 - 1) e2.
"""

import numpy as np
import pytest

from filmfit.optics.mixing import bruggeman

VALUES = (
    (1.95, 1.0, 0.5, 1.4505800702),
    (1.95 + 0.05j, 1.0, 0.5, 1.4506027930 + 0.0229285379j),
    (1.95 + 0.05j, 1.0, 0.9, 1.8535058601 + 0.0451026800j),
    (0.06 + 3.6j, 1.5, 0.5, 1.1318866902 + 1.6036608188j),
)


@pytest.mark.parametrize(("first", "second", "share", "index"), VALUES)
def test_index_of_a_mixture(first, second, share, index):
    mixed, _ = bruggeman(np.array([first**2 + 0j]), second**2, share)
    assert np.sqrt(mixed)[0] == pytest.approx(index, abs=1e-9)


@pytest.mark.parametrize(("first", "second", "share", "index"), VALUES)
def test_its_slope_is_the_difference_quotient(first, second, share, index):
    step = 1e-6
    epsilon = np.array([first**2 + 0.01j])
    above, _ = bruggeman(epsilon + step, second**2, share)
    below, _ = bruggeman(epsilon - step, second**2, share)
    _, slope = bruggeman(epsilon, second**2, share)
    assert slope[0] == pytest.approx(((above - below) / (2 * step))[0], rel=1e-6)


def test_a_share_of_one_or_none_is_the_pure_material():
    epsilon = np.array([3.8 + 0.2j])
    assert bruggeman(epsilon, 1.0, 1.0)[0] == pytest.approx(epsilon)
    assert bruggeman(epsilon, 1.0, 0.0)[0] == pytest.approx([1.0])
