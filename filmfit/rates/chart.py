"""Control charts: individuals, exponentially weighted moving average, and a test for a trend.

Knows a series in the order of the runs; does not know what may have happened between them.

Reference: NIST/SEMATECH e-Handbook of Statistical Methods, sections 6.3.2.2 (individuals) and 6.3.2.4 (EWMA);
tests/published/test_control_charts.py.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import stdtr

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

LIMIT = 3.0
D2 = 2 / np.sqrt(np.pi)  # mean of |x1 - x2| of a normal distribution, in its standard deviations
D4 = 1 + LIMIT * np.sqrt(np.pi / 2 - 1)  # upper limit of a moving range, in mean ranges
ALARM_CHANCE = 0.0026997961  # of three standard deviations, two-sided


@dataclass(frozen=True)
class Chart:
    """A chart: what is drawn (N,), its centre, its limits (N,), and which points lie outside them."""

    points: FloatArray
    centre: float
    low: FloatArray
    high: FloatArray
    outside: BoolArray


def range_sigma(values: FloatArray) -> float:
    """Return the standard deviation from the mean moving range, MRbar/d2; values (N,), N >= 2."""
    return float(np.abs(np.diff(values)).mean() / D2)


def robust_sigma(values: FloatArray) -> float:
    """Return the standard deviation from the mean moving range, ranges beyond their own limit left out.

    Args:
        values: (N,), N >= 2.

    Single blunders then do not widen the limits that are to find them; without any it is MRbar/d2.
    """
    ranges = np.abs(np.diff(values))
    while True:
        within = ranges <= D4 * ranges.mean()
        if within.all():
            return float(ranges.mean() / D2)
        ranges = ranges[within]


def individuals(values: FloatArray, target: float | None = None, sigma: float | None = None) -> Chart:
    """Return the individuals chart of values (N,).

    Args:
        values: in the order of the runs.
        target: the centre; default the mean.
        sigma: the standard deviation; default MRbar/d2.
    """
    centre = float(values.mean()) if target is None else target
    half = LIMIT * (range_sigma(values) if sigma is None else sigma)
    low, high = np.full(values.size, centre - half), np.full(values.size, centre + half)
    return Chart(values, centre, low, high, (values < low) | (values > high))


def ewma(values: FloatArray, target: float | None = None, sigma: float | None = None, weight: float = 0.3) -> Chart:
    """Return the chart of the exponentially weighted moving average, with limits that widen from the start.

    Args:
        values: (N,) in the order of the runs.
        target: where the average begins; default the mean.
        sigma: the standard deviation; default MRbar/d2.
        weight: of the newest value, 0 to 1.
    """
    centre = float(values.mean()) if target is None else target
    spread = range_sigma(values) if sigma is None else sigma
    points = np.empty(values.size)
    last = centre
    for at, value in enumerate(values):
        last = points[at] = weight * value + (1 - weight) * last
    t = np.arange(1, values.size + 1)
    half = LIMIT * spread * np.sqrt(weight / (2 - weight) * (1 - (1 - weight) ** (2 * t)))
    return Chart(points, centre, centre - half, centre + half, np.abs(points - centre) > half)


@dataclass(frozen=True)
class Trend:
    """A straight line of values against the number of the run; `alarm` at the chance of three sigma."""

    slope: float
    sigma: float
    t: float
    chance: float
    alarm: bool


def trend(values: FloatArray) -> Trend | None:
    """Return the slope per run of values (N,) and whether it is real; None for fewer than five runs.

    Reference: Student's t of a least-squares slope, NIST/SEMATECH e-Handbook, section 4.4 (from memory);
    tests/published/test_control_charts.py.
    """
    n = values.size
    if n < 5 or not np.ptp(values) > 0:
        return None
    x = np.arange(n) - (n - 1) / 2
    slope = float(x @ values / (x @ x))
    rest = values - values.mean() - slope * x
    sigma = float(np.sqrt(rest @ rest / (n - 2) / (x @ x)))
    if sigma == 0:
        return Trend(slope, 0.0, float(np.sign(slope)) * 1e9, 0.0, True)
    t = slope / sigma
    chance = float(2 * stdtr(n - 2, -abs(t)))
    return Trend(slope, sigma, t, chance, chance < ALARM_CHANCE)
