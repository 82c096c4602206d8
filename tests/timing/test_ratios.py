"""Speed as ratios within one run, so that they hold on any machine."""

import subprocess
import sys
import time
from pathlib import Path

import numpy as np

from filmfit.optics.thick import plate


def best(call, repeats):
    times = []
    for _ in range(repeats):
        start = time.perf_counter()
        call()
        times.append(time.perf_counter() - start)
    return min(times)


def test_help_against_a_bare_interpreter():
    ratios = []
    for _ in range(8):
        bare = best(lambda: subprocess.run([sys.executable, "-c", "pass"], check=True), 3)
        help_ = best(
            lambda: subprocess.run(
                [Path(sys.executable).with_name("filmfit"), "--help"], check=True, capture_output=True
            ),
            3,
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

    # as many points as scans have: beyond some thousands the memory's own cost comes in
    few, many = cost(400, 4), cost(3200, 4)
    assert many / few < 8 * 1.25
    thin, thick = cost(800, 4), cost(800, 24)
    assert thick / thin < 6 * 1.25
