"""`filmfit rate`: deposition rates, their dependence and drift, control charts.

Knows options; the work stands in jobs/rate.py.
"""

from pathlib import Path
from typing import Any

import click

from filmfit.cli.options import json_option, records_option


def choice_options(command: Any) -> Any:
    """Add --film, --chamber, --source, --process."""
    for name in ("process", "source", "chamber", "film"):
        command = click.option(f"--{name}", metavar="NAME", help=f"Runs of this {name} only ('-': none stated).")(
            command
        )
    return command


@click.command(epilog="Example: filmfit rate --chamber K2 --film ITO")
@choice_options
@click.option("--of", "of", metavar="QUANTITY", help="Chart this result instead of the rate.")
@click.option("--target", type=click.FloatRange(min=0, min_open=True), metavar="NM_MIN",
              help="Rate that the charts are drawn about (default: the law itself).")  # fmt: skip
@click.option("--end-kWh", "end_kwh", type=click.FloatRange(min=0), help="Project the rate to this source energy.")
@click.option("--report", type=click.Path(path_type=Path), metavar="FOLDER", help="Draw a picture of each group there.")
@records_option
@json_option
def rate(
    film: str | None, chamber: str | None, source: str | None, process: str | None, of: str | None,
    target: float | None, end_kwh: float | None, report: Path | None, records: str, json_to: str | None,
) -> None:  # fmt: skip
    """Rate of each chamber, source, film and process: level, dead time, drift with source energy, alarms."""
    from filmfit.cli.options import write_json
    from filmfit.cli.runs import must_exist
    from filmfit.jobs.rate import rates
    from filmfit.jobs.rate_told import rates_json
    from filmfit.records.store import Records
    from filmfit.report.rates_text import rates_text

    must_exist(records)
    which = {"film": film, "chamber": chamber, "source": source, "process": process_word_of(process)}
    with Records(records) as store:
        if of is not None:
            from filmfit.jobs.charted import charted

            told: dict[str, Any] = charted(store, of, **which)
        else:
            found = rates(store, target, end_kwh, **which)
            told = rates_json(found)
            if report is not None:
                _draw(found, report)
    if json_to is None:
        click.echo(rates_text(told))
        return
    write_json(told, json_to)


def process_word_of(given: str | None) -> str | None:
    """Return a process by its one word, in whatever usual spelling it was given."""
    if given in (None, "-"):
        return given
    from filmfit.runfile.process import process_word

    return process_word(str(given)) or given


def _draw(found: Any, folder: Path) -> None:
    """Draw each group that has a law."""
    from filmfit.cli.options import write_whole
    from filmfit.errors import UsageError
    from filmfit.report.rate_figures import draw_rate

    try:
        folder.mkdir(exist_ok=True)
    except OSError as error:
        raise UsageError(str(folder), f"cannot be made: {error.strerror}", do="name another folder") from error
    number = 0
    for one in found.groups:
        if one.law is not None:
            number += 1
            calls = {alarm.run for alarm in one.alarms}
            out = [run.id in calls for run in one.runs]
            write_whole(folder / f"rate-{number}.svg", draw_rate(one.law, one.group.name, out, one.group.in_line))
