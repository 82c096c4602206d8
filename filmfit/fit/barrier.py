"""How far a barrier that nobody declared would have moved the answer.

Knows that float glass often carries a silica barrier under its coating; does not add one to the fit.
"""

from collections.abc import Callable
from dataclasses import replace

import numpy as np

from filmfit.fit.depth import LayerModel
from filmfit.fit.interval import Posterior
from filmfit.fit.problem import Parameter
from filmfit.materials import material
from filmfit.stack import FloatArray

BARRIER_NM = 25.0  # of silica under coatings on float glass: common practice, no source
BARRIER = "fused-silica"


def moved_by_barrier(posterior: Posterior, functions: dict[str, Callable[[FloatArray], float]]) -> dict[str, float]:
    """Return by which share each function of all parameters (P,) would move if 25 nm of silica lay under the film.

    The fit's answer to a small change of the spectra: parameters move by minus the covariance times the derivatives
    times the change, in units of the noise.

    Args:
        posterior: of one run's fit without such a layer.
        functions: positive quantities by name.

    Reference: linear response of least squares; tests/rooms/test_barrier.py fits the changed spectra anew.
    """
    solution = posterior.solution
    problem = solution.problem
    run = problem.runs[0]
    added = Parameter(f"layer.{run.run}/undeclared.thickness_nm", BARRIER_NM, 0.0, 2 * BARRIER_NM, vary=False)
    layer = LayerModel("undeclared", len(problem.parameters), material=material(BARRIER))
    with_barrier = replace(
        problem,
        parameters=(*problem.parameters, added),
        runs=(replace(run, layers=(layer, *run.layers)), *problem.runs[1:]),
        index_expectations=tuple(replace(one, layer=one.layer + 1) for one in problem.index_expectations),
    )
    free = solution.values[list(problem.free)]
    residual, jacobian = problem.evaluate(free)
    changed, _ = with_barrier.evaluate(free)
    # spectra with a barrier, read without one: the change enters with the other sign
    step = np.zeros_like(solution.values)
    step[list(problem.free)] = solution.covariance @ (jacobian @ (changed - residual))
    moved = {}
    for name, function in functions.items():
        here = function(solution.values)
        moved[name] = (function(solution.values + step) - here) / here
    return moved
