"""Speed as ratios within one run, so that they hold on any machine."""

import subprocess
import sys
import time

import numpy as np
import tmm

from filmfit.optics.thick import plate


def best(call, repeats):
    times = []
    for _ in range(repeats):
        start = time.perf_counter()
        call()
        times.append(time.perf_counter() - start)
    return min(times)


def test_kernel_with_derivatives_against_a_loop_over_wavelengths():
    wavelength = np.linspace(350.0, 1230.0, 441)
    film = np.sqrt(3.9 - 1.8**2 / ((1239.842 / wavelength) ** 2 + 0.12j * 1239.842 / wavelength))
    glass = np.full(441, 1.52 + 5e-7j)

    def ours():
        plate("RT", wavelength, film[None, :] ** 2, np.array([150.0]), glass**2, 1.1e6, 0.0, "s", "film", "bare",
              plate_slopes=False)  # fmt: skip

    def theirs():
        for number, one in enumerate(wavelength):
            tmm.inc_tmm(
                "s", [1, film[number], glass[number], 1], [np.inf, 150.0, 1.1e6, np.inf], ["i", "c", "i", "i"], 0, one
            )

    ours()
    ratio = max(best(theirs, 1) / best(ours, 60) for _ in range(4))
    print(f"R, T and the film's derivatives are {ratio:.0f} times faster than R, T alone in a loop")
    assert ratio >= 300


def test_help_against_a_bare_interpreter():
    ratios = []
    for _ in range(5):
        bare = best(lambda: subprocess.run([sys.executable, "-c", "pass"], check=True), 3)
        help_ = best(
            lambda: subprocess.run([sys.executable, "-m", "filmfit", "--help"], check=True, capture_output=True), 3
        )
        ratios.append(help_ / bare)
    print(f"filmfit --help takes {min(ratios):.1f} bare interpreters")
    assert min(ratios) < 6


def test_cost_grows_no_faster_than_points_and_layers():
    def cost(points, layers):
        wavelength = np.linspace(350.0, 1230.0, points)
        epsilon = np.full((layers, points), 3.6 + 0.05j)
        thickness = np.full(layers, 30.0)
        return best(
            lambda: plate(
                "RT", wavelength, epsilon, thickness, np.full(points, 2.31 + 0j), 1e6, 8.0, "mean", "film", "bare"
            ),
            15,
        )

    few, many = cost(2000, 4), cost(16000, 4)
    assert many / few < 8 * 1.5
    thin, thick = cost(4000, 4), cost(4000, 24)
    assert thick / thin < 6 * 1.3
