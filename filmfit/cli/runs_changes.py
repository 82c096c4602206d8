"""`filmfit runs import, export, confirm, amend, leave-out, event, backup`: what changes the records, or copies them.

Knows options; the work stands in jobs/ and records/.
"""

import getpass
from collections.abc import Callable
from datetime import datetime
from pathlib import Path
from typing import Any

import click

from filmfit.cli.options import json_option, records_option

EVENT_KINDS = ("target-changed", "vented", "shields-changed", "lamp-or-mirror-changed", "other")
SHOWN_CHANGES = 20


def _name() -> str:
    """Return who is at the keyboard."""
    try:
        return getpass.getuser()
    except (KeyError, OSError):
        return "unknown"


def _signed(command: Callable[..., Any]) -> Callable[..., Any]:
    """Add --who and --because."""
    who = click.option("--who", default=_name, metavar="NAME", help="Who changes it (default: the user's name).")
    return who(click.option("--because", required=True, metavar="TEXT", help="Why; kept with the change.")(command))


@click.command("import", epilog="Example: filmfit runs import log.csv --map our-log.toml --dry-run")
@click.argument("log", type=click.Path(path_type=Path))
@click.option("--map", "log_map", type=click.Path(path_type=Path), help="TOML file that says which column is what.")
@click.option("--dry-run", is_flag=True, help="Show what would be filed, and file nothing.")
@records_option
@json_option
def import_(log: Path, log_map: Path | None, dry_run: bool, records: str, json_to: str | None) -> None:
    """File the runs of a log (CSV, one run a row), all or none; a second time files nothing."""
    from filmfit.cli.options import write_json
    from filmfit.jobs.runs_import import import_runs
    from filmfit.report.plain import plain

    done = import_runs(records, log, log_map, dry_run)
    counts = {what: done.count(what) for what in ("new", "changed", "same")}
    changed = [one for one in done.runs if one.changes]
    if json_to is not None:
        runs = [{"run": one.run, "what": one.what, "changes": [c.__dict__ for c in one.changes]} for one in done.runs]
        write_json({"schema": "filmfit.import/1", "dry_run": dry_run, **counts, "runs": runs, "notes": done.notes},
                   json_to)  # fmt: skip
        return
    for note in done.notes:
        click.echo(plain(note))
    for one in changed[:SHOWN_CHANGES]:
        click.echo(plain(f"{one.run}: " + ", ".join(f"{c.key} from {c.old} to {c.new}" for c in one.changes)))
    if len(changed) > SHOWN_CHANGES:
        click.echo(f"and {len(changed) - SHOWN_CHANGES} more with changes; --json lists all")
    verb = "would be filed" if dry_run else "filed"
    click.echo(f"{verb}: {counts['new']} new, {counts['changed']} changed; {counts['same']} were there already")


@click.command("export", epilog="Example: filmfit runs export runs.csv")
@click.argument("file", type=click.Path(path_type=Path))
@records_option
def export(file: Path, records: str) -> None:
    """Write all runs to a CSV file that 'runs import' reads, or, where its name ends in .json, everything as JSON."""
    from filmfit.cli.options import must_be_writable, write_whole
    from filmfit.cli.runs import must_exist
    from filmfit.jobs.runs_export import export_csv, export_json
    from filmfit.records.store import Records

    must_exist(records)
    must_be_writable(file)
    with Records(records) as store:
        content, count = (export_json if file.suffix == ".json" else export_csv)(store)
    write_whole(file, content)
    click.echo(f"{file}: {count} runs")


@click.command("confirm", epilog="Example: filmfit runs confirm K2-0417 2")
@click.argument("run")
@click.argument("fit", type=click.IntRange(min=1))
@click.option("--who", default=_name, metavar="NAME", help="Who says so (default: the user's name).")
@click.option("--because", default="", metavar="TEXT", help="Why; kept with the choice.")
@records_option
def confirm(run: str, fit: int, who: str, because: str, records: str) -> None:
    """Say which fit of a run counts (without it: the latest usable one)."""
    from filmfit.cli.runs import must_exist
    from filmfit.records import edits
    from filmfit.records.store import Records

    must_exist(records)
    with Records(records) as store:
        before = edits.confirm(store, run, fit, who, because)
    click.echo(f"{run}: fit {fit} counts (before: {before})")


