"""The extremum of a smooth dependence: where it lies, with its interval, or that there is none inside the range.

Knows points of several series that share a shape and not a level; does not know what they are.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import stdtrit

from filmfit.result import Quantity

FloatArray = NDArray[np.float64]
LEAST = 5  # points for a parabola with a scatter
CUBIC_T = 3.0  # significance from which the curve is skew
STRAY = 5.0
GRID = 2001


@dataclass(frozen=True)
class Optimum:
    """A minimum or maximum at x."""

    x: Quantity
    kind: str


def optimum(x: FloatArray, y: FloatArray, series: NDArray[np.int64]) -> Optimum | str:
    """Return the extremum, or the reason why there is none to be told.

    Args:
        x: the condition (N,).
        y: the result (N,); its logarithm is fitted where all are positive.
        series: number of each point's series (N,), from 0: each has its own level.

    Reference: the set of x where the slope of the fitted polynomial may be zero at 95 %, as by Fieller, J. R. Stat.
    Soc. B 16, 175 (1954) (from memory); coverage in tests/rooms/test_optimum.py.
    """
    if x.size < LEAST + int(series.max()) or np.unique(x).size < 4:
        return f"{x.size} points at {np.unique(x).size} values: too few to tell a minimum"
    centre, half = (x.max() + x.min()) / 2, (x.max() - x.min()) / 2
    u = (x - centre) / half
    values = np.log(y) if (y > 0).all() else y / (np.abs(y).max() or 1.0)
    kept = np.ones(x.size, dtype=bool)
    for _ in range(3):
        found, covariance, rest, freedom = _polynomial(u, values, series, kept)
        scale = 1.4826 * float(np.median(np.abs(rest[kept]))) * np.sqrt(kept.sum() / freedom)
        within = np.abs(rest) <= STRAY * max(scale, 1e-12)
        if within.sum() < LEAST + int(series.max()) or np.array_equal(within, kept):
            break
        kept = within
    grid = np.linspace(-1.0, 1.0, GRID)
    powers = np.arange(1, found.size + 1)
    slopes = powers * grid[:, None] ** (powers - 1)
    slope = slopes @ found
    sigma = np.sqrt(np.einsum("gi,ij,gj->g", slopes, covariance, slopes))
    return _read(grid * half + centre, slope, stdtrit(freedom, 0.975) * sigma)


def _polynomial(
    u: FloatArray, values: FloatArray, series: NDArray[np.int64], kept: NDArray[np.bool_]
) -> tuple[FloatArray, FloatArray, FloatArray, int]:
    """Return coefficients of u, u^2 and, where it matters, u^3, their covariance, the residuals, the freedom."""
    levels = np.eye(int(series.max()) + 1)[series]
    best = None
    for degree in (2, 3):
        design = np.hstack([levels, u[:, None] ** np.arange(1, degree + 1)])
        freedom = int(kept.sum()) - design.shape[1]
        if freedom < 2 and best is not None:
            break
        inverse = np.linalg.pinv(design[kept].T @ design[kept])
        found = inverse @ (design[kept].T @ values[kept])
        rest = values - design @ found
        covariance = inverse * float(rest[kept] @ rest[kept]) / max(freedom, 1)
        at = levels.shape[1]
        if degree == 3 and abs(found[-1]) < CUBIC_T * np.sqrt(covariance[-1, -1]):
            break
        best = (found[at:], covariance[at:, at:], rest, max(freedom, 1))
    assert best is not None
    return best


def _read(x: FloatArray, slope: FloatArray, half: FloatArray) -> Optimum | str:
    """Return the extremum from the slope (G,) on a grid x (G,) and the half width of its interval."""
    sign = np.where(slope > half, 1, np.where(slope < -half, -1, 0))
    told = np.flatnonzero(sign)
    if told.size == 0:
        return "the result does not depend on it beyond its scatter"
    turns = [at for at in range(told.size - 1) if sign[told[at]] != sign[told[at + 1]]]
    if len(turns) > 1:
        return "several extrema: the points do not follow one simple curve"
    if not turns:
        rising = sign[told[0]] > 0
        way = "rises" if rising else "falls"
        return f"no minimum or maximum inside the range: the result {way} over {x[0]:.4g} to {x[-1]:.4g}"
    left, right = told[turns[0]], told[turns[0] + 1]
    zero = np.flatnonzero(np.diff(np.sign(slope[left : right + 1])) != 0)
    best = float(x[left + zero[0]]) if zero.size else float((x[left] + x[right]) / 2)
    kind = "minimum" if sign[left] < 0 else "maximum"
    return Optimum(Quantity.between(best, float(x[left]), float(x[right])), kind)
