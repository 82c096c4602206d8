"""Which thickness and which model the data support: rivals refined alike and compared by their evidence.

Knows how to weigh fits against each other; does not turn them into words (verdict.py does).
"""

import logging
from dataclasses import dataclass, replace

import numpy as np

from filmfit.fit.discrepancy import Freedom, corrected
from filmfit.fit.problem import Problem
from filmfit.fit.solve import Solution, solve
from filmfit.fit.start import SAME_NM, SAME_RATIO, search, searchable
from filmfit.stack import FloatArray

log = logging.getLogger("filmfit.fit")

GROUP_NM = 4.0  # closer points are averaged: a slit is as wide, and no film's fringe is as narrow
RANKING_POINTS = 250  # a scan's points while rivals are compared
REFINED = 4  # trials refined with the law alone
CONTENDERS = 3  # of them, compared with the correction too
# How free the law's correction may be while rivals are compared, and in the end; more only where less falls short.
RANKING = Freedom(0.1)
RANKING_BANDS = Freedom(1.0, bands=True)
# No film obeys a law to better than a percent, so there is always a little.
FREEDOMS = (Freedom(0.01), Freedom(0.03), Freedom(0.1), Freedom(0.3))
BAND_FREEDOMS = (Freedom(0.3, bands=True), Freedom(1.0, bands=True), Freedom(3.0, bands=True))
NEAR_END = 0.999  # a thickness beyond this share of the largest is the end of the search, not a minimum
STRANGE = 0.1  # a law that must be corrected this much may be a rough film instead
HAZE = (".haze_R", ".haze_T")
HAZE_START = 0.01
DECISIVE_BIC = 10.0
FALLS_SHORT = 1.5  # chi2 per point
LAW_FAILS = 250.0  # chi2 per point of the best minimum with the law alone
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
    few = problem.binned(GROUP_NM)
    ranking = problem.thinned(RANKING_POINTS)
    plains = [solve(ranking.started(one.values)) for one in _refined(ranking, thickness, hint_nm)[:CONTENDERS]]
    plains = _distinct(plains, thickness)
    if plains[0].chi2 > LAW_FAILS * plains[0].problem.points:
        log.info("no thickness fits with the law alone: absorption bands are allowed from the start")
        outcome = _choose_with_bands(few, main, thickness, _ranked_with_bands(ranking, main, hint_nm))
    else:
        ranked = _ranked(plains, main) if len(plains) > 1 else ()
        plain = solve(few.started(ranked[0].plain.values if ranked else plains[0].values))
        solution, freedom = _with_scatter(plain, main, *_with_correction(plain, main))
        outcome = Outcome(solution, freedom, thickness, _rivals([one.flexible for one in ranked], thickness))
    return replace(outcome, solution=_on_all_points(outcome.solution, problem))


def _on_all_points(solution: Solution, measured: Problem) -> Solution:
    """Return a solution found on averaged points with the scans as they were measured."""
    runs = tuple(
        replace(run, scans=given.scans) for run, given in zip(solution.problem.runs, measured.runs, strict=True)
    )
    problem = replace(solution.problem, runs=runs)
    residual, _ = problem.evaluate(solution.values[list(problem.free)])
    return replace(solution, problem=problem, chi2=float(residual @ residual))


def _ranked_with_bands(problem: Problem, main: tuple[int, int], hint_nm: float | None) -> list[Solution]:
    """Return the distinct minima by evidence where absorption bands join the search."""
    thickness = problem.runs[main[0]].layers[main[1]].thickness
    flexible = corrected(_unfitted(problem), *main, RANKING_BANDS)
    found = _refined(flexible, thickness, hint_nm)[:CONTENDERS]
    return sorted((solve(flexible.started(one.values)) for one in found), key=badness)


