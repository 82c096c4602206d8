"""Which thickness and which model the data support: rivals refined alike and compared by their evidence.

Knows how to weigh fits against each other; does not turn them into words (verdict.py does).
"""

import logging
from dataclasses import dataclass

import numpy as np

from filmfit.fit.discrepancy import corrected
from filmfit.fit.problem import Problem
from filmfit.fit.solve import Solution, solve
from filmfit.fit.start import SAME_NM, SAME_RATIO, search, searchable
from filmfit.stack import FloatArray

log = logging.getLogger("filmfit.fit")

RANKING_POINTS = 250  # a scan's points while rivals are compared
REFINED = 4  # trials refined with the law alone
CONTENDERS = 3  # of them, compared with the correction too
RANKING_SIZE = 0.1
SIZES = (0.03, 0.1, 0.3)  # expected relative size of the law's correction
HOPELESS = 30.0  # a trial whose chi2 is this many times the best one's is not refined


@dataclass(frozen=True)
class Rival:
    """Another minimum: its thickness and how much worse the data speak for it."""

    thickness_nm: float
    delta_bic: float


@dataclass(frozen=True)
class Outcome:
    """What a fit came to.

    Args:
        solution: of the chosen model, on all points.
        plain: of the law alone, on all points.
        correction_size: expected relative size of the law's correction, 0 where the law alone is supported.
        thickness: index of the main thickness among the parameters.
        rivals: other minima, nearest first.
    """

    solution: Solution
    plain: Solution
    correction_size: float
    thickness: int
    rivals: tuple[Rival, ...]


def badness(solution: Solution) -> float:
    """Return -2 ln of the evidence for a fitted model, up to what all models of the same data share.

    Chi2 (expectations included) plus the logarithm of the determinant of the information matrix: a parameter that
    the data tie down costs what it narrows its expectation. Differences play the role of differences of BIC, which
    is their limit for many points and vague expectations.

    Reference: Kass and Raftery, J. Am. Stat. Assoc. 90, 773 (1995), Laplace's method.
    """
    return solution.chi2 - float(np.linalg.slogdet(solution.covariance)[1])


def choose(problem: Problem, main: tuple[int, int], hint_nm: float | None = None) -> Outcome:
    """Return the best-supported thickness and model of one run, with its rivals.

    Args:
        problem: one run, all parameters at their starting values.
        main: run and layer whose thickness is sought.
        hint_nm: a thickness to try as well.
    """
    run, layer = main
    thickness = problem.runs[run].layers[layer].thickness
    ranking = problem.thinned(RANKING_POINTS)
    ranked = _ranked(ranking, _refined(ranking, thickness, hint_nm), main)
    plain = solve(problem.started(ranked[0].plain.values))
    solution, size = _with_correction(plain, main)
    rivals = tuple(
        Rival(float(other.flexible.values[thickness]), badness(other.flexible) - badness(ranked[0].flexible))
        for other in ranked[1:]
    )
    return Outcome(solution, plain, size, thickness, rivals)


@dataclass(frozen=True)
class _Contender:
    """A minimum with the law alone, and what became of it once the law may be corrected."""

    plain: Solution
    flexible: Solution


def _refined(problem: Problem, thickness: int, hint_nm: float | None) -> list[Solution]:
    """Return distinct solutions of the law alone, best first."""
    quick = searchable(problem)
    trials = search(problem, thickness, hint_nm)
    promising = [n for n in range(trials.chi2.size) if trials.chi2[n] < HOPELESS * trials.chi2[0]][:REFINED]
    found = [solve(quick.started(quick.full(trials.values[:, n]))) for n in promising]
    found.sort(key=lambda solution: solution.chi2)
    distinct: list[Solution] = []
    for solution in found:
        here = solution.values[thickness]
        if all(abs(other.values[thickness] - here) > max(SAME_NM, SAME_RATIO * here) for other in distinct):
            distinct.append(solution)
    return distinct


def _ranked(problem: Problem, solutions: list[Solution], main: tuple[int, int]) -> list[_Contender]:
    """Return the contenders by their evidence, each given its own instrument errors and its own correction."""
    contenders = []
    for solution in solutions[:CONTENDERS]:
        plain = solve(problem.started(solution.values))
        flexible = solve(corrected(plain, *main, RANKING_SIZE))
        log.info("contender: badness %.0f alone, %.0f corrected", badness(plain), badness(flexible))
        contenders.append(_Contender(plain, flexible))
    return sorted(contenders, key=lambda contender: badness(contender.flexible))


def _with_correction(plain: Solution, main: tuple[int, int]) -> tuple[Solution, float]:
    """Return the solution of the best-supported size of correction, and that size (0: none)."""
    best, best_size = plain, 0.0
    start: FloatArray | None = None
    for size in SIZES:
        problem = corrected(plain, *main, size)
        if start is not None:
            problem = problem.started(start)
        found = solve(problem)
        start = found.values
        if badness(found) < badness(best):
            best, best_size = found, size
    return best, best_size
