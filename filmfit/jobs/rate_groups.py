"""Runs gathered into groups that share a rate law, and cut into segments where something was changed.

Knows what a group is; a missing chamber, source or process is its own group, never merged with another.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from filmfit.rates.design import carried
from filmfit.rates.law import Series
from filmfit.records.edits import Event
from filmfit.records.series import Deposited

FloatArray = NDArray[np.float64]
NEWEST = 2000  # runs that a law rests on at most, the newest
WITHOUT_SIGMA = 0.0  # own uncertainty of a thickness whose log states none: the runs' scatter speaks for it


@dataclass(frozen=True)
class Group:
    """Runs of one chamber, source, film, process, reactive mode and kind of movement, in the order of time."""

    chamber: str
    source: str
    film: str
    process: str
    target_mode: str | None
    in_line: bool
    runs: tuple[Deposited, ...]

    @property
    def name(self) -> str:
        """The group in words."""
        mode = [self.target_mode] if self.target_mode else []
        return " / ".join([self.chamber, self.source, self.film, self.process, *mode])


def exposure(run: Deposited) -> float | None:
    """Return a run's time in s, or in line its passes over speed in min/m; None where it states neither."""
    time_s, speed = run.run.get("time_s"), run.run.get("carrier_speed_m_min")
    if time_s:
        return float(time_s)
    return float(run.run.get("passes") or 1) / float(speed) if speed else None


def groups(runs: Sequence[Deposited]) -> tuple[Group, ...]:
    """Return the groups of all runs that have a thickness and a time, sorted by name."""
    found: dict[tuple[str, ...], list[Deposited]] = {}
    for run in runs:
        if run.kind != "run" or run.thickness_nm is None or run.answer == "unusable" or exposure(run) is None:
            continue
        moving = "" if run.run.get("time_s") else "in line"
        key = (run.chamber, run.source, run.film, run.process, str(run.run.get("target_mode") or ""), moving)
        found.setdefault(key, []).append(run)
    return tuple(
        Group(key[0], key[1], key[2], key[3], key[4] or None, bool(key[5]), tuple(found[key])) for key in sorted(found)
    )


def lives(group: Group, events: Sequence[Event]) -> list[tuple[tuple[Deposited, ...], NDArray[np.int64]]]:
    """Return the group's runs parted at target changes, each part with the number of the segment of its runs.

    Other events of the chamber and changes of recipe begin a segment; where that would leave fewer than four runs a
    segment, recipes are not told apart.
    """
    mine = [event for event in events if event.concerns(group.chamber, group.source)]
    changed = [event.date for event in mine if event.kind == "target-changed"]
    other = [event.date for event in mine if event.kind != "target-changed"]
    parts: dict[int, list[Deposited]] = {}
    for run in group.runs:
        parts.setdefault(sum(day <= run.date for day in changed), []).append(run)
    found = []
    for part in parts.values():
        newest = part[-NEWEST:]
        marks = [(sum(day <= run.date for day in other), run.run.get("recipe")) for run in newest]
        segment = _numbered(marks)
        if segment.max() + 1 > len(newest) / 4:
            segment = _numbered([(mark[0], None) for mark in marks])
        if segment.max() + 1 > len(newest) - 3:
            segment = np.zeros(len(newest), dtype=np.int64)
        found.append((tuple(newest), segment))
    return found


def _numbered(marks: Sequence[object]) -> NDArray[np.int64]:
    """Return a number for each mark that grows by one where the mark changes."""
    steps = [0, *(int(one != before) for before, one in pairwise(marks))]
    return np.cumsum(np.array(steps, dtype=np.int64))


def series(runs: Sequence[Deposited], segment: NDArray[np.int64], in_line: bool) -> Series:
    """Return the arrays of runs, with only the dependences that the runs can carry."""
    depth = np.array([run.thickness_nm for run in runs], dtype=float)
    own = np.array([own_sigma(run) / run.thickness_nm for run in runs if run.thickness_nm])
    time = np.array([exposure(run) for run in runs], dtype=float)
    conditions = {}
    for name in ("power_W", "pressure_Pa"):
        value = _all([run.run.get(name) for run in runs])
        if value is not None:
            conditions[name] = value
    gases = sorted({gas for run in runs for gas in run.run.get("flows_sccm", {})})
    for gas in gases:
        value = _all([run.run.get("flows_sccm", {}).get(gas) for run in runs])
        if value is not None and value.min() > 0:
            conditions[f"flows_sccm.{gas}"] = value
    wear = _all([run.run.get("source_energy_kWh") for run in runs])
    return carried(depth, own, time, segment, wear, conditions, not in_line)


def own_sigma(run: Deposited) -> float:
    """Return the part of a thickness's standard uncertainty in nm that other runs do not share.

    A fit files its whole uncertainty as common: what instrument and plate leave unsaid is the same from run to run.
    It is then counted as own as well, in the weights only, since how it is parted is not known.
    """
    if run.sigma_nm is None:
        return WITHOUT_SIGMA
    if run.common_nm is None or run.common_nm >= run.sigma_nm:
        return run.sigma_nm
    return float(np.sqrt(run.sigma_nm**2 - run.common_nm**2))


def common_share(runs: Sequence[Deposited]) -> float:
    """Return the relative standard uncertainty that all runs share: their median."""
    shares = [run.common_nm / run.thickness_nm if run.common_nm and run.thickness_nm else 0.0 for run in runs]
    return float(np.median(shares)) if shares else 0.0


def _all(values: Sequence[float | None]) -> FloatArray | None:
    """Return values as an array, None where one is missing."""
    if any(value is None for value in values):
        return None
    return np.array(values, dtype=float)
