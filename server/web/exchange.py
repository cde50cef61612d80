"""The library in and out: the whole of it as plain files, and files read back after a look at what they change."""

from __future__ import annotations

import hashlib

from fastapi import APIRouter, Request
from fastapi.responses import Response, StreamingResponse

from server import library
from server.errors import JointError
from server.library import exporting, importing
from server.storage import Session
from server.web.inputs import DbSession, UploadValues
from server.web.pages import page
from server.web.who import Who

router = APIRouter(prefix="/library/form/exchange", include_in_schema=False)

FILES = {
    "records.csv": "the newest revision of every record, one a row",
    "coupons.csv": "every coupon of every set, one a row",
}


@router.get("", name="exchange")
def show_exchange(request: Request) -> Response:
    """Show what goes out and what may come in."""
    return _page(request)


@router.get("/library.json", name="export_json")
def export_json(session: DbSession) -> Response:
    """Hand out the whole library as JSON, record by record."""
    headers = {"Content-Disposition": 'attachment; filename="library.json"'}
    return StreamingResponse(exporting.export_lines(session), media_type="application/json", headers=headers)


@router.get("/tables/{name}", name="export_csv")
def export_csv(session: DbSession, name: str) -> Response:
    """Hand out one of the tables as CSV."""
    if name not in FILES:
        raise library.NotFoundError(f"There is no table {name[:60]!r}; there are {', '.join(FILES)}.")
    headers = {"Content-Disposition": f'attachment; filename="{name}"'}
    return Response(exporting.export_csv(session)[name].encode(), media_type="text/csv; charset=utf-8", headers=headers)


@router.post("/plan", name="plan_import")
def plan_import(request: Request, session: DbSession, values: UploadValues, who: Who) -> Response:
    """Show what a file would change, line by line; nothing is changed yet."""
    text = values.get("file", "") or values.get("text", "")
    name = values.get("file.name", "") or "a pasted text"
    if not text.strip():
        return _page(request, error="Nothing was given; choose a file, or paste its text.")
    return _planned(request, session, who, text, name)


@router.post("/apply", name="apply_import")
def apply_import(request: Request, session: DbSession, values: UploadValues, who: Who) -> Response:
    """Do what the plan said, if the library still is as it was then."""
    text, name = values.get("text", ""), values.get("name", "") or "a file"
    try:
        again = importing.plan(session, text, by=who, name=name)
        if _mark(again) != values.get("planned", ""):
            return _planned(request, session, who, text, name, "The library changed since; look at the plan again.")
        return _page(request, done=importing.apply(session, text, by=who, name=name))
    except JointError as error:
        return _page(request, error=str(error), text=text)


def _planned(request: Request, session: Session, who: Who, text: str, name: str, error: str = "") -> Response:
    try:
        plan = importing.plan(session, text, by=who, name=name)
    except JointError as refused:
        return _page(request, error=str(refused), text=text)
    return _page(request, plan=plan, text=text, name=name, error=error)


def _mark(plan: importing.Plan) -> str:
    """What a plan comes to, in short: the same mark means that the same would be done."""
    return hashlib.sha256("\n".join(map(str, plan.lines)).encode()).hexdigest()


def _page(
    request: Request,
    *,
    plan: importing.Plan | None = None,
    done: importing.Plan | None = None,
    text: str = "",
    name: str = "",
    error: str = "",
) -> Response:
    return page(
        request,
        "library/exchange.html",
        status=422 if error else 200,
        files=FILES,
        plan=plan,
        done=done,
        mark=_mark(plan) if plan else "",
        text=text,
        name=name,
        error=error,
    )
