"""Rates as text for a person.

Knows the JSON of jobs/rate_told.py and of jobs/charted.py; computes nothing.
"""

from typing import Any

from filmfit.report.plain import plain
from filmfit.report.text import quantity
from filmfit.result import Quantity

LABELS = (
    ("rate_nm_min", "rate", "nm/min"),
    ("dynamic_rate_nm_m_min", "dynamic rate", "nm m/min"),
    ("rate_angstrom_s", "rate", "angstrom/s"),
    ("rate_nm_min_per_kW", "rate per kW", "nm/min/kW"),
    ("dead_time_s", "dead time", "s"),
    ("drift_percent_per_kWh", "drift, of the new source's rate", "%/kWh"),
    ("projected_rate", "rate at the end asked for", "nm/min"),
    ("crystal_tooling_percent", "new tooling, to type in", "%"),
    ("mean", "mean", ""),
)


def rates_text(told: dict[str, Any]) -> str:
    """Return all groups, one after the other."""
    lines: list[str] = []
    for group in told["groups"]:
        names = [group[key] for key in ("chamber", "source", "film", "process")]
        mode = [group["target_mode"]] if group.get("target_mode") else []
        lines.append(" / ".join([*names, *mode]) + f"   {group['runs']} runs")
        lines += _quantities(group)
        lines += _alarms(group["alarms"])
        if group.get("set_aside"):
            lines.append(f"  stray, not in the law: {', '.join(group['set_aside'])}")
        lines.append("")
    for plate in told.get("control_plates", []):
        lines.append(f"control plates of {plate['film']}")
        lines += [*_alarms(plate["alarms"]), ""]
    if not lines:
        lines = ["no runs with thickness and time"]
    return "\n".join(plain(line) for line in lines).rstrip()


def _quantities(group: dict[str, Any]) -> list[str]:
    """Return a group's quantities, one a line."""
    lines = []
    power, wear = group.get("at_power_W"), group.get("at_source_energy_kWh")
    at = [f"{power:g} W"] if power else []
    at += [f"{wear:g} kWh"] if wear is not None else []
    for key, label, unit in LABELS:
        got = group.get(key)
        if got is not None:
            tail = f"   at {', '.join(at)}" if at and key in ("rate_nm_min", "dynamic_rate_nm_m_min") else ""
            lines.append(f"  {label:<33}{quantity(Quantity(**got), unit)}{tail}")
    for name, got in group.get("exponents", {}).items():
        lines.append(f"  goes with {name + ' to the power':<23}{quantity(Quantity(**got), '')}")
    if group.get("scatter_percent") is not None:
        level = "" if group["level"] == "steady" else "; the level wanders from run to run"
        lines.append(f"  {'scatter of one run':<33}{group['scatter_percent']:.2g} %{level}")
    if group.get("segments", 1) > 1 or group.get("target_lives", 1) > 1:
        lines.append(f"  {'segments, targets':<33}{group['segments']}, {group['target_lives']}")
    return lines


def _alarms(alarms: list[dict[str, str]]) -> list[str]:
    """Return the alarms, one line a chart."""
    charts: dict[tuple[str, str], list[str]] = {}
    for one in alarms:
        charts.setdefault((one["kind"], one["chart"]), []).append(one["run"])
    return [f"  {kind} alarm, {chart} chart: {', '.join(runs)}" for (kind, chart), runs in charts.items()]
