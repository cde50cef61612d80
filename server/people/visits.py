"""Who is there: sessions of browsers, and tokens of programs that act for a person over the API."""

from __future__ import annotations

from contextlib import suppress
from dataclasses import dataclass
from datetime import datetime, timedelta

from sqlalchemy import ColumnElement, delete, select, update
from sqlalchemy.sql.dml import Update

from server import storage
from server.errors import DocumentError, Fault
from server.people.errors import NoPersonError
from server.people.roles import Person
from server.people.secret import api_token, digest, session_token
from server.people.times import moment, since
from server.storage import Session, StorageError, utc_text
from server.storage.people_tables import PersonRow, SessionRow, TokenRow

IDLE, LONGEST = timedelta(hours=4), timedelta(hours=16)
"""A session ends after four hours without a page, and sixteen hours after the sign-in: a long day."""
_SEEN_EVERY = timedelta(minutes=1)
_MOST_TOKENS = 50


@dataclass(frozen=True)
class Visit:
    """A person recognised by a session or, with ``session_id`` 0, by a token."""

    person: Person
    session_id: int = 0


@dataclass(frozen=True)
class Seat:
    """One browser in which a person is signed in."""

    id: int
    browser: str
    address: str
    started_at: str
    seen_at: str


@dataclass(frozen=True)
class Token:
    """One program's token; its secret was shown once and is not kept."""

    id: int
    label: str
    created_at: str
    used_at: str | None
    revoked_at: str | None


def start(
    session: Session, person_id: int, *, address: str = "", browser: str = "", now: datetime | None = None
) -> str:
    """Start a session of a person and return its token; sessions that have ended are cleared away."""
    at, token = moment(now), session_token()
    with storage.write(session):
        session.execute(delete(SessionRow).where(_ended(at)))
        session.add(
            SessionRow(
                person_id=person_id,
                token_hash=digest(token),
                browser=browser[:100],
                address=address[:60],
                started_at=utc_text(at),
                seen_at=utc_text(at),
                ends_at=utc_text(at + LONGEST),
            )
        )
    return token


def by_session(session: Session, token: str, *, now: datetime | None = None) -> Visit | None:
    """Return who a session's token belongs to; None where it has ended or the person is switched off."""
    at = moment(now)
    query = select(SessionRow, PersonRow).join(PersonRow, PersonRow.id == SessionRow.person_id)
    query = query.where(SessionRow.token_hash == digest(token), ~_ended(at), PersonRow.off_at.is_(None))
    found = session.execute(query).one_or_none()
    if found is None:
        return None
    row, person = found
    visit = Visit(_person(person), row.id)
    if at - since(row.seen_at) >= _SEEN_EVERY:
        _mark(session, update(SessionRow).where(SessionRow.id == row.id).values(seen_at=utc_text(at)))
    return visit


def by_token(session: Session, token: str, *, now: datetime | None = None) -> Visit | None:
    """Return who a program's token belongs to; None where it is revoked or the person is switched off."""
    at = moment(now)
    query = select(TokenRow, PersonRow).join(PersonRow, PersonRow.id == TokenRow.person_id)
    query = query.where(TokenRow.token_hash == digest(token), TokenRow.revoked_at.is_(None), PersonRow.off_at.is_(None))
    found = session.execute(query).one_or_none()
    if found is None:
        return None
    row, person = found
    visit = Visit(_person(person))
    if row.used_at is None or at - since(row.used_at) >= _SEEN_EVERY:
        _mark(session, update(TokenRow).where(TokenRow.id == row.id).values(used_at=utc_text(at)))
    return visit


def end(session: Session, token: str) -> None:
    """Sign one browser out."""
    with storage.write(session):
        session.execute(delete(SessionRow).where(SessionRow.token_hash == digest(token)))


def end_seat(session: Session, person_id: int, session_id: int) -> None:
    """Sign a person out in one browser, which need not be this one."""
    with storage.write(session):
        session.execute(delete(SessionRow).where(SessionRow.person_id == person_id, SessionRow.id == session_id))


def end_others(session: Session, person_id: int, but: int) -> None:
    """Sign a person out everywhere but in the session ``but``."""
    with storage.write(session):
        session.execute(delete(SessionRow).where(SessionRow.person_id == person_id, SessionRow.id != but))


def seats(session: Session, person_id: int, *, now: datetime | None = None) -> list[Seat]:
    """Return where a person is signed in, the newest first."""
    query = select(SessionRow).where(SessionRow.person_id == person_id, ~_ended(moment(now)))
    return [
        Seat(row.id, row.browser, row.address, row.started_at, row.seen_at)
        for row in session.scalars(query.order_by(SessionRow.seen_at.desc(), SessionRow.id.desc()))
    ]


def make_token(session: Session, person_id: int, label: str, *, now: datetime | None = None) -> str:
    """Return a new token for a program of this person; it is shown now and never again."""
    label = " ".join(label.split())
    if not label or len(label) > 80 or not label.isprintable():
        message = "Say in 1 to 80 characters which program or machine the token is for, such as “saw list script”."
        raise DocumentError([Fault("label", message)])
    token = api_token()
    with storage.write(session):
        mine = (TokenRow.person_id == person_id) & TokenRow.revoked_at.is_(None)
        if len(session.scalars(select(TokenRow.id).where(mine)).all()) >= _MOST_TOKENS:
            message = f"There are {_MOST_TOKENS} tokens already; revoke one that is no longer used."
            raise DocumentError([Fault("label", message)])
        at = utc_text(now)
        session.add(TokenRow(person_id=person_id, label=label, token_hash=digest(token), created_at=at))
        _note_token(session, person_id, "token made", at, label)
    return token


def revoke_token(session: Session, person_id: int, token_id: int, *, now: datetime | None = None) -> None:
    """End one of a person's tokens."""
    with storage.write(session):
        row = session.get(TokenRow, token_id, populate_existing=True)
        if row is None or row.person_id != person_id:
            raise NoPersonError("You have no such token. Look at the list on your page.")
        if row.revoked_at is None:
            row.revoked_at = utc_text(now)
            _note_token(session, person_id, "token revoked", row.revoked_at, row.label)


def tokens(session: Session, person_id: int) -> list[Token]:
    """Return a person's tokens: those in use first, then the revoked ones, the newest first."""
    query = select(TokenRow).where(TokenRow.person_id == person_id)
    query = query.order_by(TokenRow.revoked_at.is_not(None), TokenRow.id.desc()).limit(4 * _MOST_TOKENS)
    return [Token(row.id, row.label, row.created_at, row.used_at, row.revoked_at) for row in session.scalars(query)]


def _ended(now: datetime) -> ColumnElement[bool]:
    return (SessionRow.ends_at <= utc_text(now)) | (SessionRow.seen_at <= utc_text(now - IDLE))


def _person(row: PersonRow) -> Person:
    return Person(row.id, row.name, frozenset(row.roles))


def _mark(session: Session, change: Update) -> None:
    with suppress(StorageError), storage.write(session):  # nobody is kept out because somebody else saves
        session.execute(change)


def _note_token(session: Session, person_id: int, what: str, at: str, label: str) -> None:
    person = session.get(PersonRow, person_id)
    assert person is not None
    subject = f"person {person.sign_in_name}"
    storage.note(session, at=at, who=person.name, what=what, subject=subject, detail={"label": label})
