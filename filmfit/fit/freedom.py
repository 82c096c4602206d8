"""How free the law's correction must be: fits of growing freedom weighed by their evidence.

Knows the evidence for a fitted model and the ladder of freedoms; does not know minima or structures (choose.py does).
"""

import numpy as np

from filmfit.fit.discrepancy import Freedom, corrected
from filmfit.fit.solve import Solution, solve
from filmfit.stack import FloatArray

# No film obeys a law to better than a percent, so there is always a little.
FREEDOMS = (Freedom(0.01), Freedom(0.03), Freedom(0.1), Freedom(0.3))
BAND_FREEDOMS = tuple(Freedom(size, bands=True) for size in (0.3, 1.0, 3.0, 10.0))
# How free a correction is while rivals are compared.
RANKING = FREEDOMS[2]
RANKING_BANDS = BAND_FREEDOMS[1]
EVALUATIONS = 60
FALLS_SHORT = 1.5  # chi2 per point
DECISIVE_BIC = 10.0  # Kass and Raftery, J. Am. Stat. Assoc. 90, 773 (1995), p. 777


def badness(solution: Solution) -> float:
    """Return -2 ln of the evidence for a fitted model, up to what all models of the same data share.

    Chi2 (expectations included) plus the logarithm of the determinant of the information matrix: a parameter that
    the data tie down costs what it narrows its expectation. Differences play the role of differences of BIC, which
    is their limit for many points and vague expectations.

    Reference: Kass and Raftery, J. Am. Stat. Assoc. 90, 773 (1995), Laplace's method.
    """
    expected = sum(2.0 * float(np.log(solution.problem.parameters[at].sigma or 1.0)) for at in solution.problem.free)
    return solution.chi2 - float(np.linalg.slogdet(solution.covariance)[1]) + expected


def falls_short(solution: Solution) -> bool:
    """Say whether a fit misses the data by more than their noise."""
    return solution.chi2 > FALLS_SHORT * solution.problem.points


def freed(plain: Solution, main: tuple[int, int], first: Freedom = RANKING) -> tuple[Solution, Freedom]:
    """Return the best-supported broad correction of a law, and how free that is.

    Args:
        plain: where the fit of the law alone ended.
        main: run and layer whose law may be corrected.
        first: where the climb begins.
    """
    return _best_of(plain, main, FREEDOMS, FREEDOMS.index(first))[1:]


def banded(plain: Solution, main: tuple[int, int]) -> tuple[Solution, Freedom]:
    """Return the best-supported correction that may hold narrow bands, and how free that is; as `freed`."""
    return _best_of(plain, main, BAND_FREEDOMS, BAND_FREEDOMS.index(RANKING_BANDS))[1:]


def fitted(
    plain: Solution, main: tuple[int, int], freedom: Freedom, near: tuple[Solution, Freedom] | None = None
) -> Solution:
    """Return the fit with a correction of one freedom, begun at that of another, near one where given.

    Coefficients count in units of the expected size: the same correction has smaller ones where more is expected.
    """
    problem = corrected(plain, *main, freedom)
    if near is None:
        return solve(problem, EVALUATIONS)
    values: FloatArray = near[0].values.copy()
    values[plain.values.size :] *= near[1].size / freedom.size
    return solve(problem.started(values), EVALUATIONS)


def _best_of(
    plain: Solution, main: tuple[int, int], freedoms: tuple[Freedom, ...], first: int
) -> tuple[float, Solution, Freedom]:
    """Return the best-supported of neighbouring freedoms, climbing from the first: evidence has one peak in size."""
    tried: dict[int, tuple[float, Solution, Freedom]] = {}

    def at(number: int, near: tuple[float, Solution, Freedom] | None) -> tuple[float, Solution, Freedom]:
        if number not in tried:
            solution = fitted(plain, main, freedoms[number], near[1:] if near else None)
            tried[number] = (badness(solution), solution, freedoms[number])
        return tried[number]

    here = first
    best = at(here, None)
    for step in (-1, 1):
        while 0 <= here + step < len(freedoms) and at(here + step, best)[0] < best[0]:
            here += step
            best = tried[here]
    return best
