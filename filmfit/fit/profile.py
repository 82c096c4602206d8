"""The interval of a thickness where a parabola does not do: what all else can make good, at each value of it.

Knows that a thin film's thickness trades against the strength of its dielectric function; does not know answers.
"""

from dataclasses import dataclass, replace

import numpy as np
from scipy.interpolate import PchipInterpolator

from filmfit.fit.descend import descend
from filmfit.fit.problem import Problem
from filmfit.fit.solve import Solution
from filmfit.stack import FloatArray

GROUP_NM = 8.0  # closer points are averaged: spectra of thin films are smooth
VALUES = 17
SPAN_SIGMAS = 4.5  # to either side, of the parabola
LEAST_SPAN, MOST_SPAN = 0.12, 1.2  # of the logarithm
HELD_SIGMA = 1e-5  # a thickness is held by so tight an expectation, relative
DOWNHILL = 30
ROUNDS = 2
FINE = 2001
FALL = 1.959964**2  # of chi2 at the ends of a normal 95 % interval
# How a law's parameters follow a film of another thickness: thickness x (epsilon - 1) stays.
LINEAR, ROOT, ABOUT_ONE = (".amplitude_eV", ".strength"), (".plasma_eV",), (".constant.epsilon",)
COMMON = (".offset_nm", ".slit_nm", ".wedge")  # what a batch of trials shares


@dataclass(frozen=True)
class Profile:
    """The 95 % interval of a thickness by its index, and all parameters (P,) of its likeliest value."""

    index: int
    low: float
    high: float
    likeliest: FloatArray


def thickness_profile(solution: Solution, index: int, relative_sigma: float, growth: float) -> Profile:
    """Return the interval of a thickness by its profile likelihood: at each value of it all else is fitted anew.

    Args:
        solution: a fit in which the thickness is free.
        index: of the thickness among all parameters.
        relative_sigma: of the parabola, which sets the range that is looked at.
        growth: by which the residuals ask variances to grow; misfits shrink by it.

    Reference: Venzon and Moolgavkar, J. R. Stat. Soc. C 37, 87 (1988); tests/rooms/test_profile.py.
    """
    span = float(np.clip(SPAN_SIGMAS * relative_sigma, LEAST_SPAN, MOST_SPAN))
    parameter = solution.problem.parameters[index]
    offsets = np.linspace(-span, span, VALUES)
    depths = solution.values[index] * np.exp(offsets)
    inside = (depths > parameter.low) & (depths < parameter.high)
    offsets, depths = offsets[inside], depths[inside]
    starts = np.stack([rescaled(solution.problem, solution.values, index, depth) for depth in depths], axis=1)
    problem = _held(solution.problem, index, depths)
    for _ in range(ROUNDS):
        ended = descend(problem, starts[list(problem.free)], DOWNHILL)
        starts[list(problem.free)] = ended.values
        starts = _best_of_neighbours(problem, starts, index, depths)
    ended = descend(problem, starts[list(problem.free)], DOWNHILL)
    starts[list(problem.free)] = ended.values
    levels = ended.chi2 / growth
    low, high = _ends(offsets, levels)
    centre = float(solution.values[index])
    likeliest = starts[:, int(np.argmin(levels))]
    return Profile(index, centre * float(np.exp(low)), centre * float(np.exp(high)), likeliest)


def _best_of_neighbours(problem: Problem, trials: FloatArray, index: int, depths: FloatArray) -> FloatArray:
    """Return trials (P, B), each replaced by a neighbour's, carried to its own thickness, where that fits better."""
    sources = np.clip(np.arange(depths.size) + np.array([[0], [-1], [1]]), 0, depths.size - 1)
    candidates = [
        np.stack([rescaled(problem, trials[:, one], index, depth) for one, depth in zip(row, depths, strict=True)], 1)
        for row in sources
    ]
    misfits = [np.sum(problem.evaluate(one[list(problem.free)])[0] ** 2, axis=-1) for one in candidates]
    best = np.argmin(misfits, axis=0)
    return np.stack(candidates)[best, :, np.arange(depths.size)].T


def rescaled(problem: Problem, values: FloatArray, index: int, depth_nm: float) -> FloatArray:
    """Return all parameters (P,) with one thickness changed and its layer's law made weaker or stronger in turn."""
    ratio = float(values[index]) / depth_nm
    stem = problem.parameters[index].name.rpartition(".")[0] + "."
    changed = values.copy()
    changed[index] = depth_nm
    for at, parameter in enumerate(problem.parameters):
        name = parameter.name
        if not (parameter.vary and name.startswith(stem)):
            continue
        if name.endswith(LINEAR) or ".correction." in name:
            changed[at] *= ratio
        elif name.endswith(ROOT):
            changed[at] *= ratio**0.5
        elif name.endswith(ABOUT_ONE):
            changed[at] = 1.0 + (changed[at] - 1.0) * ratio
        changed[at] = np.clip(changed[at], parameter.low, parameter.high)
    return changed


def _held(problem: Problem, index: int, depths: FloatArray) -> Problem:
    """Return the problem on averaged points with each trial of a batch held at its own thickness."""
    parameters = []
    for at, parameter in enumerate(problem.parameters):
        if at == index:
            parameter = replace(parameter, expected=depths, sigma=HELD_SIGMA * depths)  # type: ignore[arg-type]
        elif parameter.name.endswith(COMMON):
            parameter = replace(parameter, vary=False)
        parameters.append(parameter)
    return replace(problem, parameters=tuple(parameters)).binned(GROUP_NM)


def _ends(offsets: FloatArray, levels: FloatArray) -> tuple[float, float]:
    """Return where the likelihood has fallen as far as a normal one has at its 95 % ends."""
    fine = np.linspace(offsets[0], offsets[-1], FINE)
    inside = fine[PchipInterpolator(offsets, levels - levels.min())(fine) <= FALL]
    return float(inside[0]), float(inside[-1])
