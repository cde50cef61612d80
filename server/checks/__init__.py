"""Checks: one module a kind, from a document with its values filled in to its result."""

from __future__ import annotations

from server import documents
from server.checks import coupons, fastener, glue_up, load_slip, member, splice, strip_end
from server.checks.contours import Look
from server.errors import DocumentError, Fault

__all__ = ["Look", "run"]


def run(document: documents.Document, *, working: bool = True, look: Look | None = None) -> dict[str, object]:
    """Run a document's check and return its result as the contract says.

    ``working`` false leaves the steps out (the numbers are the same), for an answer while somebody types; ``look`` asks
    for the stresses of a member's section at a chosen place, which a result with its working shows where they are most.

    Raises
    ------
    DocumentError
        If the document still refers to library records, or what it describes cannot be checked.
    """
    unresolved = document.unresolved()
    if unresolved:
        raise DocumentError(
            [
                Fault(path, "refers to a library record, but no library was opened to take it from.")
                for path in unresolved
            ]
        )
    try:
        return _run(document, working, look)
    except ArithmeticError as error:  # sizes, moduli or loads so far apart that no number holds what comes of them
        raise DocumentError(
            [
                Fault(
                    "",
                    "the numbers lie too far apart to be reckoned with; check them and their units.",
                )
            ]
        ) from error


def _run(document: documents.Document, working: bool, look: Look | None) -> dict[str, object]:
    if isinstance(document, documents.MemberDocument):
        return member.run(document, working=working, look=look)
    if isinstance(document, documents.CouponsDocument):
        return coupons.run(document, working=working)
    if isinstance(document, documents.FastenerDocument):
        return fastener.run(document, working=working)
    if isinstance(document, documents.GlueUpDocument):
        return glue_up.run(document, working=working)
    if isinstance(document, documents.LoadSlipDocument):
        return load_slip.run(document, working=working)
    if isinstance(document, documents.SpliceDocument):
        return splice.run(document, working=working)
    if isinstance(document, documents.StripEndDocument):
        return strip_end.run(document, working=working)
    raise DocumentError([Fault("kind", f"kind {document.kind!r} cannot be checked in this version.")])
