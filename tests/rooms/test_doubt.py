"""Weight along a spectrum: less where no model follows it, all of it elsewhere."""

from dataclasses import replace

import numpy as np
import pytest

from filmfit.fit.doubt import carried, doubted, excess
from filmfit.fit.solve import solve


def with_bump(problem, height):
    """Return the problem with a narrow feature in T that its law cannot have."""
    run = problem.runs[0]
    scan = run.scans[0]
    bump = height * np.exp(-(((scan.wavelength_nm - 700.0) / 25.0) ** 2))
    return replace(problem, runs=(replace(run, scans=(replace(scan, values=scan.values + bump), *run.scans[1:])),))


def test_noise_alone_is_not_doubted(make):
    solution = solve(make(noise_seed=3))
    assert doubted(solution) is solution


def test_a_feature_loses_weight_and_no_longer_bends_the_thickness(make):
    problem = with_bump(make(noise_seed=3), 0.03)
    name = "layer.run0/film.thickness_nm"
    true = problem.parameters[problem.index(name)].start
    bent = solve(problem)
    kept = doubted(bent)
    assert abs(kept.value(name) - true) < 0.5 * abs(bent.value(name) - true)
    factor = kept.problem.runs[0].scans[0].sigma / problem.runs[0].scans[0].sigma
    at = problem.runs[0].scans[0].wavelength_nm
    assert factor[np.abs(at - 700) < 20].min() > 3
    assert factor[np.abs(at - 1200) < 100].max() == 1.0


def test_excess_is_never_below_one_and_doubt_is_carried_to_another_sampling(make):
    problem = with_bump(make(noise_seed=3), 0.03)
    solution = solve(problem)
    assert min(factor.min() for factor in excess(solution, problem)) == 1.0
    scan = problem.runs[0].scans[0]
    doubtful = replace(scan, sigma=scan.sigma * 2)
    assert carried(doubtful, scan, scan.thinned(30)).sigma == pytest.approx(2 * scan.thinned(30).sigma)
