"""Many runs of a log filed at once: all or none, and nothing twice.

Knows how rows are compared with what is there; does not read files.
"""

from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, datetime
from typing import Any

from sqlalchemy import func, insert, select
from sqlalchemy.orm import Session

from filmfit.rates.rate import SECONDS_PER_MINUTE
from filmfit.records.revise import AMENDED, Change, batches, choose, differences, fields, piece
from filmfit.records.store import Records
from filmfit.records.tables import FitRow, RevisionRow, RunRow
from filmfit.result import COVERAGE_FACTOR

IMPORTED = "filmfit.imported/1"  # stands where a fit's own result has filmfit.result/1


@dataclass(frozen=True)
class Incoming:
    """One run of a log: its conditions, and its thickness where the log has one.

    `sigma_nm` is the whole standard uncertainty, `common_nm` the part of it that all runs of the log share.
    """

    conditions: dict[str, Any]
    thickness_nm: float | None = None
    sigma_nm: float | None = None
    common_nm: float | None = None

    @property
    def id(self) -> str:
        """The run's id."""
        return str(self.conditions["run"]["id"])

    def depth(self) -> dict[str, float | None]:
        """Return the thickness as the columns of a fit have it."""
        value, sigma = self.thickness_nm, self.sigma_nm
        half = None if sigma is None else COVERAGE_FACTOR * sigma
        return {
            "thickness_nm": value,
            "thickness_sigma_nm": sigma,
            "thickness_low_nm": None if value is None or half is None else value - half,
            "thickness_high_nm": None if value is None or half is None else value + half,
            "thickness_common_nm": self.common_nm,
        }


@dataclass(frozen=True)
class BroughtIn:
    """What an import did, or would do, with one run: new, changed or same."""

    run: str
    what: str
    changes: tuple[Change, ...]


def bring_in(records: Records, rows: Sequence[Incoming], sha256: str, dry_run: bool = False) -> tuple[BroughtIn, ...]:
    """File the runs of a log in one transaction; what is there already in the same words is left as it is.

    Args:
        records: open records.
        rows: the runs, each sample and state of an id once.
        sha256: checksum of the log.
        dry_run: only tell what would be done.

    Raises:
        RecordsError: the records cannot be read or written; nothing is filed then.
    """

    def work(session: Session) -> tuple[BroughtIn, ...]:
        done: list[BroughtIn] = []
        for part in batches(rows):
            done += _part(session, part, sha256, dry_run)
        return tuple(done)

    return records.transact(work, reading=dry_run)


def _part(session: Session, rows: Sequence[Incoming], sha256: str, dry_run: bool) -> list[BroughtIn]:
    """File one part of a log."""
    ids = [row.id for row in rows]
    present = select(RunRow.id).where(RunRow.id.in_(ids)).order_by(RunRow.id)
    # other writers of these runs wait here, in one order (SQLite has one writer at a time anyway)
    there = set(session.scalars(present if dry_run else present.with_for_update()))
    first: dict[str, Incoming] = {}
    later: list[Incoming] = []  # of runs that are there, or further samples and states of new ones
    for row in rows:
        if row.id in there or row.id in first:
            later.append(row)
        else:
            first[row.id] = row
    done = [BroughtIn(row.id, "new", ()) for row in first.values()]
    if not dry_run:
        _insert(session, list(first.values()), sha256)
    if later:
        known = _known(session, sorted({row.id for row in later}))
        done += [_merge(session, row, known, sha256, dry_run) for row in later]
    return done


def _insert(session: Session, rows: Sequence[Incoming], sha256: str) -> None:
    """Insert runs that were not there, with their first revision and thickness."""
    if not rows:
        return
    now = datetime.now(UTC)
    session.execute(
        insert(RunRow),
        [{"id": row.id, "created": now, "revision": 1, "fit": 1 if row.thickness_nm is not None else None,
          **fields(row.conditions["run"])} for row in rows],
    )  # fmt: skip
    revisions = [_revision(row, 1, [], sha256, now) for row in rows]
    returning = insert(RevisionRow).returning(RevisionRow.id, sort_by_parameter_order=True)
    made = session.scalars(returning, revisions).all()
    fits = [_fit(row, number, 1, now) for row, number in zip(rows, made, strict=True) if row.thickness_nm is not None]
    if fits:
        session.execute(insert(FitRow), fits)


