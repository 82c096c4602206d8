"""Which thickness and which model the data support: rivals refined alike and compared by their evidence.

Knows how to weigh fits against each other; does not turn them into words (verdict.py does).
"""

import logging
from dataclasses import dataclass, replace

import numpy as np

from filmfit.fit.discrepancy import Freedom, corrected
from filmfit.fit.doubt import carried, doubted
from filmfit.fit.freedom import (
    BAND_FREEDOMS,
    DECISIVE_BIC,
    FREEDOMS,
    RANKING,
    RANKING_BANDS,
    badness,
    banded,
    falls_short,
    fitted,
    freed,
)
from filmfit.fit.problem import Problem
from filmfit.fit.solve import Solution, roughly, solve
from filmfit.fit.start import SAME_NM, SAME_RATIO, blurred, search, searchable
from filmfit.fit.structures import STRUCTURES, sliced

log = logging.getLogger("filmfit.fit")

GROUP_NM = 4.0  # closer points are averaged: a slit is as wide, and no film's fringe is as narrow
RANKING_POINTS = 250  # a scan's points while rivals are compared
STRUCTURE_POINTS = 90  # and while structures are tried
REFINED = 4  # trials refined with the law alone
CONTENDERS = 3  # of them, compared with the correction too
PROMISING = 0.8  # a structure whose chi2 with the law alone is a larger share of that without it is not tried
NEARLY_AS_GOOD = 10.0  # chi2 over that of the best minimum, beyond which no structure is tried at another
STRUCTURED = 2  # of them, tried with every structure
NEAR_END = 0.999  # a thickness beyond this share of the largest is the end of the search, not a minimum
STRANGE = 0.1  # a law that must be corrected this much may be a film of another structure instead
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
        solution: of the chosen model, on all points, their sigma grown where the model cannot follow.
        plain: of the same structure with the law alone, on fewer points.
        freedom: of the law's correction.
        structures: what the film is beside smooth and alike at every depth, names of `structures.py`.
        thickness: index of the main thickness among the parameters.
        rivals: other minima, nearest first.
    """

    solution: Solution
    plain: Solution
    freedom: Freedom
    structures: tuple[str, ...]
    thickness: int
    rivals: tuple[Rival, ...]


def choose(problem: Problem, main: tuple[int, int], hint_nm: float | None = None) -> Outcome:
    """Return the best-supported thickness and model of one run, with its rivals.

    Args:
        problem: one run, all parameters at their starting values.
        main: run and layer whose thickness is sought.
        hint_nm: a thickness to try as well.
    """
    thickness = problem.runs[main[0]].layers[main[1]].thickness
    few = problem.binned(GROUP_NM)
    ranking = problem.thinned(RANKING_POINTS)
    plains = [solve(blurred(ranking, one.values)) for one in _refined(ranking, thickness, hint_nm)[:CONTENDERS]]
    plains = _distinct(plains, thickness)
    lost = plains[0].chi2 > LAW_FAILS * plains[0].problem.points
    ranked = _ranked(plains, main) if len(plains) > 1 and not lost else ()
    plain = solve(few.started(ranked[0].plain.values if ranked else plains[0].values))
    solution, freedom = (fitted(plain, main, RANKING), RANKING) if lost else freed(plain, main)
    outcome = Outcome(solution, plain, freedom, (), thickness, _rivals([one.flexible for one in ranked], thickness))
    if outcome.freedom.size >= STRANGE or falls_short(outcome.solution):
        outcome = _structured(outcome, plains, main)
    if falls_short(outcome.solution) and not lost:
        outcome = _with_bands(outcome, main)
    if lost and falls_short(outcome.solution):
        log.info("no thickness fits with the law alone: absorption bands are allowed from the start")
        with_bands = _choose_with_bands(few, main, thickness, _ranked_with_bands(ranking, main, hint_nm))
        outcome = min(with_bands, outcome, key=lambda one: badness(one.solution))
    return replace(outcome, solution=_on_all_points(doubted(outcome.solution), few, problem))


def _with_bands(outcome: Outcome, main: tuple[int, int]) -> Outcome:
    """Return the outcome with narrow absorption bands, where the evidence is for them."""
    solution, freedom = banded(outcome.plain, main)
    if badness(solution) < badness(outcome.solution):
        return replace(outcome, solution=solution, freedom=freedom)
    return outcome


def _structured(outcome: Outcome, plains: list[Solution], main: tuple[int, int]) -> Outcome:
    """Return the outcome with the structures that the data ask for decisively, each tried on the last one's fit."""
    starts = [plain for plain in plains[:STRUCTURED] if plain.chi2 < NEARLY_AS_GOOD * plains[0].chi2]
    for _ in STRUCTURES:
        found = _best_structure(outcome, starts, main)
        if found is None:
            break
        name, opened = found
        plain = solve(_on_points_of(outcome.plain.problem, opened))
        solution, freedom = freed(plain, main, FREEDOMS[1])
        gained = badness(outcome.solution) - badness(solution)
        log.info("%s: gains %.0f in evidence", name, gained)
        if gained < DECISIVE_BIC:
            break
        structures = (*outcome.structures, name)
        outcome = replace(outcome, solution=solution, plain=plain, freedom=freedom, structures=structures)
        starts = [opened]
        if freedom.size < STRANGE and not falls_short(solution):
            break
    return outcome if not outcome.structures else replace(outcome, solution=_sliced(outcome.solution))


