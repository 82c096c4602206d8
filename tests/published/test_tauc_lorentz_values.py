"""The Tauc-Lorentz law against values computed from the published formula by Kramers-Kronig quadrature.

Formula: Jellison and Modine, Appl. Phys. Lett. 69, 371 and erratum 2137 (1996) (from memory). Values: 30-digit
quadrature of the Kramers-Kronig relation of its epsilon2; parameter order A, E0, C, Eg, einf.
"""

import numpy as np
import pytest

from filmfit.dispersion.tauc_lorentz import tauc_lorentz

TOLERANCE = 1e-9
SETS = {
    "T1": (110, 6.0, 5.0, 3.0, 1.6),
    "T2": (200, 3.5, 2.0, 1.2, 1.0),
    "T3, C > 2 E0": (60, 3.6, 9.0, 2.5, 1.0),
    "T4, C = 2 E0": (60, 4.0, 8.0, 2.5, 1.0),
    "T5, Eg > E0": (80, 3.0, 4.0, 3.5, 1.0),
    "T6, sharp": (30, 4.2, 0.15, 3.3, 2.0),
}
EPSILON1 = {  # at 0.5 eV, 2 eV, Eg
    "T1": (4.5103420665, 4.8041926630, 5.4173119147),
    "T2": (19.4590450437, 30.1578544672, 22.0903674136),
    "T3, C > 2 E0": (1.9112764299, 2.0452566099, 2.1894001382),
    "T4, C = 2 E0": (2.0955058987, 2.2608816077, 2.4369492319),
    "T5, Eg > E0": (1.4705604090, 1.5171567276, 1.7274675732),
    "T6, sharp": (2.3391726840, 2.4262926344, 2.8343136261),
}
EPSILON = {  # at E, epsilon1, epsilon2; and at 6.5 eV
    "T1": (3.5, 6.1097219563, 0.2708386766, 3.4410940608, 5.6780423571),
    "T2": (3.5, 11.2442776148, 43.1836734694, -7.7122204485, 5.6596387710),
    "T3, C > 2 E0": (3.6, 2.4290398504, 0.6224279835, 1.3611119310, 1.1180043189),
    "T4, C = 2 E0": (4.0, 2.6143652901, 1.0546875000, 1.3592863381, 1.3928873536),
    "T5, Eg > E0": (4.5, 1.8799941552, 0.4734822213, 1.2453805273, 0.7461039224),
    "T6, sharp": (4.2, 3.1739826656, 9.1836734694, 1.7465118661, 0.0490844634),
}


def law(name, energy):
    *values, constant = SETS[name]
    epsilon, gradient = tauc_lorentz(np.atleast_1d(np.asarray(energy, float)), np.array(values, float))
    return epsilon + constant, gradient


@pytest.mark.parametrize("name", SETS)
def test_real_part_below_and_at_the_gap(name):
    epsilon, _ = law(name, [0.5, 2.0, SETS[name][3]])
    np.testing.assert_allclose(epsilon.real, EPSILON1[name], atol=TOLERANCE)


@pytest.mark.parametrize("name", SETS)
def test_both_parts_above_the_gap(name):
    energy, real, imaginary, real_65, imaginary_65 = EPSILON[name]
    epsilon, _ = law(name, [energy, 6.5])
    np.testing.assert_allclose(epsilon, [real + 1j * imaginary, real_65 + 1j * imaginary_65], atol=TOLERANCE)


@pytest.mark.parametrize(
    ("name", "energy", "gradient1", "gradient2"),
    [
        ("T1", 2.4, (0.0307072583, 0.5980048311, -0.2569465099, -2.3070392957), (0, 0, 0, 0)),
        (
            "T1",
            4.5,
            (0.0496686468, 0.9689761286, -0.6717635603, -2.8713511917),
            (0.0198856575, -0.7315875550, -0.1497430046, -2.9165630955),
        ),
        ("T3, C > 2 E0", 2.4, (0.0191265524, 0.3843873604, -0.0658399966, -1.1207727182), (0, 0, 0, 0)),
    ],
)
def test_derivatives(name, energy, gradient1, gradient2):
    _, gradient = law(name, energy)
    np.testing.assert_allclose(gradient[:, 0].real, gradient1, atol=TOLERANCE)
    np.testing.assert_allclose(gradient[:, 0].imag, gradient2, atol=TOLERANCE)


def test_derivative_with_the_gap_above_the_peak():
    _, gradient = law("T5, Eg > E0", 4.5)
    expected = (0.0109999269, 0.4855087971, 0.0548469343, -0.4361655034)
    np.testing.assert_allclose(gradient[:, 0].real, expected, atol=TOLERANCE)


@pytest.mark.parametrize("offset", [3e-8, 1e-5, -3e-8, -1e-4])
def test_derivatives_pass_smoothly_through_critical_damping(offset):
    # C -> 2 E0, where the published square roots change sign: the neighbours must differ by the offset only
    energy = np.array([2.4, 4.5])
    _, there = tauc_lorentz(energy, np.array([60.0, 4.0, 8.0, 2.5]))
    _, near = tauc_lorentz(energy, np.array([60.0, 4.0, 8.0 * (1 + offset), 2.5]))
    np.testing.assert_allclose(near, there, rtol=3 * abs(offset) + 1e-8)


def test_oscillator_limit():
    # C -> 0: epsilon1(1 eV) - einf of A = 110, E0 = 6, Eg = 3 is 4.714286
    epsilon, _ = tauc_lorentz(np.array([1.0]), np.array([110.0, 6.0, 1e-6, 3.0]))
    assert epsilon[0].real == pytest.approx(4.714286, abs=1e-5)


def test_amorphous_silicon():
    # A 122, E0 3.45, C 2.54, Eg 1.20, einf 1.15 (from memory), for the data of Pierce and Spicer, Phys. Rev. B 5, 3017 (1972)
    epsilon, _ = tauc_lorentz(np.array([2.5, 3.5]), np.array([122.0, 3.45, 2.54, 1.20]))
    np.testing.assert_allclose(epsilon + 1.15, [18.65241693 + 9.99957901j, 6.26252048 + 20.41426175j], atol=1e-7)
