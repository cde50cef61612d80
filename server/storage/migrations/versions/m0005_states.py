"""Coupon sets and lots have states of their own; what is derived from their revisions takes the new words."""

from __future__ import annotations

from alembic import op

revision = "0005"
down_revision: str | None = "0004"
branch_labels = None
depends_on = None

WORDS = {
    "sets": {"draft": "tested", "indicative": "tested", "provisional": "tested", "approved": "accepted",
             "withdrawn": "rejected"},
    "lots": {"draft": "quarantined", "indicative": "quarantined", "provisional": "quarantined",
             "approved": "released", "on hold": "quarantined", "withdrawn": "rejected"},
}  # fmt: skip


def upgrade() -> None:
    """Rewrite the heads; saved revisions and acts keep the words they were saved with, and are read in the new ones."""
    for group, words in WORDS.items():
        for old, new in words.items():
            for column in ("status", "in_force_status"):
                op.get_bind().exec_driver_sql(
                    f"UPDATE record_heads SET {column} = ? WHERE record_group = ? AND {column} = ?",  # noqa: S608
                    (new, group, old),
                )


def downgrade() -> None:
    """Never: restore a backup instead."""
    raise NotImplementedError("Restore a backup instead.")
