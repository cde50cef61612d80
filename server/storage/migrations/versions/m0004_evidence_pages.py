"""Evidence pages as they were when a value was approved: kept with the act, never changed."""

from __future__ import annotations

from alembic import op

revision = "0004"
down_revision: str | None = "0003"
branch_labels = None
depends_on = None

TABLES = """
CREATE TABLE evidence_pages (
  act_id INTEGER NOT NULL PRIMARY KEY REFERENCES record_acts (id),
  record_revision_id INTEGER NOT NULL REFERENCES record_revisions (id),
  content TEXT NOT NULL, sha256 TEXT NOT NULL CHECK (length(sha256) = 64),
  pdf BLOB NOT NULL, pdf_sha256 TEXT NOT NULL CHECK (length(pdf_sha256) = 64), at TEXT NOT NULL
) STRICT;
CREATE INDEX evidence_pages_by_revision ON evidence_pages (record_revision_id);
"""


def upgrade() -> None:
    """Make the table and its guards."""
    for statement in TABLES.split(";\n"):
        if statement.strip():
            op.get_bind().exec_driver_sql(statement)
    _refuse("delete", "DELETE", "", "is never deleted")
    _refuse("update", "UPDATE", "", "is never changed")
    _refuse(
        "replace", "INSERT", "WHEN EXISTS (SELECT 1 FROM evidence_pages WHERE act_id = NEW.act_id)", "exists already"
    )


def downgrade() -> None:
    """Never: going back would drop kept pages. Restore a backup instead."""
    raise NotImplementedError("Restore a backup instead.")


def _refuse(name: str, act: str, when: str, why: str) -> None:
    op.get_bind().exec_driver_sql(
        f"CREATE TRIGGER evidence_pages_{name} BEFORE {act} ON evidence_pages FOR EACH ROW {when} "
        f"BEGIN SELECT RAISE(ABORT, 'a saved row of evidence_pages {why}'); END"
    )
