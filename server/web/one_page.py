"""Checks that fit on one page: one set of routes for every such kind (``sheets.ONE_PAGES``).

A kind brings its questions, its blocks and its check; nothing here knows which kinds there are.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

from fastapi import APIRouter, Request
from fastapi.responses import Response

from server import checks, documents, jobs, library, sheets
from server.errors import JointError
from server.jobs import SavedRevision
from server.library import NotFoundError
from server.sheets import ONE_PAGES, OnePage
from server.sheets.asked import asks_of
from server.storage import Session
from server.web import one_page_form as forms
from server.web.errors import faults_of
from server.web.form_fields import SINGLES
from server.web.forms import place
from server.web.inputs import DbSession, FormValues, Id, whole
from server.web.keeping import Filled, form_page, keep, leave_and_save, with_refusal
from server.web.one_page_form import OneForm
from server.web.pages import page, path_for
from server.web.panel import Judged, one_page_panel, records_offered
from server.web.steps import working_of

router = APIRouter(include_in_schema=False)


def kind_of(kind: str) -> OnePage:
    """Return the kind of check that an address names."""
    if kind not in ONE_PAGES:
        raise NotFoundError("There is no check of that kind. Start again from the job.")
    return ONE_PAGES[kind]


def judge(
    session: Session, asked: OnePage, values: Mapping[str, str], *, patient: bool = True, steps: bool = True
) -> Judged:
    """Read, fill and check the form as typed; nothing is raised.

    While ``patient``, what the check cannot do without is waited for instead of being found at fault.
    """
    reading = forms.read(asked, values)
    waiting = tuple(asked.waits_for(reading.raw)) if patient else ()
    if waiting:
        return Judged(reading.raw, None, {}, waiting=waiting)
    result: Mapping[str, Any] = {}
    beside: dict[str, str] = {}
    on_top: list[str] = []
    try:
        result = checks.run(library.resolve(session, documents.read(reading.raw)), working=steps)
    except JointError as error:
        beside, on_top = place(faults_of(error), reading.paths)
    messages = {**beside, **reading.faults, **_unprintable(asked, values)}
    return Judged(reading.raw, None if messages or on_top else result, messages, tuple(on_top))


def _unprintable(asked: OnePage, values: Mapping[str, str]) -> dict[str, str]:
    return sheets.unprintable_boxes({name: text for name, text in values.items() if forms.is_box(asked, name)})


@router.get("/jobs/{job_id}/checks/{kind}/new", name="new_kind_check")
def new_check(
    request: Request, session: DbSession, job_id: Id, kind: str, check: str = "", revision: str = ""
) -> Response:
    """Show the form of a new check of a kind; that of a glue-up begins with the areas of a saved ``check``."""
    job, asked = jobs.get(session, job_id), kind_of(kind)
    values = forms.start(asked, job.display)
    if check and kind == "glue-up":
        saved = jobs.revision_of(session, whole(check) or 0, whole(revision))
        values |= {name: text for name, text in forms.write(asked, jobs.glue_up_of(session, saved)).items() if text}
    return _page(request, session, job, asked, values, judge(session, asked, values))


@router.post("/jobs/{job_id}/checks/{kind}/preview", name="preview_kind_check")
def preview_check(request: Request, session: DbSession, values: FormValues, job_id: Id, kind: str) -> Response:
    """Answer a keystroke: the result, the messages of the boxes concerned, and the boxes where others make sense."""
    asked, typed = kind_of(kind), dict(values)
    judged = judge(session, asked, typed, steps=False)
    form = _form(request, asked, typed, judged, job_id)
    reshaped = form.asked_now != typed.get("asked", form.asked_now)
    if reshaped:  # only new boxes offer the library's records
        form = _offering(form, session)
    context = _shown(judged, asked, typed)
    return page(
        request, "check/_one_page_preview.html", form=form, lazily=True, swap=True, reshaped=reshaped, **context
    )


@router.post("/jobs/{job_id}/checks/{kind}/working", name="preview_kind_working")
def preview_working(request: Request, session: DbSession, values: FormValues, job_id: Id, kind: str) -> Response:
    """Return the working of the form as typed, for when somebody opens it."""
    judged = judge(session, kind_of(kind), dict(values))
    return page(request, "check/_working.html", working=working_of(judged.result) if judged.result else [])


@router.post("/jobs/{job_id}/checks/{kind}/form", name="shape_kind_check")
def shape_check(
    request: Request, session: DbSession, values: FormValues, job_id: Id, kind: str, check: str = ""
) -> Response:
    """Calculate, or mark the boxes in other units, and give the page back as typed."""
    asked, typed = kind_of(kind), dict(values)
    if typed.get("units_of_boxes"):
        typed = forms.in_units(asked, typed, "US" if typed.get("display") == "US" else "SI")
    job, check_id = jobs.get(session, job_id), whole(check) or 0
    answer = _page(request, session, job, asked, typed, judge(session, asked, typed), check_id)
    answer.headers["HX-Trigger"] = "shaped"
    return answer


@router.post("/jobs/{job_id}/checks/{kind}", name="save_kind_check")
def save_check(request: Request, session: DbSession, values: FormValues, job_id: Id, kind: str) -> Response:
    """Save a new check in the job, or give the form back as typed."""
    return save(request, session, kind_of(kind), dict(values), job_id)


def edit(request: Request, session: Session, saved: SavedRevision) -> Response:
    """Show the form filled with a saved revision."""
    asked = kind_of(str(saved.result["kind"]))
    values = forms.write(asked, saved.document) | {"mark": saved.mark}
    judged = judge(session, asked, values, patient=False)
    return _page(request, session, jobs.get(session, saved.job_id), asked, values, judged, saved.check_id)


def save(
    request: Request, session: Session, asked: OnePage, values: dict[str, str], job_id: int, check_id: int = 0
) -> Response:
    """Save what the form says; refused, the page comes back with the form as typed and its messages (422)."""
    job, reading = jobs.get(session, job_id), forms.read(asked, values)
    faults = {**reading.faults, **_unprintable(asked, values)}
    kept = keep(
        request, session, Filled(values, reading.raw, reading.paths, faults, "thicker side member"), job_id, check_id
    )
    if isinstance(kept, Response):
        return kept
    judged = with_refusal(judge(session, asked, values, patient=False), kept)
    return _page(request, session, job, asked, values, judged, check_id, status=422)


def _page(
    request: Request,
    session: Session,
    job: jobs.Job,
    asked: OnePage,
    values: Mapping[str, str],
    judged: Judged,
    check_id: int = 0,
    *,
    status: int = 200,
) -> Response:
    form = _offering(_form(request, asked, values, judged, job.id, check_id), session)
    shown = _shown(judged, asked, values)
    boxes = "check/_one_page_form.html"
    return form_page(request, session, job, form, judged, shown, check_id, boxes=boxes, status=status, kind=asked.one)


def _offering(form: OneForm, session: Session) -> OneForm:
    """The form with the library's records to pick from, where it has boxes for them."""
    picks = any(ask.record for ask in asks_of(form.page.groups).values())
    return replace(form, library=records_offered(session)) if picks else form


