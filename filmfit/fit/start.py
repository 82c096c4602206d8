"""Where a fit begins: every thickness that may be meant is visited, and the distinct minima are kept.

Knows that minima of R and T against thickness stand about half a wavelength over the index apart; does not judge
which of them is right. No starting value is needed; a hint only adds a trial.
"""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from filmfit.fit.descend import Trials, descend
from filmfit.fit.problem import Problem
from filmfit.stack import FloatArray

THINNEST_NM = 8.0
THICKEST_NM = 3000.0
THIN_RATIO = 1.15  # spacing of trials while a film is thinner than a fringe
STEP_NM = 30.0  # and beyond: an eighth of a fringe order at 450 nm and index 1.9
PLASMA_SEEDS_EV = (0.5, 1.2, 1.9)

# Tauc-Lorentz films without carriers, index about 1.5, 1.9 and 2.4
INDEX_SEEDS: tuple[dict[str, float], ...] = (
    {".constant.epsilon": 1.2, ".amplitude_eV": 60.0, ".peak_eV": 9.0, ".gap_eV": 5.0},
    {".constant.epsilon": 1.8, ".amplitude_eV": 120.0, ".peak_eV": 7.0, ".gap_eV": 4.0},
    {".constant.epsilon": 2.0, ".amplitude_eV": 250.0, ".peak_eV": 5.0, ".gap_eV": 3.2},
)

COARSE_POINTS = 60
# Steps downhill for all trials, then how many go on, how many of them of one thickness, and their further steps.
FIRST_STEPS = 4
STAGES = ((120, 4, 5), (40, 3, 10))
KEEP = 10
BLUR = (".slit_nm", ".wedge", ".haze_R", ".haze_T")  # they blur every minimum alike
SAME_NM = 4.0  # two ends this near, and within SAME_RATIO, are one minimum
SAME_RATIO = 0.02


def thickness_seeds(low_nm: float, high_nm: float) -> FloatArray:
    """Return trial thicknesses (B,) dense enough that every minimum has one in its basin."""
    seeds = [max(low_nm, THINNEST_NM)]
    while seeds[-1] < min(high_nm, THICKEST_NM):
        seeds.append(min(seeds[-1] * THIN_RATIO, seeds[-1] + STEP_NM))
    return np.array(seeds[:-1])


def search(problem: Problem, thickness: int, hint_nm: float | None = None) -> Trials:
    """Return the distinct minima of one run's problem, best first.

    Args:
        problem: one run.
        thickness: index of the parameter that is searched.
        hint_nm: a further trial, if the user gave one.

    Returns:
        Trials over all parameters of the problem, (P, B).

    Reference: Levenberg-Marquardt from every start, survivors compared; tests/recovery/.
    """
    coarse = searchable(problem).thinned(COARSE_POINTS)
    starts = _starts(coarse, thickness, hint_nm)
    trials = descend(coarse, starts, FIRST_STEPS)
    for keep, each, steps in STAGES:
        trials = trials.best(_distinct(trials, coarse.full(trials.values)[thickness], keep, each))
        trials = descend(coarse, trials.values, steps)
    trials = trials.best(_distinct(trials, coarse.full(trials.values)[thickness], KEEP, each=1))
    return Trials(coarse.full(trials.values), trials.chi2)


def searchable(problem: Problem) -> Problem:
    """Return the problem with what does not move a minimum left out: plate, fine errors, the bare plate's scans."""
    held: dict[str, dict[str, object]] = {}
    for p in problem.parameters:
        if p.name.endswith(BLUR):
            held[p.name] = {"vary": False, "start": 0.0}
        elif p.name.endswith(".offset_nm") or p.name.startswith("plate."):
            held[p.name] = {"vary": False}
    return replace(problem.changed(held), runs=tuple(run.coated_only() for run in problem.runs))


def blurred(problem: Problem, values: FloatArray) -> Problem:
    """Return the problem started at the values (P,) of a search, slit, wedge and scatter where they stood before it."""
    kept = [p.start if p.name.endswith(BLUR) else value for p, value in zip(problem.parameters, values, strict=True)]
    return problem.started(np.array(kept))


def _starts(problem: Problem, thickness: int, hint_nm: float | None) -> FloatArray:
    """Return the starting points (F, B): every thickness with every seed of the carriers."""
    chosen = problem.parameters[thickness]
    seeds = thickness_seeds(chosen.low, chosen.high) if chosen.vary else np.array([chosen.start])
    if hint_nm is not None:
        seeds = np.append(seeds, hint_nm)
    columns = []
    for changes in _law_seeds(problem):
        block = np.repeat(problem.start_values()[:, None], seeds.size, axis=1)
        block[thickness] = seeds
        for index, value in changes:
            block[index] = value
        columns.append(block)
    return np.concatenate(columns, axis=1)[list(problem.free)]


def _law_seeds(problem: Problem) -> Sequence[Sequence[tuple[int, float]]]:
    """Return alternative starting values of the laws: few to many carriers, or low to high index without any."""
    free = {p.name: index for index, p in enumerate(problem.parameters) if p.vary}
    plasma = [
        index
        for name, index in free.items()
        if name.endswith(".drude.plasma_eV") and problem.parameters[index].low < PLASMA_SEEDS_EV[0]
    ]
    if plasma:
        return [[(index, seed) for index in plasma] for seed in PLASMA_SEEDS_EV]
    return [
        [(index, value) for name, index in free.items() for ending, value in seed.items() if name.endswith(ending)]
        for seed in (INDEX_SEEDS if any(name.endswith(".tauc-lorentz.gap_eV") for name in free) else ({},))
    ]


def _distinct(trials: Trials, depths: FloatArray, keep: int, each: int) -> FloatArray:
    """Return the indices of the best trials, at most `each` of one thickness; `depths` (B,) are theirs in nm."""
    chosen: list[int] = []
    for index in np.argsort(trials.chi2, kind="stable"):
        here = depths[index]
        near = sum(abs(depths[other] - here) < max(SAME_NM, SAME_RATIO * here) for other in chosen)
        if near < each:
            chosen.append(int(index))
        if len(chosen) == keep:
            break
    return np.array(chosen)
