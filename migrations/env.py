"""Alembic's entry: run the migrations on the connection the program hands over.

From a developer's shell (``alembic revision --autogenerate``) there is none; the database that
``FEATHERLOG_DATABASE_URL`` names is then used.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from alembic import context

from featherlog.store.engine import default_url, migrating, open_engine
from featherlog.store.tables import metadata

if TYPE_CHECKING:
    from sqlalchemy import Connection


def run(connection: Connection) -> None:
    """Run the migrations in the transaction of ``connection``."""
    context.configure(connection=connection, target_metadata=metadata)
    context.run_migrations()


given = context.config.attributes.get("connection")
if given is not None:
    run(given)
else:
    with migrating(open_engine(default_url())) as opened:
        run(opened)
