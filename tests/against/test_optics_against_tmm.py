"""The kernel against the general-purpose package tmm; its derivatives against other formulas in 40 digits.

The other formulas: Fresnel's coefficients and Airy's sum, layer by layer from the far side (Born and Wolf, Principles
of Optics, ch. 1.5-1.6, from memory); no matrices, no shared line of code. With mpmath's 40 digits a difference
quotient has no rounding to speak of, so every derivative is held to 1e-6 of itself.
"""

import subprocess
import sys

import mpmath as mp
import numpy as np
import pytest

from filmfit.optics.by_tmm import plate_by_tmm
from filmfit.optics.thick import plate

WAVELENGTH = np.array([350.0, 480.0, 700.0, 1100.0, 2000.0])
SLAB_NM = 1.1e6
BACKS = ["bare", "blackened", "rough", "index-matched"]


def random_stack(rng, layers):
    index = rng.uniform(0.3, 2.8, (layers, WAVELENGTH.size)) + 1j * rng.uniform(0.0, 1.5, (layers, WAVELENGTH.size))
    substrate = rng.uniform(1.4, 1.8, WAVELENGTH.size) + 1j * rng.uniform(0, 1e-6, WAVELENGTH.size)
    return index, rng.uniform(3.0, 200.0, layers), substrate


def ours(index, thickness, substrate, angle, polarization, side, back="bare"):
    return plate("RT", WAVELENGTH, index**2, thickness, substrate**2, SLAB_NM, angle, polarization, side, back)


@pytest.mark.parametrize("seed", range(24))
def test_random_stacks(seed):
    rng = np.random.default_rng(seed)
    index, thickness, substrate = random_stack(rng, seed % 9)
    angle = [0.0, 8.0, 30.0, 60.0, 80.0][seed % 5]
    for polarization in ("s", "p", "mean"):
        for side in ("film", "substrate"):
            R, T = plate_by_tmm(WAVELENGTH, index, thickness, substrate, SLAB_NM, angle, polarization, side)
            got_R, got_T = ours(index, thickness, substrate, angle, polarization, side)
            np.testing.assert_allclose(got_R.value, R, rtol=0, atol=1e-11)
            np.testing.assert_allclose(got_T.value, T, rtol=0, atol=1e-11)


@pytest.mark.parametrize("seed", range(6))
@pytest.mark.parametrize("back", BACKS[1:])
def test_random_stacks_whose_rear_face_returns_nothing(seed, back):
    rng = np.random.default_rng(50 + seed)
    index, thickness, substrate = random_stack(rng, seed)
    angle = [0.0, 8.0, 60.0][seed % 3]
    for polarization in ("s", "p", "mean"):
        R, T = plate_by_tmm(WAVELENGTH, index, thickness, substrate, SLAB_NM, angle, polarization, "film", back)
        got_R, got_T = ours(index, thickness, substrate, angle, polarization, "film", back)
        np.testing.assert_allclose(got_R.value, R, rtol=0, atol=1e-11)
        np.testing.assert_allclose(got_T.value, T, rtol=0, atol=1e-11)


def test_an_opaque_silver_layer():
    index = np.full((1, WAVELENGTH.size), 0.5 + 10.5j)
    arguments = (np.array([3000.0]), np.full(WAVELENGTH.size, 1.52 + 0j), 8.0, "mean", "film")
    R, T = plate_by_tmm(WAVELENGTH, index, arguments[0], arguments[1], SLAB_NM, *arguments[2:])
    got_R, got_T = ours(index, *arguments)
    np.testing.assert_allclose(got_R.value, R, rtol=0, atol=1e-11)
    np.testing.assert_allclose(got_T.value, T, rtol=0, atol=1e-11)


# what tmm prints, it prints once a process
OPAQUE = """
import logging, sys
import numpy as np
from filmfit.optics.by_tmm import plate_by_tmm
logging.basicConfig(level=logging.INFO, stream=sys.stderr)
one = np.array([500.0])
plate_by_tmm(one, np.array([[0.5 + 10.5j]]), np.array([3000.0]), np.array([1.52 + 0j]), 1e6, 0.0, "s", "film")
"""


def test_what_tmm_prints_is_logged_and_kept_from_standard_output():
    told = subprocess.run([sys.executable, "-c", OPAQUE], capture_output=True, text=True, check=True)
    assert told.stdout == ""
    assert "INFO:filmfit.optics:tmm: Warning: Layers that are almost perfectly opaque" in told.stderr


def test_what_tmm_refuses_is_said():
    film, thickness = np.full((1, WAVELENGTH.size), 2.0 + 0.5j), np.array([50.0])
    with pytest.raises(ArithmeticError, match="tmm refuses the stack at 350 nm"):
        plate_by_tmm(WAVELENGTH, film, thickness, np.full(5, 1.5 - 0.1j), SLAB_NM, 30.0, "s", "film")
    with pytest.raises(ValueError, match="bare rear face"):
        plate_by_tmm(WAVELENGTH, film, thickness, np.full(5, 1.5 + 0j), SLAB_NM, 30.0, "s", "substrate", "rough")


