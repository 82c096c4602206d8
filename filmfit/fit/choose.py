"""Which thickness and which model the data support: rivals refined alike and compared by their evidence.

Knows how to weigh fits against each other; does not turn them into words (verdict.py does).
"""

import logging
from dataclasses import dataclass

import numpy as np

from filmfit.fit.discrepancy import Freedom, corrected
from filmfit.fit.problem import Problem
from filmfit.fit.solve import Solution, solve
from filmfit.fit.start import SAME_NM, SAME_RATIO, search, searchable
from filmfit.stack import FloatArray

log = logging.getLogger("filmfit.fit")

RANKING_POINTS = 250  # a scan's points while rivals are compared
REFINED = 4  # trials refined with the law alone
CONTENDERS = 3  # of them, compared with the correction too
# How free the law's correction may be while rivals are compared, and in the end; more only where less falls short.
RANKING = Freedom(0.1)
RANKING_BANDS = Freedom(1.0, bands=True)
# No film obeys a law to better than a percent, so there is always a little.
FREEDOMS = (Freedom(0.01), Freedom(0.03), Freedom(0.1), Freedom(0.3))
BAND_FREEDOMS = (Freedom(0.3, bands=True), Freedom(1.0, bands=True), Freedom(3.0, bands=True))
FALLS_SHORT = 1.5  # chi2 per point
LAW_FAILS = 100.0  # chi2 per point of the best minimum with the law alone
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
        freedom: of the law's correction.
        thickness: index of the main thickness among the parameters.
        rivals: other minima, nearest first.
    """

    solution: Solution
    freedom: Freedom
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
    refined = _refined(ranking, thickness, hint_nm)
    if refined[0].chi2 > LAW_FAILS * refined[0].problem.points:
        log.info("no thickness fits with the law alone: absorption bands are allowed from the start")
        return _choose_with_bands(problem, main, thickness, hint_nm)
    ranked = _ranked(ranking, refined, main)
    plain = solve(problem.started(ranked[0].plain.values))
    solution, freedom = _with_correction(plain, main)
    return Outcome(solution, freedom, thickness, _rivals([one.flexible for one in ranked], thickness))


def _choose_with_bands(problem: Problem, main: tuple[int, int], thickness: int, hint_nm: float | None) -> Outcome:
    """Return the best-supported thickness where the law alone fails everywhere: the correction joins the search."""
    anchor = _unfitted(problem)
    ranking = corrected(_unfitted(problem.thinned(RANKING_POINTS)), *main, RANKING_BANDS)
    ranked = sorted(
        (solve(ranking.started(one.values)) for one in _refined(ranking, thickness, hint_nm)[:CONTENDERS]), key=badness
    )
    values = ranked[0].values
    found = []
    for freedom in BAND_FREEDOMS:
        solution = solve(corrected(anchor, *main, freedom).started(values))
        values = solution.values
        found.append((badness(solution), solution, freedom))
    _, solution, freedom = min(found, key=lambda row: row[0])
    return Outcome(solution, freedom, thickness, _rivals(ranked, thickness))


def _unfitted(problem: Problem) -> Solution:
    """Return a problem's starting values in the form of a solution."""
    free = len(problem.free)
    return Solution(problem, problem.start_values(), np.eye(free), np.inf, 0)


def _rivals(ranked: list[Solution], thickness: int) -> tuple[Rival, ...]:
    """Return all but the best of ranked solutions by thickness and evidence."""
    return tuple(Rival(float(other.values[thickness]), badness(other) - badness(ranked[0])) for other in ranked[1:])


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
    found = [solve(quick.started(trials.values[:, n])) for n in promising]
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
        flexible = solve(corrected(plain, *main, RANKING))
        log.info("contender: badness %.0f alone, %.0f corrected", badness(plain), badness(flexible))
        contenders.append(_Contender(plain, flexible))
    if all(_falls_short(contender.flexible) for contender in contenders):
        contenders = [
            _Contender(one.plain, min(one.flexible, solve(corrected(one.plain, *main, RANKING_BANDS)), key=badness))
            for one in contenders
        ]
    return sorted(contenders, key=lambda contender: badness(contender.flexible))


def _falls_short(solution: Solution) -> bool:
    """Say whether a fit misses the data by more than their noise."""
    return solution.chi2 > FALLS_SHORT * solution.problem.points


def _with_correction(plain: Solution, main: tuple[int, int]) -> tuple[Solution, Freedom]:
    """Return the solution of the best-supported correction, and how free that is."""
    found: list[tuple[float, Solution, Freedom]] = []
    for freedoms in (FREEDOMS, BAND_FREEDOMS):
        start: FloatArray | None = None
        for freedom in freedoms:
            problem = corrected(plain, *main, freedom)
            solution = solve(problem if start is None else problem.started(start))
            start = solution.values
            found.append((badness(solution), solution, freedom))
        if not _falls_short(min(found, key=lambda row: row[0])[1]):
            break
    _, solution, freedom = min(found, key=lambda row: row[0])
    return solution, freedom
