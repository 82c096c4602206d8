"""Control charts of any result, group by group.

Knows where the values come from; the charts stand in rates/chart.py.
"""

from typing import Any

import numpy as np

from filmfit.errors import UsageError, nearest
from filmfit.jobs.rate import CHARTED, alarms_of
from filmfit.jobs.values import known_results, outcome
from filmfit.records.series import Deposited, deposited
from filmfit.records.store import Records


def charted(store: Records, of: str, **which: Any) -> dict[str, Any]:
    """Return the chart of a result for every chamber, source, film and process, as JSON types.

    Args:
        store: open records.
        of: the result's name.
        which: film, chamber, source, process: of these runs only.

    Raises:
        UsageError: no run has such a result.
    """
    found: dict[tuple[str, ...], list[tuple[Deposited, float]]] = {}
    for run in deposited(store, with_result=True, **which):
        got = outcome(run, of)
        if run.kind == "run" and got is not None and got.value is not None:
            found.setdefault((run.chamber, run.source, run.film, run.process), []).append((run, got.value))
    if not found:
        raise UsageError("--of", f"no run has '{of}'", do=nearest(of, known_results()))
    groups = [_group(key, of, points) for key, points in sorted(found.items())]
    return {"schema": "filmfit.chart/1", "of": of, "groups": groups}


def _group(key: tuple[str, ...], of: str, points: list[tuple[Deposited, float]]) -> dict[str, Any]:
    """Return one group's chart."""
    runs = [run for run, _ in points]
    values = np.array([value for _, value in points])
    centre = float(np.median(values))
    alarms = alarms_of(runs, values - centre, set()) if len(runs) >= CHARTED else []
    sigma = float(values.std(ddof=1)) if len(runs) > 1 else None
    return {
        **dict(zip(("chamber", "source", "film", "process"), key, strict=True)),
        "of": of,
        "runs": len(runs),
        "mean": {"value": float(values.mean()), "sigma": None, "low": None, "high": None},
        "standard_deviation": sigma,
        "alarms": [{"run": one.run, "chart": one.chart, "kind": one.kind} for one in alarms],
    }
