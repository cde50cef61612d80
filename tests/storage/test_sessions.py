"""The settings that were measured are really in force, and only one way leads to a change."""

from __future__ import annotations

import sqlite3
import threading
from pathlib import Path

import pytest
from sqlalchemy import Engine, insert, select, text

from server import storage
from server.storage import sessions
from server.storage.tables import Job, Shop, TrailEntry


def job(number: str) -> Job:
    words = {"title": "t", "customer": "", "drawing": "", "note": "", "created_at": "", "changed_at": ""}
    return Job(number=number, paper="A4", display="SI", **words)


@pytest.mark.parametrize(
    ("pragma", "value"),
    [
        ("journal_mode", "wal"),
        ("synchronous", 2),  # FULL
        ("foreign_keys", 1),
        ("recursive_triggers", 1),
        ("busy_timeout", 10000),
        ("trusted_schema", 0),
    ],
)
def test_every_connection_has_the_settings(book: Engine, pragma: str, value: object) -> None:
    with storage.reading(book) as session:
        assert session.execute(text(f"PRAGMA {pragma}")).scalar_one() == value


def test_the_pool_serves_every_thread_of_the_framework() -> None:
    assert sessions.KEPT_CONNECTIONS + sessions.EXTRA_CONNECTIONS >= 40


def test_every_table_is_strict(book: Engine) -> None:
    with storage.reading(book) as session:
        rows = session.execute(text("SELECT name, strict FROM pragma_table_list WHERE type = 'table'")).all()
    ours = {name: strict for name, strict in rows if not name.startswith(("sqlite_", "alembic_"))}
    assert {"shop", "jobs", "checks", "check_revisions", "records", "record_revisions", "trail"} <= set(ours)
    assert all(ours.values())


def test_a_change_outside_write_is_refused(book: Engine) -> None:
    with storage.reading(book) as session:
        session.add(job("1"))
        with pytest.raises(RuntimeError, match="A change outside"):
            session.flush()
        session.rollback()
        with pytest.raises(RuntimeError, match="A change outside"):
            session.execute(insert(Shop).values(id=1, name="", address="", paper="A4", display="SI"))


def add_then_fail(session: storage.Session) -> None:
    with storage.write(session):
        session.add(job("1"))
        session.flush()
        raise ValueError("half way")


def test_a_failure_inside_write_leaves_nothing(book: Engine) -> None:
    with storage.reading(book) as session:
        with pytest.raises(ValueError, match="half way"):
            add_then_fail(session)
        assert session.scalars(select(Job)).all() == []
        with storage.write(session):
            session.add(job("2"))  # and the lock is free again
    with storage.reading(book) as session:
        assert [row.number for row in session.scalars(select(Job))] == ["2"]


def add_inside_another_write_then_fail(book: Engine) -> None:
    with storage.writing(book) as session:
        with storage.write(session):
            session.add(job("1"))
        raise ValueError("later")


def test_an_inner_write_joins_the_outer_one(book: Engine) -> None:
    with pytest.raises(ValueError, match="later"):
        add_inside_another_write_then_fail(book)
    with storage.reading(book) as session:
        assert session.scalars(select(Job)).all() == []


def test_read_then_write_never_meets_a_lock(book: Engine) -> None:
    """Each thread counts what is there, then adds; a write that started from its old view would be refused."""

    def work() -> None:
        with storage.reading(book) as session:
            for _ in range(10):
                session.scalars(select(TrailEntry)).all()
                with storage.write(session):
                    there = len(session.scalars(select(TrailEntry)).all())
                    storage.note(session, at="", who="", what=str(there), subject="")

    threads = [threading.Thread(target=work) for _ in range(6)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    with storage.reading(book) as session:
        seen = [line.what for line in storage.lines(session, limit=1000)]
    assert seen == [str(n) for n in reversed(range(60))]


def test_a_lock_held_by_another_program_is_told_in_plain_words(book: Engine) -> None:
    other = sqlite3.connect(str(book.url.database), isolation_level=None)
    other.execute("BEGIN IMMEDIATE")
    with storage.reading(book) as session:
        session.execute(text("PRAGMA busy_timeout = 50"))
        with pytest.raises(storage.StorageError, match="Another program is writing"), storage.write(session):
            pass
    other.execute("ROLLBACK")
    other.close()


def test_a_write_holds_the_file_from_its_first_moment(book: Engine) -> None:
    """Otherwise another program could save between what this one read and what it writes."""
    other = sqlite3.connect(str(book.url.database), isolation_level=None, timeout=0)
    with storage.writing(book), pytest.raises(sqlite3.OperationalError, match="locked"):
        other.execute("BEGIN IMMEDIATE")
    other.execute("BEGIN IMMEDIATE")
    other.close()


def test_a_save_that_never_ends_is_told_to_the_next(book: Engine, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sessions, "LOCK_SECONDS", 0.05)
    with storage.writing(book), storage.reading(book) as second:
        with pytest.raises(storage.StorageError, match="Another save has not finished"), storage.write(second):
            pass
        assert second.scalars(select(Job)).all() == []  # reading goes on


def test_a_missing_folder_is_told_in_plain_words(tmp_path: Path) -> None:
    engine = storage.engine(tmp_path / "nowhere" / "book.db")
    with pytest.raises(storage.StorageError, match="folder exists"):
        storage.migrate(engine)


def test_a_file_that_is_no_record_book_is_told_in_plain_words(tmp_path: Path) -> None:
    (tmp_path / "book.db").write_bytes(b"a letter to the customer " * 200)
    with pytest.raises(storage.StorageError, match="is not one"):
        storage.migrate(storage.engine(tmp_path / "book.db"))


def test_json_keeps_the_order_of_names_and_every_digit(book: Engine) -> None:
    given = {"b": 0.1 + 0.2, "a": "Ü ½ \"'", "n": {"z": 1, "y": [1, 2.0, None, True]}}
    with storage.writing(book) as session:
        storage.note(session, at="", who="", what="", subject="s", detail=given)
    with storage.reading(book) as session:
        got = storage.lines(session, subject="s")[0].detail
    assert got == given
    assert list(got) == ["b", "a", "n"]


def test_json_refuses_what_json_has_not(book: Engine) -> None:
    with pytest.raises(Exception, match="not JSON compliant"), storage.writing(book) as session:
        storage.note(session, at="", who="", what="", subject="", detail={"x": float("nan")})
