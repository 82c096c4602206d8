"""Deposition rates from the records: level, drift, dead time, dependences, charts and alarms of every group.

Knows the order of the work; the law stands in rates/law.py, groups and segments in rate_groups.py.
"""

from collections.abc import Sequence
from dataclasses import dataclass, field
from datetime import date, timedelta
from typing import Any

import numpy as np
from numpy.typing import NDArray

from filmfit.jobs.rate_groups import Group, common_share, exposure, groups, lives, series
from filmfit.rates.chart import ewma, individuals, robust_sigma, trend
from filmfit.rates.fit_law import fit_law
from filmfit.rates.law import Law
from filmfit.rates.rate import SECONDS_PER_MINUTE
from filmfit.records.edits import Event, events
from filmfit.records.series import Deposited, deposited
from filmfit.records.store import Records
from filmfit.result import COVERAGE_FACTOR, Quantity

FloatArray = NDArray[np.float64]
LEAST = 3  # runs for a law; fewer give a mean only
CHARTED = 5  # runs for a chart
SHARED_DAYS = 3  # an alarm of a control plate this near makes a process alarm one of the instrument


@dataclass(frozen=True)
class Alarm:
    """A run that a chart calls out of control, and whether process or instrument is to blame."""

    run: str
    chart: str
    kind: str = "process"


@dataclass(frozen=True)
class GroupRate:
    """What the runs of a group say of their rate; quantities are None where the runs do not carry them."""

    group: Group
    law: Law | None
    runs: tuple[Deposited, ...]
    rate: Quantity
    at_power_W: float | None
    per_kW: Quantity | None
    dead_time_s: Quantity | None
    drift_percent_per_kWh: Quantity | None
    exponents: dict[str, Quantity]
    projected: Quantity | None
    alarms: tuple[Alarm, ...]
    set_aside: tuple[str, ...]
    segments: int
    lives: int


@dataclass(frozen=True)
class Rates:
    """All groups, and the control plates with their alarms."""

    groups: tuple[GroupRate, ...]
    plates: dict[str, tuple[Alarm, ...]] = field(default_factory=dict)


def rates(store: Records, target_nm_min: float | None = None, end_kWh: float | None = None, **which: Any) -> Rates:
    """Return the rates of all groups of runs.

    Args:
        store: open records.
        target_nm_min: what the charts are drawn about; default the law itself.
        end_kWh: source energy to which the rate is projected.
        which: film, chamber, source, process: of these runs only.

    Raises:
        RecordsError: they cannot be read.
    """
    found = deposited(store, **which)
    happened = events(store)
    plates = _plates([run for run in (found if which.get("film") is None else deposited(store))
                      if run.kind == "control-plate" and run.thickness_nm])  # fmt: skip
    days = {run.date for runs in plates.values() for run, _ in runs}
    return Rates(
        tuple(group_rate(group, happened, target_nm_min, end_kWh, days) for group in groups(found)),
        {film: tuple(alarm for _, alarm in runs) for film, runs in plates.items()},
    )


def group_rate(
    group: Group,
    happened: Sequence[Event],
    target_nm_min: float | None = None,
    end_kWh: float | None = None,
    instrument_days: set[date] | None = None,
) -> GroupRate:
    """Return the rate of one group: of its newest target life, with the alarms of all."""
    parts = lives(group, happened)
    alarms: list[Alarm] = []
    aside: list[str] = []
    law = None
    for runs, segment in parts:
        law = fit_law(series(runs, segment, group.in_line)) if len(runs) >= LEAST else None
        if law is not None:
            aside += [run.id for run, kept in zip(runs, law.kept, strict=True) if not kept]
            if len(runs) >= CHARTED:
                alarms += alarms_of(runs, _charted(law, target_nm_min, group.in_line), instrument_days or set())
    runs, segment = parts[-1]
    last = runs[-1]
    power = last.run.get("power_W")
    rate, projected = _rate(law, runs, group.in_line, None), None
    if end_kWh is not None and law is not None and law.series.wear is not None:
        projected = _rate(law, runs, group.in_line, end_kWh)
    return GroupRate(
        group, law, runs, rate, power, scaled(rate, 1e3 / power) if power else None, _dead(law), _drift(law),
        _exponents(law), projected, tuple(alarms), tuple(aside), int(segment.max()) + 1, len(parts),
    )  # fmt: skip


def scaled(quantity: Quantity, factor: float) -> Quantity:
    """Return a quantity times a positive factor."""
    parts = {name: None if value is None else value * factor for name, value in quantity.model_dump().items()}
    return Quantity(**parts)


