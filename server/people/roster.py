"""The people of the shop: added, given roles, switched off and on; never deleted, never renamed."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Callable, Collection, Iterable
from dataclasses import dataclass
from datetime import datetime, timedelta

from sqlalchemy import delete, func, select, update

from server import storage
from server.errors import DocumentError, Fault
from server.people.errors import NoPersonError
from server.people.roles import KEEPS_THE_BOOK, READS, ROLES, Person
from server.people.secret import code_hash, one_time_code
from server.people.times import moment
from server.storage import Session, utc_text
from server.storage.people_tables import CodeRow, PersonRow, SessionRow, TokenRow

CODE_LASTS, FIRST_CODE_LASTS = timedelta(hours=24), timedelta(hours=1)
LONGEST_NAME = 80
_SIGN_IN_NAME = re.compile(r"[a-z0-9][a-z0-9._-]{1,39}")
_MOST = 2**53

Unprintable = Callable[[str], Iterable[str]]


@dataclass(frozen=True)
class Member:
    """One person as the list of people shows them; ``code_until`` is when an unused one-time code ends."""

    id: int
    name: str
    sign_in_name: str
    roles: tuple[str, ...]
    created_at: str
    off_at: str | None
    has_password: bool
    code_until: str | None
    seen_at: str | None

    @property
    def person(self) -> Person:
        """The person as one who acts."""
        return Person(self.id, self.name, frozenset(self.roles))


@dataclass(frozen=True)
class OneTimeCode:
    """A code to hand over: shown now, never again."""

    code: str
    ends_at: str


def anybody(session: Session) -> bool:
    """Return whether there are people yet."""
    return session.scalar(select(PersonRow.id).limit(1)) is not None


def members(session: Session) -> list[Member]:
    """Return everybody, by name; those who are switched off last."""
    rows = session.scalars(select(PersonRow).order_by(PersonRow.off_at.is_not(None), PersonRow.name))
    codes = {row.person_id: row.ends_at for row in session.scalars(select(CodeRow))}
    last_seen = select(SessionRow.person_id, func.max(SessionRow.seen_at)).group_by(SessionRow.person_id)
    seen = {person_id: at for person_id, at in session.execute(last_seen)}  # noqa: C416 -- rows are no pairs to mypy
    return [_member(row, codes.get(row.id), seen.get(row.id)) for row in rows]


def member(session: Session, person_id: int) -> Member:
    """Return one person."""
    found = [each for each in members(session) if each.id == person_id]
    if not found:
        raise NoPersonError(f"There is no person with the number {person_id}. Look under People.")
    return found[0]


def find(session: Session, sign_in_name: str) -> Member:
    """Return the person who signs in as ``sign_in_name``."""
    wanted = sign_in_name.strip().casefold()
    for each in members(session):
        if each.sign_in_name == wanted:
            return each
    raise NoPersonError(f"Nobody signs in as {sign_in_name[:60]!r}; bondwright person list shows everybody.")


def add(
    session: Session,
    *,
    name: str,
    sign_in_name: str,
    roles: Collection[str],
    by: str = "",
    unprintable: Unprintable = lambda text: (),
    now: datetime | None = None,
) -> tuple[Member, OneTimeCode]:
    """Add a person, who chooses a password with the one-time code that comes back.

    ``unprintable`` tells the characters of a name that a sheet could not print.

    Raises
    ------
    DocumentError
        If a name cannot be used or is taken, or a role is unknown; every fault with its field.
    """
    at = moment(now)
    with storage.write(session):
        person_id = insert(session, name, sign_in_name, roles, None, by=by, unprintable=unprintable, now=at)
        code = _new_code(session, person_id, at, CODE_LASTS)
    return member(session, person_id), code


def insert(
    session: Session,
    name: str,
    sign_in_name: str,
    roles: Collection[str],
    password_hash: str | None,
    *,
    by: str,
    unprintable: Unprintable,
    now: datetime,
) -> int:
    """Store a new person inside a write and return the number."""
    faults: list[Fault] = []
    name, sign_in_name = checked_names(session, faults, name, sign_in_name, unprintable)
    chosen = _chosen(faults, roles)
    if not anybody(session) and KEEPS_THE_BOOK not in chosen:
        message = f"The first person must be one who {KEEPS_THE_BOOK}; give that role too."
        faults.append(Fault("roles", message))
    if faults:
        raise DocumentError(faults)
    row = PersonRow(
        name=name, sign_in_name=sign_in_name, roles=chosen, password_hash=password_hash, created_at=utc_text(now)
    )
    session.add(row)
    session.flush()
    note(session, row, by or name, "person added", now, roles=chosen)
    return row.id


def checked_names(
    session: Session, faults: list[Fault], name: str, sign_in_name: str, unprintable: Unprintable
) -> tuple[str, str]:
    """Return both names as they are kept, with a fault for each that cannot be."""
    name = unicodedata.normalize("NFC", " ".join(name.split()))
    sign_in_name = sign_in_name.strip().casefold()
    taken = session.execute(select(PersonRow.name, PersonRow.sign_in_name)).all()
    bad = [sign for sign in name if unicodedata.category(sign)[0] == "C"] or list(unprintable(name))
    if not any(sign.isalpha() for sign in name):
        faults.append(Fault("name", "The name is empty; enter it as it is to stand on the sheets."))
    elif len(name) > LONGEST_NAME:
        faults.append(Fault("name", f"The name has {len(name)} characters; shorten it to {LONGEST_NAME}."))
    elif bad:
        faults.append(Fault("name", f"The name holds {bad[0]!a}, which a sheet cannot print; use another letter."))
    elif name.casefold() in {row.name.casefold() for row in taken}:
        message = f"There is a {name} already; add something that tells the two apart on a sheet."
        faults.append(Fault("name", message))
    if not _SIGN_IN_NAME.fullmatch(sign_in_name):
        message = (
            f"{sign_in_name[:60]!r} cannot be a sign-in name; use 2 to 40 small letters without accents, figures, "
            "dots, hyphens or underscores, such as ann.e."
        )
        faults.append(Fault("sign_in_name", message))
    elif sign_in_name in {row.sign_in_name for row in taken}:
        faults.append(Fault("sign_in_name", f"Somebody signs in as {sign_in_name} already; choose another."))
    return name, sign_in_name


def set_roles(
    session: Session, person_id: int, roles: Collection[str], *, by: str = "", now: datetime | None = None
) -> None:
    """Give a person these roles and no others; somebody must always keep the book."""
    with storage.write(session):
        row = _row(session, person_id)
        faults: list[Fault] = []
        chosen = _chosen(faults, roles)
        if KEEPS_THE_BOOK not in chosen and _only_keeper(session, row):
            message = f"Nobody else {KEEPS_THE_BOOK}; give somebody else that role first."
            faults.append(Fault("roles", message))
        if faults:
            raise DocumentError(faults)
        if chosen != row.roles:
            note(session, row, by, "roles changed", moment(now), before=row.roles, after=chosen)
            row.roles = chosen


def switch_off(session: Session, person_id: int, *, by: str = "", now: datetime | None = None) -> None:
    """Let a person in no more: sessions, tokens and codes end; what they did keeps their name."""
    at = moment(now)
    with storage.write(session):
        row = _row(session, person_id)
        if row.off_at is not None:
            return
        if _only_keeper(session, row):
            message = f"{row.name} is the only one who {KEEPS_THE_BOOK}; give somebody else that role first."
            raise DocumentError([Fault("", message)])
        row.off_at = utc_text(at)
        end_sessions(session, row.id)
        end_tokens(session, row.id, at)
        session.execute(delete(CodeRow).where(CodeRow.person_id == row.id))
        note(session, row, by, "person switched off", at)


def switch_on(session: Session, person_id: int, *, by: str = "", now: datetime | None = None) -> None:
    """Let a person in again, with the password and the roles they had."""
    with storage.write(session):
        row = _row(session, person_id)
        if row.off_at is not None:
            row.off_at = None
            note(session, row, by, "person switched on", moment(now))


def give_code(session: Session, person_id: int, *, by: str = "", now: datetime | None = None) -> OneTimeCode:
    """Return a one-time code with which a person chooses a new password; an older code ends.

    The old password holds until the code is used.
    """
    at = moment(now)
    with storage.write(session):
        row = _row(session, person_id)
        if row.off_at is not None:
            raise DocumentError([Fault("", f"{row.name} is switched off; switch {row.name} on first.")])
        code = _new_code(session, row.id, at, CODE_LASTS)
        note(session, row, by, "one-time code given", at)
    return code


def first_code(session: Session, *, now: datetime | None = None) -> OneTimeCode | None:
    """Return a code for the first person, an older one ends; None where there are people."""
    with storage.write(session):
        return None if anybody(session) else _new_code(session, None, moment(now), FIRST_CODE_LASTS)


def end_sessions(session: Session, person_id: int) -> None:
    """Sign a person out everywhere, inside a write."""
    session.execute(delete(SessionRow).where(SessionRow.person_id == person_id))


def end_tokens(session: Session, person_id: int, now: datetime) -> None:
    """Revoke every token of a person, inside a write."""
    mine = (TokenRow.person_id == person_id) & TokenRow.revoked_at.is_(None)
    session.execute(update(TokenRow).where(mine).values(revoked_at=utc_text(now)))


def note(session: Session, row: PersonRow, by: str, what: str, now: datetime, **detail: object) -> None:
    """Add a line about a person to the trail."""
    subject = f"person {row.sign_in_name}"
    storage.note(session, at=utc_text(now), who=by, what=what, subject=subject, detail=detail)


def _row(session: Session, person_id: int) -> PersonRow:
    row = session.get(PersonRow, person_id, populate_existing=True) if 0 < person_id < _MOST else None
    if row is None:
        raise NoPersonError(f"There is no person with the number {person_id}. Look under People.")
    return row


def _new_code(session: Session, person_id: int | None, now: datetime, lasts: timedelta) -> OneTimeCode:
    mine = CodeRow.person_id.is_(None) if person_id is None else CodeRow.person_id == person_id
    session.execute(delete(CodeRow).where(mine))
    code, ends = one_time_code(), utc_text(now + lasts)
    session.add(CodeRow(person_id=person_id, code_hash=code_hash(code), created_at=utc_text(now), ends_at=ends))
    session.flush()
    return OneTimeCode(code, ends)


def _chosen(faults: list[Fault], roles: Collection[str]) -> list[str]:
    """Return the roles in their order; reading is always among them."""
    for role in roles:
        if role not in ROLES:
            faults.append(Fault("roles", f"{role[:60]!r} is not a role; choose among {', '.join(ROLES)}."))
    return [role for role in ROLES if role in roles or role == READS]


def _only_keeper(session: Session, row: PersonRow) -> bool:
    """Return whether the book would be without a keeper without this person."""
    if KEEPS_THE_BOOK not in row.roles or row.off_at is not None:
        return False
    others = session.scalars(select(PersonRow).where(PersonRow.id != row.id, PersonRow.off_at.is_(None)))
    return not any(KEEPS_THE_BOOK in other.roles for other in others)


def _member(row: PersonRow, code_until: str | None, seen_at: str | None) -> Member:
    return Member(
        id=row.id,
        name=row.name,
        sign_in_name=row.sign_in_name,
        roles=tuple(row.roles),
        created_at=row.created_at,
        off_at=row.off_at,
        has_password=row.password_hash is not None,
        code_until=code_until,
        seen_at=seen_at,
    )
