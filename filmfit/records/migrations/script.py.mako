"""${message}

Revision ID: ${up_revision}
Revises: ${down_revision}
"""

revision = ${repr(up_revision)}
down_revision = ${repr(down_revision)}


def upgrade() -> None:
    ${upgrades if upgrades else "pass"}


def downgrade() -> None:
    raise RuntimeError("records are not taken back to an older schema")
