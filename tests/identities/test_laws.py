"""Checks that every law passes: a law without a row here fails."""

from itertools import pairwise

import numpy as np
import pytest

from filmfit.dispersion.compose import Dispersion
from filmfit.dispersion.table import LAWS
from filmfit.errors import MaterialError

# law: parameters, an energy and the value there (computed by hand from the formula, or see tests/published)
ROWS = {
    "constant": ((3.2,), 2.0, 3.2 + 0j),
    "cauchy": ((1.5, 0.004, 1e-4), 1.239841984 / 0.5, 1.5 + 0.004 * 4 + 1e-4 * 16 + 0j),
    "urbach": ((0.01, 3.0, 0.1), 3.0, 0.01j),
    "sellmeier": ((1.0, 0.0, 0.0, 0.1, 0.2, 9.0), 1.239841984 / 0.5, 1 + 0.25 / 0.24 + 0j),
    "lorentz": ((2.0, 5.0, 0.5), 5.0, 20j),
    "tauc-lorentz": ((110.0, 6.0, 5.0, 3.0), 2.0, 3.2041926630 + 0j),
    "drude": ((1.8, 0.12), 1.5, 2.4691573927 - 3.9 + 0.1144674086j),
}
ENERGY = np.linspace(0.4, 6.5, 40)


def test_every_law_has_a_row():
    assert set(ROWS) == set(LAWS)


@pytest.mark.parametrize("name", ROWS)
def test_value(name):
    values, energy, expected = ROWS[name]
    found, _ = LAWS[name].evaluate(np.array([energy]), np.array(values))
    assert found[0] == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize("name", ROWS)
def test_derivatives_are_difference_quotients(name):
    values = np.array(ROWS[name][0])
    energy = ENERGY[ENERGY < 3.0] if name == "sellmeier" else ENERGY
    _, gradient = LAWS[name].evaluate(energy, values)
    for at in range(values.size):
        step = 1e-5 * max(abs(values[at]), 0.1)
        more, less = values.copy(), values.copy()
        more[at] += step
        less[at] -= step
        quotient = (LAWS[name].evaluate(energy, more)[0] - LAWS[name].evaluate(energy, less)[0]) / (2 * step)
        scale = max(float(np.abs(quotient).max()), 1e-6)
        np.testing.assert_allclose(gradient[at], quotient, atol=3e-6 * scale)


@pytest.mark.parametrize("name", ROWS)
def test_a_batch_is_the_same_as_one_by_one(name):
    values = np.array(ROWS[name][0])
    batch = values[:, None, None] * np.linspace(0.9, 1.1, 5)[:, None]
    energy = ENERGY[ENERGY < 3.0] if name == "sellmeier" else ENERGY
    epsilon, gradient = LAWS[name].evaluate(energy, batch)
    assert epsilon.shape == (5, energy.size)
    for number in range(5):
        one, slopes = LAWS[name].evaluate(energy, batch[:, number, 0])
        np.testing.assert_allclose(epsilon[number], one, rtol=1e-12, atol=1e-14)
        np.testing.assert_allclose(gradient[:, number], slopes, rtol=1e-9, atol=1e-12)


@pytest.mark.parametrize("name", ROWS)
def test_bounds_hold_the_row_and_absorption_is_not_negative(name):
    values = ROWS[name][0]
    for value, parameter in zip(values, LAWS[name].parameters, strict=True):
        assert parameter.low <= value <= parameter.high
    found, _ = LAWS[name].evaluate(ENERGY, np.array(values))
    assert np.all(found.imag >= 0)


def test_a_sum_squares_index_laws_and_adds_epsilon_laws():
    both = Dispersion(("cauchy", "urbach", "drude"))
    energy = ENERGY[ENERGY < 3.5]  # below the tail's edge
    values = np.array([1.8, 0.01, 0.0, 0.02, 3.5, 0.2, 1.2, 0.1])
    epsilon, gradient = both.evaluate(energy, values)
    index = LAWS["cauchy"].evaluate(energy, values[:3])[0] + LAWS["urbach"].evaluate(energy, values[3:6])[0]
    np.testing.assert_allclose(epsilon, index**2 + LAWS["drude"].evaluate(energy, values[6:])[0], rtol=1e-13)
    step = np.zeros(8)
    step[0] = 1e-6
    quotient = (both.evaluate(energy, values + step)[0] - both.evaluate(energy, values - step)[0]) / 2e-6
    np.testing.assert_allclose(gradient[0], quotient, rtol=1e-7)


def test_a_second_law_of_a_kind_has_its_own_names():
    two = Dispersion(("tauc-lorentz", "tauc-lorentz-2"))
    assert two.names[0] == "tauc-lorentz.amplitude_eV"
    assert two.names[4] == "tauc-lorentz-2.amplitude_eV"
    assert all(a != b for a, b in pairwise(sorted(two.names)))


def test_an_unknown_law_is_named_with_the_nearest():
    with pytest.raises(MaterialError) as caught:
        Dispersion(("constant", "tauc-lorenz"), "run.toml:9: layer[1].laws")
    assert str(caught.value) == (
        "run.toml:9: layer[1].laws: unknown law 'tauc-lorenz'; allowed: cauchy, constant, drude, lorentz, sellmeier, "
        "tauc-lorentz, urbach; did you mean 'tauc-lorentz'?"
    )
