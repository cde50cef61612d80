"""The library: its records listed, shown with every revision and use, added, and changed by a new revision."""

from __future__ import annotations

from collections.abc import Mapping
from functools import partial

from fastapi import APIRouter, Request
from fastapi.responses import Response

from server import library
from server.errors import DocumentError
from server.library.groups import GROUPS, STATUSES
from server.web import forms, record_form
from server.web.form_fields import shown_unit
from server.web.inputs import DbSession, FormValues, whole
from server.web.pages import Boxes, page, see
from server.web.shop import shop_units

router = APIRouter(prefix="/library", include_in_schema=False)

TITLES = {"bonds": "Bonds", "fasteners": "Fasteners", "materials": "Materials"}
_A_PAGE = 200


@router.get("", name="list_records")
def list_records(
    request: Request, session: DbSession, q: str = "", group: str = "", status: str = "", start: str = "0"
) -> Response:
    """List the records, by group; one page of them where there are many."""
    chosen = group if group in GROUPS else None
    offset = whole(start) or 0
    found = library.search(
        session,
        q,
        group=chosen or tuple(GROUPS),
        status=status if status in STATUSES else None,
        limit=_A_PAGE,
        offset=offset,
    )
    by_group = {name: [record for record in found.records if record.group == name] for name in GROUPS}
    return page(
        request,
        "library/list.html",
        groups={name: by_group[name] for name in ([chosen] if chosen else GROUPS)},
        titles=TITLES,
        ones={name: known.one for name, known in GROUPS.items()},
        statuses=STATUSES,
        q=q,
        group=group,
        state=status,
        asked=bool(q or status),
        total=found.total,
        start=offset,
        shown=len(found.records),
        a_page=_A_PAGE,
        in_short=record_form.in_short,
    )


@router.get("/new/{group}", name="new_record")
def new_record(request: Request, session: DbSession, group: str) -> Response:
    """Show the empty form of a group."""
    return _form(request, _known(group), record_form.empty(group, shop_units(session)))


@router.post("/new/{group}", name="create_record")
def create_record(request: Request, session: DbSession, values: FormValues, group: str) -> Response:
    """Add a record, or give the form back as typed."""
    typed = record_form.read(_known(group), values)
    if typed.faults:
        return _form(request, group, typed.text, typed.faults)
    try:
        record = library.add(
            session, group=group, values=typed.values, details=typed.details, key=values.get("key", ""), **typed.words
        )
    except DocumentError as error:
        return _form(request, group, typed.text, record_form.place(group, error.faults))
    return see(request, "show_record", key=record.key)


@router.get("/{key}", name="show_record")
def show_record(request: Request, session: DbSession, key: str, revision: str = "") -> Response:
    """Show one revision of a record, the newest unless one is named, with all its revisions and its uses."""
    record = library.get(session, key, whole(revision))
    _known(record.group)
    group = GROUPS[record.group]
    return page(
        request,
        "library/show.html",
        record=record,
        standing=library.standing(record),
        values=record_form.shown(record),
        details=[(label, record.details[name]) for name, label in group.details.items() if name in record.details],
        revisions=library.revisions(session, key),
        uses=library.where_used(session, key),
        title=TITLES[record.group],
    )


@router.get("/{key}/edit", name="edit_record")
def edit_record(request: Request, session: DbSession, key: str) -> Response:
    """Show the form filled with the newest revision."""
    record = library.get(session, key)
    _known(record.group)
    return _form(request, record.group, record_form.fill(record, shop_units(session)), record=record)


@router.post("/{key}/edit", name="save_record")
def save_record(request: Request, session: DbSession, values: FormValues, key: str) -> Response:
    """Save a new revision, or give the form back as typed."""
    old = library.get(session, key)
    typed = record_form.read(_known(old.group), values)
    if typed.faults:
        return _form(request, old.group, typed.text, typed.faults, old)
    try:
        library.edit(
            session,
            key,
            values=typed.values,
            details=typed.details,
            based_on=whole(values.get("based_on", "")),
            **typed.words,
        )
    except DocumentError as error:
        return _form(request, old.group, typed.text, record_form.place(old.group, error.faults), old)
    return see(request, "show_record", key=old.key)


def _form(
    request: Request,
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
        one=GROUPS[group].one,
        title=TITLES[group],
        record=record,
        values=Boxes(values),
        errors=Boxes(errors or {}),
        labels=record_form.labels(group),
        first=first,
        more=more,
        hint=record_form.hint,
        unit=partial(shown_unit, system=forms.system_of(values)),
        details=GROUPS[group].details,
        statuses=[status for status in STATUSES if status != "approved"],
    )


def _known(group: str) -> str:
    if group not in GROUPS:
        raise library.NotFoundError(
            f"The library has no {group[:60]!r}. It has {', '.join(GROUPS)}; choose one under Library."
        )
    return group
