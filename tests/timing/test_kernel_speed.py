"""Speed of the kernel with every derivative, as a ratio within one run, so that it holds on any machine."""

import statistics
import time

import numpy as np
import pytest
import tmm

from filmfit.optics.thick import plate

WAVELENGTH = np.linspace(350.0, 1230.0, 441)
ENERGY = 1239.842 / WAVELENGTH
FILM = np.sqrt(3.9 - 1.8**2 / (ENERGY**2 + 0.12j * ENERGY))  # a transparent conductor: constant plus Drude
GLASS = np.full(WAVELENGTH.size, 1.52 + 5e-7j)
BLOCK = 350  # calls that last about as long as one loop of tmm


def seconds(call):
    start = time.perf_counter()
    call()
    return time.perf_counter() - start


@pytest.mark.parametrize(("angle", "polarization"), [(0.0, "s"), (8.0, "p")])
def test_reflectance_transmittance_and_every_derivative_against_a_loop_over_wavelengths(angle, polarization):
    epsilon, thickness, glass = FILM[None, :] ** 2, np.array([150.0]), GLASS**2

    def plates(times):
        for _ in range(times):
            found = plate("RT", WAVELENGTH, epsilon, thickness, glass, 1.1e6, angle, polarization, "film", "bare")
        return found

    def theirs():
        for n, g, one in zip(FILM, GLASS, WAVELENGTH, strict=True):
            tmm.inc_tmm(polarization, [1, n, g, 1], [np.inf, 150.0, 1.1e6, np.inf], ["i", "c", "i", "i"],
                        np.radians(angle), one)  # fmt: skip

    assert all(np.all(one.d_substrate != 0.0) for one in plates(1))  # nothing is left out
    # Blocks of about equal length take turns: a busy machine hits both alike. The best of many short calls against
    # one long call would flatter the short ones.
    ratios = [seconds(theirs) / (seconds(lambda: plates(BLOCK)) / BLOCK) for _ in range(9)]
    print(f"{angle:.0f} deg {polarization}: {statistics.median(ratios):.0f} times faster than a loop for R, T alone")
    assert statistics.median(ratios) >= 300
