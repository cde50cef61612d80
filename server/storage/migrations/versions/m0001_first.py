"""The first tables: shop, jobs, checks, library, trail, search; and the triggers that keep saved things as they are."""

from __future__ import annotations

from alembic import op

revision = "0001"
down_revision: str | None = None
branch_labels = None
depends_on = None

TABLES = """
CREATE TABLE shop (
  id INTEGER NOT NULL PRIMARY KEY CHECK (id = 1),
  name TEXT NOT NULL, address TEXT NOT NULL,
  paper TEXT NOT NULL CHECK (paper IN ('A4', 'Letter')), display TEXT NOT NULL CHECK (display IN ('SI', 'US'))
) STRICT;

CREATE TABLE jobs (
  id INTEGER NOT NULL PRIMARY KEY,
  number TEXT COLLATE NOCASE NOT NULL UNIQUE,
  title TEXT NOT NULL, customer TEXT NOT NULL, drawing TEXT NOT NULL, note TEXT NOT NULL,
  paper TEXT NOT NULL CHECK (paper IN ('A4', 'Letter')), display TEXT NOT NULL CHECK (display IN ('SI', 'US')),
  created_at TEXT NOT NULL, changed_at TEXT NOT NULL
) STRICT;

CREATE TABLE checks (
  id INTEGER NOT NULL PRIMARY KEY,
  job_id INTEGER NOT NULL REFERENCES jobs (id),
  number INTEGER NOT NULL,
  mark TEXT NOT NULL, created_at TEXT NOT NULL,
  UNIQUE (job_id, number)
) STRICT;

CREATE TABLE check_revisions (
  id INTEGER NOT NULL PRIMARY KEY,
  check_id INTEGER NOT NULL REFERENCES checks (id),
  n INTEGER NOT NULL CHECK (n >= 1),
  follows_id INTEGER REFERENCES check_revisions (id),
  kind TEXT NOT NULL, title TEXT NOT NULL, verdict TEXT NOT NULL, utilisation REAL,
  heading TEXT NOT NULL, document TEXT NOT NULL, values_used TEXT NOT NULL, result TEXT NOT NULL,
  engine TEXT NOT NULL, sha256 TEXT NOT NULL CHECK (length(sha256) = 64),
  pdf BLOB NOT NULL, pdf_sha256 TEXT NOT NULL CHECK (length(pdf_sha256) = 64),
  made_by TEXT NOT NULL, reason TEXT NOT NULL, created_at TEXT NOT NULL,
  UNIQUE (check_id, n)
) STRICT;

CREATE TABLE check_values (
  check_revision_id INTEGER NOT NULL REFERENCES check_revisions (id),
  section TEXT NOT NULL, name TEXT NOT NULL,
  record_key TEXT COLLATE NOCASE NOT NULL, record_revision INTEGER NOT NULL,
  PRIMARY KEY (check_revision_id, section, name)
) STRICT;
CREATE INDEX check_values_by_record ON check_values (record_key);

CREATE TABLE records (
  id INTEGER NOT NULL PRIMARY KEY,
  key TEXT COLLATE NOCASE NOT NULL UNIQUE,
  record_group TEXT NOT NULL, created_at TEXT NOT NULL
) STRICT;

CREATE TABLE record_revisions (
  id INTEGER NOT NULL PRIMARY KEY,
  record_id INTEGER NOT NULL REFERENCES records (id),
  n INTEGER NOT NULL CHECK (n >= 1),
  name TEXT NOT NULL, status TEXT NOT NULL, entry TEXT NOT NULL, details TEXT NOT NULL,
  source TEXT NOT NULL, note TEXT NOT NULL,
  made_by TEXT NOT NULL, reason TEXT NOT NULL, created_at TEXT NOT NULL,
  UNIQUE (record_id, n)
) STRICT;

CREATE TABLE trail (
  id INTEGER NOT NULL PRIMARY KEY,
  at TEXT NOT NULL, who TEXT NOT NULL, what TEXT NOT NULL, subject TEXT NOT NULL, detail TEXT NOT NULL
) STRICT;
CREATE INDEX trail_by_subject ON trail (subject);

CREATE VIRTUAL TABLE record_search USING fts5 (key, name, words, tokenize = 'unicode61 remove_diacritics 2');
CREATE VIRTUAL TABLE job_search USING fts5 (
  number, title, customer, drawing, marks, tokenize = 'unicode61 remove_diacritics 2'
);
"""

# What tells two rows of a table apart. An insert that meets an existing row is refused before INSERT OR REPLACE can
# remove that row, which it does without firing a DELETE trigger on connections where recursive_triggers is off.
KEPT = {
    "check_revisions": ("id", "check_id, n"),
    "check_values": ("check_revision_id, section, name",),
    "records": ("id", "key"),
    "record_revisions": ("id", "record_id, n"),
    "trail": ("id",),
}
NEVER_DELETED = {
    "jobs": ("id", "number"),
    "checks": ("id", "job_id, number"),
}


def upgrade() -> None:
    """Make the tables, then their guards."""
    for table_statement in TABLES.split(";\n"):
        if table_statement.strip():
            _run(table_statement)
    for table, keys in (KEPT | NEVER_DELETED).items():
        _run(_refuse(table, "delete", "DELETE", "", "is never deleted"))
        _run(_refuse(table, "replace", "INSERT", f"WHEN EXISTS ({_same_row(table, keys)})", "exists already"))
    for table in KEPT:
        _run(_refuse(table, "update", "UPDATE", "", "is never changed"))
    # A job's or check's heading may be corrected, but not who it is; UPDATE OR REPLACE must not push out another row.
    _run(_refuse("jobs", "update", "UPDATE", "WHEN NEW.id <> OLD.id", "keeps its identity"))
    taken = "EXISTS (SELECT 1 FROM jobs WHERE number = NEW.number AND id <> OLD.id)"
    _run(_refuse("jobs", "taken", "UPDATE", f"WHEN {taken}", "exists already"))
    moved = "NEW.id <> OLD.id OR NEW.job_id <> OLD.job_id OR NEW.number <> OLD.number"
    _run(_refuse("checks", "update", "UPDATE", f"WHEN {moved}", "keeps its identity"))


def downgrade() -> None:
    """Never: going back would drop saved checks. Restore a backup instead."""
    raise NotImplementedError("Restore a backup instead.")


def _same_row(table: str, keys: tuple[str, ...]) -> str:
    tests = (" AND ".join(f"{name.strip()} = NEW.{name.strip()}" for name in key.split(",")) for key in keys)
    return " UNION ALL ".join(f"SELECT 1 FROM {table} WHERE {test}" for test in tests)  # noqa: S608 -- our own names


def _refuse(table: str, name: str, act: str, when: str, why: str) -> str:
    return (
        f"CREATE TRIGGER {table}_{name} BEFORE {act} ON {table} FOR EACH ROW {when} "
        f"BEGIN SELECT RAISE(ABORT, 'a saved row of {table} {why}'); END"
    )


def _run(statement: str) -> None:
    op.get_bind().exec_driver_sql(statement)
