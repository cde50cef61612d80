"""One record's page: what it is and stands on, who stands for it, what keeps it from approval, where it is used."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from fastapi import Request
from fastapi.responses import Response
from markupsafe import Markup

from server import library, sheets
from server.library import ALL, Link, Record, reading, states
from server.library.obstacles import others_who_may
from server.people import APPROVES, Person
from server.storage import Session
from server.web import record_form, set_form
from server.web.coupon_panel import panel
from server.web.evidence_fields import LINKS, TITLES
from server.web.pages import Boxes, page
from server.web.set_columns import SHARES
from server.web.who import signed

IN_WORDS = {
    "on hold": "Put on hold",
    "withdrawn": "Withdraw",
    "superseded": "Mark as superseded",
    "draft": "Take back to work (draft)",
    "tested": "Take back to work (tested)",
    "reviewed": "Reviewed",
    "rejected": "Reject",
    "quarantined": "Put in quarantine",
    "opened": "Opened",
    "extended": "Extended by a retest",
}
"""The steps that may be done with a revision, beside putting it forward and finding it good."""
GOOD_WORDS = {"sets": ("Accept", "Accepted"), "lots": ("Release", "Released")}
"""What an approval is called where it has another name: the act, and who did it."""


@dataclass(frozen=True)
class Standing:
    """One record that another stands on: its role in words, and what it counts as today."""

    label: str
    link: Link
    name: str
    status: str
    short: str


def show(request: Request, session: Session, record: Record, *, errors: Mapping[str, str] | None = None,
         values: Mapping[str, str] | None = None) -> Response:  # fmt: skip
    """Return the page of one revision; with ``errors``, what was refused comes back as typed."""
    group = ALL[record.group]
    targets = reading.many(session, [*record.links.values(), *(pair for each in record.chain for pair in _pair(each))])
    coupon_set = record if record.group == "sets" else _behind(record, targets)
    result = _result_of(record, coupon_set) if coupon_set is not None else None
    points, chart = library.charted(session, record)
    person = signed(request)
    obstacles = library.obstacles(session, record, person) if _may_be_approved(record) else []
    lot = library.lot_uses(session, str(record.values["number"])) if record.group == "lots" else None
    links = _standings(record, targets, pinned=False)
    linked = {each.label for each in links}
    return page(
        request,
        "library/show.html",
        status=422 if errors else 200,
        record=record,
        group=group,
        title=TITLES[record.group],
        standing=library.standing(record),
        values_shown=record_form.shown(record),
        value_text=library.value_text(record, _display(coupon_set)) if record.group == "values" else "",
        details=[
            (f"{label}, in words" if label in linked else label, record.details[name])
            for name, label in group.details.items()
            if record.details.get(name)
        ],
        links=links,
        pins=_standings(record, targets, pinned=True),
        chain=record.chain,
        multiplication=_multiplication(record, targets),
        chains_on=library.chains_on(session, record, _display(coupon_set)),
        kept=library.kept_page(session, record) if record.group == "values" else None,
        coupon_set=coupon_set,
        panel=panel(result, _display(coupon_set)) if result is not None else None,
        history=Markup(sheets.history_svg(points, chart, display=_display(coupon_set))) if len(points) > 1 else "",  # noqa: S704 -- our own drawing
        history_says=sheets.in_words(points, chart) if chart is not None else (),
        questions=library.questions(session, record),
        obstacles=obstacles,
        may_approve=_may_be_approved(record) and _approvable(session, person, obstacles),
        forward=_may_be_put_forward(record),
        steps=[(status, IN_WORDS[status]) for status in states.steps(record.group, record.status)],
        good_words=GOOD_WORDS.get(record.group, ("Approve", "Approved")),
        life=library.life(record),
        acts=library.acts(session, record.key, record.revision),
        revisions=library.revisions(session, record.key),
        uses=library.standing_on(session, record.key) if record.group != "lots" else lot.uses if lot else (),
        lot=lot,
        linked_from=_linked_from(session, record),
        errors=Boxes(errors or {}),
        typed=Boxes(values or {}),
        shares=SHARES,
        beyond_the_grid=record.group == "sets" and bool(set_form.beyond_the_grid(record.itself, record.values)),
        load_as_typed=sheets.load_as_typed,
        area_as_typed=sheets.area_as_typed,
    )


def _pair(factor: library.Factor) -> list[Link]:
    return [pair for pair in (factor.dry, factor.conditioned) if pair is not None]


def _behind(record: Record, targets: Mapping[Link, Record]) -> Record | None:
    link = record.links.get("set")
    return targets.get(link) if link is not None else None


def _result_of(record: Record, coupon_set: Record) -> Mapping[str, Any]:
    """The result of the set behind a value, by the value's own statistic where it has one."""
    statistic = record.values.get("statistic") if record.group == "values" else None
    return library.measured_result(coupon_set, statistic)


