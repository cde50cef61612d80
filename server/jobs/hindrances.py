"""What holds a saved check back from being issued: one list, to which later parts of the program add."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass, replace
from datetime import datetime
from typing import Any

from sqlalchemy import select

from server import library
from server.errors import DocumentError, Fault, JointError
from server.jobs.export import altered
from server.jobs.revisions import SavedRevision, revision
from server.library import Link, NotFoundError, Record
from server.library.groups import STOPPED
from server.library.lots import barred_lots
from server.library.questions import Answer, answers, keep_answer, question_key
from server.people import CHECKS, Person
from server.storage import Session
from server.storage.evidence_tables import IssueRow
from server.storage.tables import CheckRevision as RevisionRow

UNPROVEN = ("draft", "indicative")


@dataclass(frozen=True)
class Hindrance:
    """One thing that holds a check back; ``answerable`` ones are lifted by a written answer, the others by a change.

    ``kind`` is "verdict", "missing", "caution", "difference", "status", "revision" or "person". ``earlier`` is what was
    answered to the same question on an earlier revision of the check.
    """

    key: str
    kind: str
    about: str
    text: str
    answerable: bool
    tested: str = ""
    used: str = ""
    where: str = ""
    answer: str = ""
    answered_by: str = ""
    answered_at: str = ""
    earlier: str = ""

    @property
    def open(self) -> bool:
        """Whether it still holds the check back."""
        return not (self.answerable and self.answer)


def hindrances(session: Session, revision_id: int, by: Person | None = None) -> list[Hindrance]:
    """Return everything that holds a saved check back, answered or not; with ``by``, also what holds that person back.

    Cautions that want an answer, differences between tested and used, a verdict that is no pass, what is missing,
    records that were held, withdrawn or replaced since, and a revision that is not the last.
    """
    saved = revision(session, revision_id)
    found = list({each.key: each for each in _all(session, saved)}.values())
    given = answers(session, "check", [saved.id]).get(saved.id, {})
    before = _earlier(session, saved)
    found = [_answered(each, given, before) for each in found]
    return found if by is None else [*found, *_of_the_person(saved, by)]


def answer(session: Session, revision_id: int, key: str, text: str, *, by: Person, now: datetime | None = None) -> None:
    """Write the answer to a hindrance; it is kept with the revision, with name and time.

    Raises
    ------
    NotFoundError
        If the revision has no such hindrance, or none that an answer lifts.
    DocumentError
        If nothing was written.
    """
    asked = {each.key: each for each in hindrances(session, revision_id) if each.answerable}
    if key not in asked:
        raise NotFoundError("This check asks no such question; look at it again, it may have changed.")
    issued = session.get(IssueRow, revision_id)
    if issued is not None:
        raise DocumentError([Fault("answer", "This revision is issued; its answers stand. Make a new revision.")])
    keep_answer(session, "check", revision_id, key, asked[key].text, text, by, now)


def _all(session: Session, saved: SavedRevision) -> Iterator[Hindrance]:
    yield from _of_the_revision(session, saved)
    yield from _of_the_result(saved)
    yield from _of_the_library(session, saved)
    for each in library.differences(session, saved.document, saved.values_used):
        yield Hindrance(
            each.key, "difference", each.about, each.text, True, tested=each.tested, used=each.used, where=each.where
        )


def _of_the_revision(session: Session, saved: SavedRevision) -> Iterator[Hindrance]:
    if saved.revision != saved.newest:
        text = f"Revision {saved.newest} of this check was saved since; only the newest is issued."
        yield _fixed("revision", "revision", text)
    if session.get(IssueRow, saved.id) is not None:
        yield _fixed("revision", "issued", "This revision is issued already.")
    wrong = altered(session, saved.id)
    if wrong:
        yield _fixed("revision", "altered", wrong)


def _of_the_result(saved: SavedRevision) -> Iterator[Hindrance]:
    if saved.verdict != "pass":
        yield _fixed("verdict", "verdict", f"The verdict is '{saved.verdict}'; only a check that passes is issued.")
    for missing in saved.result.get("missing", ()):
        yield _fixed("missing", "missing", str(missing))
    for caution in saved.result.get("cautions", ()):
        if caution.get("answer"):
            about, text = str(caution["about"]), str(caution["text"])
            yield Hindrance(question_key("caution", about, text), "caution", about, text, True)


def _of_the_library(session: Session, saved: SavedRevision) -> Iterator[Hindrance]:
    """Records that the check stands on, and what became of them since."""
    for name, link in dict.fromkeys(_records(saved.values_used)):
        try:
            record = library.get(session, link.key, link.revision)
        except JointError:
            yield _fixed("status", name, f"{link} is not in this library: nobody can tell whether it still holds.")
            continue
        yield from _standing(name, record)
        if record.group == "sets":
            yield from _lots(session, record)


def _records(values_used: Mapping[str, Mapping[str, Mapping[str, Any]]]) -> Iterator[tuple[str, Link]]:
    for section, entries in values_used.items():
        for name, entry in entries.items():
            what = f"{section[:-1]} {name}"
            if entry.get("record") is not None:
                yield what, Link(str(entry["record"]), int(entry["revision"]))
            for behind in (entry.get("lineage") or {}).values():
                yield what, Link(str(behind["record"]), int(behind["revision"]))
                if behind.get("coupon_set") is not None:
                    yield what, Link(str(behind["coupon_set"]), int(behind["coupon_set_revision"]))


def _standing(name: str, record: Record) -> Iterator[Hindrance]:
    state = library.standing(record)
    if state in STOPPED:
        yield _fixed("status", name, f"{record.itself} ({name}) is {state} now.")
    elif record.group != "sets" and state in UNPROVEN:
        yield _fixed("status", name, f"{record.itself} ({name}) is {state}: not approved.")
    elif state == "superseded" or (record.in_force is not None and record.in_force > record.revision):
        text = (
            f"{record.itself} ({name}) is superseded: revision {record.in_force or record.newest} took its place. Why "
            "is this check issued on the older one? Or run it again with today's values."
        )
        yield Hindrance(question_key("status", name, text), "status", name, text, True)


def _lots(session: Session, record: Record) -> Iterator[Hindrance]:
    for number, text in barred_lots(session, record):
        yield _fixed("status", f"lot {number}", text)


def _of_the_person(saved: SavedRevision, by: Person) -> Iterator[Hindrance]:
    if not by.may(CHECKS):
        yield _fixed("person", "person", f"{by.name} may not issue; ask somebody with the role '{CHECKS}'.")
    prepared = str(saved.made_by)
    if by.named and by.name.casefold() == prepared.casefold():
        yield _fixed("person", "person", f"{by.name} prepared this check; another person issues it.")
    elif not prepared:
        yield _fixed("person", "person", "Nobody's name stands on this revision as its preparer; save it again.")
    elif not by.named:
        yield _fixed(
            "person",
            "person",
            "Nobody is signed in here, so nobody can be told from who prepared it. Start the program with --sign-in; "
            "then another person than who prepared it issues it.",
        )


def _fixed(kind: str, about: str, text: str) -> Hindrance:
    return Hindrance(question_key(kind, about, text), kind, about, text, False)


def _answered(each: Hindrance, given: Mapping[str, Answer], before: Mapping[str, Answer]) -> Hindrance:
    written, earlier = given.get(each.key), before.get(each.key)
    if not each.answerable or (written is None and earlier is None):
        return each
    return replace(
        each,
        answer=written.text if written else "",
        answered_by=written.who if written else "",
        answered_at=written.at if written else "",
        earlier=earlier.text if earlier else "",
    )


def _earlier(session: Session, saved: SavedRevision) -> dict[str, Answer]:
    query = select(RevisionRow.id).where(RevisionRow.check_id == saved.check_id, RevisionRow.n < saved.revision)
    older: Iterable[int] = session.scalars(query.order_by(RevisionRow.n))
    merged: dict[str, Answer] = {}
    for _, given in sorted(answers(session, "check", list(older)).items()):
        merged |= given
    return merged
