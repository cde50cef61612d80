"""The library: its records listed, shown with every revision and use, added, and changed by a new revision."""

from __future__ import annotations

from collections.abc import Mapping
from functools import partial
from typing import Any

from fastapi import APIRouter, Request
from fastapi.responses import Response

from server import library
from server.errors import DocumentError
from server.library import ALL
from server.library.states import ALL_STATES
from server.storage import Session
from server.web import forms, record_form, record_page, set_form, sets
from server.web.evidence_fields import TITLES
from server.web.evidence_lists import offered
from server.web.form_fields import shown_unit
from server.web.inputs import DbSession, UploadValues, whole
from server.web.pages import Boxes, page, see
from server.web.shop import shop_units

router = APIRouter(prefix="/library", include_in_schema=False)

_A_PAGE = 50


@router.get("", name="list_records")
def list_records(
    request: Request,
    session: DbSession,
    q: str = "",
    group: str = "",
    status: str = "",
    adherend: str = "",
    property: str = "",
    start: str = "0",
) -> Response:
    """List the records that fit, one page of them, and what waits for approval."""
    offset = whole(start) or 0
    asked = {"q": q, "group": group, "status": status, "adherend": adherend, "property": property}
    found = library.search(
        session,
        q,
        group=group if group in ALL else None,
        status=status if status in ALL_STATES else None,
        adherend=adherend,
        property=property if property in library.PROPERTIES else "",
        limit=_A_PAGE,
        offset=offset,
    )
    return page(
        request,
        "library/list.html",
        records=found.records,
        titles=TITLES,
        ones={name: known.one for name, known in ALL.items()},
        statuses=ALL_STATES,
        properties=list(library.PROPERTIES),
        asked={name: text for name, text in asked.items() if text},
        narrowed=any(text for name, text in asked.items() if name != "group"),
        boxes=asked,
        total=found.total,
        start=offset,
        a_page=_A_PAGE,
        waiting=() if any(asked.values()) or offset else library.waiting(session, limit=20),
        in_short=record_form.in_short,
        standing=library.standing,
    )


@router.get("/new/{group}", name="new_record")
def new_record(request: Request, session: DbSession, group: str, set: str = "") -> Response:
    """Show the empty form of a group; of a value, filled from the coupon set that ``set`` names."""
    system = shop_units(session)
    if _known(group) == "sets":
        boxes = {**record_form.empty(group, system), **set_form.empty(system)}
        return sets.set_page(request, session, boxes, sets.judge(boxes))
    boxes = record_form.empty(group, system)
    if group == "values":
        boxes |= {"origin": "coupon set"}
        boxes |= record_page.boxes_of_draft(session, set, system) if set else {}
    return _form(request, session, group, boxes)


@router.post("/new/{group}", name="create_record")
def create_record(request: Request, session: DbSession, values: UploadValues, group: str) -> Response:
    """Add a record, or give the form back as typed."""
    if _known(group) == "sets":
        return _save_set(request, session, dict(values), None)
    typed = record_form.read(group, values)
    if typed.faults:
        return _form(request, session, group, typed.text, typed.faults)
    try:
        record = library.add(session, group=group, key=values.get("key", ""), **_content(typed))
    except DocumentError as error:
        return _form(request, session, group, typed.text, record_form.place(group, error.faults, typed.factors))
    return see(request, "show_record", key=record.key)


@router.get("/{key}", name="show_record")
def show_record(request: Request, session: DbSession, key: str, revision: str = "") -> Response:
    """Show one revision of a record, the newest unless one is named, with all its revisions and its uses."""
    return record_page.show(request, session, library.get(session, key, whole(revision)))


@router.get("/{key}/edit", name="edit_record")
def edit_record(request: Request, session: DbSession, key: str, exclude: str = "") -> Response:
    """Show the form filled with the newest revision; of a set, with ``exclude`` ready to take a coupon's cause."""
    record = library.get(session, key)
    if record.group == "sets" and (why := set_form.beyond_the_grid(record.itself, record.values)):
        return record_page.show(request, session, record, errors={"": why})
    if record.group == "sets":
        boxes = record_form.fill(record, "SI") | set_form.fill(record.values)
        if number := whole(exclude):
            out = max(set_form.exclusions(boxes), default=-1) + 1
            boxes[f"excluded[{out}].number"] = str(number)
        return sets.set_page(request, session, boxes, sets.judge(boxes), record)
    return _form(request, session, record.group, record_form.fill(record, shop_units(session)), record=record)


@router.post("/{key}/edit", name="save_record")
def save_record(request: Request, session: DbSession, values: UploadValues, key: str) -> Response:
    """Save a new revision, or give the form back as typed."""
    old = library.get(session, key)
    if old.group == "sets" and (why := set_form.beyond_the_grid(old.itself, old.values)):
        return record_page.show(request, session, old, errors={"": why})
    if old.group == "sets":
        return _save_set(request, session, dict(values), old)
    typed = record_form.read(old.group, values)
    if typed.faults:
        return _form(request, session, old.group, typed.text, typed.faults, old)
    try:
        library.edit(session, key, based_on=whole(values.get("based_on", "")), **_content(typed))
    except DocumentError as error:
        faults = record_form.place(old.group, error.faults, typed.factors)
        return _form(request, session, old.group, typed.text, faults, old)
    return see(request, "show_record", key=old.key)


def _content(typed: record_form.Typed) -> dict[str, Any]:
    """What the library is asked to keep; a chain where there is one at all."""
    more = {"chain": typed.chain} if typed.chain or typed.factors else {"chain": []}
    return {"values": typed.values, "details": typed.details, "links": typed.links, **more, **typed.words}


def _save_set(request: Request, session: Session, boxes: dict[str, str], record: library.Record | None) -> Response:
    saved, messages = sets.save(session, boxes, record)
    if saved is None:
        return sets.set_page(request, session, boxes, sets.judge(boxes), record, messages=messages)
    return see(request, "show_record", key=saved.key)


def _form(
    request: Request,
    session: Session,
    group: str,
    values: Mapping[str, str],
    errors: Mapping[str, str] | None = None,
    record: library.Record | None = None,
) -> Response:
    first, more = record_form.boxes(group)
    return page(
        request,
        "library/edit.html",
        status=422 if errors else 200,
        group=group,
        one=ALL[group].one,
        title=TITLES[group],
        record=record,
        values=Boxes(values),
        errors=Boxes(errors or {}),
        labels=record_form.labels(group),
        first=first,
        more=more,
        hint=record_form.hint,
        unit=partial(shown_unit, system=forms.system_of(values)),
        details=ALL[group].details,
        statuses=record_form.STARTS if ALL[group].section else (),
        links=record_form.links(group),
        link_groups=ALL[group].links,
        pins=record_form.pins(group),
        pinned_now=[role for role in list(record_form.pins(group))[2:] if values.get(f"links.{role}")],
        factors=record_form.factor_rows(values) if record_form.has_chain(group) else (),
        factor_boxes=record_form.FACTOR_BOXES,
        offered=offered(session),
    )


def _known(group: str) -> str:
    if group not in ALL:
        raise library.NotFoundError(
            f"The library has no {group[:60]!r}. It has {', '.join(ALL)}; choose one under Library."
        )
    return group
