"""The kernel against the general-purpose package tmm, and its derivatives against difference quotients."""

import numpy as np
import pytest

from filmfit.optics.by_tmm import plate_by_tmm
from filmfit.optics.thick import plate

WAVELENGTH = np.array([350.0, 480.0, 700.0, 1100.0, 2000.0])


def random_stack(rng, layers):
    index = rng.uniform(0.3, 2.8, (layers, WAVELENGTH.size)) + 1j * rng.uniform(0.0, 1.5, (layers, WAVELENGTH.size))
    substrate = rng.uniform(1.4, 1.8, WAVELENGTH.size) + 1j * rng.uniform(0, 1e-6, WAVELENGTH.size)
    return index, rng.uniform(3.0, 200.0, layers), substrate


def ours(index, thickness, substrate, angle, polarization, side, back="bare"):
    return plate("RT", WAVELENGTH, index**2, thickness, substrate**2, 1.1e6, angle, polarization, side, back)


@pytest.mark.parametrize("seed", range(24))
def test_random_stacks(seed):
    rng = np.random.default_rng(seed)
    index, thickness, substrate = random_stack(rng, seed % 9)
    angle = [0.0, 8.0, 30.0, 60.0, 80.0][seed % 5]
    for polarization in ("s", "p", "mean"):
        for side in ("film", "substrate"):
            R, T = plate_by_tmm(WAVELENGTH, index, thickness, substrate, 1.1e6, angle, polarization, side)
            got_R, got_T = ours(index, thickness, substrate, angle, polarization, side)
            # power fluxes in an absorbing slab differ by about its k in the two formulations
            np.testing.assert_allclose(got_R.value, R, atol=1e-9 + 2e-6 * (side == "substrate"))
            np.testing.assert_allclose(got_T.value, T, atol=1e-9)


def quotient(function, at, step):
    return (function(at + step) - function(at - step)) / (2 * step)


@pytest.mark.parametrize("seed", range(12))
@pytest.mark.parametrize("back", ["bare", "blackened", "index-matched"])
def test_derivatives(seed, back):
    rng = np.random.default_rng(100 + seed)
    index, thickness, substrate = random_stack(rng, 1 + seed % 4)
    angle, polarization = [0.0, 8.0, 45.0][seed % 3], ["s", "p", "mean"][seed % 3]
    side = "film" if back != "bare" or seed % 2 else "substrate"
    found = ours(index, thickness, substrate, angle, polarization, side, back)
    for number, one in enumerate(found):

        def value(e, d, s, number=number):
            got = plate("RT", WAVELENGTH, e, d, s, 1.1e6, angle, polarization, side, back)
            return got[number].value

        for layer in range(len(thickness)):
            unit = np.zeros_like(thickness)
            unit[layer] = 1.0
            by_d = quotient(lambda x, u=unit: value(index**2, thickness + x * u, substrate**2), 0.0, 1e-3)
            np.testing.assert_allclose(one.d_thickness[layer], by_d, rtol=1e-5, atol=1e-9)
            for direction in (1.0, 1j):
                mark = np.zeros_like(index)
                mark[layer] = direction
                by_e = quotient(lambda x, m=mark: value(index**2 + x * m, thickness, substrate**2), 0.0, 1e-5)
                np.testing.assert_allclose((one.d_epsilon[layer] * direction).real, by_e, rtol=1e-5, atol=1e-8)
        for direction in (1.0, 1j):
            step = 1e-7 if direction == 1.0 else 1e-9
            by_s = quotient(lambda x, c=direction: value(index**2, thickness, substrate**2 + x * c), 0.0, step)
            got = (one.d_substrate * direction).real
            np.testing.assert_allclose(got, by_s, rtol=2e-4, atol=1e-4 * max(1.0, np.abs(by_s).max()))
