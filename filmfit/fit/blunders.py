"""Blunders at the bench: the same data read as if the sample had been turned over, the rear face blackened, and so on.

Knows what each blunder does to a scan; a blunder hides in the nuisances and in the film's constants, so it is looked
for even where the fit is good.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from filmfit.fit.discrepancy import corrected
from filmfit.fit.freedom import DECISIVE_BIC, RANKING, badness
from filmfit.fit.model import RunModel
from filmfit.fit.problem import Problem
from filmfit.fit.scan import Scan
from filmfit.fit.solve import Solution, roughly
from filmfit.fit.start import BLUR, search
from filmfit.stack import FloatArray

POINTS = 90  # a scan's points
LOST = 30.0  # chi2 per point of the declared reading with the law alone: its end tells nothing of another reading's
SCREEN_RATIO = 3.0  # a reading whose chi2 with the law alone is this many times the declared one is out


@dataclass(frozen=True)
class Suspicion:
    """A blunder that explains the data better: its code in the table of reasons, and by how much."""

    code: str
    delta_bic: float


def suspicions(plain: Solution, solution: Solution, main: tuple[int, int]) -> tuple[Suspicion, ...]:
    """Return the blunders under which the data of one run fit clearly better, the likeliest first.

    Args:
        plain: the run as declared, without any correction of the film's law.
        solution: the chosen fit; its values of the law's parameters are where each reading begins.
        main: run and layer that is fitted.

    Reference: comparison by evidence, as in choose.py; tests/recovery/test_blunders.py.
    """
    start = _coarse(plain.problem.started(solution.values[: len(plain.values)]))
    declared = roughly(start)
    declared_badness: float | None = None
    found = []
    for code, change in HYPOTHESES.items():
        changed = change(start.runs[main[0]], start)
        if changed is None:
            continue
        runs = (*start.runs[: main[0]], changed, *start.runs[main[0] + 1 :])
        read = _read(replace(start, runs=runs), main, lost=declared.chi2 > LOST * declared.problem.points)
        if read.chi2 > SCREEN_RATIO * declared.chi2:
            continue
        if declared_badness is None:
            declared_badness, _ = _badness(declared, main)
        badness_read, dispersion = _badness(read, main)
        gained = (declared_badness - badness_read) / dispersion
        if gained > DECISIVE_BIC:
            found.append(Suspicion(code, gained))
    return tuple(sorted(found, key=lambda one: -one.delta_bic))


def _read(problem: Problem, main: tuple[int, int], lost: bool) -> Solution:
    """Return a reading of the data, from where the declared one ended or, where that was lost, from a new search."""
    near = roughly(problem)
    if not lost:
        return near
    found = search(problem, problem.runs[main[0]].layers[main[1]].thickness)
    return min(near, roughly(problem.started(found.values[:, 0])), key=lambda one: one.chi2)


def _coarse(problem: Problem) -> Problem:
    """Return the problem on few points, without slit, wedge and scatter: they blur every reading alike."""
    changes: dict[str, dict[str, object]] = {}
    for p in problem.parameters:
        if p.name.endswith(BLUR):
            changes[p.name] = {"vary": False, "start": 0.0}
        elif p.name.endswith(".offset_nm"):
            changes[p.name] = {"vary": False}
    return problem.changed(changes).thinned(POINTS)


def _badness(plain: Solution, main: tuple[int, int]) -> tuple[float, float]:
    """Return the evidence against a reading of the data, the law corrected as the ranking allows, and chi2 per point.

    What even the better reading leaves unexplained counts as noise: evidence is divided by it.

    Reference: quasi-likelihood: Wedderburn, Biometrika 61, 439 (1974).
    """
    flexible = roughly(corrected(plain, *main, RANKING))
    return badness(flexible), max(1.0, flexible.chi2 / flexible.problem.points)


def _changed(run: RunModel, change: Callable[[Scan], Scan]) -> RunModel | None:
    """Return the run with some of its coated scans read otherwise, None where that changes none."""
    scans = tuple(change(scan) if scan.coated else scan for scan in run.scans)
    return None if all(a is b for a, b in zip(scans, run.scans, strict=True)) else replace(run, scans=scans)


def _turned_over(run: RunModel, _: Problem) -> RunModel | None:
    """Return the run as if R had been measured from the other side."""
    other: dict[str, Literal["film", "substrate"]] = {"film": "substrate", "substrate": "film"}

    def change(scan: Scan) -> Scan:
        if scan.beam.quantity == "T" or scan.beam.back != "bare":
            return scan
        return replace(scan, beam=replace(scan.beam, side=other[scan.beam.side]))

    return _changed(run, change)


def _blackened(run: RunModel, _: Problem) -> RunModel | None:
    """Return the run as if the rear face had been blackened while R was measured, or had not."""
    other: dict[str, Literal["bare", "blackened"]] = {"bare": "blackened", "blackened": "bare"}

    def change(scan: Scan) -> Scan:
        if scan.beam.quantity == "T" or scan.beam.side == "substrate" or scan.beam.back not in other:
            return scan
        return replace(scan, beam=replace(scan.beam, back=other[scan.beam.back]))

    return _changed(run, change)


def _against_a_plate(run: RunModel, problem: Problem) -> RunModel | None:
    """Return the run as if T had been scanned with a bare plate in the reference beam."""

    def change(scan: Scan) -> Scan:
        if scan.beam.quantity == "R" or scan.beam.back != "bare":
            return scan
        bare = replace(run, scans=(replace(scan, coated=False),), plate_held=True)
        plate: FloatArray = bare.predict(problem.start_values()).values
        return replace(scan, values=scan.values * plate, sigma=scan.sigma * plate)

    return _changed(run, change)


def _squared(run: RunModel, _: Problem) -> RunModel | None:
    """Return the run as if R had met the sample twice, R squared."""

    def change(scan: Scan) -> Scan:
        if scan.beam.quantity == "T":
            return scan
        root = np.sqrt(np.maximum(scan.values, 1e-6))
        return replace(scan, values=root, sigma=scan.sigma / (2 * root))

    return _changed(run, change)


HYPOTHESES: dict[str, Callable[[RunModel, Problem], RunModel | None]] = {
    "side-may-be-swapped": _turned_over,
    "back-may-be-blackened": _blackened,
    "reference-may-be-a-plate": _against_a_plate,
    "reflectance-may-be-squared": _squared,
}
