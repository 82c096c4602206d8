"""The profile likelihood of a thickness: the parabola where there is one, the truth where there is none."""

import numpy as np
import pytest

from filmfit.fit.interval import Posterior
from filmfit.fit.profile import rescaled, thickness_profile
from filmfit.fit.solve import solve

NAME = "layer.run0/film.thickness_nm"


def test_a_parabola_gives_the_interval_of_its_covariance(make):
    solution = solve(make(depths=(45.0,), share=False, noise_seed=5))
    index = solution.problem.index(NAME)
    value, sigma = solution.value(NAME), solution.sigma(NAME)
    # the data know this film well enough for a parabola, looked at finely
    assert sigma / value < 0.05
    found = thickness_profile(solution, index, max(sigma / value, 0.02), 1.0)
    assert found.low == pytest.approx(value - 1.96 * sigma, abs=0.7 * sigma)
    assert found.high == pytest.approx(value + 1.96 * sigma, abs=0.7 * sigma)


def test_a_thin_film_keeps_its_strength_when_its_thickness_is_moved(make):
    problem = make(depths=(12.0,))
    values = problem.start_values()
    moved = rescaled(problem, values, problem.index(NAME), 24.0)
    plasma = problem.index("material.film.drude.plasma_eV")
    # the law is shared between runs here and so not the thickness's own: it stays
    assert moved[plasma] == values[plasma]
    own = make(depths=(12.0,), share=False)
    values = own.start_values()
    moved = rescaled(own, values, own.index(NAME), 24.0)
    plasma = own.index("layer.run0/film.drude.plasma_eV")
    assert moved[plasma] == pytest.approx(values[plasma] / np.sqrt(2))


def test_scatter_of_repeated_noise_is_the_stated_interval(make):
    held = 0
    for seed in range(20):
        posterior = Posterior.of(solve(make(depths=(18.0,), share=False, noise_seed=100 + seed)))
        index = posterior.solution.problem.index(NAME)
        got = posterior.looked_along(index).thickness(index)
        held += got is not None and got.low <= 18.0 <= got.high
    # 19 are expected; fewer than 15 of 20 has a chance below 0.3 %
    assert held >= 15
