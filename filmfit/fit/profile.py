"""The interval of one parameter where a parabola does not do: what all the others can make good, at each of its values.

Knows a solution and one of its positive parameters; does not know what the parameter means.
"""

from collections.abc import Iterator

import numpy as np
from scipy.interpolate import CubicSpline

from filmfit.fit.descend import descend
from filmfit.fit.problem import Problem
from filmfit.fit.solve import Solution, covariance
from filmfit.stack import FloatArray

STEP_SIGMAS = 0.6  # between neighbouring values, in standard uncertainties of the parabola
ENOUGH = 9.0  # rise of -2 ln p beyond which nothing counts: 3 sigma of a parabola
MOST_STEPS = 14  # to either side
DOWNHILL = 6
FINE = 2001
TAIL = 0.025


def marginal_interval(solution: Solution, index: int, growth: float) -> tuple[float, float]:
    """Return the ends of the central 95 % interval of a positive parameter, flat beforehand in its logarithm.

    At each of its values the others are fitted anew, and what room they leave counts with the misfit (Laplace).

    Args:
        solution: a fit in which the parameter is free.
        index: of the parameter among all.
        growth: by which the residuals ask variances to grow; misfits shrink by it.

    Reference: profile likelihood and Laplace's approximation of the marginal: Tierney and Kadane,
        J. Am. Stat. Assoc. 81, 82 (1986); tests/rooms/test_profile.py.
    """
    centre = float(solution.values[index])
    place = solution.problem.free.index(index)
    relative = float(np.sqrt(solution.covariance[place, place] * growth)) / centre
    step = STEP_SIGMAS * min(relative, 0.5)
    held = solution.problem.changed({solution.problem.parameters[index].name: {"vary": False}})
    found = {0.0: _level(held, solution.values, index, centre, growth)[0]}
    for side in (-step, step):
        for offset, level in _walk(solution, held, index, side, growth):
            found[offset] = level
            if level - min(found.values()) > ENOUGH:
                break
    offsets = np.array(sorted(found))
    levels = np.array([found[offset] for offset in offsets])
    if offsets.size < 4:
        return centre * float(np.exp(-2 * relative)), centre * float(np.exp(2 * relative))
    return _ends(centre, offsets, levels)


def _walk(solution: Solution, held: Problem, index: int, side: float, growth: float) -> Iterator[tuple[float, float]]:
    """Yield the parameter's relative offsets to one side and -2 ln p there, each begun at the last one's fit."""
    parameter = solution.problem.parameters[index]
    place = solution.problem.free.index(index)
    slope = solution.covariance[:, place] / solution.covariance[place, place]
    others = [at for at in solution.problem.free if at != index]
    slope = np.delete(slope, place)
    values = solution.values.copy()
    for number in range(1, MOST_STEPS + 1):
        depth = float(solution.values[index]) * float(np.exp(number * side))
        if not parameter.low < depth < parameter.high:
            return
        if number == 1:
            values[others] += slope * (depth - values[index])
        level, values = _level(held, values, index, depth, growth)
        yield number * side, level


def _level(held: Problem, values: FloatArray, index: int, depth: float, growth: float) -> tuple[float, FloatArray]:
    """Return -2 ln p, up to a constant, with the parameter held, and all values of that fit."""
    start = values.copy()
    start[index] = depth
    problem = held.started(start)
    ended = descend(problem, start[list(problem.free)][:, None], DOWNHILL)
    _, jacobian = problem.evaluate(ended.values[:, 0])
    room = float(np.linalg.slogdet(covariance(jacobian))[1])
    return float(ended.chi2[0]) / growth - room, problem.full(ended.values[:, 0])


def _ends(centre: float, offsets: FloatArray, levels: FloatArray) -> tuple[float, float]:
    """Return where the tails of exp(-level / 2) over the logarithm hold their share."""
    fine = np.linspace(offsets[0], offsets[-1], FINE)
    weight = np.exp(-0.5 * (CubicSpline(offsets, levels)(fine) - levels.min()))
    cumulative = np.concatenate([[0.0], np.cumsum(0.5 * (weight[1:] + weight[:-1]))])
    low, high = np.interp([TAIL, 1.0 - TAIL], cumulative / cumulative[-1], fine)
    return centre * float(np.exp(low)), centre * float(np.exp(high))
