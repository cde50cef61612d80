"""Jobs: found, started, shown with their checks, their heading corrected."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TypedDict

from fastapi import APIRouter, Request
from fastapi.responses import Response

from server import jobs
from server.errors import DocumentError
from server.sheets import ONE_PAGES
from server.web.inputs import DbSession, FormValues, Id, whole
from server.web.pages import Boxes, beside, page, see

router = APIRouter(prefix="/jobs", include_in_schema=False)

LABELS = {
    "number": "Job number",
    "title": "Title",
    "customer": "Customer",
    "drawing": "Drawing and its revision",
    "paper": "Paper of its sheets",
    "display": "Units of its sheets",
    "note": "Note",
}
_A_PAGE = 100


@router.get("", name="list_jobs")
def list_jobs(request: Request, session: DbSession, q: str = "", start: str = "0") -> Response:
    """List the jobs, the one changed last first; or those that fit what is looked for."""
    offset = whole(start) or 0
    found = jobs.search(session, q, limit=_A_PAGE, offset=offset)
    return page(request, "jobs/list.html", jobs=found.jobs, q=q, total=found.total, start=offset, a_page=_A_PAGE)


@router.get("/new", name="new_job")
def new_job(request: Request, session: DbSession) -> Response:
    """Show the empty heading, with the shop's paper and units."""
    shop = jobs.shop(session)
    return _form(request, {"paper": shop.paper, "display": shop.display})


@router.post("", name="create_job")
def create_job(request: Request, session: DbSession, values: FormValues) -> Response:
    """Start a job, or give the form back as typed."""
    typed = _typed(values)
    try:
        job = jobs.create(session, **typed, made_by=values.get("made_by", ""))
    except DocumentError as error:
        return _form(request, typed, beside(error, LABELS))
    return see(request, "show_job", job_id=job.id)


@router.get("/{job_id}", name="show_job")
def show_job(request: Request, session: DbSession, job_id: Id) -> Response:
    """Show a job's heading and its checks."""
    job, checks = jobs.get(session, job_id), jobs.checks_of(session, job_id)
    return page(request, "job/show.html", job=job, checks=checks, one_pages=tuple(ONE_PAGES.values()))


@router.get("/{job_id}/heading", name="edit_job")
def edit_job(request: Request, session: DbSession, job_id: Id) -> Response:
    """Show the heading as it is."""
    job = jobs.get(session, job_id)
    return _form(request, {name: getattr(job, name) for name in LABELS}, job=job)


@router.post("/{job_id}/heading", name="save_job")
def save_job(request: Request, session: DbSession, values: FormValues, job_id: Id) -> Response:
    """Correct the heading, or give the form back as typed."""
    job = jobs.get(session, job_id)
    typed = _typed(values)
    try:
        jobs.edit(session, job_id, **typed, made_by=values.get("made_by", ""))
    except DocumentError as error:
        return _form(request, typed, beside(error, LABELS), job)
    return see(request, "show_job", job_id=job_id)


class Heading(TypedDict):
    """A heading as typed."""

    number: str
    title: str
    customer: str
    drawing: str
    paper: str
    display: str
    note: str


def _typed(values: Mapping[str, str]) -> Heading:
    return Heading(
        number=values.get("number", ""),
        title=values.get("title", ""),
        customer=values.get("customer", ""),
        drawing=values.get("drawing", ""),
        paper=values.get("paper", ""),
        display=values.get("display", ""),
        note=values.get("note", ""),
    )


def _form(
    request: Request,
    values: Mapping[str, str] | Heading,
    errors: Mapping[str, str] | None = None,
    job: jobs.Job | None = None,
) -> Response:
    return page(
        request,
        "job/edit.html",
        status=422 if errors else 200,
        job=job,
        values=Boxes({name: str(text) for name, text in values.items()}),
        errors=Boxes(errors or {}),
        labels=LABELS,
    )
