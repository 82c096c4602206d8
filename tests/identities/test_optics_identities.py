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


def test_a_batch_is_the_same_as_one_by_one():
    rng = np.random.default_rng(5)
    epsilon = (rng.uniform(0.5, 2.5, (2, 6, 3)) + 1j * rng.uniform(0, 1, (2, 6, 3))) ** 2
    thickness = rng.uniform(5, 300, (2, 6))
    (batch,) = plate("R", WAVELENGTH, epsilon, thickness, GLASS, 1e6, 8.0, "mean", "film", "bare")
    for number in range(6):
        (one,) = plate(
            "R", WAVELENGTH, epsilon[:, number], thickness[:, number], GLASS, 1e6, 8.0, "mean", "film", "bare"
        )
        np.testing.assert_allclose(batch.value[number], one.value, atol=1e-14)
        np.testing.assert_allclose(batch.d_epsilon[:, number], one.d_epsilon, atol=1e-13)
        np.testing.assert_allclose(batch.d_thickness[:, number], one.d_thickness, atol=1e-14)


def test_the_wrong_sign_of_k_would_create_energy():
    # n - ik instead of n + ik: 150 nm of 1.95 - 0.05i on glass emits light; the convention is exp(-i w t), n + ik
    good, wrong = (
        coherent(np.array([550.0]), np.array([[complex(1.95, k) ** 2]]), np.array([150.0]), GLASS[:1], 0.0, "s")
        for k in (0.05, -0.05)
    )
    assert good.R_front + good.T < 1.0
    assert wrong.R_front + wrong.T > 1.0


def test_light_on_a_blackened_rear_face_is_refused():
    with pytest.raises(ValueError, match="bare rear face"):
        plate("R", WAVELENGTH, np.empty((0, 3), complex), np.array([]), GLASS, 1e6, 0.0, "s", "substrate", "blackened")
