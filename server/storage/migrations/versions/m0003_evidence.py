"""Evidence: acts that move a status, links between records, answers, issued sheets, rules; where each record stands."""

from __future__ import annotations

from alembic import op

revision = "0003"
down_revision: str | None = "0002"
branch_labels = None
depends_on = None

TABLES = """
ALTER TABLE record_revisions ADD COLUMN links TEXT NOT NULL DEFAULT '{}';
ALTER TABLE record_revisions ADD COLUMN chain TEXT NOT NULL DEFAULT '[]';

CREATE TABLE record_acts (
  id INTEGER NOT NULL PRIMARY KEY,
  record_revision_id INTEGER NOT NULL REFERENCES record_revisions (id),
  status TEXT NOT NULL, who TEXT NOT NULL, person_id INTEGER,
  at TEXT NOT NULL, reason TEXT NOT NULL, detail TEXT NOT NULL
) STRICT;
CREATE INDEX record_acts_by_revision ON record_acts (record_revision_id);

CREATE TABLE record_links (
  record_revision_id INTEGER NOT NULL REFERENCES record_revisions (id),
  role TEXT NOT NULL, target_key TEXT COLLATE NOCASE NOT NULL, target_revision INTEGER NOT NULL,
  PRIMARY KEY (record_revision_id, role, target_key)
) STRICT;
CREATE INDEX record_links_by_target ON record_links (target_key);

CREATE TABLE record_heads (
  record_id INTEGER NOT NULL PRIMARY KEY REFERENCES records (id),
  key TEXT COLLATE NOCASE NOT NULL, record_group TEXT NOT NULL,
  newest_id INTEGER NOT NULL, newest INTEGER NOT NULL, status TEXT NOT NULL,
  in_force INTEGER, in_force_status TEXT, property TEXT NOT NULL
) STRICT;
CREATE INDEX record_heads_by_group ON record_heads (record_group, key);
CREATE INDEX record_heads_by_key ON record_heads (key);

CREATE TABLE answers (
  id INTEGER NOT NULL PRIMARY KEY,
  subject TEXT NOT NULL CHECK (subject IN ('record', 'check')), subject_id INTEGER NOT NULL,
  question TEXT NOT NULL, asked TEXT NOT NULL, answer TEXT NOT NULL,
  who TEXT NOT NULL, person_id INTEGER, at TEXT NOT NULL
) STRICT;
CREATE INDEX answers_by_subject ON answers (subject, subject_id);

CREATE TABLE issues (
  check_revision_id INTEGER NOT NULL PRIMARY KEY REFERENCES check_revisions (id),
  check_id INTEGER NOT NULL REFERENCES checks (id),
  prepared_by TEXT NOT NULL, issued_by TEXT NOT NULL, person_id INTEGER,
  outside_checker TEXT NOT NULL, checked_on TEXT NOT NULL, answers TEXT NOT NULL,
  pdf BLOB NOT NULL, pdf_sha256 TEXT NOT NULL CHECK (length(pdf_sha256) = 64), at TEXT NOT NULL
) STRICT;
CREATE INDEX issues_by_check ON issues (check_id);

CREATE TABLE library_rules (
  id INTEGER NOT NULL PRIMARY KEY CHECK (id = 1),
  provisional_from INTEGER NOT NULL, approved_from INTEGER NOT NULL, adhesive_share REAL NOT NULL
) STRICT;
"""

KEPT = {
    "record_acts": "id = NEW.id",
    "record_links": "record_revision_id = NEW.record_revision_id AND role = NEW.role AND target_key = NEW.target_key",
    "answers": "id = NEW.id",
    "issues": "check_revision_id = NEW.check_revision_id",
}

# The search is made anew: with a column for adherends, and an index of beginnings, without which a broad search walks
# every entry of the dictionary. Old rows keep their words.
SEARCH = """
CREATE TEMP TABLE old_search AS SELECT rowid AS id, key, name, words FROM record_search;
DROP TABLE record_search;
CREATE VIRTUAL TABLE record_search USING fts5 (
  key, name, words, adherend, prefix = '1 2 3', tokenize = 'unicode61 remove_diacritics 2'
);
INSERT INTO record_search (rowid, key, name, words, adherend)
  SELECT old.id, old.key, old.name, old.words,
    coalesce(json_extract(last.details, '$.surface_a_material'), '') || ' ' ||
    coalesce(json_extract(last.details, '$.surface_b_material'), '')
  FROM old_search AS old
  JOIN record_revisions AS last ON last.record_id = old.id
    AND last.n = (SELECT max(n) FROM record_revisions WHERE record_id = old.id);
DROP TABLE old_search;
"""

_DECISIVE = "('approved', 'on hold', 'withdrawn', 'superseded')"
HEADS = f"""
INSERT INTO record_heads (record_id, key, record_group, newest_id, newest, status, in_force, in_force_status, property)
  SELECT records.id, records.key, records.record_group, last.id, last.n, last.status, decided.n, decided.status, ''
  FROM records
  JOIN record_revisions AS last ON last.record_id = records.id
    AND last.n = (SELECT max(n) FROM record_revisions WHERE record_id = records.id)
  LEFT JOIN record_revisions AS decided ON decided.record_id = records.id
    AND decided.n = (SELECT max(n) FROM record_revisions
                     WHERE record_id = records.id AND status IN {_DECISIVE})
"""  # noqa: S608 -- our own words


def upgrade() -> None:
    """Make the tables, then their guards, then what is derived from the records that are there."""
    for statement in (*TABLES.split(";\n"), *SEARCH.split(";\n"), HEADS):
        if statement.strip():
            op.get_bind().exec_driver_sql(statement)
    for table, same in KEPT.items():
        _refuse(table, "delete", "DELETE", "", "is never deleted")
        _refuse(table, "update", "UPDATE", "", "is never changed")
        exists = f"WHEN EXISTS (SELECT 1 FROM {table} WHERE {same})"  # noqa: S608 -- our own names
        _refuse(table, "replace", "INSERT", exists, "exists already")


def downgrade() -> None:
    """Never: going back would drop approvals. Restore a backup instead."""
    raise NotImplementedError("Restore a backup instead.")


def _refuse(table: str, name: str, act: str, when: str, why: str) -> None:
    op.get_bind().exec_driver_sql(
        f"CREATE TRIGGER {table}_{name} BEFORE {act} ON {table} FOR EACH ROW {when} "
        f"BEGIN SELECT RAISE(ABORT, 'a saved row of {table} {why}'); END"
    )