def _form(
    request: Request,
    asked: OnePage,
    values: Mapping[str, str],
    judged: Judged,
    job_id: int,
    check_id: int = 0,
) -> OneForm:
    def of_kind(name: str) -> str:
        return path_for(request, name, job_id=job_id, kind=asked.kind)

    leave, save_url = leave_and_save(request, job_id, check_id, of_kind("save_kind_check"))
    return OneForm(
        page=asked,
        values=values,
        messages=judged.messages,
        raw=judged.raw,
        preview_url=of_kind("preview_kind_check"),
        shape_url=of_kind("shape_kind_check") + (f"?check={check_id}" if check_id else ""),
        working_url=of_kind("preview_kind_working"),
        save_url=save_url,
        leave_url=leave,
        revising=bool(check_id),
    )


def _shown(judged: Judged, asked: OnePage, values: Mapping[str, str]) -> dict[str, Any]:
    """What the result panel asks for."""
    asks = asks_of(asked.groups)

    def label(name: str) -> str:
        return asks[name].label if name in asks else SINGLES[name].label if name in SINGLES else name

    faults = [(name, label(name), text) for name, text in judged.messages.items()]
    faults += [("", "", text) for text in judged.on_top]
    display = "US" if judged.raw.get("display") == "US" else "SI"
    found = one_page_panel(judged.result, display) if judged.result else None
    return {"panel": found, "waiting": judged.waiting, "faults_on_page": faults}
