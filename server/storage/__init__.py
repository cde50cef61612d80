"""The record book on disk: engine and sessions, migrations, the trail, search terms, backup."""

from server.storage import evidence_tables, people_tables  # so that Base knows every table
from server.storage.copies import backup, check_whole, restore
from server.storage.search import search_terms
from server.storage.sessions import Session, StorageError, engine, plain_words, reading, write, writing
from server.storage.trail import TrailLine, lines, note, utc_text
from server.storage.upgrade import migrate

__all__ = [
    "Session",
    "StorageError",
    "TrailLine",
    "backup",
    "check_whole",
    "engine",
    "evidence_tables",
    "lines",
    "migrate",
    "note",
    "people_tables",
    "plain_words",
    "reading",
    "restore",
    "search_terms",
    "utc_text",
    "write",
    "writing",
]
