from __future__ import annotations

import threading
from pathlib import Path

import pytest
from alembic.autogenerate import compare_metadata
from alembic.runtime.migration import MigrationContext
from sqlalchemy import Engine, text

from server import storage
from server.storage import tables


def test_the_migrations_make_the_tables_the_program_reads(book: Engine) -> None:
    with book.connect() as connection:
        context = MigrationContext.configure(connection, opts={"include_name": _not_search, "compare_type": True})
        assert compare_metadata(context, tables.Base.metadata) == []


def _not_search(name: str | None, kind: str, parents: object) -> bool:
    return kind != "table" or "_search" not in str(name)


def test_a_column_the_migrations_lack_would_be_noticed(book: Engine) -> None:
    with storage.writing(book) as session:
        session.execute(text("ALTER TABLE shop DROP COLUMN address"))
    with book.connect() as connection:
        context = MigrationContext.configure(connection, opts={"include_name": _not_search})
        assert compare_metadata(context, tables.Base.metadata) != []


def test_migrating_twice_changes_nothing(book: Engine) -> None:
    def schema() -> list[object]:
        with book.connect() as connection:
            return list(connection.execute(text("SELECT type, name, sql FROM sqlite_schema ORDER BY name")))

    before = schema()
    storage.migrate(book)
    assert schema() == before


def test_two_programs_starting_at_once_both_succeed(tmp_path: Path) -> None:
    failures: list[BaseException] = []

    def start() -> None:
        try:
            storage.migrate(storage.engine(tmp_path / "book.db"))
        except BaseException as error:
            failures.append(error)

    threads = [threading.Thread(target=start) for _ in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert failures == []


def test_a_failing_step_leaves_the_file_as_it_was(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    from alembic import command

    def upgrade_then_fail(config: object, revision: str) -> None:
        real(config, revision)  # type: ignore[arg-type]
        raise ValueError("half way")

    real = command.upgrade
    monkeypatch.setattr(command, "upgrade", upgrade_then_fail)
    engine = storage.engine(tmp_path / "book.db")
    with pytest.raises(ValueError, match="half way"):
        storage.migrate(engine)
    with engine.connect() as connection:
        assert list(connection.execute(text("SELECT name FROM sqlite_schema"))) == []


def test_a_file_of_a_newer_version_is_refused(book: Engine) -> None:
    with storage.writing(book) as session:
        session.execute(text("UPDATE alembic_version SET version_num = '9999'"))
    with pytest.raises(storage.StorageError, match="newer version"):
        storage.migrate(book)
