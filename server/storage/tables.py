"""The tables, as the program reads them. The migrations make them; a test keeps the two alike.

Saved things (check and record revisions, the values a check used, the trail) are never changed or deleted: triggers in
the migrations refuse it, whoever asks.
"""

from __future__ import annotations

import json
from typing import Any

from sqlalchemy import REAL, Dialect, ForeignKey, Index, LargeBinary, MetaData, Text, TypeDecorator, UniqueConstraint
from sqlalchemy.orm import DeclarativeBase, Mapped, mapped_column

NOCASE = Text(collation="NOCASE")
STRICT = {"sqlite_strict": True}


class Json(TypeDecorator[Any]):
    """A JSON value kept as text: names in the order given, numbers to the last digit."""

    impl = Text
    cache_ok = True

    def process_bind_param(self, value: Any, dialect: Dialect) -> str | None:
        return None if value is None else compact(value)

    def process_result_value(self, value: Any, dialect: Dialect) -> Any:
        return None if value is None else json.loads(value)


def compact(value: object) -> str:
    """Return ``value`` as JSON text without spaces: names in their order, letters unescaped, no NaN or infinity.

    This text is what a saved revision's hash is taken over, so it must never change.
    """
    return json.dumps(value, ensure_ascii=False, allow_nan=False, separators=(",", ":"))


class Base(DeclarativeBase):
    metadata = MetaData()


class Shop(Base):
    """The one row with the shop's heading and defaults."""

    __tablename__ = "shop"
    __table_args__ = (STRICT,)

    id: Mapped[int] = mapped_column(primary_key=True)
    name: Mapped[str] = mapped_column(Text)
    address: Mapped[str] = mapped_column(Text)
    paper: Mapped[str] = mapped_column(Text)
    display: Mapped[str] = mapped_column(Text)


class Job(Base):
    __tablename__ = "jobs"
    __table_args__ = (STRICT,)

    id: Mapped[int] = mapped_column(primary_key=True)
    number: Mapped[str] = mapped_column(NOCASE, unique=True)
    title: Mapped[str] = mapped_column(Text)
    customer: Mapped[str] = mapped_column(Text)
    drawing: Mapped[str] = mapped_column(Text)
    note: Mapped[str] = mapped_column(Text)
    paper: Mapped[str] = mapped_column(Text)
    display: Mapped[str] = mapped_column(Text)
    created_at: Mapped[str] = mapped_column(Text)
    changed_at: Mapped[str] = mapped_column(Text)


class Check(Base):
    __tablename__ = "checks"
    __table_args__ = (UniqueConstraint("job_id", "number"), STRICT)

    id: Mapped[int] = mapped_column(primary_key=True)
    job_id: Mapped[int] = mapped_column(ForeignKey("jobs.id"))
    number: Mapped[int]
    mark: Mapped[str] = mapped_column(Text)
    created_at: Mapped[str] = mapped_column(Text)


class CheckRevision(Base):
    __tablename__ = "check_revisions"
    __table_args__ = (UniqueConstraint("check_id", "n"), STRICT)

    id: Mapped[int] = mapped_column(primary_key=True)
    check_id: Mapped[int] = mapped_column(ForeignKey("checks.id"))
    n: Mapped[int]
    follows_id: Mapped[int | None] = mapped_column(ForeignKey("check_revisions.id"))
    kind: Mapped[str] = mapped_column(Text)
    title: Mapped[str] = mapped_column(Text)
    verdict: Mapped[str] = mapped_column(Text)
    utilisation: Mapped[float | None] = mapped_column(REAL)
    heading: Mapped[dict[str, Any]] = mapped_column(Json, deferred=True)
    document: Mapped[dict[str, Any]] = mapped_column(Json, deferred=True)
    values_used: Mapped[dict[str, Any]] = mapped_column(Json, deferred=True)
    result: Mapped[dict[str, Any]] = mapped_column(Json, deferred=True)
    engine: Mapped[str] = mapped_column(Text)
    sha256: Mapped[str] = mapped_column(Text)
    pdf: Mapped[bytes] = mapped_column(LargeBinary, deferred=True)
    pdf_sha256: Mapped[str] = mapped_column(Text)
    made_by: Mapped[str] = mapped_column(Text)
    reason: Mapped[str] = mapped_column(Text)
    created_at: Mapped[str] = mapped_column(Text)


class CheckValue(Base):
    """Which record revision stands behind one name in one saved check: the index for "where is this used"."""

    __tablename__ = "check_values"
    __table_args__ = (Index("check_values_by_record", "record_key"), STRICT)

    check_revision_id: Mapped[int] = mapped_column(ForeignKey("check_revisions.id"), primary_key=True)
    section: Mapped[str] = mapped_column(Text, primary_key=True)
    name: Mapped[str] = mapped_column(Text, primary_key=True)
    record_key: Mapped[str] = mapped_column(NOCASE)
    record_revision: Mapped[int]


class Record(Base):
    __tablename__ = "records"
    __table_args__ = (STRICT,)

    id: Mapped[int] = mapped_column(primary_key=True)
    key: Mapped[str] = mapped_column(NOCASE, unique=True)
    group: Mapped[str] = mapped_column("record_group", Text)
    created_at: Mapped[str] = mapped_column(Text)


class RecordRevision(Base):
    __tablename__ = "record_revisions"
    __table_args__ = (UniqueConstraint("record_id", "n"), STRICT)

    id: Mapped[int] = mapped_column(primary_key=True)
    record_id: Mapped[int] = mapped_column(ForeignKey("records.id"))
    n: Mapped[int]
    name: Mapped[str] = mapped_column(Text)
    status: Mapped[str] = mapped_column(Text)
    entry: Mapped[dict[str, Any]] = mapped_column(Json)
    details: Mapped[dict[str, str]] = mapped_column(Json)
    links: Mapped[dict[str, Any]] = mapped_column(Json)
    chain: Mapped[list[Any]] = mapped_column(Json)
    source: Mapped[str] = mapped_column(Text)
    note: Mapped[str] = mapped_column(Text)
    made_by: Mapped[str] = mapped_column(Text)
    reason: Mapped[str] = mapped_column(Text)
    created_at: Mapped[str] = mapped_column(Text)


class TrailEntry(Base):
    __tablename__ = "trail"
    __table_args__ = (Index("trail_by_subject", "subject"), STRICT)

    id: Mapped[int] = mapped_column(primary_key=True)
    at: Mapped[str] = mapped_column(Text)
    who: Mapped[str] = mapped_column(Text)
    what: Mapped[str] = mapped_column(Text)
    subject: Mapped[str] = mapped_column(Text)
    detail: Mapped[dict[str, Any]] = mapped_column(Json)
