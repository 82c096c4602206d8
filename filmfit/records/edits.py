"""Changes by persons: confirm a fit, amend a condition, leave a run out, tell an event; each with who, when, why.

Knows what is kept of a change; does not judge whether the new value is allowed.
"""

import sqlite3
from contextlib import closing
from dataclasses import dataclass
from datetime import UTC, date, datetime
from pathlib import Path
from typing import Any

from sqlalchemy import select
from sqlalchemy.orm import Session

from filmfit.errors import RecordsError, nearest
from filmfit.records.revise import AMENDED, choose, revise
from filmfit.records.store import Records
from filmfit.records.tables import EditRow, EventRow, FitRow, RevisionRow, RunRow

EVENT_KINDS = ("target-changed", "vented", "shields-changed", "lamp-or-mirror-changed", "other")


@dataclass(frozen=True)
class Event:
    """What happened to a chamber, or to one source in it, on a day: one of EVENT_KINDS."""

    chamber: str
    date: date
    kind: str
    note: str
    source: str | None = None

    def concerns(self, chamber: str, source: str) -> bool:
        """Say whether the runs of a source in a chamber are concerned."""
        return self.chamber == chamber and self.source in (None, source)


def confirm(records: Records, run_id: str, fit: int, who: str, because: str = "") -> int | None:
    """Say which fit of a run counts; return the number that counted before.

    Raises:
        RecordsError: no such run or fit.
    """

    def work(session: Session) -> int | None:
        run = _run(session, records, run_id)
        numbers = session.scalars(select(FitRow.number).where(FitRow.run_id == run_id).order_by(FitRow.number)).all()
        if fit not in numbers:
            have = ", ".join(str(one) for one in numbers) or "none: the run has no fits"
            raise RecordsError(records.address, f"run '{run_id}' has no fit {fit}", have)
        before = run.fit
        session.add(_edit(run_id, "confirm", "fit", before, fit, who, because))
        run.fit, run.confirmed = fit, True
        return before

    return records.transact(work)


def conditions(records: Records, run_id: str) -> dict[str, Any]:
    """Return a run's present conditions.

    Raises:
        RecordsError: no such run.
    """
    return records.transact(lambda session: _present(session, _run(session, records, run_id)).conditions, reading=True)


def amend(
    records: Records, run_id: str, new: dict[str, Any], changes: dict[str, tuple[Any, Any]], who: str, because: str
) -> int:
    """File changed conditions as a new revision; return its number.

    Args:
        records: open records.
        run_id: the run.
        new: its conditions, whole.
        changes: old and new value by key.
        who: who changed them.
        because: why.
    """

    def work(session: Session) -> int:
        _run(session, records, run_id)
        revision, _ = revise(session, new, AMENDED)
        for key, (old, value) in changes.items():
            session.add(_edit(run_id, "amend", key, old, value, who, because))
        choose(session, run_id)
        return revision.number

    return records.transact(work)


def leave_out(records: Records, run_id: str, who: str, because: str | None) -> str | None:
    """Leave a run out of rates and trends, or, with because = None, take it in again; return the reason before."""

    def work(session: Session) -> str | None:
        run = _run(session, records, run_id)
        before = run.left_out
        action = "take-in" if because is None else "leave-out"
        session.add(_edit(run_id, action, "left_out", before, because, who, because or ""))
        run.left_out = because
        return before

    return records.transact(work)


def tell_event(records: Records, event: Event, who: str) -> bool:
    """File an event; return False where the same one is there already."""

    def work(session: Session) -> bool:
        same = select(EventRow).where(
            EventRow.chamber == event.chamber,
            EventRow.date == event.date,
            EventRow.kind == event.kind,
            EventRow.source.is_not_distinct_from(event.source),
        )
        if session.scalars(same).first() is not None:
            return False
        now = datetime.now(UTC)
        columns = {"chamber": event.chamber, "source": event.source, "kind": event.kind, "note": event.note}
        session.add(EventRow(date=event.date, created=now, **columns))
        told = {**columns, "date": event.date.isoformat()}
        session.add(_edit(None, "event", event.kind, None, told, who, event.note))
        return True

    return records.transact(work)


def events(records: Records) -> tuple[Event, ...]:
    """Return all events, the oldest first."""

    def work(session: Session) -> tuple[Event, ...]:
        rows = session.scalars(select(EventRow).order_by(EventRow.date, EventRow.id))
        return tuple(Event(one.chamber, one.date, one.kind, one.note, one.source) for one in rows)

    return records.transact(work, reading=True)


def backup(address: Path, to: Path) -> None:
    """Copy an SQLite file of records whole by SQLite's own call, while others may be writing.

    Args:
        address: the file of the records.
        to: a file that is not there yet.

    Raises:
        RecordsError: it cannot be copied; what was begun is taken away.
    """
    try:
        with closing(sqlite3.connect(address)) as source, closing(sqlite3.connect(to)) as target:
            source.backup(target)
            sound = target.execute("PRAGMA integrity_check").fetchone()
    except sqlite3.Error as error:
        to.unlink(missing_ok=True)
        raise RecordsError(str(to), f"the backup failed ({error})", do="name another place") from error
    if sound != ("ok",):
        to.unlink(missing_ok=True)
        raise RecordsError(str(address), f"is damaged ({sound[0]})", do="restore an older backup")


def _run(session: Session, records: Records, run_id: str) -> RunRow:
    """Return a run's row."""
    run = session.get(RunRow, run_id)
    if run is None:
        known = session.scalars(select(RunRow.id)).all()
        do = nearest(run_id, known) or "see 'filmfit runs list'"
        raise RecordsError(records.address, f"no run '{run_id}'", do=do)
    return run


def _present(session: Session, run: RunRow) -> RevisionRow:
    """Return the revision whose conditions count."""
    wanted = select(RevisionRow).where(RevisionRow.run_id == run.id, RevisionRow.number == run.revision)
    return session.scalars(wanted).one()


def _edit(run_id: str | None, action: str, key: str, old: Any, new: Any, who: str, because: str) -> EditRow:
    """Return a change as it is kept."""
    return EditRow(run_id=run_id, action=action, key=key, old=old, new=new, who=who, because=because,
                   created=datetime.now(UTC))  # fmt: skip
