"""The door to the record book: one SQLite file, many readers, one writer at a time.

A page opens a session with :func:`reading`. Whoever saves something wraps that in :func:`write`, which is short: work
that takes long (checking, drawing a sheet) is done before it. Every setting here was measured.
"""

from __future__ import annotations

import sqlite3
import threading
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

from sqlalchemy import Connection, Engine, create_engine, event
from sqlalchemy import orm as sa_orm
from sqlalchemy.exc import DatabaseError
from sqlalchemy.orm import ORMExecuteState
from sqlalchemy.pool import ConnectionPoolEntry

from server.errors import JointError

BUSY_SECONDS = 10
LOCK_SECONDS = 30
# The web framework runs 40 plain functions at once; each holds one connection.
KEPT_CONNECTIONS, EXTRA_CONNECTIONS = 20, 30

# One writer a process: without it twenty savers at once wait on SQLite's sleeping retries (p95 800 ms against 110 ms).
_write_lock = threading.Lock()


class StorageError(JointError):
    """The record book cannot be read or written now; the message says why and what to do."""


class Session(sa_orm.Session):
    """A session on the record book. It reads; it changes something only inside :func:`write`."""

    @property
    def is_writing(self) -> bool:
        return bool(self.info.get("writing"))


@event.listens_for(Session, "before_flush")
def _flush_only_while_writing(session: Session, *_: object) -> None:
    # A write that starts from a reading transaction is refused by SQLite whenever somebody saved in between.
    if not session.is_writing and (session.new or session.dirty or session.deleted):
        raise RuntimeError("A change outside storage.write(session).")


@event.listens_for(Session, "do_orm_execute")
def _change_only_while_writing(state: ORMExecuteState) -> None:
    changes = state.is_insert or state.is_update or state.is_delete
    if changes and not state.session.info.get("writing"):
        raise RuntimeError("A change outside storage.write(session).")


def engine(path: Path | str) -> Engine:
    """Return the engine for the record book at ``path``; the file is made by ``migrate``."""
    made = create_engine(
        f"sqlite:///{Path(path)}",
        pool_size=KEPT_CONNECTIONS,
        max_overflow=EXTRA_CONNECTIONS,
        connect_args={"timeout": BUSY_SECONDS},
    )
    event.listen(made, "connect", _set_up_connection)
    event.listen(made, "begin", _begin)
    return made


def _set_up_connection(connection: sqlite3.Connection, _: ConnectionPoolEntry) -> None:
    connection.isolation_level = None  # SQLAlchemy says BEGIN, see _begin; the driver would say it too late
    for pragma in (
        f"busy_timeout = {BUSY_SECONDS * 1000}",
        "journal_mode = WAL",
        "synchronous = FULL",  # an acknowledged save survives a power cut
        "foreign_keys = ON",
        "recursive_triggers = ON",  # REPLACE then fires the triggers that refuse deletion
        "trusted_schema = OFF",
    ):
        connection.execute(f"PRAGMA {pragma}")


def _begin(connection: Connection) -> None:
    immediate = connection.get_execution_options().get("immediate", False)
    connection.exec_driver_sql("BEGIN IMMEDIATE" if immediate else "BEGIN")


@contextmanager
def reading(source: Engine) -> Iterator[Session]:
    """Open a session. What it reads is one moment's state; saving functions switch it to writing by themselves."""
    with plain_words(), Session(source, expire_on_commit=False) as session:
        yield session


@contextmanager
def writing(source: Engine) -> Iterator[Session]:
    """Open a session that writes from the start: several changes that stand or fall together."""
    with reading(source) as session, write(session):
        yield session


@contextmanager
def write(session: Session) -> Iterator[Session]:
    """Let ``session`` change things; everything is on disk when the block ends, or nothing is.

    Inside another ``write`` it joins that one. Otherwise it gives up the state read so far and starts from the newest,
    so numbers counted before must be counted again inside.
    """
    if session.is_writing:
        yield session
        return
    session.rollback()
    with plain_words(), _turn():
        session.info["writing"] = True
        try:
            session.connection(execution_options={"immediate": True})
            yield session
            session.commit()
        finally:
            session.rollback()  # nothing to do after a commit
            del session.info["writing"]


@contextmanager
def _turn() -> Iterator[None]:
    if not _write_lock.acquire(timeout=LOCK_SECONDS):
        raise StorageError(
            f"Another save has not finished for {LOCK_SECONDS} seconds; nothing was saved. Try again in a minute."
        )
    try:
        yield
    finally:
        _write_lock.release()


@contextmanager
def plain_words() -> Iterator[None]:
    """Turn the database's own complaints that a person can act on into a StorageError."""
    try:
        yield
    except DatabaseError as error:
        said = str(error.orig)
        for sign, message in _PLAIN.items():
            if sign in said:
                raise StorageError(message) from error
        raise


_PLAIN: dict[str, str] = {
    "locked": "Another program is writing to the record book; nothing was saved. Close it, or try again in a minute.",
    "disk is full": "The disk is full; nothing was saved. Free some space and save again.",
    "readonly": "The record book may only be read by this user; nothing was saved. Check who owns its folder.",
    "unable to open": "The record book cannot be opened. Check that its folder exists and may be written to.",
    "malformed": "The record book is damaged. Keep the file and restore a backup (bondwright restore).",
    "not a database": "The file at the record book's place is not one. Move it away, or restore a backup.",
    "disk I/O": "The disk did not answer; nothing was saved. Check the disk, then start again.",
}
