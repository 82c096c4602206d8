"""An undeclared barrier: the linear answer against spectra that have one, fitted without it."""

from dataclasses import replace

import numpy as np
import pytest

from filmfit.fit.barrier import BARRIER_NM, moved_by_barrier
from filmfit.fit.depth import LayerModel
from filmfit.fit.interval import Posterior
from filmfit.fit.problem import Parameter
from filmfit.fit.solve import solve
from filmfit.materials import material

NAME = "layer.run0/film.thickness_nm"


def measured_with_barrier(problem):
    """Return the problem with the spectra that a film on 25 nm of silica would give."""
    run = problem.runs[0]
    layer = LayerModel("barrier", len(problem.parameters), material=material("fused-silica"))
    true = replace(
        problem,
        parameters=(*problem.parameters, Parameter("layer.x/barrier.thickness_nm", BARRIER_NM, 0.0, 50.0)),
        runs=(replace(run, layers=(layer, *run.layers)),),
    )
    (seen,) = true.predict(true.start_values())
    parts = np.split(seen.values, len(run.scans))
    return replace(problem, runs=(replace(run, scans=tuple(map(lambda s, v: replace(s, values=v), run.scans, parts))),))


def test_the_shift_is_the_one_a_fit_makes(make):
    solution = solve(make())
    index = solution.problem.index(NAME)
    found = moved_by_barrier(Posterior.of(solution), {"thickness": lambda values: float(values[index])})
    refitted = solve(measured_with_barrier(make()))
    moved = refitted.value(NAME) / solution.value(NAME) - 1
    assert 0.003 < abs(moved) < 0.1
    assert found["thickness"] == pytest.approx(moved, rel=0.35)
