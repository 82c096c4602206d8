"""The rate law of one source: level, decline with use, dead time, powers of the conditions, and the scatter about it.

    ln d = level(segment) + ln(1 + k (E - E0)) + sum of exponent ln(condition / its middle) + ln(t - dead time)

Knows arrays in the order of the runs; does not know records. Each coefficient is there only where the runs carry it:
design.py says which.
"""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.special import stdtrit

from filmfit.rates.level import whiten

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

WANDERS = (0.0, 0.003, 0.01, 0.03, 0.1, 0.3)  # variance of the level's step over that of a run's scatter
WANDER_EVIDENCE = 2.7  # twice the gain of log likelihood: 10 % of a chi-squared of one degree, on the bound (5 %)
ADDED = (0.0, 0.25, 0.5, 0.75, 1.0)  # share of the scatter's variance that is additive, not proportional
STRAY = 4.0  # standard deviations beyond which a run is set aside
STEPS = 12


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
class Law:
    """A fitted law; `values` and `covariance` in the order of `names`, scatter relative."""

    series: Series
    names: tuple[str, ...]
    values: FloatArray
    covariance: FloatArray
    middle: dict[str, float]
    kept: BoolArray
    freedom: int
    scatter: float
    wander: float
    level: float
    level_columns: FloatArray
    level_variance: float
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
        value, gradient = _model(at, self.names, self.values, self.middle)
        lever, log_time = gradient[0], 0.0
        if per_time:
            log_time = float(np.log(max(time - self.get("dead"), 1e-3 * time)))
            if "dead" in self.names:
                lever[self.names.index("dead")] = 0.0
        lever = lever - self.level_columns
        sigma = np.sqrt(lever @ self.covariance @ lever + self.level_variance)
        return float(value[0]) + self.level - log_time, float(sigma)


def fit_law(series: Series) -> Law:
    """Return the law of a series, robust to stray runs, its scatter found from the runs themselves.

    Args:
        series: at least three runs more than coefficients.

    Reference: iterated least squares on the logarithm; generalised for a wandering level by level.py. Coverage is
    counted in tests/recovery/test_rate_coverage.py.
    """
    names = _names(series)
    middle = {name: float(np.exp(np.log(value).mean())) for name, value in series.conditions.items()}
    if series.wear is not None:
        middle["wear"] = float(series.wear.mean())
    kept = np.ones(series.depth.size, dtype=bool)
    robust = np.ones(series.depth.size)
    values = _start(series, names)
    for _ in range(5):
        values = _descend(series, names, values, middle, robust)
        rest = _rest(series, names, values, middle)
        scale = 1.4826 * float(np.median(np.abs(rest))) or 1e-9
        robust = np.maximum(1.0, np.abs(rest) / (1.5 * scale))
    for _ in range(4):
        best = _best_noise(series, names, values, middle, kept)
        values = _descend(series, names, values, middle, np.where(kept, best[1], 1e6))
        rest = _rest(series, names, values, middle)
        freedom = max(int(kept.sum()) - len(names), 1)
        spread = np.sqrt(best[1] * float(np.median(rest[kept] ** 2 / best[1][kept])) / 0.4549)
        within = np.abs(rest) <= STRAY * (1 + 5 / freedom) * np.maximum(spread, 1e-12)
        if np.array_equal(within, kept) or within.sum() < len(names) + 3:
            break
        kept = within
    return _final(series, names, values, middle, kept)


def _names(series: Series) -> tuple[str, ...]:
    """Return the names of the coefficients."""
    levels = [f"level {number}" for number in range(int(series.segment.max()) + 1)]
    wear = ["wear"] if series.wear is not None else []
    return (*levels, *wear, *sorted(series.conditions), *(["dead"] if series.dead else []))


def _start(series: Series, names: tuple[str, ...]) -> FloatArray:
    """Return first values: each segment's median rate, nothing else."""
    values = np.zeros(len(names))
    rate = np.log(series.depth / series.time)
    for at, name in enumerate(names):
        if name.startswith("level "):
            values[at] = np.median(rate[series.segment == int(name.removeprefix("level "))])
    return values


def _model(
    series: Series, names: tuple[str, ...], values: FloatArray, middle: dict[str, float]
) -> tuple[FloatArray, FloatArray]:
    """Return ln d (N,) and its derivatives (N, P)."""
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


