"""The least-squares call: lmfit's trust-region solver with our analytic derivatives.

Knows lmfit and its pitfalls; does not know where to begin or which model is right.
"""

from dataclasses import dataclass

import lmfit
import numpy as np

from filmfit.fit.descend import descend
from filmfit.fit.problem import Problem
from filmfit.stack import FloatArray

MOST_EVALUATIONS = 200
ROUGH_STEPS = 15  # where fits are only compared
FIRST_STEPS = 12  # by normal equations, cheaper than the solver's, before it takes over
CHI2_TOLERANCE = 1e-5  # of chi2: a hundredth of a unit for a thousand points
STEEPEST = 1e12
FAR = 1e6  # the residual of a point that cannot be computed
BOUND_MARGIN = 1e-6  # a start this near its bound, as a share of the span, is moved inside


@dataclass(frozen=True)
class Solution:
    """Where a fit ended.

    Args:
        problem: what was fitted, started at the solution.
        values: all parameters (P,).
        covariance: of the free parameters (F, F), for residuals of unit variance; expectations included.
        chi2: of points and expectations.
        evaluations: number of model evaluations.
    """

    problem: Problem
    values: FloatArray
    covariance: FloatArray
    chi2: float
    evaluations: int

    @property
    def reduced_chi2(self) -> float:
        """Chi2 per degree of freedom, expectations counted as points."""
        return self.chi2 / max(1, self.problem.points - len(self.problem.free))

    def value(self, name: str) -> float:
        """Return one parameter by its full name."""
        return float(self.values[self.problem.index(name)])

    def sigma(self, name: str) -> float:
        """Return one parameter's standard uncertainty, 0 where it is held."""
        index = self.problem.index(name)
        if index not in self.problem.free:
            return 0.0
        at = self.problem.free.index(index)
        return float(np.sqrt(max(self.covariance[at, at], 0.0)))


class _Cache:
    """Residuals and derivatives of the last point: the solver asks for both in turn."""

    def __init__(self, problem: Problem) -> None:
        self.problem = problem
        self.point: FloatArray | None = None
        self.residual = np.empty(0)
        self.jacobian = np.empty((0, 0))
        self.evaluations = 0

    def at(self, point: FloatArray) -> "_Cache":
        """Evaluate the problem unless it stands at this point already."""
        if self.point is None or not np.array_equal(point, self.point):
            with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
                residual, jacobian = self.problem.evaluate(point)
            # a point that no law survives is only far away; the solver turns back
            self.residual = np.clip(np.where(np.isfinite(residual), residual, FAR), -FAR, FAR)
            self.jacobian = np.clip(np.where(np.isfinite(jacobian), jacobian, 0.0), -STEEPEST, STEEPEST)
            self.point = point.copy()
            self.evaluations += 1
        return self


def solve(problem: Problem, max_evaluations: int = MOST_EVALUATIONS) -> Solution:
    """Return the least-squares solution nearest to the problem's starting values.

    Args:
        problem: residuals in units of their noise; starting values and bounds.
        max_evaluations: where to stop at the latest.

    Reference: Branch, Coleman, Li, SIAM J. Sci. Comput. 21, 1 (1999) for the solver;
        tests/rooms/test_search_and_solve.py.
    """
    begun = problem.start_values()[list(problem.free)]
    near = descend(problem, begun[:, None], min(FIRST_STEPS, max_evaluations)).values[:, 0]
    problem = problem.started(problem.full(near))
    parameters = lmfit.Parameters()
    for number, index in enumerate(problem.free):
        p = problem.parameters[index]
        margin = BOUND_MARGIN * min(p.high - p.low, 1.0 + abs(p.start))
        start = float(np.clip(p.start, p.low + margin, p.high - margin))
        parameters.add(f"p{number}", value=start, min=p.low, max=p.high)
    cache = _Cache(problem)

    def point(given: lmfit.Parameters) -> FloatArray:
        return np.array([given[f"p{number}"].value for number in range(len(problem.free))])

    with np.errstate(
        invalid="ignore", over="ignore", divide="ignore"
    ):  # lmfit's own error bars of undetermined parameters; ours are wide instead
        found = lmfit.minimize(
            lambda given: cache.at(point(given)).residual.copy(),
            parameters,
            method="least_squares",
            Dfun=lambda given: cache.at(point(given)).jacobian.T.copy(),
            x_scale="jac",
            scale_covar=False,
            max_nfev=max_evaluations,
            ftol=CHI2_TOLERANCE,
        )
    end = point(found.params)
    cache.at(end)
    return Solution(
        problem.started(problem.full(end)),
        problem.full(end),
        covariance(cache.jacobian),
        float(cache.residual @ cache.residual),
        cache.evaluations,
    )


def roughly(problem: Problem, steps: int = ROUGH_STEPS) -> Solution:
    """Return where so many steps downhill end: enough where fits are only compared.

    Args:
        problem: as for `solve`.
        steps: at most.
    """
    begun = problem.start_values()[list(problem.free)]
    end = descend(problem, begun[:, None], steps).values[:, 0]
    residual, jacobian = problem.evaluate(end)
    values = problem.full(end)
    return Solution(problem.started(values), values, covariance(jacobian), float(residual @ residual), steps)


def covariance(jacobian: FloatArray) -> FloatArray:
    """Return the covariance (F, F) of least squares from the derivatives (F, M) of unit-variance residuals.

    Directions that the data do not determine come out wide instead of failing.
    """
    scale = np.sqrt(np.sum(jacobian**2, axis=1))
    scale = np.where(scale > 0, scale, 1.0)
    normal = (jacobian / scale[:, None]) @ (jacobian / scale[:, None]).T
    eigenvalues, vectors = np.linalg.eigh(normal)
    inverse = (vectors / np.maximum(eigenvalues, 1e-12)) @ vectors.T
    with np.errstate(over="ignore"):
        spread: FloatArray = inverse / np.outer(scale, scale)
    return spread
