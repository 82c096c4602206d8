"""Slit and wedge against averages of the exact transmittance over wavelength or thickness.

Film n = 1.95 of 1000 nm on a lossless plate of 1.51, 550 nm: full T 0.90837186; wedge +-10 nm 0.90638638, +-30 nm
0.89209522; triangular slit of 5 nm 0.90752312. Averages computed from Swanepoel's T (J. Phys. E 16, 1214 (1983));
inhomogeneity as in Swanepoel, J. Phys. E 17, 896 (1984).
"""

from dataclasses import replace

import numpy as np
import pytest

from filmfit.measurement import Errors, observe
from filmfit.stack import Beam, Optics

GRID = np.array([548.0, 549.0, 550.0, 551.0, 552.0])
OPTICS = Optics(
    GRID, np.full((1, 5), 1.95**2 + 0j), np.zeros((1, 5), complex), np.full(5, 1.51**2 + 0j), np.zeros(5, complex)
)
BEAM = Beam("T", 0.0, "mean", "film", "bare")


def moved(by_nm):
    """Return the optics at longer wavelengths, to first order."""
    spread = OPTICS.spread(np.full((1, 1), by_nm))
    return replace(spread, **{name: getattr(spread, name)[0] for name in ("wavelength_nm", "substrate")},
                   epsilon=spread.epsilon[:, 0], epsilon_slope=OPTICS.epsilon_slope)  # fmt: skip


@pytest.mark.parametrize(
    ("errors", "T"),
    [
        (Errors(1.0, 0.0, 0.0), 0.90837186),
        (Errors(1.0, 0.0, 0.01), 0.90638638),
        (Errors(1.0, 5.0, 0.0), 0.90752312),
    ],
)
def test_averaged_transmittance(errors, T):
    seen = observe(OPTICS, np.array([1000.0]), 1.0, BEAM, errors)
    assert seen.value[2] == pytest.approx(T, abs=1e-5)


def test_a_strong_wedge_is_close_to_the_exact_average():
    # a phase spread of 1.3 rad is beyond the two-point rule's third order
    seen = observe(OPTICS, np.array([1000.0]), 1.0, BEAM, Errors(1.0, 0.0, 0.03))
    assert seen.value[2] == pytest.approx(0.89209522, abs=2e-3)


@pytest.mark.parametrize("quantity", ["R", "T"])
def test_derivatives_of_the_instruments_errors(quantity):
    beam = Beam(quantity, 8.0, "mean", "film", "bare")
    depth = np.array([640.0])
    at = Errors(1.01, 4.0, 0.012)
    seen = observe(OPTICS, depth, 1.0, beam, at)

    def quotient(name, step):
        more, less = (
            observe(OPTICS, depth, 1.0, beam, at._replace(**{name: getattr(at, name) + sign * step})).value
            for sign in (1, -1)
        )
        return (more - less) / (2 * step)

    np.testing.assert_allclose(seen.d_scale, quotient("scale", 1e-4), atol=1e-9)
    np.testing.assert_allclose(seen.d_slit, quotient("slit_nm", 1e-3), atol=1e-9)
    np.testing.assert_allclose(seen.d_wedge, quotient("wedge", 1e-5), atol=1e-6)
    longer, shorter = (observe(moved(sign * 1e-3), depth, 1.0, beam, at).value for sign in (1, -1))
    np.testing.assert_allclose(seen.d_wavelength, (longer - shorter) / 2e-3, atol=1e-8)
