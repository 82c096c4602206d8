"""The tables of the deposition records.

Knows columns, keys and how times and JSON are kept; does not know how a database is opened.
"""

import json
from datetime import UTC, date, datetime
from typing import Any

from sqlalchemy import (
    JSON,
    Boolean,
    Date,
    DateTime,
    Dialect,
    ForeignKey,
    Index,
    MetaData,
    String,
    Text,
    TypeDecorator,
    UniqueConstraint,
    false,
)
from sqlalchemy.orm import DeclarativeBase, Mapped, mapped_column

NAMING = {
    "ix": "ix_%(column_0_label)s",
    "uq": "uq_%(table_name)s_%(column_0_N_name)s",
    "ck": "ck_%(table_name)s_%(constraint_name)s",
    "fk": "fk_%(table_name)s_%(column_0_name)s_%(referred_table_name)s",
    "pk": "pk_%(table_name)s",
}


class Utc(TypeDecorator[datetime]):
    """A moment, kept in UTC on databases that drop time zones."""

    impl = DateTime(timezone=True)
    cache_ok = True

    def process_bind_param(self, value: datetime | None, dialect: Dialect) -> datetime | None:
        """Turn a moment into UTC; one without a zone is refused."""
        if value is None:
            return None
        if value.tzinfo is None:
            raise ValueError("a time without a zone")
        return value.astimezone(UTC)

    def process_result_value(self, value: datetime | None, dialect: Dialect) -> datetime | None:
        """Give a moment its zone back."""
        if value is None or value.tzinfo is not None:
            return value
        return value.replace(tzinfo=UTC)


class Base(DeclarativeBase):
    """Base of all tables."""

    metadata = MetaData(naming_convention=NAMING)


class RunRow(Base):
    """One deposition, by its id; what is often asked for, of its latest revision."""

    __tablename__ = "runs"
    __table_args__ = (Index("ix_runs_chamber_source", "chamber", "source"),)

    id: Mapped[str] = mapped_column(String(100), primary_key=True)
    date: Mapped[date] = mapped_column(Date, index=True)
    film: Mapped[str] = mapped_column(String(200), index=True)
    chamber: Mapped[str] = mapped_column(String(200))
    source: Mapped[str] = mapped_column(String(200))
    process: Mapped[str] = mapped_column(String(100))
    created: Mapped[datetime] = mapped_column(Utc)
    kind: Mapped[str] = mapped_column(String(40), server_default="run")
    revision: Mapped[int | None]  # the number of the revision whose conditions count
    fit: Mapped[int | None]  # the number of the fit that counts
    confirmed: Mapped[bool] = mapped_column(Boolean, server_default=false())  # a person chose that fit
    left_out: Mapped[str | None] = mapped_column(Text)  # why a person left the run out


class RevisionRow(Base):
    """The conditions of a run as once filed; a change is a new row."""

    __tablename__ = "revisions"
    __table_args__ = (UniqueConstraint("run_id", "number"),)

    id: Mapped[int] = mapped_column(primary_key=True)
    run_id: Mapped[str] = mapped_column(ForeignKey("runs.id"), index=True)
    number: Mapped[int]
    conditions: Mapped[dict[str, Any]] = mapped_column(JSON)
    changes: Mapped[list[Any]] = mapped_column(JSON)
    run_file: Mapped[str] = mapped_column(String(80))
    created: Mapped[datetime] = mapped_column(Utc)
    sample: Mapped[str] = mapped_column(String(200), server_default="-")
    state: Mapped[str] = mapped_column(String(200), server_default="as-deposited")


class FitRow(Base):
    """One fit of a run, whole; appended, never overwritten."""

    __tablename__ = "fits"
    __table_args__ = (UniqueConstraint("run_id", "number"),)

    id: Mapped[int] = mapped_column(primary_key=True)
    run_id: Mapped[str] = mapped_column(ForeignKey("runs.id"), index=True)
    revision_id: Mapped[int] = mapped_column(ForeignKey("revisions.id"))
    number: Mapped[int]
    answer: Mapped[str] = mapped_column(String(20))
    thickness_nm: Mapped[float | None]
    thickness_sigma_nm: Mapped[float | None]
    thickness_low_nm: Mapped[float | None]
    thickness_high_nm: Mapped[float | None]
    rate_nm_min: Mapped[float | None]
    rate_sigma_nm_min: Mapped[float | None]
    rate_low_nm_min: Mapped[float | None]
    rate_high_nm_min: Mapped[float | None]
    result: Mapped[dict[str, Any]] = mapped_column(JSON)
    created: Mapped[datetime] = mapped_column(Utc)
    thickness_common_nm: Mapped[float | None]  # the part of sigma that runs of one instrument share


class EventRow(Base):
    """What happened to a chamber, a source or an instrument on a day."""

    __tablename__ = "events"

    id: Mapped[int] = mapped_column(primary_key=True)
    chamber: Mapped[str] = mapped_column(String(200), index=True)
    source: Mapped[str | None] = mapped_column(String(200))  # None: all sources of the chamber
    date: Mapped[date] = mapped_column(Date)
    kind: Mapped[str] = mapped_column(String(40))
    note: Mapped[str] = mapped_column(Text)
    created: Mapped[datetime] = mapped_column(Utc)


class EditRow(Base):
    """One change by a person: who, when, what, why, and the value before; appended, never overwritten."""

    __tablename__ = "edits"

    id: Mapped[int] = mapped_column(primary_key=True)
    run_id: Mapped[str | None] = mapped_column(ForeignKey("runs.id"), index=True)
    action: Mapped[str] = mapped_column(String(40))
    key: Mapped[str] = mapped_column(String(200))
    old: Mapped[Any] = mapped_column(JSON)
    new: Mapped[Any] = mapped_column(JSON)
    who: Mapped[str] = mapped_column(String(200))
    because: Mapped[str] = mapped_column(Text)
    created: Mapped[datetime] = mapped_column(Utc)


class MarkRow(Base):
    """What this database is: one row that no other program's file has."""

    __tablename__ = "filmfit_mark"

    id: Mapped[int] = mapped_column(primary_key=True)
    says: Mapped[str] = mapped_column(Text)


def dumps(value: Any) -> str:
    """Return JSON without NaN: SQLite would keep it, PostgreSQL would not."""
    return json.dumps(value, allow_nan=False, ensure_ascii=False)