def _known(session: Session, ids: Sequence[str]) -> dict[tuple[str, str, str], tuple[RevisionRow, FitRow | None]]:
    """Return, by run, sample and state, the latest revision and the latest imported thickness."""
    known: dict[tuple[str, str, str], tuple[RevisionRow, FitRow | None]] = {}
    pieces = {}
    for one in session.scalars(select(RevisionRow).where(RevisionRow.run_id.in_(ids)).order_by(RevisionRow.number)):
        pieces[one.id] = key = (one.run_id, one.sample, one.state)
        if one.run_file != AMENDED:  # the same log again does not take back what a person amended since
            known[key] = (one, None)
    for fit in session.scalars(select(FitRow).where(FitRow.run_id.in_(ids)).order_by(FitRow.number)):
        if fit.result.get("schema") == IMPORTED:
            key = pieces[fit.revision_id]
            known[key] = (known[key][0], fit)
    return known


def _merge(
    session: Session, row: Incoming, known: dict[tuple[str, str, str], tuple[RevisionRow, FitRow | None]],
    sha256: str, dry_run: bool,
) -> BroughtIn:  # fmt: skip
    """File what is new in a run that was there: a revision, a thickness, both or nothing."""
    revision, fit = known.get((row.id, *piece(row.conditions)), (None, None))
    changes = () if revision is None else differences(revision.conditions, row.conditions)
    before = None if fit is None else fit.thickness_nm
    parts = row.depth()
    other = fit is None or any(getattr(fit, name) != value for name, value in parts.items())
    new_depth = row.thickness_nm is not None and other
    if new_depth:
        changes = (*changes, Change("thickness_nm", before, row.thickness_nm))
    if revision is not None and not changes:
        return BroughtIn(row.id, "same", ())
    if not dry_run:
        _append(session, row, revision, changes, new_depth, sha256)
    return BroughtIn(row.id, "new" if revision is None else "changed", changes)


def _append(
    session: Session, row: Incoming, revision: RevisionRow | None, changes: Sequence[Change], new_depth: bool, sha: str
) -> None:
    """Append a revision where conditions changed and a fit where the thickness did."""
    now = datetime.now(UTC)
    told = [[one.key, one.old, one.new] for one in changes if one.key != "thickness_nm"]
    if revision is None or told:
        last = session.scalar(select(func.max(RevisionRow.number)).where(RevisionRow.run_id == row.id)) or 0
        revision = RevisionRow(**_revision(row, last + 1, told, sha, now))
        session.add(revision)
        session.flush()
    if new_depth:
        last = session.scalar(select(func.max(FitRow.number)).where(FitRow.run_id == row.id)) or 0
        session.execute(insert(FitRow), [_fit(row, revision.id, last + 1, now)])
    session.flush()
    choose(session, row.id)


def _revision(row: Incoming, number: int, changes: list[Any], sha256: str, now: datetime) -> dict[str, Any]:
    """Return a revision's columns."""
    sample, state = piece(row.conditions)
    return {"run_id": row.id, "number": number, "conditions": row.conditions, "changes": changes,
            "run_file": f"sha256:{sha256}", "created": now, "sample": sample, "state": state}  # fmt: skip


def _fit(row: Incoming, revision_id: int, number: int, now: datetime) -> dict[str, Any]:
    """Return the columns of a thickness that a log brought."""
    parts = row.depth()
    time_s = row.conditions["run"].get("time_s")
    per_nm = SECONDS_PER_MINUTE / time_s if time_s else None
    ends = (("", "value"), ("_sigma", "sigma"), ("_low", "low"), ("_high", "high"))
    rates: dict[str, float | None] = {}
    depth: dict[str, float | None] = {}
    for part, name in ends:
        value = parts[f"thickness{part}_nm"]
        depth[name] = value
        rates[f"rate{part}_nm_min"] = None if value is None or per_nm is None else value * per_nm
    told = {"schema": IMPORTED, "run": row.id, "results": {"thickness_nm": depth}}
    return {"run_id": row.id, "revision_id": revision_id, "number": number, "answer": "usable", "created": now,
            "result": told, **parts, **rates}  # fmt: skip
