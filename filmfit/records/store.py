"""The deposition records: runs with revisions of their conditions, and fits that are only ever appended.

Knows what is filed and how it is asked for; the tables are in tables.py, the database in engine.py.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from datetime import UTC, date, datetime
from types import TracebackType
from typing import Any, TypeVar

from sqlalchemy import Engine, and_, func, select
from sqlalchemy.exc import IntegrityError, SQLAlchemyError
from sqlalchemy.orm import Session

from filmfit.errors import RecordsError, nearest
from filmfit.rates.rate import rate_nm_min
from filmfit.records.engine import READ_ONLY, open_engine, told
from filmfit.records.revise import Change, batches, choose, revise
from filmfit.records.tables import EditRow, FitRow, RevisionRow, RunRow
from filmfit.result import Quantity, Result

Got = TypeVar("Got")


@dataclass(frozen=True)
class Filed:
    """Where a fit was filed, and what changed in the run's conditions."""

    run: str
    revision: int
    fit: int
    changes: tuple[Change, ...]


@dataclass(frozen=True)
class RunSummary:
    """A line of `runs list`: a run with its latest usable fit, else its latest."""

    id: str
    date: date
    film: str
    chamber: str
    source: str
    process: str
    fits: int
    answer: str | None
    thickness_nm: Quantity | None
    rate_nm_min: Quantity | None
    kind: str = "run"
    left_out: str | None = None


@dataclass(frozen=True)
class FitRecord:
    """A filed fit."""

    number: int
    revision: int
    created: datetime
    answer: str
    thickness_nm: Quantity | None
    rate_nm_min: Quantity | None
    result: dict[str, Any]
    sample: str
    state: str
    counts: bool


@dataclass(frozen=True)
class RunRecord:
    """A run with its present conditions, their earlier changes, and all its fits."""

    id: str
    date: date
    film: str
    conditions: dict[str, Any]
    revisions: tuple[tuple[int, datetime, tuple[Change, ...]], ...]
    fits: tuple[FitRecord, ...]
    edits: tuple["Edit", ...] = ()
    left_out: str | None = None


@dataclass(frozen=True)
class Edit:
    """A change by a person, with the value before."""

    created: datetime
    who: str
    action: str
    key: str
    old: Any
    new: Any
    because: str


class Records:
    """Open deposition records.

    Args:
        address: a file name or an SQLAlchemy URL; a new file is made.

    Raises:
        RecordsError: they cannot be opened or written.
    """

    def __init__(self, address: str) -> None:
        self.address = address
        self._engine: Engine = open_engine(address)

    def __enter__(self) -> "Records":
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._engine.dispose()

    def file_fit(self, conditions: dict[str, Any], run_file_sha256: str, result: Result) -> Filed:
        """File a fit of a run in one transaction; a run of that id with other conditions gets a new revision.

        Args:
            conditions: everything in the run file as plain JSON types.
            run_file_sha256: checksum of the run file.
            result: what the fit answered.
        """

        def write(session: Session) -> Filed:
            revision, changes = revise(session, conditions, run_file_sha256)
            run_id = revision.run_id
            last = session.scalar(select(func.max(FitRow.number)).where(FitRow.run_id == run_id)) or 0
            depth, rate = result.results.thickness_nm, result.results.rate_nm_min
            session.add(
                FitRow(
                    run_id=run_id, revision_id=revision.id, number=last + 1, answer=result.answer,
                    thickness_nm=_part(depth, "value"), thickness_sigma_nm=_part(depth, "sigma"),
                    thickness_low_nm=_part(depth, "low"), thickness_high_nm=_part(depth, "high"),
                    rate_nm_min=_part(rate, "value"), rate_sigma_nm_min=_part(rate, "sigma"),
                    rate_low_nm_min=_part(rate, "low"), rate_high_nm_min=_part(rate, "high"),
                    result=result.as_dict(), created=datetime.now(UTC), thickness_common_nm=_part(depth, "sigma"),
                )
            )  # fmt: skip
            session.flush()
            choose(session, run_id)
            return Filed(run_id, revision.number, last + 1, changes)

        return self.transact(write)

    def list_runs(self, last: int | None = None, film: str | None = None) -> tuple[RunSummary, ...]:
        """Return runs, the newest first.

        Args:
            last: at most so many.
            film: of this film only.
        """

        def read(session: Session) -> tuple[RunSummary, ...]:
            wanted = select(RunRow).order_by(RunRow.date.desc(), RunRow.id.desc())
            if film is not None:
                wanted = wanted.where(RunRow.film == film)
            rows = session.scalars(wanted.limit(last)).all()
            return tuple(row for part in batches(rows) for row in _summaries(session, part))

        return self.transact(read, reading=True)

    def show(self, run_id: str) -> RunRecord:
        """Return everything filed under a run.

        Raises:
            RecordsError: no run of that id.
        """

        def read(session: Session) -> RunRecord:
            run = session.get(RunRow, run_id)
            if run is None:
                known = session.scalars(select(RunRow.id)).all()
                raise RecordsError(
                    self.address, f"no run '{run_id}'", do=nearest(run_id, known) or "see 'filmfit runs list'"
                )
            revisions = session.scalars(
                select(RevisionRow).where(RevisionRow.run_id == run_id).order_by(RevisionRow.number)
            ).all()
            by_id = {one.id: one for one in revisions}
            present = next(one for one in revisions if one.number == run.revision)
            fits = session.scalars(select(FitRow).where(FitRow.run_id == run_id).order_by(FitRow.number)).all()
            return RunRecord(
                run.id, run.date, run.film, present.conditions,
                tuple((one.number, one.created, tuple(Change(*row) for row in one.changes)) for one in revisions),
                tuple(
                    FitRecord(fit.number, by_id[fit.revision_id].number, fit.created, fit.answer, _thickness(fit),
                              _rate(fit), fit.result, by_id[fit.revision_id].sample, by_id[fit.revision_id].state,
                              fit.number == run.fit)
                    for fit in fits
                ),
                tuple(
                    Edit(one.created, one.who, one.action, one.key, one.old, one.new, one.because)
                    for one in session.scalars(select(EditRow).where(EditRow.run_id == run_id).order_by(EditRow.id))
                ),
                run.left_out,
            )  # fmt: skip

        return self.transact(read, reading=True)

    def transact(self, work: Callable[[Session], Got], reading: bool = False) -> Got:
        """Run one piece of work in one transaction; a writer that lost a race for a number tries again."""
        for attempt in (1, 2, 3):
            try:
                with (
                    self._engine.connect().execution_options(**(READ_ONLY if reading else {})) as connection,
                    Session(connection) as session,
                    session.begin(),
                ):
                    return work(session)
            except IntegrityError as error:
                if attempt == 3:
                    raise told(error, self.address) from error
            except SQLAlchemyError as error:
                raise told(error, self.address) from error
        raise AssertionError("unreachable: the loop returns or raises")