def _choose_with_bands(problem: Problem, main: tuple[int, int], thickness: int, ranked: list[Solution]) -> Outcome:
    """Return the best-supported bands, begun at the best of the ranked minima."""
    anchor, values = _unfitted(problem), ranked[0].values
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
    highest = ranked[0].problem.parameters[thickness].high * NEAR_END if ranked else 0.0
    return tuple(
        Rival(float(other.values[thickness]), badness(other) - badness(ranked[0]))
        for other in ranked[1:]
        if other.values[thickness] < highest
    )


@dataclass(frozen=True)
class _Contender:
    """A minimum with the law alone, and what became of it once the law may be corrected."""

    plain: Solution
    flexible: Solution


def _refined(problem: Problem, thickness: int, hint_nm: float | None) -> list[Solution]:
    """Return distinct solutions of the law alone, best first."""
    quick = searchable(problem)
    trials = search(problem, thickness, hint_nm)
    others = [n for n in range(1, trials.chi2.size) if trials.chi2[n] < HOPELESS * trials.chi2[0]]
    promising = [0, *others[: REFINED - 1]]
    return _distinct([solve(quick.started(trials.values[:, n])) for n in promising], thickness)


def _distinct(solutions: list[Solution], thickness: int) -> list[Solution]:
    """Return solutions of different thickness, best first, without the hopeless."""
    distinct: list[Solution] = []
    for solution in sorted(solutions, key=lambda one: one.chi2):
        here = solution.values[thickness]
        apart = all(abs(one.values[thickness] - here) > max(SAME_NM, SAME_RATIO * here) for one in distinct)
        if apart and (not distinct or solution.chi2 < HOPELESS * distinct[0].chi2):
            distinct.append(solution)
    return distinct


def _ranked(plains: list[Solution], main: tuple[int, int]) -> list[_Contender]:
    """Return the contenders by their evidence, each given its own correction."""
    contenders = [_Contender(plain, solve(corrected(plain, *main, RANKING))) for plain in plains]
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
    best = _best_of(plain, main, FREEDOMS, FREEDOMS.index(RANKING))
    if _falls_short(best[1]):
        best = min(
            best, _best_of(plain, main, BAND_FREEDOMS, BAND_FREEDOMS.index(RANKING_BANDS)), key=lambda row: row[0]
        )
    _, solution, freedom = best
    return solution, freedom


def _with_scatter(
    plain: Solution, main: tuple[int, int], solution: Solution, freedom: Freedom
) -> tuple[Solution, Freedom]:
    """Return the solution with light lost by scattering where that is decisively better than a strange law."""
    if freedom.size < STRANGE:
        return solution, freedom
    problem = plain.problem
    free = {p.name: {"vary": True, "start": HAZE_START} for p in problem.parameters if p.name.endswith(HAZE)}
    hazy = solve(problem.changed(free))
    gained_badness, gained, its_freedom = _best_of(hazy, main, FREEDOMS, FREEDOMS.index(RANKING))
    log.info("with scatter: badness %.0f against %.0f", gained_badness, badness(solution))
    if gained_badness < badness(solution) - DECISIVE_BIC:
        return gained, its_freedom
    return solution, freedom


def _best_of(
    plain: Solution, main: tuple[int, int], freedoms: tuple[Freedom, ...], first: int
) -> tuple[float, Solution, Freedom]:
    """Return the best-supported of neighbouring freedoms, climbing from the first: evidence has one peak in size."""
    tried: dict[int, tuple[float, Solution, Freedom]] = {}

    def at(number: int, start: FloatArray | None) -> tuple[float, Solution, Freedom]:
        if number not in tried:
            problem = corrected(plain, *main, freedoms[number])
            solution = solve(problem if start is None else problem.started(start))
            tried[number] = (badness(solution), solution, freedoms[number])
        return tried[number]

    here = first
    best = at(here, None)
    for step in (-1, 1):
        while 0 <= here + step < len(freedoms) and at(here + step, best[1].values)[0] < best[0]:
            here += step
            best = tried[here]
    return best
