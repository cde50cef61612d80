from __future__ import annotations

import threading
from pathlib import Path

import pytest
from alembic.autogenerate import compare_metadata
from alembic.config import Config
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


def test_a_book_of_the_version_before_evidence_keeps_its_records(tmp_path: Path) -> None:
    from alembic import command

    from server import library
    from server.storage import upgrade

    engine = storage.engine(tmp_path / "book.db")
    config = Config()
    config.set_main_option("script_location", str(Path(upgrade.__file__).parent / "migrations"))
    with storage.writing(engine) as session:
        config.attributes["connection"] = session.connection()
        command.upgrade(config, "0002")
        session.execute(text("INSERT INTO records VALUES (1, 'B-001', 'bonds', '')"))
        for n, status in ((1, "approved"), (2, "draft")):
            row = f"({n}, 1, {n}, 'Epoxy {n}', '{status}', '{{\"shear_strength\": {n}}}', "
            row += "'{\"surface_a_material\": \"spruce\"}', 'report 1', '', 'Ann', '', '')"
            session.execute(text(f"INSERT INTO record_revisions VALUES {row}".replace(":", r"\:")))
        session.execute(text("INSERT INTO records VALUES (2, 'L-001', 'lots', '')"))
        lot = "(3, 2, 1, 'Epoxy lot', 'approved', '{\"number\": \"7\"}', '{}', '', '', 'Ann', '', '')".replace(
            ":", r"\:"
        )
        session.execute(text(f"INSERT INTO record_revisions VALUES {lot}"))
        session.execute(text("INSERT INTO record_search (rowid, key, name, words) VALUES (1, 'B-001', 'Epoxy 2', 'w')"))
    storage.migrate(engine)
    with storage.reading(engine) as session:
        record = library.get(session, "B-001")
        assert (record.revision, record.status, record.in_force, record.in_force_status) == (2, "draft", 1, "approved")
        assert (record.links, record.chain) == ({}, ())
        for found in (
            library.search(session, "epoxy"),
            library.search(session, adherend="spruce"),
            library.search(session, status="approved"),
        ):
            assert [each.key for each in found.records] == ["B-001"]
        assert library.get(session, "L-001").status == "released"  # an older book's word, read in today's
        assert [each.key for each in library.search(session, status="released").records] == ["L-001"]
        library.edit(session, "B-001", note="later", made_by="Bo")
        assert library.get(session, "B-001").revision == 3
