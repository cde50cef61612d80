"""Copies of the record book that are known to be whole, and the way back from one."""

from __future__ import annotations

import os
import sqlite3
from collections.abc import Iterator
from contextlib import closing, contextmanager
from pathlib import Path

from sqlalchemy import Engine

from server.storage.sessions import BUSY_SECONDS, StorageError

_TABLES_OF_OURS = {"jobs", "checks", "check_revisions", "records", "record_revisions", "trail"}


def backup(engine: Engine, target: Path | str) -> Path:
    """Copy the record book to ``target`` while it is in use; the copy is checked before it takes its name.

    Raises
    ------
    StorageError
        If the copy cannot be written or is not whole; an older file at ``target`` is then still there.
    """
    source = engine.url.database
    if source is None or not Path(source).is_file():
        raise StorageError(f"There is no record book at {source}; nothing was copied.")
    target = Path(target)
    if target.exists() and target.samefile(source):
        raise StorageError("The backup would overwrite the record book itself; choose another file.")
    _copy(Path(source), target)
    return target


def restore(source: Path | str, target: Path | str) -> Path | None:
    """Put the backup ``source`` in the place of the record book ``target``, also while it is open elsewhere.

    What ``target`` held is kept beside it under the returned name (None where there was nothing): a restore can be
    undone.

    Raises
    ------
    StorageError
        If ``source`` is not a whole record book of ours; ``target`` is then untouched.
    """
    source, target = Path(source), Path(target)
    if target.exists() and source.exists() and target.samefile(source):
        raise StorageError("The backup and the record book are the same file; choose another.")
    check_whole(source)
    if not target.exists():
        _copy(source, target)
        return None
    kept = _free_name(target)
    try:
        _copy(target, kept)
    except StorageError:
        # The present file is damaged, which may be why we are here: set it aside as it is.
        for ending in ("", "-wal", "-shm"):
            if (part := Path(f"{target}{ending}")).exists():
                part.replace(f"{kept}{ending}")
        _copy(source, target)
        return kept
    with _plain_words(target), closing(_open(source)) as old, closing(_open(target, write=True)) as new:
        # Into the open file, page by page in one transaction: a program that has it open sees the restored book,
        # where a file put in its place would leave that program saving into the one that is gone.
        old.backup(new)
    check_whole(target)
    return kept


def check_whole(path: Path | str) -> None:
    """Raise StorageError unless ``path`` is a record book of ours, undamaged, with every reference in place."""
    path = Path(path)
    if not path.is_file():
        raise StorageError(f"There is no file {path.name}; give the path of a backup.")
    with _plain_words(path), closing(_open(path)) as connection:
        tables = {name for (name,) in connection.execute("SELECT name FROM sqlite_schema WHERE type = 'table'")}
        if not tables >= _TABLES_OF_OURS:
            raise StorageError(f"{path.name} is not a record book of this program; give the path of a backup.")
        found = [str(row[0]) for row in connection.execute("PRAGMA integrity_check(3)")]
        if found != ["ok"]:
            raise StorageError(f"{path.name} is damaged ({found[0]}); use an older backup.")
        if loose := connection.execute("PRAGMA foreign_key_check").fetchone():
            raise StorageError(f"{path.name} is damaged (a row of {loose[0]} points to nothing); use an older backup.")


def _copy(source: Path, target: Path) -> None:
    """Copy by way of a file beside ``target``, checked and on disk before it takes the name."""
    part = target.with_name(target.name + ".part")
    try:
        with _plain_words(target):
            target.parent.mkdir(parents=True, exist_ok=True)
            part.unlink(missing_ok=True)
            with closing(_open(source)) as old, closing(sqlite3.connect(part)) as new:
                old.backup(new)  # in one step: in small steps it never ends while others save
                new.execute("PRAGMA journal_mode = DELETE")  # one file, nothing beside it
            check_whole(part)
            _to_disk(part)
            part.replace(target)
            _to_disk(target.parent)
    finally:
        part.unlink(missing_ok=True)


def _open(path: Path, *, write: bool = False) -> sqlite3.Connection:
    mode = "rw" if write else "ro"
    return sqlite3.connect(f"{path.resolve().as_uri()}?mode={mode}", uri=True, timeout=BUSY_SECONDS)


def _to_disk(path: Path) -> None:
    if path.is_dir() and os.name == "nt":
        return  # Windows has no such thing for folders
    handle = os.open(path, os.O_RDONLY if path.is_dir() else os.O_RDWR)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def _free_name(target: Path) -> Path:
    number = 1
    while (kept := target.with_name(f"{target.name}.before-restore-{number}")).exists():
        number += 1
    return kept


@contextmanager
def _plain_words(path: Path) -> Iterator[None]:
    try:
        yield
    except sqlite3.DatabaseError as error:
        raise StorageError(f"{path.name} cannot be read or written as a record book ({error}).") from error
    except OSError as error:
        raise StorageError(f"{path.name} cannot be written ({error.strerror}); choose another place.") from error
