"""Ways in: name and password, one-time code, the first person's code; and the change of one's own password."""

from __future__ import annotations

import hmac
from collections.abc import Iterable
from dataclasses import dataclass
from datetime import datetime

from sqlalchemy import delete, select

from server import storage
from server.errors import DocumentError, Fault
from server.people import passwords, roster, tries, visits
from server.people.errors import NoPersonError, SignInError
from server.people.roles import ROLES, Person
from server.people.roster import Unprintable
from server.people.secret import code_hash
from server.people.times import moment
from server.storage import Session, utc_text
from server.storage.people_tables import CodeRow, PersonRow

_DO_NOT_FIT = "The name and the password do not fit. Try again; if it is forgotten, ask for a one-time code."
_NO_CODE = (
    "The name and the code do not fit, or the code was used or has ended. Look at it again, or ask for another one."
)


@dataclass(frozen=True)
class SignedIn:
    """A person who got in; ``token`` goes into the cookie of this browser and nowhere else."""

    person: Person
    token: str


@dataclass(frozen=True)
class Browser:
    """Where somebody comes from: shown in the list of their sessions; the address limits guessing."""

    address: str = ""
    kind: str = ""


def sign_in(
    session: Session, *, sign_in_name: str, password: str, browser: Browser, now: datetime | None = None
) -> SignedIn:
    """Let a person in by name and password.

    Raises
    ------
    SignInError
        If they do not fit, or the person is switched off (the message is the same); HeldError after too many tries.
    """
    at = moment(now)
    keys = tries.by_name(sign_in_name), tries.by_address(browser.address)
    tries.count(session, keys, at)
    row = _named(session, sign_in_name)
    fits = passwords.fits(row.password_hash if row is not None else None, password)
    if row is None or not fits or row.off_at is not None:
        raise SignInError(_DO_NOT_FIT)
    renewed = passwords.hashed(password) if passwords.outdated(row.password_hash or "") else None
    with storage.write(session):
        row = _still_there(session, row.id)
        if renewed is not None:
            row.password_hash = renewed
        tries.forgive(session, *keys)
        return _in(session, row, browser, at)


def use_code(
    session: Session,
    *,
    sign_in_name: str,
    code: str,
    password: str,
    again: str,
    browser: Browser,
    now: datetime | None = None,
) -> SignedIn:
    """Choose a new password with a one-time code; every session and token of the person ends.

    Raises
    ------
    DocumentError
        If the new password cannot be used; the code can then be used again.
    SignInError
        If name and code do not fit, or the code was used or has ended.
    """
    at = moment(now)
    keys = tries.by_name(sign_in_name), tries.by_address(browser.address)
    faults = _password_faults(password, again, sign_in_name)
    if faults:
        raise DocumentError(faults)
    tries.count(session, keys, at)
    row = _named(session, sign_in_name)
    fits = _code_fits(session, 0 if row is None else row.id, code, at)
    if row is None or not fits or row.off_at is not None:
        raise SignInError(_NO_CODE)
    if message := passwords.fault(password, row.name, row.sign_in_name):
        tries.forgive(session, *keys)
        raise DocumentError([Fault("password", message)])
    kept = passwords.hashed(password)
    with storage.write(session):
        if not _code_fits(session, row.id, code, at):  # somebody else was quicker
            raise SignInError(_NO_CODE)
        session.execute(delete(CodeRow).where(CodeRow.person_id == row.id))
        row = _still_there(session, row.id)
        row.password_hash = kept
        roster.end_sessions(session, row.id)
        roster.end_tokens(session, row.id, at)
        roster.note(session, row, row.name, "password chosen with a one-time code", at)
        tries.forgive(session, *keys)
        return _in(session, row, browser, at)