def _sliced(solution: Solution) -> Solution:
    """Return the solution with graded layers cut as finely as its spectra ask for."""
    finer = sliced(solution.problem, solution.values)
    return solution if finer is solution.problem else solve(finer)


def _best_structure(outcome: Outcome, starts: list[Solution], main: tuple[int, int]) -> tuple[str, Solution] | None:
    """Return the structure, not there yet, with which the law alone comes nearest to the data, and its fit."""
    few = [start.problem.thinned(STRUCTURE_POINTS).started(start.values) for start in starts]
    found = [
        (name, roughly(opened))
        for name, opening in STRUCTURES.items()
        if name not in outcome.structures
        for start in few
        for opened in opening(start, *main)
    ]
    best = min(found, key=lambda row: row[1].chi2, default=None)
    if best is None or best[1].chi2 > PROMISING * min(roughly(start).chi2 for start in few):
        return None
    return best


def _on_points_of(measured: Problem, solution: Solution) -> Problem:
    """Return a solution's problem, started at its values, on the points of another with the same scans."""
    runs = tuple(
        replace(run, scans=given.scans) for run, given in zip(solution.problem.runs, measured.runs, strict=True)
    )
    return replace(solution.problem, runs=runs)


def _on_all_points(solution: Solution, few: Problem, measured: Problem) -> Solution:
    """Return a solution found on averaged points with the scans as they were measured, doubts carried over."""
    runs = tuple(
        replace(run, scans=tuple(map(carried, run.scans, averaged.scans, given.scans)))
        for run, averaged, given in zip(solution.problem.runs, few.runs, measured.runs, strict=True)
    )
    problem = replace(solution.problem, runs=runs)
    residual, _ = problem.evaluate(solution.values[list(problem.free)])
    return replace(solution, problem=problem, chi2=float(residual @ residual))


def _ranked_with_bands(problem: Problem, main: tuple[int, int], hint_nm: float | None) -> list[Solution]:
    """Return the distinct minima by evidence where absorption bands join the search."""
    thickness = problem.runs[main[0]].layers[main[1]].thickness
    flexible = corrected(_unfitted(problem), *main, RANKING_BANDS)
    found = _refined(flexible, thickness, hint_nm)[:CONTENDERS]
    return sorted((solve(blurred(flexible, one.values)) for one in found), key=badness)


def _choose_with_bands(problem: Problem, main: tuple[int, int], thickness: int, ranked: list[Solution]) -> Outcome:
    """Return the best-supported bands, begun at the best of the ranked minima."""
    anchor = _unfitted(problem)
    near = (ranked[0], RANKING_BANDS)
    found = []
    for freedom in BAND_FREEDOMS:
        near = (fitted(anchor, main, freedom, near), freedom)
        found.append(near)
    solution, freedom = min(found, key=lambda one: badness(one[0]))
    return Outcome(solution, anchor, freedom, (), thickness, _rivals(ranked, thickness))


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
    return _distinct([roughly(quick.started(trials.values[:, n])) for n in promising], thickness)


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
    contenders = [_Contender(plain, fitted(plain, main, RANKING)) for plain in plains]
    if all(falls_short(contender.flexible) for contender in contenders):
        contenders = [
            _Contender(one.plain, min(one.flexible, fitted(one.plain, main, RANKING_BANDS), key=badness))
            for one in contenders
        ]
    return sorted(contenders, key=lambda contender: badness(contender.flexible))
