"""Evidence pages that are kept: drawn once, when a value is approved, and handed out unchanged for ever after."""

from __future__ import annotations

import hashlib
from dataclasses import dataclass

from sqlalchemy import Select, select
from sqlalchemy.orm import undefer

from server import sheets
from server.errors import JointError
from server.library.evidence_page import evidence_content, evidence_data, evidence_hash
from server.library.record import NotFoundError, Record
from server.storage import Session
from server.storage.evidence_tables import EvidencePageRow


@dataclass(frozen=True)
class KeptPage:
    """One kept evidence page: when it was drawn, the hash of what it stands on, and that of its bytes."""

    at: str
    sha256: str
    pdf_sha256: str


def evidence_pdf(session: Session, record: Record) -> bytes:
    """Draw the evidence page of a value's revision as things stand today."""
    content = evidence_content(session, record)
    return sheets.evidence_pdf(evidence_data(session, record, evidence_hash(content)))


def keep(session: Session, record: Record, act_id: int, at: str) -> None:
    """Draw the page of a value that was just approved, and keep it with the act; called inside ``storage.write``."""
    content = evidence_content(session, record)
    sha256 = evidence_hash(content)
    pdf = sheets.evidence_pdf(evidence_data(session, record, sha256, kept=True))
    session.add(
        EvidencePageRow(
            act_id=act_id,
            record_revision_id=record.revision_id,
            content=content,
            sha256=sha256,
            pdf=pdf,
            pdf_sha256=hashlib.sha256(pdf).hexdigest(),
            at=at,
        )
    )


def kept_page(session: Session, record: Record) -> KeptPage | None:
    """Return the page that was kept when a revision was last approved; None where none was."""
    row = session.scalars(_last(record)).first()
    return None if row is None else KeptPage(row.at, row.sha256, row.pdf_sha256)


def kept_pdf(session: Session, record: Record) -> bytes:
    """Return the bytes of the page that was kept at the last approval.

    Raises
    ------
    NotFoundError
        If none was kept.
    JointError
        If the bytes or what they stand on were altered in the file.
    """
    row = session.scalars(_last(record).options(undefer(EvidencePageRow.pdf), undefer(EvidencePageRow.content))).first()
    if row is None:
        raise NotFoundError(
            f"No evidence page of {record.itself} is kept: one is kept when a value is approved. The page as it stands "
            "today is drawn from the library."
        )
    if hashlib.sha256(row.pdf).hexdigest() != row.pdf_sha256 or evidence_hash(row.content) != row.sha256:
        raise JointError(
            f"The kept evidence page of {record.itself} was altered after {row.at[:10]}: it does not fit its hash. "
            "Restore a backup from before."
        )
    return row.pdf


def _last(record: Record) -> Select[EvidencePageRow]:
    query = select(EvidencePageRow).where(EvidencePageRow.record_revision_id == record.revision_id)
    return query.order_by(EvidencePageRow.act_id.desc()).limit(1)
