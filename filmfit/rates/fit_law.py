"""How a rate law is found from the runs: robust least squares, the scatter's size, the wander of the level.

Knows how a law is fitted; the law itself stands in law.py.
"""

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from filmfit.rates.law import Branch, Law, Series, model
from filmfit.rates.level import whiten

FloatArray = NDArray[np.float64]
BoolArray = NDArray[np.bool_]

WANDERS = (0.0, 0.003, 0.01, 0.03, 0.1, 0.3)  # variance of the level's step over that of a run's scatter
WANDER_EVIDENCE = 2.7  # twice the gain of log likelihood: 10 % of a chi-squared of one degree, on the bound (5 %)
ADDED = (0.0, 0.25, 0.5, 0.75, 1.0)  # share of the scatter's variance that is additive, not proportional
STRAY = 4.0  # standard deviations beyond which a run is set aside
STEPS = 12
EXACT = 1e-6  # chi2 of runs that agree to the last digit


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


def _rest(series: Series, names: tuple[str, ...], values: FloatArray, middle: dict[str, float]) -> FloatArray:
    """Return what the law leaves of ln d (N,)."""
    rest: FloatArray = np.log(series.depth) - model(series, names, values, middle)[0]
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
        _, gradient = model(series, names, values, middle)
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
    _, gradient = model(series, names, values, middle)
    rest = _rest(series, names, values, middle)
    columns = np.column_stack([rest, gradient])
    order = np.flatnonzero(kept)
    freedom = order.size - len(names)
    unit = float(np.median(variance[order]))
    trials = []
    for wander in WANDERS if freedom >= 8 else WANDERS[:1]:
        white, level, spread = whiten(columns[order], variance[order], wander * unit)
        inverse = np.linalg.inv(white[:, 1:-1].T @ white[:, 1:-1])
        step = inverse @ (white[:, 1:-1].T @ white[:, 0])
        chi2 = max(float(np.sum((white[:, 0] - white[:, 1:-1] @ step) ** 2)) / freedom, EXACT)
        # restricted likelihood, the scatter's size taken at its best
        told = -float(white[:, -1].sum()) - 0.5 * freedom * np.log(chi2) + 0.5 * np.linalg.slogdet(inverse)[1]
        # stated uncertainties are not made smaller by luck; larger where the runs say so
        grown = max(chi2, 1.0) if scatter == 0 else chi2
        size = float(np.sqrt(unit * grown))
        made = Branch(1.0, wander, values + step, np.asarray(inverse * grown, dtype=float), size,
                      float(level[0] - level[1:] @ step), level[1:], spread * grown)  # fmt: skip
        trials.append((told, made))
    return _mixed(series, names, middle, kept, trials)


def _mixed(
    series: Series, names: tuple[str, ...], middle: dict[str, float], kept: BoolArray,
    trials: list[tuple[float, Branch]],
) -> Law:  # fmt: skip
    """Return the law as the mean of its branches, each believed by its likelihood.

    No choice is made among them: a level that was called steady because the runs are few would make its drift too sure.
    """
    told = np.array([one for one, _ in trials])
    weight = np.exp(told - told.max())
    weight /= weight.sum()
    branches = tuple(replace(one, weight=float(w)) for w, (_, one) in zip(weight, trials, strict=True))
    found = np.sum([one.weight * one.values for one in branches], axis=0)
    covariance = np.sum(
        [one.weight * (one.covariance + np.outer(one.values - found, one.values - found)) for one in branches], axis=0
    )
    best = int(told.argmax())
    wander = branches[best].wander if 2 * (told[best] - told[0]) > WANDER_EVIDENCE else 0.0
    scatter = float(np.sqrt(sum(one.weight * one.scatter**2 for one in branches)))
    freedom = int(kept.sum()) - len(names)
    rest = _rest(series, names, branches[0].values, middle)
    return Law(series, names, found, covariance, middle, kept, freedom, scatter, wander, branches, rest)
