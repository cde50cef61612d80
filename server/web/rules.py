"""The shop's rules for values: from how many coupons on a value may be approved, how much may peel."""

from __future__ import annotations

from collections.abc import Mapping

from fastapi import APIRouter, Request
from fastapi.responses import Response

from server import library
from server.errors import DocumentError, Fault
from server.web.inputs import DbSession, FormValues
from server.web.pages import Boxes, beside, page, see

router = APIRouter(prefix="/library/form/rules", include_in_schema=False)

LABELS = {
    "provisional_from": "A value is provisional from",
    "approved_from": "A value may be approved from",
    "adhesive_share": "Adhesive failure, at most",
}


@router.get("", name="edit_rules")
def edit_rules(request: Request, session: DbSession) -> Response:
    """Show the rules."""
    rules = library.rules(session)
    return _form(request, {name: f"{getattr(rules, name):g}" for name in LABELS})


@router.post("", name="save_rules")
def save_rules(request: Request, session: DbSession, values: FormValues) -> Response:
    """Set the rules, or give the form back as typed."""
    try:
        library.set_rules(session, made_by=values.get("made_by", ""), **_numbers(values))  # type: ignore[arg-type]
    except DocumentError as error:
        return _form(request, values, beside(error, LABELS))
    return see(request, "list_records")


def _numbers(values: Mapping[str, str]) -> dict[str, float]:
    faults, found = [], {}
    for name in LABELS:
        text = values.get(name, "").strip().removesuffix("%").strip()
        if text.isascii() and text.replace(".", "", 1).isdecimal() and len(text) < 8:
            found[name] = float(text) if name == "adhesive_share" else int(float(text))
        else:
            faults.append(Fault(name, f"“{text[:40]}” is no number; enter one such as 10."))
    if faults:
        raise DocumentError(faults)
    return found


def _form(request: Request, values: Mapping[str, str], errors: Mapping[str, str] | None = None) -> Response:
    return page(
        request,
        "library/rules.html",
        status=422 if errors else 200,
        values=Boxes(values),
        errors=Boxes(errors or {}),
        labels=LABELS,
    )
