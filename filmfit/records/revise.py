"""Revisions of a run's conditions, and which revision and which fit of a run count.

Knows samples and states: each has its own row of revisions; the run's own conditions are those of the sample that was
filed first as deposited. Does not open a transaction.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from datetime import UTC, date, datetime
from typing import Any, TypeVar

from sqlalchemy import select
from sqlalchemy.orm import Session

from filmfit.records.tables import FitRow, RevisionRow, RunRow

NOT_STATED = "-"
AMENDED = "amended"  # stands where a revision that a file brought has the file's checksum
AS_DEPOSITED = "as-deposited"
BATCH = 500  # numbers of values in one IN (...): SQLite's oldest limit is 999
Row = TypeVar("Row")


@dataclass(frozen=True)
class Change:
    """A condition that a new revision changed: its key, the old and the new value (None: absent)."""

    key: str
    old: Any
    new: Any


def revise(session: Session, conditions: dict[str, Any], sha256: str) -> tuple[RevisionRow, tuple[Change, ...]]:
    """Return the revision of these conditions, made where they are new, and what changed.

    Args:
        session: an open transaction.
        conditions: everything in the run file as plain JSON types.
        sha256: checksum of the run file, or AMENDED.
    """
    keys = conditions["run"]
    sample, state = piece(conditions)
    # other writers of this run wait here (SQLite has one writer at a time anyway)
    run = session.get(RunRow, keys["id"], with_for_update=True)
    now = datetime.now(UTC)
    if run is None:
        run = RunRow(id=keys["id"], created=now, **fields(keys))
        session.add(run)
        session.flush()
    rows = session.scalars(select(RevisionRow).where(RevisionRow.run_id == run.id).order_by(RevisionRow.number)).all()
    mine = [one for one in rows if (one.sample, one.state) == (sample, state)]
    latest = mine[-1] if mine else None
    filed = next((one for one in reversed(mine) if one.run_file != AMENDED), None)
    if latest is not None and filed is not None and sha256 != AMENDED and filed.conditions == conditions:
        return latest, ()  # the same file again does not take back what a person amended since
    changes = differences(latest.conditions, conditions) if latest is not None else ()
    if latest is not None and not changes:
        return latest, ()
    made = RevisionRow(
        run_id=run.id, number=rows[-1].number + 1 if rows else 1, conditions=conditions, run_file=sha256, created=now,
        changes=[[one.key, one.old, one.new] for one in changes], sample=sample, state=state,
    )  # fmt: skip
    session.add(made)
    session.flush()
    choose(session, run.id)
    return made, changes


def choose(session: Session, run_id: str) -> None:
    """Set which revision and which fit of a run count: of the first sample as deposited, the latest of each.

    A fit that a person confirmed stays; else the latest usable one counts, else the latest.
    """
    run = session.get_one(RunRow, run_id)
    rows = session.scalars(select(RevisionRow).where(RevisionRow.run_id == run_id).order_by(RevisionRow.number)).all()
    first = next((one for one in rows if one.state == AS_DEPOSITED), rows[0])
    mine = [one for one in rows if (one.sample, one.state) == (first.sample, first.state)]
    run.revision = mine[-1].number
    for name, value in fields(mine[-1].conditions["run"]).items():
        setattr(run, name, value)
    if run.confirmed:
        return
    of = FitRow.revision_id.in_([one.id for one in mine])
    answers = session.execute(select(FitRow.number, FitRow.answer).where(of).order_by(FitRow.number.desc())).all()
    usable = next((number for number, answer in answers if answer == "usable"), None)
    run.fit = usable if usable is not None else answers[0][0] if answers else None


def piece(conditions: dict[str, Any]) -> tuple[str, str]:
    """Return the name and the state of the sample that conditions speak of."""
    sample = conditions.get("sample") or {}
    return str(sample.get("name") or NOT_STATED), str(sample.get("state") or AS_DEPOSITED)


def fields(keys: dict[str, Any]) -> dict[str, Any]:
    """Return the columns of a run's row from the keys of [run]."""
    return {
        "date": date.fromisoformat(str(keys["date"])),
        "film": keys["film"],
        "chamber": keys.get("chamber") or NOT_STATED,
        "source": keys.get("source") or NOT_STATED,
        "process": keys.get("process") or NOT_STATED,
        "kind": keys.get("kind") or "run",
    }


def differences(old: Any, new: Any, key: str = "") -> tuple[Change, ...]:
    """Return what differs between two sets of conditions, by dotted key; lists are compared whole."""
    if isinstance(old, dict) and isinstance(new, dict):
        return tuple(
            change
            for name in sorted({*old, *new})
            for change in differences(old.get(name), new.get(name), f"{key}.{name}" if key else str(name))
        )
    return () if old == new else (Change(key, old, new),)


def batches(rows: Sequence[Row]) -> Iterator[Sequence[Row]]:
    """Yield rows in parts short enough for one query."""
    yield from (rows[at : at + BATCH] for at in range(0, len(rows), BATCH))