def first_person(
    session: Session,
    *,
    code: str,
    name: str,
    sign_in_name: str,
    password: str,
    again: str,
    browser: Browser,
    unprintable: Unprintable = lambda text: (),
    now: datetime | None = None,
) -> SignedIn:
    """Make the first person, with every role, by the code that the program printed when it started.

    Raises
    ------
    DocumentError
        If a name or the password cannot be used, or there are people already.
    SignInError
        If the code does not fit or has ended.
    """
    at = moment(now)
    keys = tries.by_name("the first person"), tries.by_address(browser.address)
    faults: list[Fault] = []
    roster.checked_names(session, faults, name, sign_in_name, unprintable)
    faults += _password_faults(password, again, name, sign_in_name)
    if faults:
        raise DocumentError(faults)
    tries.count(session, keys, at)
    if not _code_fits(session, None, code, at):
        raise SignInError("The code does not fit or has ended. Start the program again; it prints a new one.")
    kept = passwords.hashed(password)
    with storage.write(session):
        if roster.anybody(session) or not _code_fits(session, None, code, at):
            raise SignInError("There are people already. Sign in, or ask for a one-time code.")
        person_id = roster.insert(session, name, sign_in_name, ROLES, kept, by="", unprintable=unprintable, now=at)
        session.execute(delete(CodeRow).where(CodeRow.person_id.is_(None)))
        tries.forgive(session, *keys)
        return _in(session, _still_there(session, person_id), browser, at)


def change_password(
    session: Session,
    person_id: int,
    *,
    old: str,
    password: str,
    again: str,
    browser: Browser,
    now: datetime | None = None,
) -> SignedIn:
    """Change one's own password; every session ends, this browser gets a new one.

    Raises
    ------
    DocumentError
        If the present password does not fit or the new one cannot be used; HeldError after too many tries.
    """
    at = moment(now)
    row = _still_there(session, person_id)
    faults = _password_faults(password, again, row.name, row.sign_in_name)
    if not faults and password == old:
        faults = [Fault("password", "This is the password you have; choose another one.")]
    if faults:
        raise DocumentError(faults)
    keys = tries.by_name(row.sign_in_name), tries.by_address(browser.address)
    tries.count(session, keys, at)
    if not passwords.fits(row.password_hash, old):
        raise DocumentError([Fault("old", "This is not your present password; type it again.")])
    kept = passwords.hashed(password)
    with storage.write(session):
        row = _still_there(session, person_id)
        row.password_hash = kept
        session.execute(delete(CodeRow).where(CodeRow.person_id == row.id))
        roster.end_sessions(session, row.id)
        roster.note(session, row, row.name, "password changed", at)
        tries.forgive(session, *keys)
        return _in(session, row, browser, at)


def _password_faults(password: str, again: str, *names: str) -> list[Fault]:
    if message := passwords.fault(password, *names):
        return [Fault("password", message)]
    if password != again:
        return [Fault("again", "The two passwords differ; type the same one twice.")]
    return []


def _named(session: Session, sign_in_name: str) -> PersonRow | None:
    wanted = sign_in_name.strip().casefold()
    if "\x00" in wanted or not wanted.isascii():
        return None
    query = select(PersonRow).where(PersonRow.sign_in_name == wanted).execution_options(populate_existing=True)
    return session.scalars(query).one_or_none()


def _still_there(session: Session, person_id: int) -> PersonRow:
    row = session.get(PersonRow, person_id, populate_existing=True)
    if row is None or row.off_at is not None:
        raise NoPersonError("This person is switched off. Ask whoever keeps the book.")
    return row


def _code_fits(session: Session, person_id: int | None, code: str, now: datetime) -> bool:
    mine = CodeRow.person_id.is_(None) if person_id is None else CodeRow.person_id == person_id
    found: Iterable[str] = session.scalars(select(CodeRow.code_hash).where(mine, CodeRow.ends_at > utc_text(now)))
    return any(hmac.compare_digest(kept, code_hash(code)) for kept in found)


def _in(session: Session, row: PersonRow, browser: Browser, now: datetime) -> SignedIn:
    person = Person(row.id, row.name, frozenset(row.roles))
    return SignedIn(person, visits.start(session, row.id, address=browser.address, browser=browser.kind, now=now))
