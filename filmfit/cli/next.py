"""`filmfit next`: how long the next run must go for a wanted thickness.

Knows options and words; the work stands in jobs/next_run.py.
"""

from typing import TYPE_CHECKING, Any

import click

from filmfit.cli.options import json_option, records_option
from filmfit.cli.rate import process_word_of

if TYPE_CHECKING:
    from filmfit.jobs.next_run import NextRun

ABOVE_ZERO = click.FloatRange(min=0, min_open=True, max=1e9)


@click.command("next", epilog="Example: filmfit next --film ITO --thickness-nm 250 --chamber K2")
@click.option("--film", required=True, metavar="NAME")
@click.option("--thickness-nm", required=True, type=ABOVE_ZERO, help="Wanted thickness.")
@click.option("--chamber", metavar="NAME")
@click.option("--source", metavar="NAME")
@click.option("--process", metavar="NAME")
@click.option("--power-W", "power_w", type=ABOVE_ZERO, help="Default: the last run's.")
@click.option("--source-energy-kWh", "energy", type=click.FloatRange(min=0, max=1e9), help="Default: the last run's.")
@click.option("--passes", type=click.IntRange(min=1), help="In line; default: the last run's.")
@click.option("--within", type=click.FloatRange(min=0, min_open=True, max=99), default=2.0, show_default=True,
              metavar="PERCENT", help="Tell the chance to land this near.")  # fmt: skip
@click.option("--extrapolate", is_flag=True, help="Go beyond the recorded conditions.")
@records_option
@json_option
def next_(
    film: str, thickness_nm: float, chamber: str | None, source: str | None, process: str | None,
    power_w: float | None, energy: float | None, passes: int | None, within: float, extrapolate: bool,
    records: str, json_to: str | None,
) -> None:  # fmt: skip
    """Time (in line: carrier speed) of the next run, with its 95 % prediction interval and the chance to land near."""
    from filmfit.cli.options import write_json
    from filmfit.cli.runs import must_exist
    from filmfit.jobs.next_run import Wanted, next_run
    from filmfit.records.store import Records

    must_exist(records)
    wanted = Wanted(film, thickness_nm, power_w, energy, passes, within, extrapolate)
    with Records(records) as store:
        found = next_run(store, wanted, chamber=chamber, source=source, process=process_word_of(process))
    if json_to is None:
        click.echo("\n".join(_lines(found)))
        return
    write_json(_json(found), json_to)


def _speed(found: "NextRun") -> dict[str, float | None]:
    """Return the carrier speed in m/min for an exposure in min/m: passes over it."""
    got = found.found.exposure
    ends = {"value": got.value, "low": got.high, "high": got.low}
    speeds = {name: None if not value else found.passes / value for name, value in ends.items()}
    low, high = speeds["low"], speeds["high"]
    sigma = None if low is None or high is None else (high - low) / 3.92
    return {"value": speeds["value"], "sigma": sigma, "low": low, "high": high}


def _json(found: "NextRun") -> dict[str, Any]:
    """Return the answer as the contract names it."""
    got, group = found.found, found.group
    time_s = None if group.in_line else got.exposure.model_dump(mode="json")
    told: dict[str, Any] = {
        "schema": "filmfit.next/1",
        "chamber": group.chamber,
        "source": group.source,
        "film": group.film,
        "process": group.process,
        "time_s": time_s,
        "thickness_nm": got.thickness_nm.model_dump(mode="json"),
        "chance_within": {"percent": found.wanted.within_percent, "probability": got.within},
        "runs": list(found.runs),
        "keep": got.keep,
        "notes": list(found.notes),
    }
    if group.in_line:
        told |= {"carrier_speed_m_min": _speed(found), "passes": found.passes}
    return told


def _lines(found: "NextRun") -> list[str]:
    """Return the answer for a person."""
    from filmfit.report.plain import plain
    from filmfit.report.text import quantity
    from filmfit.result import Quantity

    got = found.found
    speed = found.group.in_line
    value = Quantity(**_speed(found)) if speed else got.exposure
    what = quantity(value, "m/min" if speed else "s") + (f", {found.passes} passes" if speed else "")
    lines = [
        f"{'keep' if got.keep else 'set'} {what}",
        f"  for {found.wanted.thickness_nm:g} nm of {found.group.name}",
        f"  thickness to be expected: {quantity(got.thickness_nm, 'nm')}",
        f"  chance to land within {found.wanted.within_percent:g} %: {100 * got.within:.0f} %",
    ]
    if got.keep:
        lines.append("  the runs do not support a change; correcting by the last error would add to the scatter")
    lines += [f"  {note}" for note in found.notes]
    lines.append(f"  rests on {len(found.runs)} runs: {', '.join(found.runs[-8:])}")
    lines.append("  the intervals are those of the next run, its own scatter included")
    return [plain(line) for line in lines]
