"""The check page of a built-up member: start, live preview, rows, save."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import replace
from typing import Any

from fastapi import APIRouter, Request
from fastapi.responses import Response

from server import checks, documents, jobs, library, sheets
from server.errors import Fault, JointError
from server.sheets import ONE_PAGES
from server.sheets.asked import RECORDS
from server.storage import Session
from server.units import parse
from server.web import form_shape, form_words, forms, layouts, needed_zones, one_page
from server.web.errors import faults_of
from server.web.form_fields import VALUE_GROUPS
from server.web.form_view import Form
from server.web.inputs import DbSession, FormValues, Id, whole
from server.web.keeping import Filled, form_page, keep, leave_and_save, with_refusal
from server.web.pages import page, path_for
from server.web.panel import Asked, Judged, panel, records_offered
from server.web.steps import working_of

router = APIRouter(include_in_schema=False)


def judge(session: Session, values: Mapping[str, str], *, patient: bool = True, working: bool = True) -> Judged:
    """Read, fill and check the form as typed; nothing is raised.

    While ``patient``, a form whose span or loads are not typed yet is waited for instead of being found at fault;
    without ``working`` the result has no steps.
    """
    reading = forms.reading_of(values)
    waiting = tuple(_still_to_enter(values, reading.raw)) if patient else ()
    if waiting:
        return Judged(reading.raw, None, {}, waiting=waiting)
    try:
        document = library.resolve(session, documents.read(reading.raw))
        result = checks.run(document, working=working, look=_look(values))
        faults: Iterable[Fault] = ()
    except JointError as error:
        result, faults = {}, faults_of(error)
    beside, on_top = forms.place(faults, reading.paths)
    messages = {**beside, **reading.faults, **_unprintable(values)}
    return Judged(reading.raw, None if messages or on_top else result, messages, tuple(on_top))


def _look(values: Mapping[str, str]) -> checks.Look | None:
    """Where the section's stresses are asked for; a place that cannot be read is none."""
    if not values.get("stress"):
        return None
    try:
        at = parse("stress_at", values.get("stress_at", "").strip(), "length")
    except JointError:
        at = None
    return checks.Look(at, values.get("stress_for") or None)


def _unprintable(values: Mapping[str, str]) -> dict[str, str]:
    return sheets.unprintable_boxes({name: text for name, text in values.items() if forms.is_box(name)})


def _still_to_enter(values: Mapping[str, str], raw: Mapping[str, Any]) -> Iterable[str]:
    if not values.get("span", "").strip():
        yield "the span"
    if not raw["loads"]:
        yield "a load"
    if not raw["section"]["pieces"]:
        yield "the pieces"


@router.get("/jobs/{job_id}/checks/new", name="new_check")
def new_check(request: Request, session: DbSession, job_id: Id, layout: str = "box") -> Response:
    """Show the form of a new check, started from a layout."""
    job = jobs.get(session, job_id)
    values = layouts.start(layout if layout in layouts.LAYOUTS else "empty", job.display)
    return _page(request, session, job, values, judge(session, values))


@router.post("/jobs/{job_id}/checks/preview", name="preview_check")
def preview_check(request: Request, session: DbSession, values: FormValues, job_id: Id) -> Response:
    """Answer a keystroke: the result, and the messages of the boxes concerned."""
    typed = dict(values)
    judged = judge(session, typed, working=False)
    form = _form(request, typed, judged, job_id)
    return page(request, "check/_preview.html", form=form, lazily=True, swap=True, **_shown(judged, typed))


@router.post("/jobs/{job_id}/checks/working", name="preview_working")
def preview_working(request: Request, session: DbSession, values: FormValues, job_id: Id) -> Response:
    """Return the working of the form as typed, for when somebody opens it."""
    judged = judge(session, dict(values))
    steps = working_of(judged.result) if judged.result else []
    return page(request, "check/_working.html", working=steps)


@router.post("/jobs/{job_id}/checks/form", name="shape_check")
def shape_check(request: Request, session: DbSession, values: FormValues, job_id: Id, check: str = "") -> Response:
    """Do what a button of the form asks (rows, layout, units, zones, calculate) and give the page back as typed."""
    shaped, told = form_shape.shape(dict(values)), ""
    if values.get(needed_zones.BUTTON):
        typed = form_shape.shape(dict(values)).values
        reading, found = forms.reading_of(typed), judge(session, typed, working=False)
        shaped, told = needed_zones.put(typed, found, reading.paths, forms.system_of(typed))
    job, check_id = jobs.get(session, job_id), whole(check) or 0
    if "HX-Request" in request.headers:
        # Only the boxes are taken from this answer; they then ask for a preview themselves.
        judged = Judged(forms.reading_of(shaped.values).raw, None, {})
    else:
        judged = judge(session, shaped.values)
    answer = _page(
        request, session, job, shaped.values, judged, check_id, opened=shaped.opened, focus=shaped.focus, told=told
    )
    answer.headers["HX-Trigger"] = "shaped"
    return answer


