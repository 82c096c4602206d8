"""How long the next run must go for a wanted thickness.

Knows which runs it rests on and how far beyond them it would reach; the law stands in rates/.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

from filmfit.errors import RecordsError, UsageError, nearest
from filmfit.jobs.rate import LEAST, GroupRate, group_rate
from filmfit.jobs.rate_groups import Group, common_share, groups
from filmfit.rates.law import Law
from filmfit.rates.next_time import NextTime, next_time
from filmfit.records.edits import events
from filmfit.records.series import deposited
from filmfit.records.store import Records

TIME_MARGIN = 0.10  # beyond the shortest and longest recorded time
POWER_MARGIN = 0.03
PROPORTIONAL_SIGMA = 0.15  # of the exponent of power where the runs do not show it, and one asks all the same


@dataclass(frozen=True)
class Wanted:
    """What the next run is to be."""

    film: str
    thickness_nm: float
    power_W: float | None = None
    source_energy_kWh: float | None = None
    passes: int | None = None
    within_percent: float = 2.0
    extrapolate: bool = False


@dataclass(frozen=True)
class NextRun:
    """The next run's time, the runs it rests on, and what a person should know."""

    wanted: Wanted
    group: Group
    found: NextTime
    passes: int
    runs: tuple[str, ...]
    notes: tuple[str, ...]


def next_run(store: Records, wanted: Wanted, **which: Any) -> NextRun:
    """Return the next run's time, or in line its exposure.

    Args:
        store: open records.
        wanted: film, thickness and conditions.
        which: chamber, source, process: of these runs only.

    Raises:
        RecordsError: no runs to rest on, or runs of several groups.
        UsageError: it would reach beyond the recorded conditions.
    """
    group = _group(store, wanted.film, which)
    rate = group_rate(group, events(store))
    law = rate.law
    if law is None:
        have = f"only {len(rate.runs)} run(s) since the target was changed" if rate.lives > 1 else "too few runs"
        raise RecordsError(group.name, have, f"{LEAST} or more with thickness and time", "deposit and measure more")
    series, last = law.series, rate.runs[-1]
    wear = None
    if series.wear is not None:
        wear = float(series.wear[-1]) if wanted.source_energy_kWh is None else wanted.source_energy_kWh
    conditions = {name: float(value[-1]) for name, value in series.conditions.items()}
    notes: list[str] = []
    beyond: list[str] = []
    extra = _power(rate, law, wanted, conditions, beyond, notes)
    same_power = wanted.power_W is None or wanted.power_W == rate.at_power_W
    may_keep = float(series.time[-1]) if same_power else None
    found = next_time(law, wanted.thickness_nm, wear, conditions, common_share(rate.runs), wanted.within_percent,
                      may_keep, extra)  # fmt: skip
    beyond += _beyond_time(law, found.exposure.value or 0.0, group.in_line)
    beyond += _beyond_wear(law, wear)
    if beyond and not wanted.extrapolate:
        raise UsageError("filmfit next", "; ".join(beyond), do="deposit a run nearer to it, or give --extrapolate")
    notes += beyond
    if law.wander:
        notes.append("the level wanders from run to run: the newest runs count most")
    runs = tuple(run.id for run, kept in zip(rate.runs, law.kept, strict=True) if kept)
    passes = wanted.passes or int(last.run.get("passes") or 1)
    return NextRun(wanted, group, found, passes, runs, tuple(notes))


def _group(store: Records, film: str, which: dict[str, Any]) -> Group:
    """Return the one group that is meant."""
    found = groups(deposited(store, film=film, **which))
    if not found:
        known = sorted({run.film for run in deposited(store)})
        do = nearest(film, known) if film not in known else "see 'filmfit rate'"
        raise RecordsError(store.address, f"no runs of film '{film}' with thickness and time there", do=do)
    if len(found) > 1:
        names = "; ".join(group.name for group in found[:6]) + (" ..." if len(found) > 6 else "")
        raise RecordsError(store.address, f"film '{film}' comes from {len(found)} groups: {names}",
                           do="give --chamber, --source or --process")  # fmt: skip
    return found[0]


def _power(
    rate: GroupRate, law: Law, wanted: Wanted, conditions: dict[str, float], beyond: list[str], notes: list[str]
) -> tuple[float, float]:
    """Set the power among the conditions; return ln of a factor that the runs do not show, and its uncertainty."""
    power = wanted.power_W
    if power is None or power == rate.at_power_W:
        return 0.0, 0.0
    if "power_W" in law.series.conditions:
        conditions["power_W"] = power
        seen = law.series.conditions["power_W"]
        if not seen.min() * (1 - POWER_MARGIN) <= power <= seen.max() * (1 + POWER_MARGIN):
            beyond.append(f"{power:g} W lies outside the recorded {seen.min():g} to {seen.max():g} W")
        return 0.0, 0.0
    if rate.at_power_W is None:
        beyond.append(f"{power:g} W: the runs state no power")
        return 0.0, 0.0
    beyond.append(f"{power:g} W: the runs, of {rate.at_power_W:g} W at last, do not show how the rate goes with power")
    notes.append("the rate is taken as proportional to power, exponent 1 +- 0.15")
    ratio = float(np.log(power / rate.at_power_W))
    return ratio, PROPORTIONAL_SIGMA * abs(ratio)


def _beyond_time(law: Law, exposure: float, in_line: bool) -> list[str]:
    """Return how far a time lies outside the recorded ones."""
    low, high = float(law.series.time[law.kept].min()), float(law.series.time[law.kept].max())
    if low * (1 - TIME_MARGIN) <= exposure <= high * (1 + TIME_MARGIN):
        return []
    if in_line:
        words = f"{1 / exposure:.3g} m/min a pass lies outside the recorded {1 / high:.3g} to {1 / low:.3g}"
    else:
        words = f"{exposure:.0f} s lies outside the recorded {low:g} to {high:g} s"
    far = exposure / high - 1 if exposure > high else 1 - exposure / low
    return [f"{words}, by {100 * far:.0f} %"]


def _beyond_wear(law: Law, wear: float | None) -> list[str]:
    """Return how far a source energy lies beyond the last recorded one; a usual step further is no extrapolation."""
    if wear is None or law.series.wear is None:
        return []
    seen = law.series.wear
    step = float(np.abs(np.diff(seen)).max()) if seen.size > 1 else 0.0
    reach = max(step, 0.05 * float(np.ptp(seen)))
    if seen.min() - reach <= wear <= seen.max() + reach:
        return []
    far = wear - seen.max() if wear > seen.max() else seen.min() - wear
    return [f"{wear:g} kWh lies outside the recorded {seen.min():g} to {seen.max():g} kWh, by {far:.3g} kWh"]
