"""People: who they are, one-time codes, sessions, tokens for programs, and the tries that limit guessing."""

from __future__ import annotations

from alembic import op

revision = "0002"
down_revision: str | None = "0001"
branch_labels = None
depends_on = None

TABLES = """
CREATE TABLE people (
  id INTEGER NOT NULL PRIMARY KEY CHECK (id >= 1),
  name TEXT COLLATE NOCASE NOT NULL UNIQUE,
  sign_in_name TEXT COLLATE NOCASE NOT NULL UNIQUE,
  roles TEXT NOT NULL,
  password_hash TEXT,
  created_at TEXT NOT NULL, off_at TEXT
) STRICT;

CREATE TABLE one_time_codes (
  id INTEGER NOT NULL PRIMARY KEY,
  person_id INTEGER UNIQUE REFERENCES people (id),
  code_hash TEXT NOT NULL CHECK (length(code_hash) = 64),
  created_at TEXT NOT NULL, ends_at TEXT NOT NULL
) STRICT;

CREATE TABLE sessions (
  id INTEGER NOT NULL PRIMARY KEY,
  person_id INTEGER NOT NULL REFERENCES people (id),
  token_hash TEXT NOT NULL UNIQUE CHECK (length(token_hash) = 64),
  browser TEXT NOT NULL, address TEXT NOT NULL,
  started_at TEXT NOT NULL, seen_at TEXT NOT NULL, ends_at TEXT NOT NULL
) STRICT;
CREATE INDEX sessions_by_person ON sessions (person_id);

CREATE TABLE tokens (
  id INTEGER NOT NULL PRIMARY KEY,
  person_id INTEGER NOT NULL REFERENCES people (id),
  label TEXT NOT NULL,
  token_hash TEXT NOT NULL UNIQUE CHECK (length(token_hash) = 64),
  created_at TEXT NOT NULL, used_at TEXT, revoked_at TEXT
) STRICT;
CREATE INDEX tokens_by_person ON tokens (person_id);

CREATE TABLE sign_in_tries (
  key_hash TEXT NOT NULL PRIMARY KEY CHECK (length(key_hash) = 64),
  failures INTEGER NOT NULL, last_at TEXT NOT NULL, held_until TEXT NOT NULL
) STRICT;
"""

# Saved sheets and records carry a person's name: nobody disappears, and nobody takes another's name.
GUARDS = (
    "CREATE TRIGGER people_delete BEFORE DELETE ON people FOR EACH ROW "
    "BEGIN SELECT RAISE(ABORT, 'a saved row of people is never deleted'); END",
    "CREATE TRIGGER people_replace BEFORE INSERT ON people FOR EACH ROW WHEN EXISTS (SELECT 1 FROM people "
    "WHERE id = NEW.id OR name = NEW.name OR sign_in_name = NEW.sign_in_name) "
    "BEGIN SELECT RAISE(ABORT, 'a saved row of people exists already'); END",
    "CREATE TRIGGER people_update BEFORE UPDATE ON people FOR EACH ROW "
    "WHEN NEW.id <> OLD.id OR NEW.name IS NOT OLD.name COLLATE BINARY "
    "OR NEW.sign_in_name IS NOT OLD.sign_in_name COLLATE BINARY "
    "BEGIN SELECT RAISE(ABORT, 'a saved row of people keeps its identity'); END",
)


def upgrade() -> None:
    """Make the tables, then their guards."""
    for statement in (*TABLES.split(";\n"), *GUARDS):
        if statement.strip():
            op.get_bind().exec_driver_sql(statement)


def downgrade() -> None:
    """Never: going back would drop people. Restore a backup instead."""
    raise NotImplementedError("Restore a backup instead.")