def _display(coupon_set: Record | None) -> str:
    return "US" if coupon_set is not None and coupon_set.values.get("display") == "US" else "SI"


def _standings(record: Record, targets: Mapping[Link, Record], *, pinned: bool) -> list[Standing]:
    found = []
    for role, link in record.links.items():
        target = targets.get(link)
        is_pin = role not in LINKS
        if target is None or is_pin is not pinned:
            continue
        label = LINKS.get(role) or record_form.pins(record.group).get(role, role)
        found.append(Standing(label, link, target.name, library.standing(target), record_form.in_short(target)))
    return found


def _linked_from(session: Session, record: Record) -> list[tuple[str, Link]]:
    """What links to a record, of each other record its newest revision that does, with the role in words."""
    newest: dict[tuple[str, str], Link] = {}
    for role, link in library.links_to(session, record.key):
        newest[role, link.key] = link
    return [(_role_words(role), link) for (role, _), link in newest.items()]


def _role_words(role: str) -> str:
    head, _, tail = role.partition(":")
    if head == "value":
        return f"as its {tail.replace('strengths.', '').replace('_', ' ')}"
    return f"in its factor {tail}" if head == "factor" else f"as its {_inside(LINKS.get(role, role))}"


def _inside(label: str) -> str:
    """A label within a sentence: 'surface A: material'."""
    return label[:1].lower() + label[1:]


def _multiplication(record: Record, targets: Mapping[Link, Record]) -> str:
    """The chain as one line on the record's first strength: '1.58 MPa × 0.85 (moisture) = 1.34 MPa'."""
    if not record.chain:
        return ""
    field, kind = STRENGTHS[record.group]
    pin = record.pins.get(field)
    pinned = targets.get(pin) if pin is not None else None
    value = pinned.values.get("value") if pinned is not None else record_form.at(record.values, field)
    if value is None:
        return library.multiplication(record.chain)
    return library.chain_line(record.chain, value, kind)


STRENGTHS = {
    "bonds": ("shear_strength", "stress"),
    "fasteners": ("shear_resistance", "force"),
    "materials": ("strengths.bending", "stress"),
}
"""The value that a record's chain is shown on."""


def _may_be_approved(record: Record) -> bool:
    return record.status in (*states.IN_WORK, "on hold")


def _approvable(session: Session, person: Person, obstacles: Sequence[library.Obstacle]) -> bool:
    """Whether nothing stands against it, or only who asks, in a shop where an outside checker may look it over."""
    if any(each.about != "person" for each in obstacles):
        return False
    return not obstacles or (person.may(APPROVES) and not others_who_may(session, person, APPROVES))


def _may_be_put_forward(record: Record) -> bool:
    return record.status in states.IN_WORK and record.group != "lots" and record.revision == record.newest


def boxes_of_draft(session: Session, key: str, system: str) -> dict[str, str]:
    """Return the boxes of a new value that is found from a coupon set."""
    coupon_set = library.get(session, key)
    if coupon_set.group != "sets":
        raise library.NotFoundError(f"{coupon_set.itself} is no coupon set; choose one under Library, Coupon sets.")
    draft = library.value_draft(coupon_set)
    boxes = record_form.content("values", draft.values, draft.details, {**coupon_set.links, **draft.links}, system)
    return boxes | {"name": draft.name, "status": "draft", "units": system}
