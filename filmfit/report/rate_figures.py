"""Pictures of rates and trends.

Knows matplotlib; draws what it is given and computes only what is drawn.
"""

import warnings
from collections.abc import Sequence
from io import BytesIO
from typing import Any

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure

from filmfit.rates.chart import LIMIT, robust_sigma
from filmfit.rates.law import Law
from filmfit.rates.rate import SECONDS_PER_MINUTE
from filmfit.report.plain import plain
from filmfit.report.style import BLUE, GREEN, GREY, INK, SETTINGS, VERMILION
from filmfit.result import Quantity

COLOURS = (BLUE, VERMILION, GREEN, GREY, INK)
MARKS = ("o", "s", "^", "D", "v")


def draw_rate(law: Law, title: str, outside: Sequence[bool], in_line: bool) -> bytes:
    """Return an SVG: rate against source energy (or run) with its band, and the control chart below.

    Args:
        law: the fitted law.
        title: the group.
        outside: which runs are out of control (N,).
        in_line: the exposure is passes over speed.
    """
    with mpl.rc_context({**SETTINGS}), warnings.catch_warnings():  # type: ignore[dict-item] # stubs: literals only
        warnings.filterwarnings("ignore", message="Glyph .* missing")  # a film may be named in any script
        figure = Figure(figsize=(6.6, 5.4), layout="constrained")
        upper, lower = figure.subplots(2, 1, height_ratios=(3, 2))
        out = np.asarray(outside)
        _rates(upper, law, out, in_line)
        _chart(lower, law, out)
        figure.suptitle(plain(title))
        return _svg(figure)


def _rates(axes: Axes, law: Law, out: Any, in_line: bool) -> None:
    """Draw each run's rate, brought to the last run's other conditions, and the law with its band."""
    series = law.series
    unit = 1.0 if in_line else SECONDS_PER_MINUTE
    last = {name: float(value[-1]) for name, value in series.conditions.items()}
    x = np.arange(1.0, series.depth.size + 1) if series.wear is None else series.wear
    ends = np.linspace(x.min(), x.max(), 60)
    time = float(series.time[-1])
    seen = [law.log_depth(time, None if series.wear is None else float(one), last, per_time=True) for one in ends]
    middle = np.array([one[0] for one in seen])
    half = law.factor * np.hypot(np.array([one[1] for one in seen]), law.scatter)
    axes.fill_between(ends, unit * np.exp(middle - half), unit * np.exp(middle + half), color=GREY, alpha=0.3, lw=0)
    axes.plot(ends, unit * np.exp(middle), color=INK)
    points = unit * np.exp(law.steady_log_rate() + law.residual)
    axes.plot(x[~out], points[~out], "o", ms=3.5, color=BLUE)
    axes.plot(x[out], points[out], "s", ms=5, color=VERMILION)
    axes.set_xlabel("run" if series.wear is None else "source energy (kWh)")
    axes.set_ylabel("dynamic rate (nm m/min)" if in_line else "rate (nm/min)")
    axes.margins(x=0.02)


def _chart(axes: Axes, law: Law, out: Any) -> None:
    """Draw the individuals chart of what the law leaves, in percent."""
    values = 100 * law.residual
    x = np.arange(1, values.size + 1)
    half = LIMIT * robust_sigma(values)
    for level in (-half, 0.0, half):
        axes.axhline(level, color=INK if level == 0 else GREY, lw=0.8, ls="-" if level == 0 else "--")
    axes.plot(x, values, color=GREY, lw=0.6)
    axes.plot(x[~out], values[~out], "o", ms=3, color=BLUE)
    axes.plot(x[out], values[out], "s", ms=5, color=VERMILION, label="out of control")
    if out.any():
        axes.legend(frameon=False, loc="best")
    axes.set_xlabel("run, in the order of time")
    axes.set_ylabel("off the law (%)")


def draw_trend(points: Sequence[tuple[str, float, Quantity]], of: str, against: str, best: Quantity | None) -> bytes:
    """Return an SVG of a result against a condition.

    Args:
        points: series, x, y of each run.
        of: the result's name.
        against: the condition's name.
        best: where the optimum lies.
    """
    with mpl.rc_context({**SETTINGS}), warnings.catch_warnings():  # type: ignore[dict-item] # stubs: literals only
        warnings.filterwarnings("ignore", message="Glyph .* missing")  # a film may be named in any script
        figure = Figure(figsize=(6.2, 4.0), layout="constrained")
        axes = figure.subplots()
        for number, name in enumerate(sorted({one[0] for one in points})):
            mine = [one for one in points if one[0] == name and one[2].value is not None]
            y = np.array([one[2].value for one in mine], dtype=float)
            sigma = np.array([one[2].sigma or 0.0 for one in mine])
            axes.errorbar([one[1] for one in mine], y, yerr=sigma, ls="none", marker=MARKS[number % len(MARKS)], ms=4,
                          lw=0.8, color=COLOURS[number % len(COLOURS)], label=plain(name))  # fmt: skip
        if best is not None and best.low is not None and best.high is not None and best.value is not None:
            axes.axvspan(best.low, best.high, color=GREY, alpha=0.3, lw=0)
            axes.axvline(best.value, color=INK, lw=0.8)
        axes.set_xlabel(plain(against))
        axes.set_ylabel(plain(of))
        axes.legend(frameon=False, fontsize=7)
        return _svg(figure)


def _svg(figure: Figure) -> bytes:
    """Return a figure as SVG, the same bytes for the same content."""
    out = BytesIO()
    figure.savefig(out, format="svg", metadata={"Date": None})
    return out.getvalue()
