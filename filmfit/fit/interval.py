"""How sure: the spread of any function of the fitted parameters.

Knows the solution's covariance and how much the residuals ask it to grow; does not know what a quantity means.
"""

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace

import numpy as np

from filmfit.fit.problem import Problem
from filmfit.fit.profile import Profile, thickness_profile
from filmfit.fit.solve import Solution, solve
from filmfit.result import COVERAGE_FACTOR, Quantity
from filmfit.stack import FloatArray

STEP_SIGMAS = 0.05  # of the difference quotient, in sigmas of each parameter
CLEARLY_BETTER = 0.5  # in chi2
# The data also chose how free the law is, which a covariance at that choice leaves out: found by the coverage of made
# films, DEVELOPERS.md.
CHOICE = 1.3**2
PARABOLIC = 0.02  # a relative uncertainty up to which the likelihood of a thickness is a parabola
LARGEST_RATIO = 50.0  # of the interval's ends; beyond it a parameter is not determined
LARGEST_RELATIVE_SIGMA = 1.0  # beyond it a positive quantity is not determined


@dataclass(frozen=True)
class Posterior:
    """Parameters (P,) with the covariance (F, F) of the free ones, grown to what the residuals show."""

    solution: Solution
    covariance: FloatArray
    profile: Profile | None = None  # of the thickness, where no parabola does

    @classmethod
    def of(cls, solution: Solution) -> "Posterior":
        """Return the solution with its covariance grown by the residuals' excess over their noise.

        Each scan's share of the information counts by its own growth, expectations by theirs: the sandwich.

        Reference: White, Econometrica 50, 1 (1982); tests/rooms/test_scan_and_interval.py.
        """
        residual, jacobian = solution.problem.evaluate(solution.values[list(solution.problem.free)])
        spread = np.ones(residual.size)
        scans = list(residual_growths(solution.problem, residual))
        # a model that fails one scan is trusted no more in the others
        common = sum(growth * (stop - start) for start, stop, growth in scans) / scans[-1][1]
        for start, stop, growth in scans:
            spread[start:stop] = max(growth, common)
        scores = (jacobian * (spread * CHOICE)) @ jacobian.T
        return cls(solution, solution.covariance @ scores @ solution.covariance)

    def growth(self, index: int) -> float:
        """Return by how much the variance of a free parameter, by its index among all, has grown."""
        place = self.solution.problem.free.index(index)
        return max(1.0, float(self.covariance[place, place] / self.solution.covariance[place, place]))

    def looked_along(self, index: int) -> "Posterior":
        """Return the posterior with the profile likelihood of a thickness where its parabola is too wide to be one.

        Where the likelihood is highest elsewhere than the fit ended, the fit goes on from there.
        """
        if index not in self.solution.problem.free:
            return self
        place = self.solution.problem.free.index(index)
        relative = float(np.sqrt(self.covariance[place, place])) / float(self.solution.values[index])
        if relative < PARABOLIC:
            return self
        profile = thickness_profile(self.solution, index, relative, self.growth(index))
        onward = solve(self.solution.problem.started(profile.likeliest))
        if onward.chi2 < self.solution.chi2 - CLEARLY_BETTER:
            return replace(Posterior.of(onward), profile=profile)
        return replace(self, profile=profile)

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

    def thickness(self, index: int) -> Quantity | None:
        """Return a thickness by its index among the parameters, its interval the profile's where that was needed.

        None where the data do not determine it.
        """
        if self.profile is None or self.profile.index != index:
            return self.positive(lambda values: float(values[index]))
        low, high = self.profile.low, self.profile.high
        if high > LARGEST_RATIO * low:
            return None
        return Quantity.between(float(np.clip(self.solution.values[index], low, high)), low, high)

    def plain(self, function: Callable[[FloatArray], float]) -> Quantity:
        """Return a quantity of either sign, its interval symmetric."""
        slopes = self.gradient(function)
        variance = float(slopes @ self.covariance @ slopes)
        return Quantity.normal(float(function(self.solution.values)), max(variance, 0.0) ** 0.5)


def residual_growths(problem: Problem, residual: FloatArray) -> Iterator[tuple[int, int, float]]:
    """Yield for each scan where its rows begin and end, and by how much it asks variances to grow, at least 1.

    Noise that is larger than assumed counts by chi2 per point. Residuals that hold together over neighbouring points
    carry less information than their number: the variance grows by the sum of their autocorrelation.

    Reference: effective number of observations: Bayley and Hammersley, J. R. Stat. Soc. Suppl. 8, 184 (1946);
        tests/rooms/test_scan_and_interval.py.
    """
    start = 0
    for run in problem.runs:
        for scan in run.scans:
            stop = start + scan.values.size
            part = residual[start:stop]
            yield start, stop, max(1.0, float(part @ part) / part.size) * max(1.0, autocorrelation_sum(part))
            start = stop


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
