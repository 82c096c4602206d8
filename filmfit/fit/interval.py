"""How sure: the spread of any function of the fitted parameters.

Knows the solution's covariance and how much the residuals ask it to grow; does not know what a quantity means.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from filmfit.fit.solve import Solution
from filmfit.result import COVERAGE_FACTOR, Quantity
from filmfit.stack import FloatArray

STEP_SIGMAS = 0.05  # of the difference quotient, in sigmas of each parameter
LARGEST_RELATIVE_SIGMA = 1.0  # beyond it a positive quantity is not determined


@dataclass(frozen=True)
class Posterior:
    """Parameters (P,) with the covariance (F, F) of the free ones, grown to what the residuals show."""

    solution: Solution
    growth: float

    @classmethod
    def of(cls, solution: Solution) -> "Posterior":
        """Return the solution with its covariance grown by the residuals' excess over their noise."""
        return cls(solution, residual_growth(solution))

    @property
    def covariance(self) -> FloatArray:
        """Covariance of the free parameters (F, F)."""
        return self.solution.covariance * self.growth

    def gradient(self, function: Callable[[FloatArray], float]) -> FloatArray:
        """Return the derivatives (F,) of a function of all parameters (P,) by central differences."""
        values = self.solution.values
        free = self.solution.problem.free
        sigmas = np.sqrt(np.diag(self.solution.covariance))
        slopes = np.empty(len(free))
        for row, index in enumerate(free):
            step = np.zeros_like(values)
            step[index] = STEP_SIGMAS * min(float(sigmas[row]), 0.1 * max(abs(float(values[index])), 1e-3))
            slope = (function(values + step) - function(values - step)) / (2 * step[index])
            slopes[row] = slope if np.isfinite(slope) else 0.0
        return slopes

    def positive(self, function: Callable[[FloatArray], float], relative_sigma: float = 0.0) -> Quantity | None:
        """Return a positive quantity, its interval symmetric in the logarithm.

        Args:
            function: of all parameters (P,).
            relative_sigma: a further relative uncertainty, independent of the fit.

        Returns:
            The quantity, or None where its relative uncertainty exceeds 100 %: the data do not determine it.
        """
        with np.errstate(all="ignore"):
            value = float(function(self.solution.values))
        if not (np.isfinite(value) and value > 0):
            return None
        slopes = self.gradient(function) / value
        relative = float(np.sqrt(slopes @ self.covariance @ slopes + relative_sigma**2))
        if not np.isfinite(relative) or relative > LARGEST_RELATIVE_SIGMA:
            return None
        spread = float(np.exp(COVERAGE_FACTOR * relative))
        if not np.isfinite(value * spread):
            return None
        return Quantity.between(value, value / spread, value * spread)

    def parameter(self, index: int) -> Quantity:
        """Return one parameter by its index among all, its interval symmetric; a held one has no spread."""
        value = float(self.solution.values[index])
        if index not in self.solution.problem.free:
            return Quantity.normal(value, 0.0)
        row = self.solution.problem.free.index(index)
        return Quantity.normal(value, max(float(self.covariance[row, row]), 0.0) ** 0.5)

    def plain(self, function: Callable[[FloatArray], float]) -> Quantity:
        """Return a quantity of either sign, its interval symmetric."""
        slopes = self.gradient(function)
        variance = float(slopes @ self.covariance @ slopes)
        return Quantity.normal(float(function(self.solution.values)), max(variance, 0.0) ** 0.5)


def residual_growth(solution: Solution) -> float:
    """Return by how much the residuals ask the covariance to grow, at least 1.

    Noise that is larger than assumed grows it by chi2 per point. Residuals that hold together over neighbouring
    points carry less information than their number: the variance grows by the sum of their autocorrelation.

    Reference: effective number of observations: Bayley and Hammersley, J. R. Stat. Soc. Suppl. 8, 184 (1946);
        tests/rooms/test_scan_and_interval.py.
    """
    residual, _ = solution.problem.evaluate(solution.values[list(solution.problem.free)])
    start, chi2, growths = 0, 0.0, []
    for run in solution.problem.runs:
        for scan in run.scans:
            part = residual[start : start + scan.values.size]
            start += scan.values.size
            chi2 += float(part @ part)
            growths.append((autocorrelation_sum(part), part.size))
    points = sum(size for _, size in growths)
    memory = sum(growth * size for growth, size in growths) / points
    return max(1.0, chi2 / points) * max(1.0, memory)


def autocorrelation_sum(residual: FloatArray) -> float:
    """Return 1 + 2 sum of the autocorrelation (W,) up to its first zero."""
    centred = residual - residual.mean()
    power = float(centred @ centred)
    if power == 0:
        return 1.0
    total = 1.0
    for lag in range(1, min(residual.size // 4, 60)):
        correlation = float(centred[:-lag] @ centred[lag:]) / power
        if correlation <= 2 / np.sqrt(residual.size):
            break
        total += 2 * correlation
    return total
