"""Causal laws: the real part is the Kramers-Kronig integral of the imaginary part, integrated numerically."""

import numpy as np
import pytest
from scipy.integrate import quad

from filmfit.dispersion.correction import Correction, hat_epsilon
from filmfit.dispersion.table import LAWS

CAUSAL = {
    "lorentz": (2.0, 5.0, 0.5),
    "tauc-lorentz": (110.0, 6.0, 5.0, 3.0),
    "drude": (1.8, 0.12),
}
HIGHEST_EV = 4000.0


def test_every_causal_law_is_checked():
    assert set(CAUSAL) == {name for name, law in LAWS.items() if law.causal}


def kramers_kronig(epsilon2, energy, breaks=()):
    """Return (2/pi) P int x epsilon2(x) / (x^2 - E^2) dx."""

    def smooth(x):
        return x * epsilon2(x) / (x + energy)

    # symmetric about the pole, so that the principal value is an ordinary integral
    def folded(u):
        return (smooth(energy + u) - smooth(energy - u)) / u

    near = quad(
        folded, 0.0, energy, points=[abs(b - energy) for b in breaks if 0 < abs(b - energy) < energy], limit=800
    )[0]
    far = quad(lambda x: smooth(x) / (x - energy), 2 * energy, 20.0, points=[b for b in breaks if 2 * energy < b < 20.0],
               limit=800)[0]  # fmt: skip
    tail = quad(lambda x: smooth(x) / (x - energy), 20.0, HIGHEST_EV, limit=800)[0]
    return 2 / np.pi * (near + far + tail)


@pytest.mark.parametrize("name", CAUSAL)
@pytest.mark.parametrize("energy", [0.7, 2.0, 4.1])
def test_real_part(name, energy):
    values = np.array(CAUSAL[name])

    def epsilon2(x):
        # at zero energy Drude's epsilon2 diverges as 1/x while x epsilon2 stays finite
        return float(LAWS[name].evaluate(np.array([max(x, 1e-9)]), values)[0][0].imag)

    breaks = [3.0] if name == "tauc-lorentz" else [0.12, 5.0]
    found = LAWS[name].evaluate(np.array([energy]), values)[0][0].real
    assert kramers_kronig(epsilon2, energy, breaks) == pytest.approx(found, abs=2e-5 * max(1.0, abs(found)))


@pytest.mark.parametrize("energy", [0.7, 1.2, 1.5, 3.0])
def test_hat(energy):
    knots = np.array([1.0, 1.5, 2.2])
    found = hat_epsilon(np.array([energy]), knots)[0, 0]
    assert found.imag == pytest.approx(np.interp(energy, knots, [0.0, 1.0, 0.0]), abs=1e-12)

    def epsilon2(x):
        return float(np.interp(x, knots, [0.0, 1.0, 0.0], left=0.0, right=0.0))

    assert kramers_kronig(epsilon2, energy, knots) == pytest.approx(found.real, abs=1e-5)


def test_a_tabulated_correction_is_its_functions():
    knots = np.array([1.0, 1.5, 2.2, 3.0])
    grid = np.linspace(0.5, 4.0, 4001)
    energy = np.linspace(0.6, 3.9, 57)
    found = Correction(grid, hat_epsilon(grid, knots)).at(energy)
    np.testing.assert_allclose(found, hat_epsilon(energy, knots), atol=2e-3)
    assert found.shape == (2, 57)
