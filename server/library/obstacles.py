"""What keeps a revision from being approved: one list, for the page and for the act itself."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from server.library import reading
from server.library.coupon_sets import coupon_result
from server.library.groups import STOPPED
from server.library.lot_life import expiry, is_over
from server.library.lots import barred_lots
from server.library.properties import PROPERTIES
from server.library.questions import questions
from server.library.record import Record
from server.library.references import standing
from server.library.rules import Rules, rules
from server.library.states import IN_WORK
from server.people import APPROVES, Person, members
from server.storage import Session

# A bond may be approved on these: it never counts for more than the values it pins.
_GOOD_ENOUGH = ("approved", "provisional")


@dataclass(frozen=True)
class Obstacle:
    """One thing that keeps a revision from approval; ``question`` is the key of a question that wants an answer."""

    about: str
    text: str
    question: str = ""


def obstacles(session: Session, record: Record, by: Person | None = None) -> list[Obstacle]:
    """Return everything that keeps ``record`` from approval; with ``by``, also what keeps that person from it."""
    found = [*_of_the_state(record), *_of_the_evidence(session, record)]
    if by is not None:
        found += _of_the_person(session, record, by)
    return found


def _of_the_state(record: Record) -> Iterator[Obstacle]:
    if record.status not in (*IN_WORK, "on hold", "withdrawn", "superseded", "rejected"):
        yield Obstacle("status", f"{record.itself} is {record.status} already.")
    elif record.status in ("withdrawn", "superseded"):
        yield Obstacle("status", f"{record.itself} is {record.status}; save a new revision and have that one approved.")
    elif record.status == "rejected":
        yield Obstacle("status", f"{record.itself} is rejected; take it back to work first, with the reason.")
    if record.group == "lots" and is_over(record):
        yield Obstacle(
            "expiry", f"{record.itself} expired on {expiry(record)}; a retest extends it, or it is rejected."
        )
    if record.revision != record.newest:
        yield Obstacle("revision", f"{record.itself} is not the newest; look at revision {record.newest}.")


def _of_the_evidence(session: Session, record: Record) -> Iterator[Obstacle]:
    if record.group == "values":
        yield from _of_a_value(session, record)
    elif record.pins:
        yield from _of_pins(session, record)
    elif record.group in ("bonds", "fasteners", "materials") and not record.source:
        yield Obstacle("source", "The source is empty; name the test report or standard before it is approved.")
    for question in questions(session, record):
        if question.open:
            yield Obstacle(question.about, f"Not answered yet: {question.text}", question.key)


def _of_a_value(session: Session, record: Record) -> Iterator[Obstacle]:
    origin = record.values["origin"]
    if origin == "data sheet":
        yield Obstacle(
            "origin",
            "A maker's data sheet compares adhesives; it is no design value of these surfaces (see ASTM D4896), so it "
            "stays indicative. Break coupons of your own.",
        )
    behind = record.links.get("set")
    if origin != "coupon set" or behind is None:
        return
    coupons = reading.get(session, behind.key, behind.revision)
    known = rules(session)
    yield from _of_the_number(record, known)
    yield from _of_the_pattern(record, coupons, known)
    state = standing(coupons)
    if state in STOPPED:
        yield Obstacle("coupon set", f"{coupons.itself} is {state}.")
    for _, text in barred_lots(session, coupons):
        yield Obstacle("lot", text)
    if coupons.newest > coupons.revision:
        yield Obstacle(
            "coupon set",
            f"{coupons.key} has a revision {coupons.newest}; this value was found from revision {coupons.revision}. "
            "Save a new revision of the value from it.",
        )


def _of_the_number(record: Record, known: Rules) -> Iterator[Obstacle]:
    n = record.values["found"]["n"]
    if n < known.approved_from:
        yield Obstacle(
            "number of coupons",
            f"{n} {'coupon counts' if n == 1 else 'coupons count'}; {known.approved_from} or more may be approved. "
            "Until then the value stays "
            f"{'provisional' if n >= known.provisional_from else 'indicative'}.",
        )


def _of_the_pattern(record: Record, coupons: Record, known: Rules) -> Iterator[Obstacle]:
    if PROPERTIES[record.values["property"]].section != "adhesives":
        return
    failure = coupon_result(coupons, record.values.get("statistic"))["failure"]
    if failure is None:
        yield Obstacle(
            "failure pattern", "Where the coupons broke is not recorded; enter the shares (ISO 10365) in the set."
        )
    elif failure["adhesive"] > known.adhesive_share:
        yield Obstacle(
            "failure pattern",
            f"{failure['adhesive']:.3g} % of the bonded area failed by adhesion on average; at most "
            f"{known.adhesive_share:g} % may be approved. It peeled off the surface: mend the preparation.",
        )


def _of_pins(session: Session, record: Record) -> Iterator[Obstacle]:
    pinned = reading.many(session, record.pins.values())
    for at, link in record.pins.items():
        state = standing(pinned[link])
        if state not in _GOOD_ENOUGH:
            yield Obstacle("pinned value", f"{link} ({at.replace('_', ' ')}) is {state}; have it approved first.")


def entered_by(session: Session, record: Record) -> list[str]:
    """Return who entered a revision and what it rests on: since the last approval, with the coupons behind it."""
    names: list[str] = []
    for each in reading.revisions(session, record.key):
        if each.revision < record.revision and each.approval is not None:
            break
        if each.revision <= record.revision:
            names.append(each.made_by)
    behind = record.links.get("set")
    if behind is not None:
        older = reading.revisions(session, behind.key)
        names += [each.made_by for each in older if each.revision <= behind.revision]
    return list(dict.fromkeys(names))


def _of_the_person(session: Session, record: Record, by: Person) -> Iterator[Obstacle]:
    if not by.may(APPROVES):
        yield Obstacle("person", f"{by.name} may not approve; ask somebody with the role '{APPROVES}'.")
    if record.group == "lots":  # who takes a lot in may also release it: the label is compared, nothing is judged
        return
    names = entered_by(session, record)
    if by.named and by.name.casefold() in {name.casefold() for name in names}:
        yield Obstacle("person", f"{by.name} entered it, or the coupons behind it; another person approves.")
    elif by.named and "" in names:
        yield Obstacle(
            "person", "It was entered without a name; save it once more under the name of who stands for it."
        )
    elif not by.named:
        yield Obstacle(
            "person",
            "Nobody is signed in here, so nobody can be told from who entered it. Start the program with --sign-in; "
            "then another person approves it.",
        )


def others_who_may(session: Session, by: Person, role: str) -> list[str]:
    """Return the names of those, beside ``by``, who have ``role`` and are not switched off."""
    every = members(session)
    return [each.name for each in every if each.off_at is None and role in each.roles and each.id != by.id]
