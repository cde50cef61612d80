"""The setting-out page: one sheet for the bench, with the fasteners alone. Drawn from a saved result."""

from __future__ import annotations

from collections.abc import Iterator

from server.errors import JointError
from server.sheets import setting_out
from server.sheets.composition import Part, SheetData, head_of
from server.sheets.values import utilisation, verdict

FOOT = "Setting out as checked; the sheet of the check says what it stands on. Measure the pieces before drilling."


def compose_setting_out(sheet: SheetData) -> Part:
    """The page as data for the template.

    Raises
    ------
    JointError
        Where the check has no fasteners with a spacing, or was saved before they were set out.
    """
    if not setting_out.laid_out(sheet.result):
        raise JointError(
            "This check sets out no fasteners: none of its joints has a fastener with a spacing, or it was saved "
            "before the program set them out. Give a spacing, or run it again."
        )
    head = head_of(sheet)
    return {
        "paper": {"A4": "a4", "Letter": "us-letter"}[sheet.paper],
        "head": {**head, "kind": "Setting out of fasteners"},
        "verdict": {
            "word": verdict(sheet.result),
            "utilisation": utilisation(sheet.result.get("utilisation")),
            "governing": "The check as a whole. Do not build from this page where it does not pass.",
        },
        "parts": list(_parts(sheet)),
        "foot": {
            "engine": sheet.engine or str(sheet.result.get("engine", "")),
            "hash": sheet.content_hash or "not saved",
            "limits": FOOT,
        },
    }


def _parts(sheet: SheetData) -> Iterator[Part]:
    result, display = sheet.result, sheet.display
    yield setting_out.figure(result, display)
    yield {"kind": "sub", "title": "Step off from the left", "about": "each row goes on from the one above"}
    yield from setting_out.tables(result, display)
    yield from setting_out.remarks(result, display)
