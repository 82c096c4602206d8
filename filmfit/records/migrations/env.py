"""Runs the migrations on the connection that schema.py hands over.

Knows Alembic's way in; the connection and its transaction are the caller's.
"""

from alembic import context

from filmfit.records.tables import Base

context.configure(
    connection=context.config.attributes["connection"],
    target_metadata=Base.metadata,
    render_as_batch=True,
    transaction_per_migration=False,
)
context.run_migrations()
