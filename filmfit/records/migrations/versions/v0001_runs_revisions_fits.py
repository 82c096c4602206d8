"""Runs, revisions of their conditions, and fits.

Knows the first schema as it was; later files change it step by step.
"""

import sqlalchemy as sa
from alembic import op

from filmfit.records.tables import Utc

revision = "0001"
down_revision = None


def upgrade() -> None:
    """Create the tables."""
    op.create_table(
        "filmfit_mark",
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("says", sa.Text(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_filmfit_mark"),
    )
    op.bulk_insert(
        sa.table("filmfit_mark", sa.column("id", sa.Integer), sa.column("says", sa.Text)),
        [{"id": 1, "says": "deposition records of filmfit"}],
    )
    op.create_table(
        "runs",
        sa.Column("id", sa.String(100), nullable=False),
        sa.Column("date", sa.Date(), nullable=False),
        sa.Column("film", sa.String(200), nullable=False),
        sa.Column("chamber", sa.String(200), nullable=False),
        sa.Column("source", sa.String(200), nullable=False),
        sa.Column("process", sa.String(100), nullable=False),
        sa.Column("created", Utc(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_runs"),
    )
    op.create_index("ix_runs_date", "runs", ["date"])
    op.create_index("ix_runs_film", "runs", ["film"])
    op.create_table(
        "revisions",
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("run_id", sa.String(100), nullable=False),
        sa.Column("number", sa.Integer(), nullable=False),
        sa.Column("conditions", sa.JSON(), nullable=False),
        sa.Column("changes", sa.JSON(), nullable=False),
        sa.Column("run_file", sa.String(80), nullable=False),
        sa.Column("created", Utc(), nullable=False),
        sa.ForeignKeyConstraint(["run_id"], ["runs.id"], name="fk_revisions_run_id_runs"),
        sa.PrimaryKeyConstraint("id", name="pk_revisions"),
        sa.UniqueConstraint("run_id", "number", name="uq_revisions_run_id_number"),
    )
    op.create_index("ix_revisions_run_id", "revisions", ["run_id"])
    quantities: list[sa.Column[float]] = [
        sa.Column(name, sa.Double(), nullable=True)
        for name in (
            "thickness_nm", "thickness_sigma_nm", "thickness_low_nm", "thickness_high_nm",
            "rate_nm_min", "rate_sigma_nm_min", "rate_low_nm_min", "rate_high_nm_min",
        )
    ]  # fmt: skip
    op.create_table(
        "fits",
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("run_id", sa.String(100), nullable=False),
        sa.Column("revision_id", sa.Integer(), nullable=False),
        sa.Column("number", sa.Integer(), nullable=False),
        sa.Column("answer", sa.String(20), nullable=False),
        *quantities,
        sa.Column("result", sa.JSON(), nullable=False),
        sa.Column("created", Utc(), nullable=False),
        sa.ForeignKeyConstraint(["run_id"], ["runs.id"], name="fk_fits_run_id_runs"),
        sa.ForeignKeyConstraint(["revision_id"], ["revisions.id"], name="fk_fits_revision_id_revisions"),
        sa.PrimaryKeyConstraint("id", name="pk_fits"),
        sa.UniqueConstraint("run_id", "number", name="uq_fits_run_id_number"),
    )
    op.create_index("ix_fits_run_id", "fits", ["run_id"])


def downgrade() -> None:
    """Refuse: records are not taken back to an older schema."""
    raise RuntimeError("records are not taken back to an older schema")
