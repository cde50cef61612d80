"""Called by alembic, which loads this file under the name ``env_py``; ``migrate`` hands it an open connection."""

from __future__ import annotations

from alembic import context


def run() -> None:
    """Run the pending steps in the transaction that ``migrate`` has opened."""
    # SQLite undoes changes of tables with the rest of a transaction; alembic has to be told.
    context.configure(connection=context.config.attributes["connection"], transactional_ddl=True)
    with context.begin_transaction():
        context.run_migrations()


if __name__ == "env_py":
    run()
