"""The tables of the people who sign in. Passwords, codes and tokens stand in them as hashes only."""

from __future__ import annotations

from sqlalchemy import ForeignKey, Index, Text
from sqlalchemy.orm import Mapped, mapped_column

from server.storage.tables import NOCASE, STRICT, Base, Json


class PersonRow(Base):
    """One person; never deleted, only switched off, and the name stays as saved sheets carry it."""

    __tablename__ = "people"
    __table_args__ = (STRICT,)

    id: Mapped[int] = mapped_column(primary_key=True)
    name: Mapped[str] = mapped_column(NOCASE, unique=True)
    sign_in_name: Mapped[str] = mapped_column(NOCASE, unique=True)
    roles: Mapped[list[str]] = mapped_column(Json)
    password_hash: Mapped[str | None] = mapped_column(Text)
    created_at: Mapped[str] = mapped_column(Text)
    off_at: Mapped[str | None] = mapped_column(Text)


class CodeRow(Base):
    """A one-time code for a person, or for the first one (without ``person_id``)."""

    __tablename__ = "one_time_codes"
    __table_args__ = (STRICT,)

    id: Mapped[int] = mapped_column(primary_key=True)
    person_id: Mapped[int | None] = mapped_column(ForeignKey("people.id"), unique=True)
    code_hash: Mapped[str] = mapped_column(Text)
    created_at: Mapped[str] = mapped_column(Text)
    ends_at: Mapped[str] = mapped_column(Text)


class SessionRow(Base):
    """One browser in which a person is signed in."""

    __tablename__ = "sessions"
    __table_args__ = (Index("sessions_by_person", "person_id"), STRICT)

    id: Mapped[int] = mapped_column(primary_key=True)
    person_id: Mapped[int] = mapped_column(ForeignKey("people.id"))
    token_hash: Mapped[str] = mapped_column(Text, unique=True)
    browser: Mapped[str] = mapped_column(Text)
    address: Mapped[str] = mapped_column(Text)
    started_at: Mapped[str] = mapped_column(Text)
    seen_at: Mapped[str] = mapped_column(Text)
    ends_at: Mapped[str] = mapped_column(Text)


class TokenRow(Base):
    """One program that acts for a person over the API."""

    __tablename__ = "tokens"
    __table_args__ = (Index("tokens_by_person", "person_id"), STRICT)

    id: Mapped[int] = mapped_column(primary_key=True)
    person_id: Mapped[int] = mapped_column(ForeignKey("people.id"))
    label: Mapped[str] = mapped_column(Text)
    token_hash: Mapped[str] = mapped_column(Text, unique=True)
    created_at: Mapped[str] = mapped_column(Text)
    used_at: Mapped[str | None] = mapped_column(Text)
    revoked_at: Mapped[str | None] = mapped_column(Text)


class TryRow(Base):
    """Failed tries of one name or from one address; the key is a hash, as people type passwords into wrong boxes."""

    __tablename__ = "sign_in_tries"
    __table_args__ = (STRICT,)

    key_hash: Mapped[str] = mapped_column(Text, primary_key=True)
    failures: Mapped[int]
    last_at: Mapped[str] = mapped_column(Text)
    held_until: Mapped[str] = mapped_column(Text)
