"""The rate law of one source: level, decline with use, dead time, powers of the conditions, and the scatter about it.

    ln d = level(segment) + ln(1 + k (E - E0)) + sum of exponent ln(condition / its middle) + ln(t - dead time)

Knows arrays in the order of the runs; does not know records. Each coefficient is there only where the runs carry it:
design.py says which.
"""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.special import stdtrit

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]


@dataclass(frozen=True)
class Series:
    """Runs in the order of time: thickness, its own relative sigma, time (or any exposure), what the law hangs on.

    `segment` (N,) counts from 0; `wear` (N,) is the source energy or None; `conditions` are positive arrays by name.
    `dead` says whether a dead time is sought.
    """

    depth: FloatArray
    own: FloatArray
    time: FloatArray
    segment: NDArray[np.int64]
    wear: FloatArray | None
    conditions: dict[str, FloatArray]
    dead: bool


@dataclass(frozen=True)
class Branch:
    """The law for one size of the level's wander: how much it is believed, its values, covariance, next level."""

    weight: float
    wander: float
    values: FloatArray
    covariance: FloatArray
    scatter: float
    level: float
    level_columns: FloatArray
    level_variance: float


@dataclass(frozen=True)
class Law:
    """A fitted law; `values` and `covariance` in the order of `names`, scatter relative.

    `residual` is what the law with a steady level leaves of ln d: what charts show.
    """

    series: Series
    names: tuple[str, ...]
    values: FloatArray
    covariance: FloatArray
    middle: dict[str, float]
    kept: BoolArray
    freedom: int
    scatter: float
    wander: float
    branches: tuple["Branch", ...]
    residual: FloatArray

    @property
    def factor(self) -> float:
        """Student's factor of a 95 % interval."""
        return float(stdtrit(self.freedom, 0.975))

    def get(self, name: str) -> float:
        """Return a coefficient, 0 where the law has none of that name."""
        return float(self.values[self.names.index(name)]) if name in self.names else 0.0

    def sigma(self, name: str) -> float:
        """Return a coefficient's standard uncertainty."""
        at = self.names.index(name)
        return float(np.sqrt(self.covariance[at, at]))

    def steady_log_rate(self) -> FloatArray:
        """Return ln of the rate (N,) that the law with a steady level has for each run at the last run's conditions."""
        last = {name: np.full_like(value, value[-1]) for name, value in self.series.conditions.items()}
        at = replace(self.series, conditions=last)
        steady = self.branches[0].values
        exposure = np.maximum(self.series.time - dict(zip(self.names, steady, strict=True)).get("dead", 0.0), 1e-9)
        log_rate: FloatArray = model(at, self.names, steady, self.middle)[0] - np.log(exposure)
        return log_rate

    def log_depth(
        self, time: float, wear: float | None, conditions: dict[str, float], per_time: bool = False
    ) -> tuple[float, float]:
        """Return ln of the thickness that the next run should have, and its standard uncertainty without scatter.

        Args:
            time: its exposure.
            wear: its source energy; None: the middle of the runs'.
            conditions: by name; one that is not given is at the middle of the runs'.
            per_time: ln of the rate instead, the thickness over the exposure without the dead time.
        """
        used = None if self.series.wear is None else np.array([self.middle["wear"] if wear is None else wear])
        given = {name: np.array([conditions.get(name, self.middle[name])]) for name in self.series.conditions}
        at = Series(np.ones(1), np.zeros(1), np.array([time]), np.array([self.series.segment.max()]), used, given,
                    self.series.dead)  # fmt: skip
        value, gradient = model(at, self.names, self.values, self.middle)
        row, log_time = gradient[0], 0.0
        reach = row.copy()
        if per_time:
            log_time = float(np.log(max(time - self.get("dead"), 1e-3 * time)))
            if "dead" in self.names:
                reach[self.names.index("dead")] = 0.0
        weight = np.array([one.weight for one in self.branches])
        means = np.array([reach @ (one.values - self.values) + one.level for one in self.branches])
        levers = [reach - one.level_columns for one in self.branches]
        variances = np.array([lever @ one.covariance @ lever + one.level_variance
                              for lever, one in zip(levers, self.branches, strict=True)])  # fmt: skip
        mean = float(weight @ means)
        sigma = float(np.sqrt(weight @ (variances + (means - mean) ** 2)))
        return float(value[0]) + mean - log_time, sigma


def model(
    series: Series, names: tuple[str, ...], values: FloatArray, middle: dict[str, float]
) -> tuple[FloatArray, FloatArray]:
    """Return ln d (N,) and its derivatives (N, P).

    Args:
        series: the runs.
        names: of the coefficients.
        values: the coefficients (P,).
        middle: the middle of the source energy and of each condition.

    Reference: derivatives against differences in tests/rooms/test_rates.py.
    """
    parts = dict(zip(names, values, strict=True))
    exposure = np.maximum(series.time - parts.get("dead", 0.0), 1e-3 * series.time)
    total = np.log(exposure)
    columns = []
    for name in names:
        if name.startswith("level "):
            here = (series.segment == int(name.removeprefix("level "))).astype(float)
            total = total + here * parts[name]
            columns.append(here)
        elif name == "wear":
            assert series.wear is not None
            used = series.wear - middle["wear"]
            left = np.maximum(1 + parts[name] * used, 1e-3)
            total = total + np.log(left)
            columns.append(used / left)
        elif name == "dead":
            columns.append(-1 / exposure)
        else:
            ratio = np.log(series.conditions[name] / middle[name])
            total = total + parts[name] * ratio
            columns.append(ratio)
    return total, np.column_stack(columns)
