"""Saved checks: shown as stored, printed from the kept bytes, run again, compared. Nothing here recalculates."""

from __future__ import annotations

import json
import re
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from typing import Any

from fastapi import APIRouter, Request
from fastapi.responses import Response

from server import jobs, library, sheets
from server.jobs import Moved, SavedRevision
from server.storage import Session
from server.web import issue_panel
from server.web.inputs import DbSession, FormValues, Id
from server.web.pages import page, see
from server.web.panel import any_panel, asked_of
from server.web.steps import working_of
from server.web.who import signed

router = APIRouter(prefix="/checks", include_in_schema=False)

_ABOUT = (("given", "What was given"), ("values", "Values used"), ("result", "What was found"))
_ONE = {"materials": "Material", "adhesives": "Adhesive", "fasteners": "Fastener"}


@dataclass(frozen=True)
class ValueUsed:
    """One value that a saved check stands on; ``today`` says what the library holds now, where that differs."""

    what: str
    name: str
    record: str
    revision: int | None
    status: str
    source: str
    today: str
    lineage: tuple[tuple[str, Mapping[str, Any]], ...] = ()
    """Each value that was pinned to it, with the value's record and the coupon set behind it."""


@router.get("/{check_id}", name="show_check")
def show_check(request: Request, session: DbSession, check_id: Id) -> Response:
    """Show the newest revision of a check."""
    return show(request, session, jobs.revision_of(session, check_id))


@router.get("/{check_id}/revisions/{revision}", name="show_revision")
def show_revision(request: Request, session: DbSession, check_id: Id, revision: Id) -> Response:
    """Show one saved revision as it was stored."""
    return show(request, session, jobs.revision_of(session, check_id, revision))


@router.get("/{check_id}/revisions/{revision}/sheet.pdf", name="check_pdf")
def check_pdf(session: DbSession, check_id: Id, revision: Id) -> Response:
    """Hand out the sheet: the bytes drawn when the revision was saved."""
    saved = jobs.revision_of(session, check_id, revision)
    headers = {"Content-Disposition": f'inline; filename="{file_name(saved)}.pdf"'}
    return Response(jobs.pdf_bytes(session, saved.id), media_type="application/pdf", headers=headers)


@router.get("/{check_id}/revisions/{revision}/setting-out.pdf", name="setting_out_pdf")
def setting_out_pdf(session: DbSession, check_id: Id, revision: Id) -> Response:
    """Hand out the setting-out page: the fasteners of the saved result alone, drawn and not reckoned."""
    saved = jobs.revision_of(session, check_id, revision)
    headers = {"Content-Disposition": f'inline; filename="{file_name(saved)}-setting-out.pdf"'}
    page_of = sheets.setting_out_pdf(jobs.sheet_of(saved))
    return Response(page_of, media_type="application/pdf", headers=headers)


@router.get("/{check_id}/revisions/{revision}/traveller.pdf", name="traveller_pdf")
def traveller_pdf(session: DbSession, check_id: Id, revision: Id) -> Response:
    """Hand out the traveller of a glue-up: the saved plan, with blanks to write on."""
    saved = jobs.revision_of(session, check_id, revision)
    headers = {"Content-Disposition": f'inline; filename="{file_name(saved)}-traveller.pdf"'}
    return Response(sheets.traveller_pdf(jobs.sheet_of(saved)), media_type="application/pdf", headers=headers)


@router.get("/{check_id}/revisions/{revision}/document.json", name="check_document")
def check_document(session: DbSession, check_id: Id, revision: Id) -> Response:
    """Hand out the check document as typed, for the command line or another program."""
    saved = jobs.revision_of(session, check_id, revision)
    headers = {"Content-Disposition": f'attachment; filename="{file_name(saved)}.json"'}
    text = json.dumps(saved.document, indent=2, ensure_ascii=False)
    return Response(text.encode(), media_type="application/json", headers=headers)


@router.post("/{check_id}/revisions/{revision}/again", name="run_again")
def run_again(request: Request, session: DbSession, values: FormValues, check_id: Id, revision: Id) -> Response:
    """Run a revision again with today's values: a new revision, then what moved."""
    old = jobs.revision_of(session, check_id, revision)
    new = jobs.run_again(session, old.id, made_by=values.get("made_by", ""))
    return see(request, "compare_revisions", check_id=check_id, old=old.revision, new=new.revision)


