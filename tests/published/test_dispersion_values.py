"""The simple laws against published constants and values computed from their formulas."""

import numpy as np
import pytest

from filmfit.dispersion.compose import Dispersion, index_from_epsilon
from filmfit.dispersion.table import LAWS
from filmfit.units import HC_EV_NM


def law(name, energy, *values):
    return LAWS[name].evaluate(np.atleast_1d(np.asarray(energy, float)), np.array(values, float))[0]


def test_photon_energy_constant():
    # CODATA 2018 exact: hc = 1239.841984 eV nm
    assert pytest.approx(1239.841984, abs=1e-6) == HC_EV_NM


@pytest.mark.parametrize(
    ("wavelength_um", "index"),
    [
        (0.4, 1.47011612),
        (0.4861327, 1.46312648),
        (0.5460740, 1.46007813),
        (0.587562, 1.45846368),
        (0.6328, 1.45701793),
        (0.6562725, 1.45636662),
        (1.0, 1.45041741),
        (1.55, 1.44402362),
    ],
)
def test_fused_silica(wavelength_um, index):
    # Malitson, J. Opt. Soc. Am. 55, 1205 (1965)
    epsilon = law(
        "sellmeier", HC_EV_NM * 1e-3 / wavelength_um, 0.6961663, 0.4079426, 0.8974794, 0.0684043, 0.1162414, 9.896161
    )
    assert np.sqrt(epsilon[0].real) == pytest.approx(index, abs=1e-7)


def test_cauchy():
    energy = HC_EV_NM * 1e-3 / np.array([0.4, 0.55, 0.8])
    index = law("cauchy", energy, 1.85, 0.02, 0.0008)
    np.testing.assert_allclose(index.real, [2.00625, 1.92485827, 1.88320313], atol=1e-8)


@pytest.mark.parametrize(
    ("energy", "epsilon"),
    [
        (1, 2.0824295011 + 0.0433839479j),
        (4, 5.2941176471 + 1.1764705882j),
        (5, 0 + 20j),
        (6, -4.2307692308 + 1.1538461538j),
    ],
)
def test_lorentz(energy, epsilon):
    assert law("lorentz", energy, 2, 5, 0.5)[0] == pytest.approx(epsilon, abs=1e-9)


def test_urbach_tail():
    # alpha = a0 exp((E - E1)/Eu), Urbach, Phys. Rev. 92, 1324 (1953) (from memory): a0 = 1e4/cm at 3.5 eV, Eu = 0.12 eV
    # gives k(3.2 eV) = 2.530873e-3 for that exponential alpha; ours is exponential in k, so scale by E / edge.
    edge, width, level = 3.5, 0.12, 1e4
    k0 = level * HC_EV_NM * 1e-7 / (4 * np.pi * edge)
    k = law("urbach", 3.2, k0, edge, width)[0].imag
    assert k * edge / 3.2 == pytest.approx(2.530873e-3, rel=1e-6)


@pytest.mark.parametrize(
    ("energy", "epsilon", "index"),
    [
        (0.5, -8.3541603631 + 2.9409984871j, 0.5012775742 + 2.9335029520j),
        (1.5, 2.4691573927 + 0.1144674086j, 1.5717771236 + 0.0364133715j),
    ],
)
def test_drude_with_a_constant(energy, epsilon, index):
    found, _ = Dispersion(("constant", "drude")).evaluate(np.array([float(energy)]), np.array([3.9, 1.8, 0.12]))
    assert found[0] == pytest.approx(epsilon, abs=1e-9)
    assert index_from_epsilon(found)[0] == pytest.approx(index, abs=1e-9)
