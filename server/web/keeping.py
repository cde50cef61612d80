"""Saving what a check's form says, whatever the kind of check: kept, or refused with a message beside each box."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

from fastapi import Request
from fastapi.responses import Response

from server import jobs
from server.errors import JointError
from server.storage import Session
from server.web.errors import faults_of
from server.web.forms import BESIDE, place
from server.web.pages import page, path_for, see
from server.web.panel import Judged
from server.web.steps import working_of


@dataclass(frozen=True)
class Filled:
    """A form as it was sent: the document it says, where each part of that was typed, and what is wrong already.

    ``example`` is a reason that would do for a change of such a check.
    """

    values: Mapping[str, str]
    raw: Mapping[str, Any]
    paths: dict[str, str]
    faults: Mapping[str, str]
    example: str


def keep(request: Request, session: Session, filled: Filled, job_id: int, check_id: int) -> Response | Judged:
    """Save the form as a new check, or as the next revision of one, and lead to it; else say what is wrong."""
    messages = dict(filled.faults)
    on_top: list[str] = []
    values = filled.values
    if check_id and not values.get("reason", "").strip():
        messages["reason"] = f"The reason is empty; say in a few words what changed, such as “{filled.example}”."
    if not messages:
        try:
            saved = jobs.save(
                session,
                job_id=job_id,
                raw=filled.raw,
                check_id=check_id or None,
                mark=values.get("mark") or None,
                made_by=values.get("made_by", ""),
                reason=values.get("reason", ""),
            )
            return see(request, "show_revision", check_id=saved.check_id, revision=saved.revision)
        except JointError as error:
            messages, on_top = place(faults_of(error), filled.paths | BESIDE)
    return Judged(filled.raw, None, messages, tuple(on_top))


def with_refusal(judged: Judged, refused: Judged) -> Judged:
    """What the form says as it stands, under what kept it from being saved."""
    messages = {**judged.messages, **refused.messages}
    return replace(judged, result=None, messages=messages, on_top=refused.on_top or judged.on_top)


def form_page(
    request: Request,
    session: Session,
    job: jobs.Job,
    form: object,
    judged: Judged,
    shown: Mapping[str, Any],
    check_id: int = 0,
    *,
    boxes: str,
    status: int = 200,
    **more: Any,
) -> Response:
    """The page of a check's form: ``boxes`` the template of what is asked, ``shown`` what the result panel says."""
    return page(
        request,
        "check/edit.html",
        status=status,
        job=job,
        check=jobs.revision_of(session, check_id) if check_id else None,
        form=form,
        boxes=boxes,
        refused=status == 422,
        lazily=True,
        swap=False,
        working=[] if judged.result is None else working_of(judged.result),
        **shown,
        **more,
    )


def leave_and_save(request: Request, job_id: int, check_id: int, save_new: str) -> tuple[str, str]:
    """Addresses: back without saving, and where the form is sent (``save_new`` unless a check is changed)."""
    if check_id:
        return path_for(request, "show_check", check_id=check_id), path_for(request, "revise_check", check_id=check_id)
    return path_for(request, "show_job", job_id=job_id), save_new
