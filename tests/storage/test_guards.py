"""Saved things stay as they were saved, also against raw SQL with none of our settings."""

from __future__ import annotations

import sqlite3
from collections.abc import Iterator
from pathlib import Path

import pytest
from sqlalchemy import Engine

HASH = "0" * 64
KEPT = {
    "check_revisions": "(1, 1, 1, NULL, 'member', 't', 'pass', 0.5, '{}', '{}', '{}', '{}', 'e', "
    f"'{HASH}', x'25', '{HASH}', '', '', '')",
    "check_values": "(1, 'adhesives', 'glue', 'B-001', 1)",
    "records": "(1, 'B-001', 'bonds', '')",
    "record_revisions": "(1, 1, 1, 'n', 'draft', '{}', '{}', '', '', '', '', '', '{}', '[]')",
    "record_acts": "(1, 1, 'approved', 'n', NULL, '', '', '{}')",
    "record_links": "(1, 'set', 'T-001', 1)",
    "answers": "(1, 'record', 1, 'q', 'asked', 'answer', 'n', NULL, '')",
    "issues": f"(1, 1, 'a', 'b', NULL, '', '', '[]', x'25', '{HASH}', '')",
    "trail": "(1, '', '', 'saved', '', '{}')",
}
HEADINGS = {
    "jobs": "(1, '1', 't', '', '', '', 'A4', 'SI', '', '')",
    "checks": "(1, 1, 1, 'B1', '')",
}
# The same row under another id, so that only the second key meets it.
SECOND_KEY = {
    "check_revisions": KEPT["check_revisions"].replace("(1, 1, 1", "(2, 1, 1", 1),
    "records": "(2, 'b-001', 'bonds', '')",
    "record_revisions": KEPT["record_revisions"].replace("(1, 1, 1", "(2, 1, 1", 1),
    "jobs": HEADINGS["jobs"].replace("(1,", "(2,", 1),
    "checks": "(2, 1, 1, 'B1', '')",
}


@pytest.fixture(params=[False, True], ids=["bare", "with settings"])
def raw(book: Engine, request: pytest.FixtureRequest) -> Iterator[sqlite3.Connection]:
    """A plain connection holding one row in each table; without and with foreign keys and recursive triggers."""
    connection = sqlite3.connect(Path(str(book.url.database)), isolation_level=None)
    for table, row in (HEADINGS | KEPT).items():
        connection.execute(f"INSERT INTO {table} VALUES {row}")
    if request.param:
        connection.execute("PRAGMA foreign_keys = ON")
        connection.execute("PRAGMA recursive_triggers = ON")
    yield connection
    connection.close()


def rows(connection: sqlite3.Connection) -> dict[str, list[object]]:
    return {table: connection.execute(f"SELECT * FROM {table}").fetchall() for table in HEADINGS | KEPT}


def refused(connection: sqlite3.Connection, statement: str) -> None:
    before = rows(connection)
    with pytest.raises(sqlite3.IntegrityError, match="a saved row of"):
        connection.execute(statement)
    assert rows(connection) == before


@pytest.mark.parametrize("table", KEPT)
def test_update_is_refused(raw: sqlite3.Connection, table: str) -> None:
    columns = [row[1] for row in raw.execute(f"PRAGMA table_info({table})")]
    for column in columns:
        refused(raw, f"UPDATE {table} SET {column} = {column}")
    refused(raw, f"UPDATE OR REPLACE {table} SET {columns[0]} = 7")


@pytest.mark.parametrize("table", HEADINGS | KEPT)
def test_delete_is_refused(raw: sqlite3.Connection, table: str) -> None:
    refused(raw, f"DELETE FROM {table}")


@pytest.mark.parametrize("table", HEADINGS | KEPT)
def test_insert_or_replace_is_refused(raw: sqlite3.Connection, table: str) -> None:
    refused(raw, f"INSERT OR REPLACE INTO {table} VALUES {(HEADINGS | KEPT)[table]}")
    refused(raw, f"REPLACE INTO {table} VALUES {(HEADINGS | KEPT)[table]}")


@pytest.mark.parametrize("table", SECOND_KEY)
def test_insert_or_replace_is_refused_by_the_second_key(raw: sqlite3.Connection, table: str) -> None:
    refused(raw, f"INSERT OR REPLACE INTO {table} VALUES {SECOND_KEY[table]}")


@pytest.mark.parametrize("table", ["check_revisions", "records", "trail"])
def test_upsert_is_refused(raw: sqlite3.Connection, table: str) -> None:
    column = {"check_revisions": "verdict", "records": "record_group", "trail": "what"}[table]
    row = KEPT[table]
    refused(raw, f"INSERT INTO {table} VALUES {row} ON CONFLICT DO UPDATE SET {column} = 'x'")


def test_headings_may_be_corrected_but_keep_their_identity(raw: sqlite3.Connection) -> None:
    raw.execute("UPDATE jobs SET title = 'new', number = '2'")
    raw.execute("UPDATE checks SET mark = 'B2'")
    refused(raw, "UPDATE jobs SET id = 5")
    refused(raw, "UPDATE checks SET number = 5")
    raw.execute("INSERT INTO jobs VALUES (2, '9', 't', '', '', '', 'A4', 'SI', '', '')")
    refused(raw, "UPDATE OR REPLACE jobs SET number = '2' WHERE id = 2")


def test_new_rows_are_welcome(raw: sqlite3.Connection) -> None:
    raw.execute(f"INSERT INTO check_revisions VALUES {KEPT['check_revisions'].replace('(1, 1, 1', '(NULL, 1, 2', 1)}")
    raw.execute("INSERT INTO records VALUES (NULL, 'B-002', 'bonds', '')")
    raw.execute("INSERT INTO trail VALUES (NULL, '', '', 'saved', '', '{}')")
    assert len(rows(raw)["trail"]) == 2
