"""A saved check of a fastener becomes a record of the library: its values, and the sheet they come from."""

from __future__ import annotations

from collections.abc import Mapping
from decimal import ROUND_DOWN, Decimal
from typing import Any

from server import library
from server.errors import DocumentError, Fault
from server.jobs.revisions import SavedRevision, revision
from server.library import Record
from server.storage import Session

KINDS = ("fastener", "load-slip")
_VALUES = {"shear_resistance": "N", "slip_modulus": "N/mm", "spacing_min": "mm"}
_METHODS = {
    "EN 1995-1-1": "EN 1995-1-1, characteristic value",
    "yield-limit": "NDS yield-limit equations, reference value",
    "thin metal": "tested shear and bearing in thin metal",
}
_REFERENCE = (
    "This is the NDS reference value, which holds its margin already: it is no characteristic value. Divide it by no "
    "further safety factor meant for one, and put the adjustments under duration and other factors."
)


def may_be_kept(saved: SavedRevision) -> bool:
    """Whether a saved check can become a fastener record: of the right kind, and nothing missing."""
    return saved.result["kind"] in KINDS and saved.result["verdict"] == "pass"


def keep_fastener(session: Session, revision_id: int, *, made_by: str = "") -> Record:
    """Add a draft fastener record with the values of a saved check; its source names the sheet.

    Raises
    ------
    DocumentError
        If the check is of another kind, or something is missing in it; nothing is added.
    """
    saved = revision(session, revision_id)
    if not may_be_kept(saved):
        raise DocumentError(
            [
                Fault(
                    "",
                    "Only a check of a fastener, or of fastener tests, in which nothing is missing becomes a record.",
                )
            ]
        )
    result, heading = saved.result, saved.heading
    sheet = f"job {heading['job_number']}, {saved.mark} revision {saved.revision}, content {saved.sha256[:16]}"
    method = _method(result)
    return library.add(
        session,
        group="fasteners",
        name=saved.title or f"Fastener {saved.mark}",
        values=_values(saved.document, result),
        source=f"{method}; {sheet}",
        note=_REFERENCE if result.get("method") == "yield-limit" else "",
        details={"test_method": method, **_members(saved.document)},
        made_by=made_by,
    )


def _method(result: Mapping[str, Any]) -> str:
    if result["kind"] == "load-slip":
        return f"EN 26891, {result['n']} tests of the shop, characteristic value"
    return _METHODS[str(result["method"])]


def _members(document: Mapping[str, Any]) -> dict[str, str]:
    """The parts that the strength was found with: it holds for those."""
    told = {}
    for side in ("side", "main"):
        part = document.get(side)
        if isinstance(part, Mapping):
            told[f"{side}_member"] = str(part.get("kind") or "timber")
    thickness = (document.get("side") or {}).get("thickness")
    if thickness is not None:
        told["side_thickness"] = thickness if isinstance(thickness, str) else f"{thickness:.12g} mm"
    return told


def _values(document: Mapping[str, Any], result: Mapping[str, Any]) -> dict[str, str]:
    """The values as texts with units; what the check did not find is left out."""
    values = {name: f"{_five_digits(result[name])} {unit}" for name, unit in _VALUES.items() if result.get(name)}
    diameter = (document.get("fastener") or {}).get("diameter")
    if diameter is not None:
        values["diameter"] = diameter if isinstance(diameter, str) else f"{diameter:.12g} mm"
    return values


def _five_digits(value: float) -> str:
    """A found value as a record says it: five digits, never more than was found.

    >>> _five_digits(351.27986), _five_digits(963.0), _five_digits(123456.7)
    ('351.27', '963', '123450')
    """
    found = Decimal(repr(float(value)))
    return f"{found.quantize(Decimal(1).scaleb(found.adjusted() - 4), ROUND_DOWN).normalize():f}"