@click.command("amend", epilog="Example: filmfit runs amend K2-0417 time_s=960 --because 'shutter log'")
@click.argument("run")
@click.argument("changes", nargs=-1, required=True, metavar="KEY=VALUE...")
@_signed
@records_option
def amend(run: str, changes: tuple[str, ...], who: str, because: str, records: str) -> None:
    """Change conditions of a run; the old ones are kept. An empty value takes a key away."""
    from filmfit.cli.runs import must_exist
    from filmfit.jobs.runs_edit import amend_run
    from filmfit.records.store import Records
    from filmfit.report.plain import plain

    must_exist(records)
    with Records(records) as store:
        changed = amend_run(store, run, changes, who, because)
    for key, (old, new) in changed.items():
        click.echo(plain(f"{run}: {key} from {old} to {new}"))
    if not changed:
        click.echo(f"{run}: nothing changes")


@click.command("leave-out", epilog="Example: filmfit runs leave-out K2-0417 --because 'shutter stuck'")
@click.argument("run")
@click.option("--take-in", is_flag=True, help="Take it in again.")
@_signed
@records_option
def leave_out(run: str, take_in: bool, who: str, because: str, records: str) -> None:
    """Leave a run out of rates and trends; it stays in the records."""
    from filmfit.cli.runs import must_exist
    from filmfit.records import edits
    from filmfit.records.store import Records

    must_exist(records)
    with Records(records) as store:
        edits.leave_out(store, run, who, None if take_in else because)
    click.echo(f"{run}: {'taken in again' if take_in else 'left out'}")


@click.command("event", epilog="Example: filmfit runs event --chamber K2 --date 2026-04-17 --kind target-changed")
@click.option("--chamber", required=True, metavar="NAME")
@click.option("--source", metavar="NAME", help="This source of the chamber only (default: all).")
@click.option("--date", "day", required=True, type=click.DateTime(["%Y-%m-%d"]), help="From this day on.")
@click.option("--kind", required=True, type=click.Choice(EVENT_KINDS))
@click.option("--note", default="", metavar="TEXT", help="In your own words.")
@click.option("--who", default=_name, metavar="NAME", help="Who says so (default: the user's name).")
@records_option
def event(chamber: str, source: str | None, day: datetime, kind: str, note: str, who: str, records: str) -> None:
    """Tell what was done to a chamber; the runs from that day on are a segment of their own."""
    from filmfit.records import edits
    from filmfit.records.store import Records

    with Records(records) as store:
        new = edits.tell_event(store, edits.Event(chamber, day.date(), kind, note, source), who)
    click.echo(f"{chamber}, {day:%Y-%m-%d}: {kind}{'' if new else ' is there already'}")


@click.command("backup", epilog="Example: filmfit runs backup records-2026-04.sqlite")
@click.argument("file", type=click.Path(path_type=Path))
@records_option
def backup(file: Path, records: str) -> None:
    """Copy the records whole to a new SQLite file, while others may be writing."""
    from filmfit.cli.options import must_be_writable, records_path
    from filmfit.cli.runs import must_exist
    from filmfit.errors import UsageError
    from filmfit.records import edits

    must_exist(records)
    if "://" in records and not records.startswith("sqlite"):
        raise UsageError("--records", "are on a server", do="use the server's own backup, or 'filmfit runs export'")
    must_be_writable(file)
    if file.exists():
        raise UsageError(str(file), "is there already", do="name another file")
    edits.backup(records_path(records), file)
    click.echo(f"{file}: whole and sound")


@click.command("check", epilog="Example: filmfit runs check")
@records_option
@json_option
def check(records: str, json_to: str | None) -> None:
    """Look whether the records are sound, and which runs have no usable fit; nothing is repaired."""
    from filmfit.cli.options import write_json
    from filmfit.cli.runs import must_exist
    from filmfit.records import check as job
    from filmfit.records.store import Records
    from filmfit.report.plain import plain

    must_exist(records)
    with Records(records) as store:
        found = job.check(store)
    if json_to is None:
        click.echo("\n".join(plain(line) for line in job.told(found)))
        return
    findings = [{"what": one.what, "runs": list(one.runs)} for one in found]
    write_json({"schema": "filmfit.check/1", "findings": findings}, json_to)
