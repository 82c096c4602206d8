"""Whether the records are sound: the file itself, what refers to what, runs that no fit answers for.

Knows how to look; repairs nothing.
"""

from dataclasses import dataclass

from sqlalchemy import and_, exists, select
from sqlalchemy.orm import Session

from filmfit.records.store import Records
from filmfit.records.tables import FitRow, RevisionRow, RunRow

SHOWN = 20


@dataclass(frozen=True)
class Finding:
    """Something a person should look at: what, and which runs."""

    what: str
    runs: tuple[str, ...] = ()


def check(records: Records) -> tuple[Finding, ...]:
    """Return what is wrong with the records, or worth knowing; empty where all is sound.

    Raises:
        RecordsError: they cannot be read.
    """
    return records.transact(_findings, reading=True)


def _findings(session: Session) -> tuple[Finding, ...]:
    """Return everything found."""
    found = []
    if session.get_bind().dialect.name == "sqlite":
        connection = session.connection()
        said = [str(row[0]) for row in connection.exec_driver_sql("PRAGMA integrity_check")]
        if said != ["ok"]:
            found.append(Finding(f"the file is damaged: {said[0]}"))
        orphans = {str(row[0]) for row in connection.exec_driver_sql("PRAGMA foreign_key_check")}
        found += [Finding(f"rows of '{table}' refer to what is not there") for table in sorted(orphans)]
    this = and_(RevisionRow.run_id == RunRow.id, RevisionRow.number == RunRow.revision)
    counted = and_(FitRow.run_id == RunRow.id, FitRow.number == RunRow.fit)
    lost = ~exists().where(counted)
    usable = exists().where(FitRow.run_id == RunRow.id, FitRow.answer == "usable")
    crossed = exists().where(FitRow.revision_id == RevisionRow.id, FitRow.run_id != RevisionRow.run_id)
    for what, wanted in (
        ("no conditions that count", select(RunRow.id).where(~exists().where(this))),
        (
            "the fit that counts is not there",
            select(RunRow.id).where(RunRow.fit.is_not(None), lost),
        ),
        ("a fit of another run's conditions", select(RevisionRow.run_id).where(crossed)),
        ("no usable fit", select(RunRow.id).where(~usable)),
    ):
        runs = tuple(session.scalars(wanted.order_by(RunRow.id if "fit of" not in what else RevisionRow.run_id)))
        if runs:
            found.append(Finding(what, runs))
    return tuple(found)


def told(found: tuple[Finding, ...]) -> list[str]:
    """Return findings as lines for a person."""
    lines = []
    for one in found:
        more = f" and {len(one.runs) - SHOWN} more" if len(one.runs) > SHOWN else ""
        lines.append(f"{one.what}: {', '.join(one.runs[:SHOWN])}{more}" if one.runs else one.what)
    return lines or ["sound"]
