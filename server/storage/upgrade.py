"""Bring a record book to today's tables, from whatever version wrote it."""

from __future__ import annotations

from pathlib import Path

from alembic import command
from alembic.config import Config
from alembic.runtime.migration import MigrationContext
from alembic.script import ScriptDirectory
from sqlalchemy import Engine

from server.storage.sessions import StorageError, writing

# Beside this file both in a checkout and in an installed wheel.
_SCRIPTS = Path(__file__).parent / "migrations"


def migrate(engine: Engine) -> None:
    """Make or update the tables; all steps or none. Two programs starting at once wait for each other.

    Raises
    ------
    StorageError
        If a newer version of the program wrote this record book.
    """
    config = Config()
    config.set_main_option("script_location", str(_SCRIPTS).replace("%", "%%"))
    with writing(engine) as session:
        connection = session.connection()
        _refuse_newer(MigrationContext.configure(connection).get_current_revision(), config)
        config.attributes["connection"] = connection
        command.upgrade(config, "head")


def _refuse_newer(current: str | None, config: Config) -> None:
    known = {script.revision for script in ScriptDirectory.from_config(config).walk_revisions()}
    if current is not None and current not in known:
        raise StorageError(
            f"This record book was written by a newer version of the program (its tables are version {current}, "
            f"this program knows up to {max(known)}). Install the newer version, or open a backup made by this one."
        )
