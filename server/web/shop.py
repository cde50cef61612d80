"""The shop's heading: what stands on every sheet, and what a new job starts with."""

from __future__ import annotations

from collections.abc import Mapping

from fastapi import APIRouter, Request
from fastapi.responses import RedirectResponse, Response

from server import jobs
from server.errors import DocumentError
from server.storage import Session
from server.web.inputs import DbSession, FormValues
from server.web.pages import Boxes, beside, page, path_for

router = APIRouter(prefix="/shop", include_in_schema=False)

LABELS = {"name": "Name of the shop", "address": "Address", "paper": "Paper", "display": "Units"}


def shop_units(session: Session) -> str:
    """Return the system the shop's boxes are marked in: SI or US."""
    return jobs.shop(session).display


@router.get("", name="edit_shop")
def edit_shop(request: Request, session: DbSession, saved: str = "") -> Response:
    """Show the heading."""
    return _form(request, vars(jobs.shop(session)), saved=bool(saved))


@router.post("", name="save_shop")
def save_shop(request: Request, session: DbSession, values: FormValues) -> Response:
    """Save the heading, or give the form back as typed."""
    typed = {name: values.get(name, "") for name in LABELS}
    try:
        jobs.set_shop(
            session,
            name=typed["name"],
            address=typed["address"],
            paper=typed["paper"],
            display=typed["display"],
            made_by=values.get("made_by", ""),
        )
    except DocumentError as error:
        return _form(request, typed, beside(error, LABELS))
    return RedirectResponse(path_for(request, "edit_shop") + "?saved=yes", status_code=303)


def _form(
    request: Request, values: Mapping[str, str], errors: Mapping[str, str] | None = None, saved: bool = False
) -> Response:
    return page(
        request,
        "shop/edit.html",
        status=422 if errors else 200,
        values=Boxes(values),
        errors=Boxes(errors or {}),
        labels=LABELS,
        saved=saved,
    )
