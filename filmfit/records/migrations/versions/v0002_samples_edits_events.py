"""Samples and states, the fit that counts, changes by persons, events.

Knows the second schema as it was; columns are added in place, so that no table with children is made anew.
"""

import sqlalchemy as sa
from alembic import op

from filmfit.records.tables import Utc

revision = "0002"
down_revision = "0001"


def upgrade() -> None:
    """Add columns and tables, and fill them from what is there."""
    op.add_column("runs", sa.Column("kind", sa.String(40), nullable=False, server_default="run"))
    op.add_column("runs", sa.Column("revision", sa.Integer(), nullable=True))
    op.add_column("runs", sa.Column("fit", sa.Integer(), nullable=True))
    op.add_column("runs", sa.Column("confirmed", sa.Boolean(), nullable=False, server_default=sa.false()))
    op.add_column("runs", sa.Column("left_out", sa.Text(), nullable=True))
    op.create_index("ix_runs_chamber_source", "runs", ["chamber", "source"])
    op.add_column("revisions", sa.Column("sample", sa.String(200), nullable=False, server_default="-"))
    op.add_column("revisions", sa.Column("state", sa.String(200), nullable=False, server_default="as-deposited"))
    op.add_column("fits", sa.Column("thickness_common_nm", sa.Double(), nullable=True))
    op.create_table(
        "events",
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("chamber", sa.String(200), nullable=False),
        sa.Column("source", sa.String(200), nullable=True),
        sa.Column("date", sa.Date(), nullable=False),
        sa.Column("kind", sa.String(40), nullable=False),
        sa.Column("note", sa.Text(), nullable=False),
        sa.Column("created", Utc(), nullable=False),
        sa.PrimaryKeyConstraint("id", name="pk_events"),
    )
    op.create_index("ix_events_chamber", "events", ["chamber"])
    op.create_table(
        "edits",
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("run_id", sa.String(100), nullable=True),
        sa.Column("action", sa.String(40), nullable=False),
        sa.Column("key", sa.String(200), nullable=False),
        sa.Column("old", sa.JSON(), nullable=False),
        sa.Column("new", sa.JSON(), nullable=False),
        sa.Column("who", sa.String(200), nullable=False),
        sa.Column("because", sa.Text(), nullable=False),
        sa.Column("created", Utc(), nullable=False),
        sa.ForeignKeyConstraint(["run_id"], ["runs.id"], name="fk_edits_run_id_runs"),
        sa.PrimaryKeyConstraint("id", name="pk_edits"),
    )
    op.create_index("ix_edits_run_id", "edits", ["run_id"])
    _fill()


def _fill() -> None:
    """Fill the new columns of old rows."""
    connection = op.get_bind()
    revisions = sa.table("revisions", sa.column("id", sa.Integer), sa.column("run_id", sa.String),
                         sa.column("number", sa.Integer), sa.column("conditions", sa.JSON),
                         sa.column("sample", sa.String), sa.column("state", sa.String))  # fmt: skip
    for row in connection.execute(sa.select(revisions.c.id, revisions.c.conditions)).all():
        sample = row.conditions.get("sample") or {}
        if sample:
            values = {"sample": sample.get("name") or "-", "state": sample.get("state") or "as-deposited"}
            connection.execute(revisions.update().where(revisions.c.id == row.id).values(**values))
    op.execute("UPDATE fits SET thickness_common_nm = thickness_sigma_nm")
    op.execute("UPDATE runs SET revision = (SELECT max(number) FROM revisions WHERE run_id = runs.id)")
    op.execute(
        "UPDATE runs SET fit = coalesce((SELECT max(number) FROM fits WHERE run_id = runs.id AND answer = 'usable'), "
        "(SELECT max(number) FROM fits WHERE run_id = runs.id))"
    )


def downgrade() -> None:
    """Refuse: records are not taken back to an older schema."""
    raise RuntimeError("records are not taken back to an older schema")
