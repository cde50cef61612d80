"""A saved revision as one plain JSON object that any later program can read, and its sheet from it."""

from __future__ import annotations

import base64
import binascii
from collections.abc import Mapping
from typing import Any

from server.errors import JointError
from server.jobs.content import PARTS, bytes_hash, content_hash
from server.jobs.revisions import pdf_bytes, revision
from server.storage import Session

FORMAT = "bondwright-record/1"


class RecordError(JointError):
    """An exported record is not whole, or was altered."""


def export_revision(session: Session, revision_id: int) -> dict[str, Any]:
    """Return a saved revision with all that belongs to it: heading, document, values, result, sheet, hashes."""
    saved = revision(session, revision_id)
    return {
        "format": FORMAT,
        "heading": saved.heading,
        "document": saved.document,
        "values_used": saved.values_used,
        "result": saved.result,
        "engine": saved.engine,
        "sha256": saved.sha256,
        "pdf": base64.b64encode(pdf_bytes(session, revision_id)).decode(),
        "pdf_sha256": saved.pdf_sha256,
    }


def print_record(record: Mapping[str, Any]) -> bytes:
    """Return the kept sheet of an exported record, after making sure that nothing in it was altered.

    Raises
    ------
    RecordError
        If it is of another format, lacks a part, or a hash does not fit.
    """
    if record.get("format") != FORMAT:
        raise RecordError(f"The format is {str(record.get('format'))[:60]!r}; this program reads {FORMAT!r}.")
    lacking = [part for part in (*PARTS, "sha256", "pdf", "pdf_sha256") if part not in record]
    if lacking:
        raise RecordError(f"The record lacks {', '.join(lacking)}; export it again from the program that saved it.")
    if content_hash(record) != record["sha256"]:
        raise RecordError(
            "The record was altered after it was saved: its content does not fit its hash. Use the original."
        )
    try:
        pdf = base64.b64decode(record["pdf"], validate=True)
    except (binascii.Error, TypeError, ValueError) as error:
        raise RecordError("The record's sheet is not base64 text; export it again.") from error
    if bytes_hash(pdf) != record["pdf_sha256"]:
        raise RecordError("The record's sheet was altered after it was saved. Use the original.")
    return pdf


def altered(session: Session, revision_id: int) -> str | None:
    """Return what is wrong with a saved revision in the record book, or None: the hash and the sheet fit."""
    try:
        print_record(export_revision(session, revision_id))
    except RecordError as error:
        return str(error)
    return None
