"""What must hold for any stack, whatever its numbers."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from filmfit.optics.coherent import coherent
from filmfit.optics.thick import plate

WAVELENGTH = np.array([400.0, 650.0, 1300.0])
ANGLES = st.floats(0.0, 85.0)
POLARIZATIONS = st.sampled_from(["s", "p"])


def stack(layers, lossless=False):
    index = np.array([[complex(n, 0.0 if lossless else k)] * WAVELENGTH.size for n, k, _ in layers])
    return index.reshape(len(layers), WAVELENGTH.size) ** 2, np.array([d for *_, d in layers], float)


LAYERS = st.lists(st.tuples(st.floats(0.2, 3.0), st.floats(0.0, 4.0), st.floats(0.0, 400.0)), min_size=0, max_size=4)
GLASS = np.full(WAVELENGTH.size, 1.52**2 + 0j)


@settings(max_examples=60, deadline=None)
@given(LAYERS, ANGLES, POLARIZATIONS)
def test_energy_is_conserved_without_absorption_and_lost_with_it(layers, angle, polarization):
    epsilon, thickness = stack(layers, lossless=True)
    # a lossless medium of index below sin(angle) totally reflects: that too conserves energy
    found = coherent(WAVELENGTH, epsilon, thickness, GLASS, angle, polarization)
    np.testing.assert_allclose(found.R_front + found.T, 1.0, atol=1e-9)
    epsilon, thickness = stack(layers)
    found = coherent(WAVELENGTH, epsilon, thickness, GLASS, angle, polarization)
    assert np.all(found.R_front + found.T <= 1.0 + 1e-9)
    assert np.all(found.R_rear + found.T <= 1.0 + 1e-9)


@settings(max_examples=40, deadline=None)
@given(LAYERS, ANGLES, POLARIZATIONS)
def test_transmittance_is_the_same_from_both_sides(layers, angle, polarization):
    epsilon, thickness = stack(layers)
    glass = np.full(WAVELENGTH.size, (1.52 + 3e-7j) ** 2)
    arguments = ("T", WAVELENGTH, epsilon, thickness, glass, 2e6, angle, polarization)
    (film,), (substrate,) = plate(*arguments, "film", "bare"), plate(*arguments, "substrate", "bare")
    np.testing.assert_allclose(film.value, substrate.value, atol=1e-12)


@settings(max_examples=40, deadline=None)
@given(LAYERS, st.floats(0.2, 3.0), st.floats(0.0, 4.0), ANGLES, POLARIZATIONS)
def test_a_layer_of_no_thickness_vanishes(layers, n, k, angle, polarization):
    epsilon, thickness = stack(layers)
    more, longer = stack([*layers, (n, k, 0.0)])
    one = coherent(WAVELENGTH, epsilon, thickness, GLASS, angle, polarization)
    two = coherent(WAVELENGTH, more, longer, GLASS, angle, polarization)
    np.testing.assert_allclose(one.R_front, two.R_front, atol=1e-10)
    np.testing.assert_allclose(one.T, two.T, atol=1e-10)


@settings(max_examples=40, deadline=None)
@given(LAYERS.filter(bool), st.floats(0.05, 0.95), ANGLES, POLARIZATIONS)
def test_a_layer_cut_in_two_changes_nothing(layers, share, angle, polarization):
    (n, k, d), rest = layers[0], layers[1:]
    one = coherent(WAVELENGTH, *stack(layers), GLASS, angle, polarization)
    two = coherent(WAVELENGTH, *stack([(n, k, share * d), (n, k, (1 - share) * d), *rest]), GLASS, angle, polarization)
    np.testing.assert_allclose(one.R_front, two.R_front, atol=1e-9)
    np.testing.assert_allclose(one.T, two.T, atol=1e-9)


@pytest.mark.parametrize("polarization", ["s", "p"])
def test_the_bare_face_is_the_face_without_layers(polarization):
    glass = np.array([1.52 + 0j, 1.7 + 1e-5j, 3.5 + 0.4j]) ** 2
    face = coherent(WAVELENGTH, *stack([(2.0, 0.1, 80.0)] * 2), glass, 40.0, polarization)
    bare, general = face.without_layers(), coherent(WAVELENGTH, *stack([]), glass, 40.0, polarization)
    for name in ("R_front", "T", "R_rear"):
        np.testing.assert_allclose(getattr(bare, name), getattr(general, name), rtol=1e-14)
    one, none = np.ones(3), np.zeros(3)
    for got, partials in zip(bare.exit_slopes(), ((one, none, none), (none, one, none)), strict=True):
        np.testing.assert_allclose(got, general.slopes(*partials).exit, rtol=1e-12)


def test_a_lossless_half_wave_layer_is_not_there():
    index = 2.1
    epsilon = np.full((1, 1), index**2 + 0j)
    bare = coherent(np.array([500.0]), epsilon[:0], np.array([]), GLASS[:1], 0.0, "s")
    half = coherent(np.array([500.0]), epsilon, np.array([500.0 / (2 * index)]), GLASS[:1], 0.0, "s")
    assert half.R_front == pytest.approx(bare.R_front, abs=1e-12)


def test_an_opaque_metal_transmits_nothing_and_stays_finite():
    epsilon = np.full((1, WAVELENGTH.size), (1.0 + 60j) ** 2)
    R, T = plate("RT", WAVELENGTH, epsilon, np.array([3000.0]), GLASS, 1e6, 8.0, "mean", "film", "bare")
    assert np.all(T.value == 0.0)
    assert np.all(R.value > 0.9)
    for one in (R, T):
        for part in (one.d_epsilon, one.d_thickness, one.d_substrate):
            assert np.all(np.isfinite(part))


@pytest.mark.parametrize("polarization", ["s", "p"])
def test_the_sign_of_a_zero_imaginary_part_does_not_choose_the_growing_wave(polarization):
    # epsilon = -16 - 0i lies on the cut of the square root: the wave must decay there as at -16 + 0i
    for layers, glass in ((np.array([[-16.0]]), GLASS[:1]), (np.empty((0, 1)), np.array([-16.0]))):
        faces = [
            coherent(WAVELENGTH[:1], signed(layers, zero), np.full(len(layers), 3e5), signed(glass, zero), 30.0,
                     polarization)
            for zero in (0.0, -0.0)
        ]  # fmt: skip
        assert faces[0].R_front == faces[1].R_front == pytest.approx(1.0, abs=1e-12)
        assert faces[0].T == faces[1].T == 0.0


def signed(epsilon, zero):
    out = np.asarray(epsilon, complex).copy()
    out.imag = zero
    return out


@pytest.mark.parametrize("polarization", ["s", "p"])
def test_a_lossless_metal_as_the_plate_has_finite_slopes(polarization):
    # Re Y = 0 in the exit medium: no flux, and no division by it
    R, T = plate("RT", WAVELENGTH, np.full((1, 3), 4.0 + 0.1j), np.array([50.0]), np.full(3, -16.0 + 0j), 1e6, 30.0,
                 polarization, "film", "bare")  # fmt: skip
    assert np.all(T.value == 0.0)
    assert np.all((R.value > 0.1) & (R.value < 1.0))
    for one in (R, T):
        assert np.all(np.isfinite(one.d_epsilon))
        assert np.all(np.isfinite(one.d_substrate))


def assert_same(batch, one, number, tolerance):
    for got, wanted in zip(batch, one, strict=True):
        np.testing.assert_allclose(got.value[number], wanted.value, rtol=0, atol=tolerance)
        np.testing.assert_allclose(got.d_epsilon[:, number], wanted.d_epsilon, rtol=1e-12, atol=tolerance)
        np.testing.assert_allclose(got.d_thickness[:, number], wanted.d_thickness, rtol=1e-12, atol=tolerance)
        np.testing.assert_allclose(got.d_substrate[number], wanted.d_substrate, rtol=1e-12, atol=tolerance)


@pytest.mark.parametrize("back", ["bare", "blackened", "index-matched"])
@pytest.mark.parametrize("polarization", ["s", "p", "mean"])
def test_a_batch_is_the_same_as_one_by_one(back, polarization):
    rng = np.random.default_rng(5)
    rest = (1e6, 38.0, polarization, "film", back)
    for layers in (0, 1, 3):
        shape = (layers, 6, WAVELENGTH.size)
        epsilon = (rng.uniform(0.5, 2.5, shape) + 1j * rng.uniform(0, 1, shape)) ** 2
        thickness = rng.uniform(5, 300, (layers, 6))
        glass = (rng.uniform(1.4, 1.7, (6, WAVELENGTH.size)) + 1e-7j) ** 2
        every = plate("RT", WAVELENGTH, epsilon, thickness, glass, *rest)
        for n in range(6):
            one = plate("RT", WAVELENGTH, epsilon[:, n], thickness[:, n], glass[n], *rest)
            assert_same(every, one, n, 1e-14)


def test_a_batch_of_thicknesses_shares_one_dielectric_function():
    rng = np.random.default_rng(6)
    epsilon = (rng.uniform(0.5, 2.5, (2, 1, 3)) + 1j * rng.uniform(0, 1, (2, 1, 3))) ** 2
    thickness = rng.uniform(5, 300, (2, 6))
    rest = (1e6, 8.0, "mean", "film", "bare")
    every = plate("RT", WAVELENGTH, epsilon, thickness, GLASS, *rest)
    for n in range(6):
        assert_same(every, plate("RT", WAVELENGTH, epsilon[:, 0], thickness[:, n], GLASS, *rest), n, 1e-14)


@pytest.mark.parametrize("layers", [0, 1])
def test_a_plate_of_one_dielectric_function_at_all_wavelengths(layers):
    epsilon, thickness = np.full((layers, WAVELENGTH.size), 4.0 + 0.1j), np.full(layers, 70.0)
    rest = (1e6, 8.0, "mean", "film", "bare")
    wanted = plate("RT", WAVELENGTH, epsilon, thickness, GLASS, *rest)
    for constant in (GLASS[0], GLASS[:1]):
        found = plate("RT", WAVELENGTH, epsilon, thickness, constant, *rest)
        for got, want in zip(found, wanted, strict=True):
            np.testing.assert_array_equal(got.value, want.value)
            np.testing.assert_array_equal(got.d_substrate, want.d_substrate)


def test_the_wrong_sign_of_k_would_create_energy():
    # n - ik instead of n + ik: 150 nm of 1.95 - 0.05i on glass emits light, R + T = 1.190 (an independent matrix code);
    # the convention is exp(-i w t), n + ik
    good, wrong = (
        coherent(np.array([550.0]), np.array([[complex(1.95, k) ** 2]]), np.array([150.0]), GLASS[:1], 0.0, "s")
        for k in (0.05, -0.05)
    )
    assert good.R_front + good.T < 1.0
    assert wrong.R_front + wrong.T == pytest.approx(1.190, abs=5e-4)


def test_light_on_a_blackened_rear_face_is_refused():
    with pytest.raises(ValueError, match="bare rear face"):
        plate("R", WAVELENGTH, np.empty((0, 3), complex), np.array([]), GLASS, 1e6, 0.0, "s", "substrate", "blackened")