@pytest.mark.filterwarnings("ignore::RuntimeWarning")  # numpy's own remark on tmm's overflow
def test_numbers_beyond_the_range_of_tmm_are_said():
    layers = 40  # tmm lets each opaque layer pass exp(-35): the product of 40 cannot be written
    index = np.array([[0.5 + 10.5j] * WAVELENGTH.size, [2.0 + 9.0j] * WAVELENGTH.size] * (layers // 2))
    thickness = np.full(layers, 3000.0)
    with pytest.raises(ArithmeticError, match="tmm leaves the range of its numbers at 350 nm"):
        plate_by_tmm(WAVELENGTH, index, thickness, np.full(5, 1.5 + 0j), SLAB_NM, 0.0, "s", "film")
    R, T = ours(index, thickness, np.full(5, 1.5 + 0j), 0.0, "s", "film")
    assert np.all(np.isfinite(R.value))
    assert np.all(T.value == 0.0)


def airy(polarization, wavelength, epsilon, thickness, sine2):
    """R and T of layers between the first and the last medium, in 40 digits."""
    normal = [mp.sqrt(e - sine2) for e in epsilon]
    Y = normal if polarization == "s" else [e / k for e, k in zip(epsilon, normal, strict=True)]
    r, t = mp.mpf(0), mp.mpf(1)
    for j in reversed(range(len(epsilon) - 1)):
        there = len(epsilon) - 2 > j
        phase = mp.exp(2j * mp.pi * normal[j + 1] * thickness[j] / wavelength) if there else mp.mpf(1)
        face, into = (Y[j] - Y[j + 1]) / (Y[j] + Y[j + 1]), 2 * Y[j] / (Y[j] + Y[j + 1])
        back = r * phase**2
        r, t = (face + back) / (1 + face * back), into * phase * t / (1 + face * back)
    return abs(r) ** 2, abs(t) ** 2 * mp.re(Y[-1]) / mp.re(Y[0])


def in_40_digits(polarization, wavelength, epsilon, thickness, slab, angle, side, back):
    """R and T of the plate."""
    sine2 = mp.sin(mp.pi * mp.mpf(angle) / 180) ** 2
    air, glass = mp.mpf(1), mp.mpf(SLAB_NM)
    R, T = airy(polarization, wavelength, [air, *epsilon, slab], thickness, sine2)
    R_rear, _ = airy(polarization, wavelength, [slab, *epsilon[::-1], air], thickness[::-1], sine2)
    R0, T0 = airy(polarization, wavelength, [air, slab], [], sine2)
    tau = mp.exp(-4 * mp.pi * mp.im(mp.sqrt(slab - sine2)) * glass / wavelength)
    if back != "bare":
        return R, T * tau if back == "index-matched" else mp.mpf(0)
    rounds = 1 - R_rear * R0 * tau**2
    reflected = R + T**2 * tau**2 * R0 / rounds if side == "film" else R0 + T0**2 * tau**2 * R_rear / rounds
    return reflected, T * T0 * tau / rounds


CASES = [("s", 0.0), ("s", 8.0), ("p", 8.0), ("p", 45.0), ("s", 70.0), ("mean", 45.0)]


@pytest.mark.parametrize("seed", range(8))
@pytest.mark.parametrize(("back", "side"), [*((back, "film") for back in BACKS), ("bare", "substrate")])
def test_values_and_derivatives(seed, back, side):
    rng = np.random.default_rng(100 + seed)
    with mp.workdps(40):
        index, thickness, substrate = random_stack(rng, seed % 5)
        polarization, angle = CASES[seed % len(CASES)]
        found = ours(index, thickness, substrate, angle, polarization, side, back)
        at = seed % WAVELENGTH.size
        epsilon = [mp.mpc(complex(e)) for e in (index**2)[:, at]]
        lengths = [mp.mpf(float(d)) for d in thickness]
        slab, step = mp.mpc(complex((substrate**2)[at])), mp.mpf(10) ** -14

        def value(e=epsilon, d=lengths, s=slab):
            both = [polarization] if polarization != "mean" else ["s", "p"]
            each = [in_40_digits(one, mp.mpf(WAVELENGTH[at]), e, d, s, angle, side, back) for one in both]
            return [mp.fsum(column) / len(both) for column in zip(*each, strict=True)]

        def check(got, changed):
            for mine, up, down in zip(got, changed(step), changed(-step), strict=True):
                assert float(mine) == pytest.approx(float((up - down) / (2 * step)), rel=1e-6, abs=1e-15)

        def moved(values, layer, x):
            return [v + x * (j == layer) for j, v in enumerate(values)]

        for one, exact in zip(found, value(), strict=True):
            assert one.value[at] == pytest.approx(float(exact), abs=1e-13)
        for way in (1, 1j):
            check([(one.d_substrate[at] * way).real for one in found], lambda x, w=way: value(s=slab + w * x))
        for layer in range(len(lengths)):
            check([one.d_thickness[layer, at] for one in found], lambda x, n=layer: value(d=moved(lengths, n, x)))
            for way in (1, 1j):
                check(
                    [(one.d_epsilon[layer, at] * way).real for one in found],
                    lambda x, n=layer, w=way: value(e=moved(epsilon, n, w * x)),
                )