@router.post("/jobs/{job_id}/checks", name="save_check")
def save_check(request: Request, session: DbSession, values: FormValues, job_id: Id) -> Response:
    """Save a new check in the job, or give the form back as typed."""
    return _save(request, session, dict(values), job_id)


@router.get("/checks/{check_id}/edit", name="edit_check")
def edit_check(request: Request, session: DbSession, check_id: Id, revision: str = "") -> Response:
    """Show the form filled with a revision of a check, the newest unless one is named."""
    saved = jobs.revision_of(session, check_id, whole(revision))
    if saved.result["kind"] in ONE_PAGES:
        return one_page.edit(request, session, saved)
    values = forms.write(saved.document) | {"mark": saved.mark}
    job = jobs.get(session, saved.job_id)
    return _page(request, session, job, values, judge(session, values, patient=False), check_id)


@router.post("/checks/{check_id}/revisions", name="revise_check")
def revise_check(request: Request, session: DbSession, values: FormValues, check_id: Id) -> Response:
    """Save the form as the next revision of a check, or give it back as typed."""
    saved = jobs.revision_of(session, check_id)
    if saved.result["kind"] in ONE_PAGES:
        asked = one_page.kind_of(str(saved.result["kind"]))
        return one_page.save(request, session, asked, dict(values), saved.job_id, check_id)
    return _save(request, session, dict(values), saved.job_id, check_id)


def _save(request: Request, session: Session, values: dict[str, str], job_id: int, check_id: int = 0) -> Response:
    """Save what the form says; refused, the page comes back with the form as typed and its messages (422)."""
    job, reading = jobs.get(session, job_id), forms.reading_of(values)
    faults = {**reading.faults, **_unprintable(values)}
    filled = Filled(values, reading.raw, reading.paths, faults, "customer asked for 150 psf")
    kept = keep(request, session, filled, job_id, check_id)
    if isinstance(kept, Response):
        return kept
    judged = with_refusal(judge(session, values, patient=False), kept)
    return _page(request, session, job, values, judged, check_id, status=422)


def _page(
    request: Request,
    session: Session,
    job: jobs.Job,
    values: Mapping[str, str],
    judged: Judged,
    check_id: int = 0,
    *,
    status: int = 200,
    opened: str = "",
    focus: str = "",
    told: str = "",
) -> Response:
    form = replace(
        _form(request, values, judged, job.id, check_id),
        library=_library(session),
        opened=opened,
        focus=focus,
        told=told,
    )
    shown, boxes = _shown(judged, values), "check/_form.html"
    return form_page(
        request, session, job, form, judged, shown, check_id, boxes=boxes, status=status, layouts=layouts.LAYOUTS
    )


def _form(request: Request, values: Mapping[str, str], judged: Judged, job_id: int, check_id: int = 0) -> Form:
    of_job = {name: path_for(request, name, job_id=job_id) for name in _JOB_ROUTES}
    leave, save = leave_and_save(request, job_id, check_id, of_job["save_check"])
    return Form(
        values=values,
        messages=judged.messages,
        raw=judged.raw,
        preview_url=of_job["preview_check"],
        shape_url=of_job["shape_check"] + (f"?check={check_id}" if check_id else ""),
        working_url=of_job["preview_working"],
        save_url=save,
        leave_url=leave,
        revising=bool(check_id),
    )


_JOB_ROUTES = ("preview_check", "shape_check", "preview_working", "save_check")


def _shown(judged: Judged, values: Mapping[str, str]) -> dict[str, Any]:
    """What the result panel asks for."""
    faults = [(name, form_words.label_of(name, values), text) for name, text in judged.messages.items()]
    faults += [("", "", text) for text in judged.on_top]
    display = "US" if judged.raw.get("display") == "US" else "SI"
    asked = Asked(values.get("shade", ""), *(values.get(name, "") for name in ("stress", "stress_at", "stress_for")))
    found = panel(judged.result, display, asked) if judged.result else None
    return {"panel": found, "waiting": judged.waiting, "faults_on_page": faults}


def _library(session: Session) -> dict[str, tuple[tuple[str, str], ...]]:
    """Return the records to choose from, by group of the form."""
    offered = records_offered(session)
    return {name: offered[RECORDS[name]] for name in VALUE_GROUPS}
