"""The tables of the evidence behind the records: acts that move a status, links, answers, issued sheets, rules.

Acts, links, answers, kept pages and issues are never changed or deleted (triggers refuse it). ``HeadRow`` is derived:
it says where each record stands today, so that a list of thousands does not look through every revision.
"""

from __future__ import annotations

from typing import Any

from sqlalchemy import REAL, ForeignKey, Index, LargeBinary, Text
from sqlalchemy.orm import Mapped, mapped_column

from server.storage.tables import NOCASE, STRICT, Base, Json


class ActRow(Base):
    """A step of one record revision from one status to the next: who, when, why. The last one counts."""

    __tablename__ = "record_acts"
    __table_args__ = (Index("record_acts_by_revision", "record_revision_id"), STRICT)

    id: Mapped[int] = mapped_column(primary_key=True)
    record_revision_id: Mapped[int] = mapped_column(ForeignKey("record_revisions.id"))
    status: Mapped[str] = mapped_column(Text)
    who: Mapped[str] = mapped_column(Text)
    person_id: Mapped[int | None]
    at: Mapped[str] = mapped_column(Text)
    reason: Mapped[str] = mapped_column(Text)
    detail: Mapped[dict[str, Any]] = mapped_column(Json)


class LinkRow(Base):
    """What one record revision stands on: another record's revision, or (role "lot") a lot by its number."""

    __tablename__ = "record_links"
    __table_args__ = (Index("record_links_by_target", "target_key"), STRICT)

    record_revision_id: Mapped[int] = mapped_column(ForeignKey("record_revisions.id"), primary_key=True)
    role: Mapped[str] = mapped_column(Text, primary_key=True)
    target_key: Mapped[str] = mapped_column(NOCASE, primary_key=True)
    target_revision: Mapped[int]


class HeadRow(Base):
    """Where one record stands today; written together with every revision and act."""

    __tablename__ = "record_heads"
    __table_args__ = (
        Index("record_heads_by_group", "record_group", "key"),
        Index("record_heads_by_key", "key"),
        STRICT,
    )

    record_id: Mapped[int] = mapped_column(ForeignKey("records.id"), primary_key=True)
    key: Mapped[str] = mapped_column(NOCASE)
    group: Mapped[str] = mapped_column("record_group", Text)
    newest_id: Mapped[int]
    newest: Mapped[int]
    status: Mapped[str] = mapped_column(Text)
    in_force: Mapped[int | None]
    in_force_status: Mapped[str | None] = mapped_column(Text)
    property: Mapped[str] = mapped_column(Text)


class AnswerRow(Base):
    """A written answer to a question about one saved revision (of a record or of a check); the last one counts."""

    __tablename__ = "answers"
    __table_args__ = (Index("answers_by_subject", "subject", "subject_id"), STRICT)

    id: Mapped[int] = mapped_column(primary_key=True)
    subject: Mapped[str] = mapped_column(Text)
    subject_id: Mapped[int]
    question: Mapped[str] = mapped_column(Text)
    asked: Mapped[str] = mapped_column(Text)
    answer: Mapped[str] = mapped_column(Text)
    who: Mapped[str] = mapped_column(Text)
    person_id: Mapped[int | None]
    at: Mapped[str] = mapped_column(Text)


class IssueRow(Base):
    """One issued check revision: who issued it, the answers given, and the sheet as it went out."""

    __tablename__ = "issues"
    __table_args__ = (Index("issues_by_check", "check_id"), STRICT)

    check_revision_id: Mapped[int] = mapped_column(ForeignKey("check_revisions.id"), primary_key=True)
    check_id: Mapped[int] = mapped_column(ForeignKey("checks.id"))
    prepared_by: Mapped[str] = mapped_column(Text)
    issued_by: Mapped[str] = mapped_column(Text)
    person_id: Mapped[int | None]
    outside_checker: Mapped[str] = mapped_column(Text)
    checked_on: Mapped[str] = mapped_column(Text)
    answers: Mapped[list[dict[str, Any]]] = mapped_column(Json)
    pdf: Mapped[bytes] = mapped_column(LargeBinary, deferred=True)
    pdf_sha256: Mapped[str] = mapped_column(Text)
    at: Mapped[str] = mapped_column(Text)


class EvidencePageRow(Base):
    """The evidence page of a value as it was approved: what it stands on, and its bytes."""

    __tablename__ = "evidence_pages"
    __table_args__ = (Index("evidence_pages_by_revision", "record_revision_id"), STRICT)

    act_id: Mapped[int] = mapped_column(ForeignKey("record_acts.id"), primary_key=True)
    record_revision_id: Mapped[int] = mapped_column(ForeignKey("record_revisions.id"))
    content: Mapped[dict[str, Any]] = mapped_column(Json, deferred=True)
    sha256: Mapped[str] = mapped_column(Text)
    pdf: Mapped[bytes] = mapped_column(LargeBinary, deferred=True)
    pdf_sha256: Mapped[str] = mapped_column(Text)
    at: Mapped[str] = mapped_column(Text)


class RulesRow(Base):
    """The one row with the shop's rules for values."""

    __tablename__ = "library_rules"
    __table_args__ = (STRICT,)

    id: Mapped[int] = mapped_column(primary_key=True)
    provisional_from: Mapped[int]
    approved_from: Mapped[int]
    adhesive_share: Mapped[float] = mapped_column(REAL)