@router.post("/{check_id}/revisions/{revision}/record", name="keep_fastener")
def keep_fastener(request: Request, session: DbSession, values: FormValues, check_id: Id, revision: Id) -> Response:
    """Make a draft record of a fastener that was checked or tested, and show it."""
    saved = jobs.revision_of(session, check_id, revision)
    record = jobs.keep_fastener(session, saved.id, made_by=values.get("made_by", ""))
    return see(request, "show_record", key=record.key)


@router.get("/{check_id}/compare/{old}/{new}", name="compare_revisions")
def compare_revisions(request: Request, session: DbSession, check_id: Id, old: Id, new: Id) -> Response:
    """Show what moved between two revisions of a check."""
    before, after = (jobs.revision_of(session, check_id, n) for n in (old, new))
    moved = jobs.moved(before, after)
    parts = [(title, [(_words(each), each) for each in moved if each.about == about]) for about, title in _ABOUT]
    return page(
        request,
        "check/compare.html",
        job=jobs.get(session, after.job_id),
        old=before,
        new=after,
        parts=[(title, found) for title, found in parts if found],
        flipped=_flipped(moved),
    )


def _words(moved: Moved) -> str:
    """Say a document's path in words: 'loads.imposed[0].value' is 'loads, imposed 1, value'."""
    if moved.about != "given":
        return moved.what
    return re.sub(r"\[(\d+)\]", lambda at: f" {int(at[1]) + 1}", moved.what).replace(".", ", ").replace("_", " ")


def _flipped(moved: Iterable[Moved]) -> Moved | None:
    return next((each for each in moved if each.what == "verdict"), None)


def show(
    request: Request,
    session: Session,
    saved: SavedRevision,
    errors: Mapping[str, str] | None = None,
    values: Mapping[str, str] | None = None,
) -> Response:
    """Return the page of a saved revision; with ``errors``, what was refused on it comes back as typed."""
    display = str(saved.heading["display"])
    used = list(_values_used(session, saved.values_used))
    return page(
        request,
        "check/saved.html",
        status=422 if errors else 200,
        job=jobs.get(session, saved.job_id),
        saved=saved,
        revisions=jobs.revisions_of(session, saved.check_id),
        given=sheets.given_values(saved.document, saved.values_used, display),
        used=used,
        notices=[value for value in used if value.today],
        may_be_kept=jobs.may_be_kept(saved),
        may_be_glued=jobs.may_be_glued(saved),
        sets_out=bool(sheets.laid_out(saved.result)),
        panel=any_panel(saved.result, display, asked_of(request.query_params)),
        waiting=(),
        faults_on_page=(),
        swap=False,
        working=working_of({**saved.result, "display": display}),
        **issue_panel.context(session, saved, signed(request), errors, values),
    )


def _values_used(session: Session, values_used: Mapping[str, Any]) -> Iterable[ValueUsed]:
    for section, entries in values_used.items():
        for name, entry in entries.items():
            yield ValueUsed(
                what=_ONE.get(section, section),
                name=name,
                record=str(entry.get("record") or ""),
                revision=entry.get("revision"),
                status=str(entry.get("status") or ""),
                source=str(entry.get("source") or ""),
                today=_today(session, entry),
                lineage=tuple((entry.get("lineage") or {}).items()),
            )


def _today(session: Session, entry: Mapping[str, Any]) -> str:
    """Say what became of a record since; '' where the sheet's revision still holds, or none was used."""
    key, used = entry.get("record"), entry.get("revision")
    if key is None or used is None:
        return ""
    current = library.in_force(session, str(key))
    if current is None or current.revision <= used:
        return ""
    state = "" if current.status == "approved" else f" and {current.status}"
    now = f"Library value {key} is now rev {current.revision}{state}."
    return f"{now} This sheet used rev {used} and still prints rev {used}."


def file_name(saved: SavedRevision) -> str:
    """Return a file name that says job, mark and revision in letters every system takes."""
    words = f"{saved.heading['job_number']} {saved.mark} rev {saved.revision}"
    return re.sub(r"[^A-Za-z0-9._]+", "-", words).strip("-.")
