"""Runs with their conditions and the result that counts, in the order of time, as rates and trends ask for them.

Knows how they are fetched fast; computes nothing.
"""

from dataclasses import dataclass
from datetime import date
from typing import Any

from sqlalchemy import and_, select
from sqlalchemy.orm import Session

from filmfit.records.revise import NOT_STATED
from filmfit.records.store import Records
from filmfit.records.tables import FitRow, RevisionRow, RunRow


@dataclass(frozen=True)
class Deposited:
    """A run as the records have it now: conditions, and the thickness that counts with its parts of uncertainty.

    `result` is the whole result where it was asked for.
    """

    id: str
    date: date
    film: str
    chamber: str
    source: str
    process: str
    kind: str
    conditions: dict[str, Any]
    answer: str | None
    thickness_nm: float | None
    sigma_nm: float | None
    common_nm: float | None
    result: dict[str, Any] | None = None

    @property
    def run(self) -> dict[str, Any]:
        """The keys of [run]."""
        keys: dict[str, Any] = self.conditions["run"]
        return keys


def deposited(
    records: Records,
    film: str | None = None,
    chamber: str | None = None,
    source: str | None = None,
    process: str | None = None,
    with_result: bool = False,
    left_out: bool = False,
) -> tuple[Deposited, ...]:
    """Return the runs that were not left out, the oldest first; each argument narrows the choice.

    Args:
        records: open records.
        film, chamber, source, process: as the run file states them; "-" where it states none.
        with_result: fetch each run's whole result too.
        left_out: the runs that were left out as well.

    Raises:
        RecordsError: they cannot be read.
    """
    columns: list[Any] = [
        RunRow.id, RunRow.date, RunRow.film, RunRow.chamber, RunRow.source, RunRow.process, RunRow.kind,
        RevisionRow.conditions, FitRow.answer, FitRow.thickness_nm, FitRow.thickness_sigma_nm,
        FitRow.thickness_common_nm,
    ]  # fmt: skip
    if with_result:
        columns.append(FitRow.result)
    wanted = (
        select(*columns)
        .join(RevisionRow, and_(RevisionRow.run_id == RunRow.id, RevisionRow.number == RunRow.revision))
        .outerjoin(FitRow, and_(FitRow.run_id == RunRow.id, FitRow.number == RunRow.fit))
        .order_by(RunRow.date, RunRow.id)
    )
    if not left_out:
        wanted = wanted.where(RunRow.left_out.is_(None))
    given = ((RunRow.film, film), (RunRow.chamber, chamber), (RunRow.source, source), (RunRow.process, process))
    for column, value in given:
        if value is not None:
            wanted = wanted.where(column == (value or NOT_STATED))

    def work(session: Session) -> tuple[Deposited, ...]:
        return tuple(Deposited(*row) for row in session.execute(wanted).all())

    return records.transact(work, reading=True)
