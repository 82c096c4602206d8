"""`filmfit fit`: the main job for any number of run files.

Knows options, order of output and exit status; the job stands in jobs/fit.py.
"""

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from filmfit.cli.options import json_option, records_option, tell

if TYPE_CHECKING:
    from filmfit.jobs.fit import Fitted
    from filmfit.records.store import Filed

UNUSABLE, FAULTY = 1, 2


def _later(context: click.Context, option: click.Parameter, value: object) -> None:
    """Refuse an option that is not built yet."""
    if value not in (None, False):
        raise click.UsageError(f"{option.opts[0]} is not supported yet", context)


@click.command(epilog="Example: filmfit fit examples/first-run/run.toml --json -")
@click.argument("run_files", nargs=-1, required=True, metavar="RUN.toml...", type=click.Path(path_type=Path))
@json_option
@records_option
@click.option("--no-records", is_flag=True, help="Do not file the result.")
@click.option(
    "--report", type=click.Path(path_type=Path, file_okay=False), metavar="FOLDER", help="Put the picture here."
)
@click.option("--quiet", is_flag=True, help="One line a run.")
@click.option("--verbose", is_flag=True, help="Stages and times on standard error.")
@click.option("--together", is_flag=True, callback=_later, expose_value=False, hidden=True)
@click.option("--map", callback=_later, expose_value=False, hidden=True)
@click.option("--workers", callback=_later, expose_value=False, hidden=True)
@click.option("--cluster", callback=_later, expose_value=False, hidden=True)
def fit(
    run_files: tuple[Path, ...],
    json_to: str | None,
    records: str,
    no_records: bool,
    report: Path | None,
    quiet: bool,
    verbose: bool,
) -> int:
    """Fit each run file: print the answer, draw it, file it in the records.

    Exit status: 0 answered (usable or check), 1 at least one unusable, 2 something could not be read.
    """
    from filmfit.cli.options import write_json

    if verbose:
        _log_to_standard_error()
    _refuse_places(None if no_records else records, json_to, report)
    status, answers = 0, []
    for run_file in run_files:
        answer, code = _one(run_file, None if no_records else records, report, json_to == "-", quiet)
        answers.append(answer)
        status = max(status, code)
    if json_to is not None:
        write_json(answers[0] if len(answers) == 1 else answers, json_to)
    return status


def _refuse_places(records: str | None, json_to: str | None, report: Path | None) -> None:
    """Refuse records, a file or a folder that cannot be written, before anything is computed."""
    from filmfit.cli.options import must_be_writable
    from filmfit.errors import UsageError

    if json_to not in (None, "-"):
        must_be_writable(Path(str(json_to)))
    if report is not None:
        try:
            report.mkdir(parents=True, exist_ok=True)
        except OSError as error:
            raise UsageError(str(report), f"cannot be made: {error.strerror}", do="name another folder") from error
    if records is not None:
        from filmfit.records.store import Records

        with Records(records):
            pass


def _one(
    run_file: Path, records: str | None, report: Path | None, silent: bool, quiet: bool
) -> tuple[dict[str, Any], int]:
    """Fit, file, draw and print one run; a fault costs this run only, a picture's fault the picture only."""
    from filmfit.errors import Faults, FilmfitError, UsageError
    from filmfit.jobs.fit import fit_run

    picture = None
    try:
        with _stage(f"{run_file}: read and fitted"):
            fitted = fit_run(run_file)
        with _stage(f"{run_file}: filed"):
            filed = _file(fitted, records)
    except (Faults, FilmfitError) as error:
        tell(error)
        first = error.errors[0] if isinstance(error, Faults) else error
        return {"run": run_file.stem, "error": first.as_dict()}, FAULTY
    code = UNUSABLE if fitted.result.answer == "unusable" else 0
    try:
        with _stage(f"{run_file}: drawn"):
            picture = _draw(fitted, records, report)
    except UsageError as error:
        tell(error)
        code = FAULTY
    if not silent:
        _print(fitted, filed, picture, quiet)
    return fitted.result.as_dict(), code


def _file(fitted: "Fitted", records: str | None) -> "Filed | None":
    """File a fit in the records."""
    if records is None:
        return None
    from filmfit.records.store import Records

    with Records(records) as store:
        return store.file_fit(fitted.conditions, fitted.run_file_sha256, fitted.result)


def _draw(fitted: "Fitted", records: str | None, report: Path | None) -> Path | None:
    """Draw a fit beside the records, or in the report's folder; without either, not at all."""
    if report is None and records is None:
        return None
    from filmfit.cli.options import records_path, write_whole
    from filmfit.report.figures import draw_fit

    folder = report if report is not None else records_path(str(records)).parent
    picture = folder / f"{fitted.result.run}-fit.svg"
    write_whole(picture, draw_fit(fitted.result, fitted.curves))
    return picture


def _print(fitted: "Fitted", filed: "Filed | None", picture: Path | None, quiet: bool) -> None:
    """Print a result for a person."""
    from filmfit.report.text import fit_text, one_line

    if quiet:
        click.echo(one_line(fitted.result))
        return
    tail = []
    if filed is not None:
        tail.append(f"filed as fit {filed.fit} of run {filed.run}, revision {filed.revision}")
        tail += [f"  changed: {one.key} from {one.old} to {one.new}" for one in filed.changes]
    if picture is not None:
        tail.append(f"picture: {picture}")
    click.echo(fit_text(fitted.result, tail))


@contextmanager
def _stage(name: str) -> Iterator[None]:
    """Log a stage of the work with the time it took."""
    import logging
    import time

    started = time.perf_counter()
    yield
    logging.getLogger("filmfit.cli").info("%s in %.2f s", name, time.perf_counter() - started)


def _log_to_standard_error() -> None:
    """Show filmfit's own log lines, and no other package's."""
    import logging

    shown = logging.StreamHandler()
    shown.setFormatter(logging.Formatter("%(relativeCreated)7.0f ms  %(name)s: %(message)s"))
    log = logging.getLogger("filmfit")
    log.addHandler(shown)
    log.setLevel(logging.INFO)
