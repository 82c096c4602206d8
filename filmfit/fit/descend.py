"""Many trials at once downhill: Levenberg-Marquardt over a batch of starting points, with bounds.

Knows residuals and derivatives; does not know what the parameters mean. The search uses it to visit every minimum
cheaply; the answer itself comes from `solve.py`.
"""

from dataclasses import dataclass

import numpy as np

from filmfit.fit.problem import Problem
from filmfit.stack import FloatArray

FIRST_DAMPING = 1e-2
DAMPING_DOWN = 0.2
DAMPING_UP = 6.0
LARGEST_DAMPING = 1e8
UNDAMPED = 1e-4  # below it a step is a Gauss-Newton step, whose gain tells how far the minimum is
GAVE_UP = 1e4  # a trial damped this much has no way down
SETTLED = 1e-6  # of chi2, gained by the last step


@dataclass(frozen=True)
class Trials:
    """Free parameters (F, B) of a batch of trials and the chi2 (B,) each has reached."""

    values: FloatArray
    chi2: FloatArray

    def best(self, keep: FloatArray) -> "Trials":
        """Return the trials that an index array keeps, in its order."""
        return Trials(self.values[:, keep], self.chi2[keep])


def descend(problem: Problem, starts: FloatArray, steps: int) -> Trials:
    """Return a batch of trials after so many damped Gauss-Newton steps.

    Args:
        problem: residuals and derivatives.
        starts: free parameters, (F, B).
        steps: number of steps at most; each costs one evaluation of the batch.

    Returns:
        The best point each trial has seen.

    Reference: Marquardt, J. Soc. Ind. Appl. Math. 11, 431 (1963); tests/rooms/test_search_and_solve.py.
    """
    low, high = (bound[:, None] for bound in problem.bounds())
    values = np.clip(starts, low, high)
    residual, jacobian, chi2 = _evaluated(problem, values)
    damping = np.full(chi2.shape, FIRST_DAMPING)
    for _ in range(steps):
        trial = np.clip(values + _step(residual, jacobian, damping, values, low, high), low, high)
        new_residual, new_jacobian, new_chi2 = _evaluated(problem, trial)
        better = new_chi2 < chi2
        small = (chi2 - new_chi2 < SETTLED * chi2) & (damping < UNDAMPED)
        settled = np.all(np.where(better, small, damping > GAVE_UP))
        values = np.where(better, trial, values)
        chi2 = np.where(better, new_chi2, chi2)
        residual = np.where(better[:, None], new_residual, residual)
        jacobian = np.where(better[:, None], new_jacobian, jacobian)
        damping = np.minimum(damping * np.where(better, DAMPING_DOWN, DAMPING_UP), LARGEST_DAMPING)
        if settled:
            break
    return Trials(values, chi2)


def _evaluated(problem: Problem, values: FloatArray) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Return residuals, derivatives and chi2 (B,); a trial that cannot be computed is infinitely bad."""
    with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
        residual, jacobian = problem.evaluate(values)
        chi2 = np.sum(residual**2, axis=-1)
    lost = ~np.isfinite(chi2)
    if lost.any():
        residual, jacobian = residual.copy(), jacobian.copy()
        residual[lost], jacobian[:, lost] = 0.0, 0.0
        chi2 = np.where(lost, np.inf, chi2)
    return residual, jacobian, chi2


def _step(
    residual: FloatArray,
    jacobian: FloatArray,
    damping: FloatArray,
    values: FloatArray,
    low: FloatArray,
    high: FloatArray,
) -> FloatArray:
    """Return the damped step (F, B); a parameter held by its bound does not move."""
    by_trial = np.moveaxis(jacobian, 0, 1)  # (B, F, M)
    normal = by_trial @ np.swapaxes(by_trial, 1, 2)
    gradient = np.einsum("bfm,bm->fb", by_trial, residual)
    held = ((values <= low) & (gradient > 0)) | ((values >= high) & (gradient < 0))
    gradient = np.where(held, 0.0, gradient)
    normal = np.where(held.T[:, :, None] | held.T[:, None, :], 0.0, normal)
    diagonal = np.einsum("bff->bf", normal)
    floor = np.maximum(diagonal.max(axis=1, keepdims=True) * 1e-14, 1e-300)
    added = np.maximum(diagonal, floor) * damping[:, None] + np.where(held.T, 1.0, 0.0) + floor
    normal = normal + added[:, :, None] * np.eye(normal.shape[1])
    step: FloatArray = -np.linalg.solve(normal, gradient.T[:, :, None])[:, :, 0].T
    return step
