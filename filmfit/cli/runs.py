"""`filmfit runs`: what the deposition records hold.

Knows options; the records stand in records/store.py.
"""

from typing import Any

import click

from filmfit.cli.options import json_option, records_option
from filmfit.cli.runs_changes import amend, backup, check, confirm, event, export, import_, leave_out


@click.group(epilog="Example: filmfit runs list")
def runs() -> None:
    """List, show, bring in, correct and copy the runs in the deposition records."""


for command in (import_, export, confirm, amend, leave_out, event, backup, check):
    runs.add_command(command)


@runs.command("list", epilog="Example: filmfit runs list --last 20")
@records_option
@json_option
@click.option("--last", type=click.IntRange(min=1), metavar="N", help="The newest N only.")
@click.option("--film", metavar="NAME", help="Runs of this film only.")
def list_(records: str, json_to: str | None, last: int | None, film: str | None) -> None:
    """List the runs, newest first, each with its latest usable fit."""
    from filmfit.cli.options import write_json
    from filmfit.records.store import Records
    from filmfit.report.text import runs_text

    must_exist(records)
    with Records(records) as store:
        found = store.list_runs(last, film)
    if json_to is None:
        click.echo(runs_text(found))
        return
    write_json({"schema": "filmfit.runs/1", "runs": [_plain(run) for run in found]}, json_to)


@runs.command("show", epilog="Example: filmfit runs show C1-0231")
@click.argument("run")
@records_option
@json_option
def show(run: str, records: str, json_to: str | None) -> None:
    """Show a run: conditions, their changes, and every fit."""
    from filmfit.cli.options import write_json
    from filmfit.jobs.pieces import pieces
    from filmfit.records.store import Records
    from filmfit.report.plain import plain
    from filmfit.report.text import quantity, run_text

    must_exist(records)
    with Records(records) as store:
        found = store.show(run)
    beside = pieces(found)
    if json_to is None:
        click.echo(run_text(found))
        for one in beside:
            less = "counts" if one.difference_nm is None else f"differs by {quantity(one.difference_nm, 'nm')}"
            click.echo(plain(f"{one.sample}, {one.state}: {quantity(one.thickness_nm, 'nm')}, {less}"))
        return
    shown = [_plain(one) for one in beside]
    write_json({"schema": "filmfit.run/1", **_plain(found), "samples": shown}, json_to)


def must_exist(records: str) -> None:
    """Refuse to make new records where someone only wants to look."""
    from filmfit.cli.options import records_path
    from filmfit.errors import RecordsError

    local = "://" not in records or records.startswith("sqlite:///")
    if local and not records_path(records).exists():
        raise RecordsError(records, "no such records", do="file a run with 'filmfit fit', or name them with --records")


def _plain(found: Any) -> dict[str, Any]:
    """Return a record as plain JSON types."""
    from dataclasses import fields, is_dataclass
    from datetime import date

    from filmfit.result import Quantity

    def plain(value: Any) -> Any:
        if isinstance(value, Quantity):
            return value.model_dump(mode="json")
        if is_dataclass(value) and not isinstance(value, type):
            return {one.name: plain(getattr(value, one.name)) for one in fields(value)}
        if isinstance(value, date):
            return value.isoformat()
        if isinstance(value, list | tuple):
            return [plain(one) for one in value]
        return value

    shown: dict[str, Any] = plain(found)
    return shown
