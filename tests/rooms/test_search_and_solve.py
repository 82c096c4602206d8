"""From no starting value to the solution: batch descent, search, solver, covariance."""

import numpy as np
import pytest

from filmfit.fit.choose import choose
from filmfit.fit.descend import descend
from filmfit.fit.solve import covariance, solve
from filmfit.fit.start import THICKEST_NM, search, searchable, thickness_seeds


def test_seeds_are_dense_enough_for_every_fringe():
    seeds = thickness_seeds(2.0, THICKEST_NM)
    # minima stand lambda / 2n apart: 100 nm at 400 nm and index 2; three seeds in each
    assert np.all(np.diff(seeds) <= 100.0 / 3)
    assert seeds[0] <= 8.0
    assert seeds[-1] >= THICKEST_NM - 100


def test_descent_ends_where_the_solver_ends(make):
    problem = searchable(make(noise_seed=1))
    start = problem.start_values()[list(problem.free)]
    ended = descend(problem, np.array([start * 1.02, start * 0.98]).T, 80)
    solution = solve(problem)
    # a tenth of a unit of chi2 is far inside the noise
    assert ended.chi2 == pytest.approx(solution.chi2, abs=0.1)


def test_descent_stays_within_bounds(make):
    problem = searchable(make(noise_seed=1))
    low, high = problem.bounds()
    ended = descend(problem, np.array([low, high]).T, 10)
    assert np.all(ended.values >= low[:, None])
    assert np.all(ended.values <= high[:, None])


@pytest.mark.parametrize("depth", [62.0, 318.0, 905.0])
def test_search_finds_the_thickness_without_a_start(make, depth):
    smooth = {name: {"vary": False} for name in ("run.run0.haze_R", "run.run0.haze_T")}
    problem = make(depths=(depth,), noise_seed=2).changed({"layer.run0/film.thickness_nm": {"start": 100.0}, **smooth})
    trials = search(problem, 0)
    assert np.min(np.abs(trials.values[0] - depth)) < 0.05 * depth
    outcome = choose(problem, (0, 0))
    assert outcome.solution.values[0] == pytest.approx(depth, rel=0.01)


def test_the_solver_recovers_from_a_start_on_a_bound(make):
    problem = make(noise_seed=4)
    low = problem.parameters[problem.index("material.film.drude.plasma_eV")].low
    solution = solve(problem.changed({"material.film.drude.plasma_eV": {"start": low}}))
    assert solution.reduced_chi2 < 1.3


def test_covariance_is_the_scatter_of_repeated_noise(make):
    values, sigmas = [], []
    for seed in range(60):
        solution = solve(searchable(make(noise_seed=seed)))
        values.append(solution.values[0])
        sigmas.append(solution.sigma("layer.run0/film.thickness_nm"))
    # the expectations pull repeated fits together, so the scatter may be smaller than the sigma, never much larger
    assert 0.5 < np.std(values, ddof=1) / np.mean(sigmas) < 1.3


def test_an_undetermined_direction_is_wide_and_does_not_fail():
    rng = np.random.default_rng(0)
    row = rng.normal(size=50)
    spread = covariance(np.array([row, row, rng.normal(size=50)]))
    assert np.all(np.isfinite(spread))
    assert spread[0, 0] > 1e6 * spread[2, 2]
