"""Any result against any condition or date, with the optimum where the points carry one.

Knows which points belong together; the optimum stands in rates/optimum.py.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

from filmfit.errors import UsageError, nearest
from filmfit.jobs.values import condition, known_results, outcome
from filmfit.rates.optimum import Optimum, optimum
from filmfit.records.edits import events
from filmfit.records.series import deposited
from filmfit.records.store import Records
from filmfit.result import Quantity


@dataclass(frozen=True)
class Point:
    """A run: its condition, its result, and the series it belongs to (source and segment)."""

    run: str
    series: str
    x: float
    y: Quantity


@dataclass(frozen=True)
class TrendFound:
    """The points, the optimum or the reason why there is none."""

    of: str
    against: str
    points: tuple[Point, ...]
    optimum: Optimum | None
    reason: str


def trend(store: Records, of: str, against: str, **which: Any) -> TrendFound:
    """Return a result against a condition; sources and segments keep their own level.

    Args:
        store: open records.
        of: name of the result.
        against: name of the condition, A/B for a ratio, or "date".
        which: film, chamber, source, process: of these runs only.

    Raises:
        UsageError: no run has both.
    """
    happened = events(store)
    points = []
    results = conditions = 0
    for run in deposited(store, with_result=True, **which):
        if run.kind != "run":
            continue
        y, x = outcome(run, of), condition(run, against)
        results += y is not None
        conditions += x is not None
        if x is None or y is None or y.value is None:
            continue
        segment = sum(one.date <= run.date for one in happened if one.concerns(run.chamber, run.source))
        name = " / ".join([run.chamber, run.source, run.film, run.process] + ([str(segment)] if segment else []))
        points.append(Point(run.id, name, x, y))
    if not results:
        raise UsageError("--of", f"no run has '{of}'", do=nearest(of, known_results()))
    if not points:
        raise UsageError("--against", f"no run with '{of}' has '{against}'",
                         "a number among the conditions, flows_sccm.GAS, A/B or date")  # fmt: skip
    names = sorted({point.series for point in points})
    found = optimum(
        np.array([point.x for point in points]),
        np.array([point.y.value for point in points], dtype=float),
        np.array([names.index(point.series) for point in points], dtype=np.int64),
    )
    best = found if isinstance(found, Optimum) else None
    return TrendFound(of, against, tuple(points), best, found if isinstance(found, str) else "")
