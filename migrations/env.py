"""How Alembic runs our revisions: always on a connection that chooser opened."""

from __future__ import annotations

from pathlib import Path

from alembic import context
from alembic.util import CommandError
from sqlalchemy import Connection

from chooser.stock.models import Base


def run(connection: Connection) -> None:
    """Run the pending revisions inside the transaction that the caller holds."""
    context.configure(
        connection=connection,
        target_metadata=Base.metadata,
        render_as_batch=True,  # SQLite cannot alter most things in place
        compare_type=True,
        compare_server_default=True,
    )
    with context.begin_transaction():
        context.run_migrations()


def run_for_developer() -> None:
    """Serve the alembic command: `alembic -x db=trial.db revision --autogenerate -m "..."`."""
    from chooser.stock.engine import immediate

    path = context.get_x_argument(as_dictionary=True).get("db")
    if path is None:
        raise CommandError("name a database made by `chooser --db FILE db upgrade`: -x db=FILE")
    with immediate(Path(path), foreign_keys=False) as connection:
        run(connection)


given = context.config.attributes.get("connection")
if given is None:
    run_for_developer()
else:
    run(given)
