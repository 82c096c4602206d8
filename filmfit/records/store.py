"""The deposition records: runs with revisions of their conditions, and fits that are only ever appended.

Knows what is filed and how it is asked for; the tables are in tables.py, the database in engine.py.
"""

from collections.abc import Callable
from dataclasses import dataclass
from datetime import UTC, date, datetime
from types import TracebackType
from typing import Any, TypeVar

from sqlalchemy import Engine, func, select
from sqlalchemy.exc import IntegrityError, SQLAlchemyError
from sqlalchemy.orm import Session

from filmfit.errors import RecordsError, nearest
from filmfit.records.engine import READ_ONLY, open_engine, told
from filmfit.records.tables import FitRow, RevisionRow, RunRow
from filmfit.result import Quantity, Result

NOT_STATED = "-"
Got = TypeVar("Got")


@dataclass(frozen=True)
class Change:
    """A condition that a new revision changed: its key, the old and the new value (None: absent)."""

    key: str
    old: Any
    new: Any


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


@dataclass(frozen=True)
class RunRecord:
    """A run with its present conditions, their earlier changes, and all its fits."""

    id: str
    date: date
    film: str
    conditions: dict[str, Any]
    revisions: tuple[tuple[int, datetime, tuple[Change, ...]], ...]
    fits: tuple[FitRecord, ...]


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
            revision, changes = _revision(session, conditions, run_file_sha256)
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
                    result=result.as_dict(), created=datetime.now(UTC),
                )
            )  # fmt: skip
            return Filed(run_id, revision.number, last + 1, changes)

        return self._do(write)

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
            fits: dict[str, list[FitRow]] = {}
            ids = [row.id for row in rows]
            for part in range(0, len(ids), 500):
                found = select(FitRow).where(FitRow.run_id.in_(ids[part : part + 500])).order_by(FitRow.number)
                for fit in session.scalars(found):
                    fits.setdefault(fit.run_id, []).append(fit)
            return tuple(_summary(row, fits.get(row.id, [])) for row in rows)

        return self._do(read, reading=True)

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
            numbers = {one.id: one.number for one in revisions}
            fits = session.scalars(select(FitRow).where(FitRow.run_id == run_id).order_by(FitRow.number)).all()
            return RunRecord(
                run.id, run.date, run.film, revisions[-1].conditions,
                tuple((one.number, one.created, tuple(Change(*row) for row in one.changes)) for one in revisions),
                tuple(
                    FitRecord(fit.number, numbers[fit.revision_id], fit.created, fit.answer, _thickness(fit),
                              _rate(fit), fit.result)
                    for fit in fits
                ),
            )  # fmt: skip

        return self._do(read, reading=True)

    def _do(self, work: Callable[[Session], Got], reading: bool = False) -> Got:
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


def _revision(session: Session, conditions: dict[str, Any], sha256: str) -> tuple[RevisionRow, tuple[Change, ...]]:
    """Return the run's revision of these conditions, made where they are new."""
    keys = conditions["run"]
    run = session.get(RunRow, keys["id"])
    fields = {
        "date": date.fromisoformat(str(keys["date"])),
        "film": keys["film"],
        "chamber": keys.get("chamber") or NOT_STATED,
        "source": keys.get("source") or NOT_STATED,
        "process": keys.get("process") or NOT_STATED,
    }
    now = datetime.now(UTC)
    latest = None
    if run is None:
        session.add(RunRow(id=keys["id"], created=now, **fields))
    else:
        latest = session.scalar(
            select(RevisionRow).where(RevisionRow.run_id == run.id).order_by(RevisionRow.number.desc()).limit(1)
        )
    changes = differences(latest.conditions, conditions) if latest is not None else ()
    if latest is not None and not changes:
        return latest, ()
    if run is not None:
        for name, value in fields.items():
            setattr(run, name, value)
    made = RevisionRow(
        run_id=keys["id"], number=1 if latest is None else latest.number + 1, conditions=conditions,
        changes=[[one.key, one.old, one.new] for one in changes], run_file=sha256, created=now,
    )  # fmt: skip
    session.flush()
    session.add(made)
    session.flush()
    return made, changes


def differences(old: Any, new: Any, key: str = "") -> tuple[Change, ...]:
    """Return what differs between two sets of conditions, by dotted key; lists are compared whole."""
    if isinstance(old, dict) and isinstance(new, dict):
        return tuple(
            change
            for name in sorted({*old, *new})
            for change in differences(old.get(name), new.get(name), f"{key}.{name}" if key else str(name))
        )
    return () if old == new else (Change(key, old, new),)


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


def _summary(run: RunRow, fits: list[FitRow]) -> RunSummary:
    """Return a run's line: its latest usable fit counts, else its latest."""
    counted = next((fit for fit in reversed(fits) if fit.answer == "usable"), fits[-1] if fits else None)
    return RunSummary(
        run.id, run.date, run.film, run.chamber, run.source, run.process, len(fits),
        counted.answer if counted else None,
        _thickness(counted) if counted else None,
        _rate(counted) if counted else None,
    )  # fmt: skip