def _rest(series: Series, names: tuple[str, ...], values: FloatArray, middle: dict[str, float]) -> FloatArray:
    """Return what the law leaves of ln d (N,)."""
    rest: FloatArray = np.log(series.depth) - _model(series, names, values, middle)[0]
    return rest


def _descend(
    series: Series, names: tuple[str, ...], values: FloatArray, middle: dict[str, float], variance: FloatArray
) -> FloatArray:
    """Return the values of least squares, by Gauss and Newton with halved steps."""
    root = np.sqrt(variance)

    def misfit(at: FloatArray) -> float:
        return float(np.sum((_rest(series, names, at, middle) / root) ** 2))

    now = misfit(values)
    for _ in range(STEPS):
        _, gradient = _model(series, names, values, middle)
        rest = _rest(series, names, values, middle)
        step = np.linalg.lstsq(gradient / root[:, None], rest / root, rcond=None)[0]
        for _ in range(8):
            then = misfit(values + step)
            if then <= now:
                break
            step = step / 2
        else:
            return values
        values = values + step
        if now - then <= 1e-10 * now:
            return values
        now = then
    return values


def _noise(series: Series, scatter: float, added: float) -> FloatArray:
    """Return the variance of ln d (N,): the thickness's own, and scatter partly additive."""
    depth = float(np.exp(np.log(series.depth).mean()))
    relative: FloatArray = series.own**2 + scatter**2 * (1 - added + added * (depth / series.depth) ** 2)
    return relative


def _best_noise(
    series: Series, names: tuple[str, ...], values: FloatArray, middle: dict[str, float], kept: BoolArray
) -> tuple[float, FloatArray]:
    """Return the scatter and the variances (N,) that are most likely for the residuals."""
    rest = _rest(series, names, values, middle)[kept]
    lost = 1 - len(names) / max(kept.sum(), len(names) + 1)
    varied = np.ptp(np.log(series.depth)) > 0.3
    best = (-np.inf, 0.0, series.own**2)
    guess = float(np.sqrt(np.mean(rest**2) / lost))
    for added in ADDED if varied else ADDED[:1]:
        for scatter in guess * np.linspace(0.0, 1.3, 27):
            variance = _noise(series, max(scatter, 1e-3 * guess, 1e-9), added)
            seen = variance[kept]
            likelihood = -0.5 * float(np.sum(np.log(seen)) * lost + np.sum(rest**2 / seen))
            if likelihood > best[0]:
                best = (likelihood, scatter, variance)
    return best[1], best[2]


def _final(
    series: Series, names: tuple[str, ...], values: FloatArray, middle: dict[str, float], kept: BoolArray
) -> Law:
    """Return the law at its best values with its covariance, the wander of its level tested."""
    scatter, variance = _best_noise(series, names, values, middle, kept)
    _, gradient = _model(series, names, values, middle)
    rest = _rest(series, names, values, middle)
    columns = np.column_stack([rest, gradient])
    order = np.flatnonzero(kept)
    freedom = order.size - len(names)
    trials = []
    for wander in WANDERS if freedom >= 8 else WANDERS[:1]:
        unit = float(np.median(variance[order]))
        white, level, spread = whiten(columns[order], variance[order], wander * unit)
        inverse = np.linalg.inv(white[:, 1:-1].T @ white[:, 1:-1])
        step = inverse @ (white[:, 1:-1].T @ white[:, 0])
        chi2 = float(np.sum((white[:, 0] - white[:, 1:-1] @ step) ** 2)) / freedom
        likelihood = -float(white[:, -1].sum()) * 2 - order.size * np.log(chi2)
        trials.append((likelihood, wander, step, inverse, chi2, level, spread))
    plain, best = trials[0], max(trials, key=lambda one: one[0])
    chosen = best if best[0] - plain[0] > WANDER_EVIDENCE else plain
    _, wander, step, inverse, chi2, level, spread = chosen
    # stated uncertainties are not made smaller by luck; larger where the runs say so
    grown = max(chi2, 1.0) if scatter == 0 else chi2
    found: FloatArray = values + step
    deviation = float(np.sqrt(np.median(variance[order]) * grown))
    return Law(series, names, found, np.asarray(inverse * grown), middle, kept, freedom, deviation, wander,
               float(level[0] - level[1:] @ step), level[1:], spread * grown,
               _rest(series, names, found, middle))  # fmt: skip
