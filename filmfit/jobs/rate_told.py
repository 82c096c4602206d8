"""Rates as plain JSON types, as the contract names them.

Knows the schema filmfit.rate/1; computes nothing.
"""

from typing import Any

from filmfit.jobs.crystal import tooling
from filmfit.jobs.rate import Alarm, GroupRate, Rates, scaled
from filmfit.result import Quantity

ANGSTROM_S = 10.0 / 60.0  # of a nm/min


def rates_json(found: Rates) -> dict[str, Any]:
    """Return all groups as JSON types."""
    plates = [{"film": film, "alarms": _alarms(alarms)} for film, alarms in found.plates.items()]
    return {"schema": "filmfit.rate/1", "groups": [_group(one) for one in found.groups], "control_plates": plates}


def _group(one: GroupRate) -> dict[str, Any]:
    """Return one group as JSON types."""
    group, law = one.group, one.law
    evaporated = "evaporation" in group.process and not group.in_line
    return {
        "chamber": group.chamber,
        "source": group.source,
        "film": group.film,
        "process": group.process,
        "target_mode": group.target_mode,
        "runs": len(group.runs),
        "runs_in_law": 0 if law is None else int(law.kept.sum()),
        "rate_nm_min": None if group.in_line else _plain(one.rate),
        "dynamic_rate_nm_m_min": _plain(one.rate) if group.in_line else None,
        "rate_angstrom_s": _plain(scaled(one.rate, ANGSTROM_S)) if evaporated else None,
        "at_power_W": one.at_power_W,
        "at_source_energy_kWh": one.runs[-1].run.get("source_energy_kWh"),
        "rate_nm_min_per_kW": None if group.in_line else _plain(one.per_kW),
        "dead_time_s": _plain(one.dead_time_s),
        "drift_percent_per_kWh": _plain(one.drift_percent_per_kWh),
        "exponents": {name: _plain(value) for name, value in one.exponents.items()},
        "scatter_percent": None if law is None else 100 * law.scatter,
        "level": None if law is None else "varies" if law.wander else "steady",
        "projected_rate": _plain(one.projected),
        "crystal_tooling_percent": _plain(tooling(one.runs)),
        "segments": one.segments,
        "target_lives": one.lives,
        "alarms": _alarms(one.alarms),
        "set_aside": list(one.set_aside),
    }


def _alarms(alarms: tuple[Alarm, ...]) -> list[dict[str, str]]:
    """Return alarms as JSON types."""
    return [{"run": one.run, "chart": one.chart, "kind": one.kind} for one in alarms]


def _plain(quantity: Quantity | None) -> dict[str, float | None] | None:
    """Return a quantity as JSON types."""
    return None if quantity is None else quantity.model_dump(mode="json")