def last_conditions(law: Law) -> dict[str, float]:
    """Return the conditions of the law's last run."""
    return {name: float(value[-1]) for name, value in law.series.conditions.items()}


def _rate(law: Law | None, runs: Sequence[Deposited], in_line: bool, wear: float | None) -> Quantity:
    """Return the rate at the last run's conditions, in nm/min, or in line in nm m/min."""
    unit = 1.0 if in_line else SECONDS_PER_MINUTE
    common = common_share(runs)
    if law is None:
        each = [run.thickness_nm / (exposure(run) or 1) * unit for run in runs if run.thickness_nm]
        value = float(np.mean(each))
        own = [(run.sigma_nm or 0.0) / run.thickness_nm for run in runs if run.thickness_nm]
        if not any(own):
            return Quantity(value=value, sigma=None, low=None, high=None)
        return Quantity.normal(value, value * float(np.hypot(max(own), common)))
    if wear is None and law.series.wear is not None:
        wear = float(law.series.wear[-1])
    log, sigma = law.log_depth(float(law.series.time[-1]), wear, last_conditions(law), per_time=True)
    half = float(np.hypot(law.factor * sigma, COVERAGE_FACTOR * common))
    value = float(np.exp(log)) * unit
    return Quantity.between(value, value * float(np.exp(-half)), value * float(np.exp(half)))


def _dead(law: Law | None) -> Quantity | None:
    """Return the dead time in s."""
    return None if law is None or "dead" not in law.names else _coefficient(law, "dead")


def _drift(law: Law | None) -> Quantity | None:
    """Return the change of the rate in percent of the new source's rate per kWh."""
    if law is None or "wear" not in law.names:
        return None
    middle, got = law.middle["wear"], _coefficient(law, "wear")
    assert got.value is not None
    assert got.low is not None
    assert got.high is not None
    ends = [100 * k / (1 - k * middle) for k in (got.value, got.low, got.high) if k * middle < 1]
    return Quantity.between(*ends) if len(ends) == 3 else None


def _exponents(law: Law | None) -> dict[str, Quantity]:
    """Return the power law's exponent of each condition."""
    return {} if law is None else {name: _coefficient(law, name) for name in law.series.conditions}


def _coefficient(law: Law, name: str) -> Quantity:
    """Return a coefficient with its interval."""
    value, half = law.get(name), law.factor * law.sigma(name)
    return Quantity.between(value, value - half, value + half)


def _charted(law: Law, target_nm_min: float | None, in_line: bool) -> FloatArray:
    """Return what is charted (N,): ln of each run's rate over the law's, or over the target."""
    if target_nm_min is None:
        return law.residual
    target = np.log(target_nm_min / (1.0 if in_line else SECONDS_PER_MINUTE))
    return np.asarray(law.residual + law.steady_log_rate() - target, dtype=float)


def alarms_of(runs: Sequence[Deposited], values: FloatArray, instrument_days: set[date]) -> list[Alarm]:
    """Return the alarms of three charts; stray points are clipped for the average, which would remember them."""
    sigma = robust_sigma(values)
    if not sigma > 0:
        return []
    centre = 0.0
    single = individuals(values, centre, sigma)
    average = ewma(np.clip(values, single.low, single.high), centre, sigma)
    near = {day + timedelta(days=off) for day in instrument_days for off in range(-SHARED_DAYS, SHARED_DAYS + 1)}

    def alarm(at: int, chart: str) -> Alarm:
        return Alarm(runs[at].id, chart, "instrument" if runs[at].date in near else "process")

    found = [alarm(int(at), "individuals") for at in np.flatnonzero(single.outside)]
    found += [alarm(int(at), "ewma") for at in np.flatnonzero(average.outside)]
    kept = np.flatnonzero(~single.outside)
    slope = trend(values[kept])
    if slope is not None and slope.alarm:
        found.append(alarm(int(kept[-1]), "trend"))
    return found


def _plates(plates: Sequence[Deposited]) -> dict[str, list[tuple[Deposited, Alarm]]]:
    """Return the alarms of the control plates by film, each with its run."""
    films: dict[str, list[Deposited]] = {}
    for run in plates:
        films.setdefault(run.film, []).append(run)
    found: dict[str, list[tuple[Deposited, Alarm]]] = {}
    for film, runs in films.items():
        depth = np.log(np.array([run.thickness_nm for run in runs], dtype=float))
        by_id = {run.id: run for run in runs}
        alarms = alarms_of(runs, depth - np.median(depth), set()) if len(runs) >= CHARTED else []
        found[film] = [(by_id[one.run], Alarm(one.run, one.chart, "instrument")) for one in alarms]
    return found