def _part(quantity: Quantity | None, name: str) -> float | None:
    """Return one number of a quantity."""
    return None if quantity is None else getattr(quantity, name)


def _thickness(fit: FitRow) -> Quantity | None:
    """Return a fit's thickness."""
    return _quantity(fit.thickness_nm, fit.thickness_sigma_nm, fit.thickness_low_nm, fit.thickness_high_nm)


def _rate(fit: FitRow) -> Quantity | None:
    """Return a fit's rate."""
    return _quantity(fit.rate_nm_min, fit.rate_sigma_nm_min, fit.rate_low_nm_min, fit.rate_high_nm_min)


def _quantity(value: float | None, sigma: float | None, low: float | None, high: float | None) -> Quantity | None:
    """Return a quantity from its columns, None where all are empty."""
    if value is None and low is None and high is None:
        return None
    return Quantity(value=value, sigma=sigma, low=low, high=high)


def _summaries(session: Session, runs: Sequence[RunRow]) -> list[RunSummary]:
    """Return the lines of some runs, each with the fit that counts and the rate of its present conditions."""
    ids = [run.id for run in runs]
    mine = RunRow.id.in_(ids)
    counted = select(FitRow.run_id, func.count()).where(FitRow.run_id.in_(ids)).group_by(FitRow.run_id)
    counts: dict[str, int] = {row[0]: row[1] for row in session.execute(counted)}
    that_counts = and_(RunRow.id == FitRow.run_id, RunRow.fit == FitRow.number)
    fits = {fit.run_id: fit for fit in session.scalars(select(FitRow).join(RunRow, that_counts).where(mine))}
    present = and_(RunRow.id == RevisionRow.run_id, RunRow.revision == RevisionRow.number)
    found = session.scalars(select(RevisionRow).join(RunRow, present).where(mine))
    revisions = {one.run_id: one.conditions for one in found}
    lines = []
    for run in runs:
        fit = fits.get(run.id)
        depth = _thickness(fit) if fit else None
        time_s = revisions.get(run.id, {}).get("run", {}).get("time_s")
        rate = rate_nm_min(depth, time_s) if depth is not None and time_s else None
        lines.append(
            RunSummary(run.id, run.date, run.film, run.chamber, run.source, run.process, counts.get(run.id, 0),
                       fit.answer if fit else None, depth, rate, run.kind, run.left_out)
        )  # fmt: skip
    return lines
