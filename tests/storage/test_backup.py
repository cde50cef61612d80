from __future__ import annotations

import sqlite3
import threading
from pathlib import Path

import pytest
from sqlalchemy import Engine

from server import storage


def add(engine: Engine, what: str) -> None:
    with storage.writing(engine) as session:
        storage.note(session, at="", who="", what=what, subject="")


def contents(path: Path) -> list[str]:
    engine = storage.engine(path)
    with storage.reading(engine) as session:
        found = [line.what for line in storage.lines(session)]
    engine.dispose()
    return found


def test_a_backup_is_one_whole_file(book: Engine, tmp_path: Path) -> None:
    add(book, "one")
    target = storage.backup(book, tmp_path / "copies" / "b.db")
    storage.check_whole(target)
    assert [path.name for path in target.parent.iterdir()] == ["b.db"]
    assert contents(target) == ["one"]


def test_a_backup_while_others_save_is_whole(book: Engine, tmp_path: Path) -> None:
    stop = threading.Event()

    def save() -> None:
        while not stop.is_set():
            add(book, "x")

    thread = threading.Thread(target=save)
    thread.start()
    for number in range(5):
        storage.check_whole(storage.backup(book, tmp_path / f"{number}.db"))
    stop.set()
    thread.join()


def test_restore_brings_back_and_can_be_undone(book: Engine, tmp_path: Path) -> None:
    path = Path(str(book.url.database))
    add(book, "one")
    storage.backup(book, tmp_path / "b.db")
    add(book, "two")
    kept = storage.restore(tmp_path / "b.db", path)
    assert kept is not None
    with storage.reading(book) as session:  # the engine was open all the time
        assert [line.what for line in storage.lines(session)] == ["one"]
    add(book, "three")
    assert contents(path) == ["three", "one"]
    storage.restore(kept, path)
    assert contents(path) == ["two", "one"]


def test_restore_into_nothing(book: Engine, tmp_path: Path) -> None:
    add(book, "one")
    storage.backup(book, tmp_path / "b.db")
    assert storage.restore(tmp_path / "b.db", tmp_path / "new" / "book.db") is None
    assert contents(tmp_path / "new" / "book.db") == ["one"]


def test_restore_over_a_damaged_file_sets_it_aside(book: Engine, tmp_path: Path) -> None:
    storage.backup(book, tmp_path / "b.db")
    broken = tmp_path / "broken.db"
    broken.write_bytes(b"not a database at all" * 100)
    kept = storage.restore(tmp_path / "b.db", broken)
    assert kept is not None
    assert kept.read_bytes().startswith(b"not a database")
    storage.check_whole(broken)


def test_a_damaged_backup_is_refused_and_the_book_untouched(book: Engine, tmp_path: Path) -> None:
    for number in range(200):
        add(book, f"{number} " + "x" * 500)
    target = storage.backup(book, tmp_path / "b.db")
    damaged = bytearray(target.read_bytes())
    damaged[len(damaged) // 2 :] = b"\xff" * (len(damaged) - len(damaged) // 2)
    target.write_bytes(damaged)
    before = contents(Path(str(book.url.database)))
    with pytest.raises(storage.StorageError):
        storage.restore(target, Path(str(book.url.database)))
    assert contents(Path(str(book.url.database))) == before


def test_another_programs_database_is_refused(book: Engine, tmp_path: Path) -> None:
    with sqlite3.connect(tmp_path / "other.db") as other:
        other.execute("CREATE TABLE things (id)")
    with pytest.raises(storage.StorageError, match="not a record book of this program"):
        storage.restore(tmp_path / "other.db", Path(str(book.url.database)))


def test_a_loose_reference_is_noticed(book: Engine, tmp_path: Path) -> None:
    with sqlite3.connect(str(book.url.database)) as raw:
        raw.execute("INSERT INTO checks VALUES (1, 77, 1, '', '')")
    with pytest.raises(storage.StorageError, match="points to nothing"):
        storage.backup(book, tmp_path / "b.db")


def test_a_failed_backup_leaves_the_older_one(book: Engine, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    from server.storage import copies as module

    def found_damage(path: Path) -> None:
        raise storage.StorageError("damaged")

    add(book, "one")
    target = storage.backup(book, tmp_path / "b.db")
    add(book, "two")
    monkeypatch.setattr(module, "check_whole", found_damage)
    with pytest.raises(storage.StorageError, match="damaged"):
        storage.backup(book, target)
    assert contents(target) == ["one"]
    assert not (tmp_path / "b.db.part").exists()


def test_the_book_never_overwrites_itself(book: Engine) -> None:
    path = Path(str(book.url.database))
    with pytest.raises(storage.StorageError, match="itself"):
        storage.backup(book, path)
    with pytest.raises(storage.StorageError, match="same file"):
        storage.restore(path, path)


def test_missing_files_are_named(book: Engine, tmp_path: Path) -> None:
    with pytest.raises(storage.StorageError, match=r"no file gone\.db"):
        storage.restore(tmp_path / "gone.db", tmp_path / "x.db")
    with pytest.raises(storage.StorageError, match="no record book"):
        storage.backup(storage.engine(tmp_path / "gone.db"), tmp_path / "b.db")
