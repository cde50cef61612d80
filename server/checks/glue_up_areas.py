"""The areas of a glue-up: as given, or from the bonded joints of a member check."""

from __future__ import annotations

from dataclasses import dataclass

from server import documents
from server.checks import crosssection
from server.checks.resistance import Findings
from server.documents.glue_up import Area, GlueUpDocument, total_of
from server.errors import DocumentError, Fault
from server.working import Working

GEOMETRY = "width x length"
SPREAD_WHOLE = (
    "Adhesive is spread over the whole bonded width, along all the length on which both pieces run; the joint's "
    "coverage says how much of that is counted on for strength and is not taken off here."
)


@dataclass(frozen=True)
class Bond:
    """One area to be bonded [mm2]; ``start`` and ``end`` along the member, or from 0, None where no length is known."""

    name: str
    area: float
    width: float | None = None
    start: float | None = None
    end: float | None = None
    adhesive: str = ""
    coverage: float | None = None

    def as_result(self) -> dict[str, object]:
        """Its entry in the result."""
        length = None if self.start is None or self.end is None else self.end - self.start
        found: dict[str, object] = {"id": self.name, "width": self.width, "length": length, "area": self.area}
        if self.coverage is not None:
            found |= {"adhesive": self.adhesive, "from": self.start, "coverage": self.coverage}
        return found


def bonds_of(document: GlueUpDocument, book: Working, findings: Findings) -> list[Bond]:
    """The bonds, each with the step that gives its area.

    Raises
    ------
    DocumentError
        If the member check has no joint with adhesive, or its geometry cannot be built.
    """
    book.begin("Area")
    if document.check is None:
        return [_given(each, number, book) for number, each in enumerate(document.areas or [], 1)]
    return _from_check(document, document.check, book, findings)


def _given(each: float | Area, number: int, book: Working) -> Bond:
    name = each.name if isinstance(each, Area) and each.name else f"area {number}"
    if not isinstance(each, Area) or each.width is None or each.length is None:
        area = total_of(each)
        assert area is not None
        return Bond(name, area)
    return Bond(name, _sized(name, number, each.width, each.length, "", book), each.width, 0.0, each.length)


def _sized(name: str, number: int, width: float, length: float, note: str, book: Working) -> float:
    given = {"b": (width, "mm"), "l": (length, "mm")}
    return book.step(f"Area of {name}", f"A_{number}", "b*l", given, "mm2", GEOMETRY, note=note)


def _from_check(
    document: GlueUpDocument, check: documents.MemberDocument, book: Working, findings: Findings
) -> list[Bond]:
    sites = [site for site in _sites(check) if document.bond in (None, site.spec.adhesive)]
    if not sites:
        wanted = "an adhesive" if document.bond is None else f"adhesive {document.bond!r}"
        raise DocumentError([Fault("check.section.joints", f"No joint has {wanted}, so there is nothing to glue.")])
    used = list(dict.fromkeys(str(site.spec.adhesive) for site in sites))
    if len(used) > 1:
        named = ", ".join(repr(name) for name in used)
        findings.miss(f"one adhesive: the joints have {named}; name in 'bond' the one that this glue-up is for.")
    bonds = []
    for number, site in enumerate(sites, 1):
        start = max(site.first.start, site.second.start)
        end = min(site.first.end, site.second.end)
        note = SPREAD_WHOLE if number == 1 else ""
        area = _sized(site.id, number, site.width, end - start, note, book)
        bonds.append(Bond(site.id, area, site.width, start, end, str(site.spec.adhesive), site.spec.coverage))
    return bonds


def _sites(check: documents.MemberDocument) -> list[crosssection.Site]:
    """The bonded joints, placed on their contacts."""
    try:
        body = crosssection.build(check)
    except DocumentError as error:
        faults = [Fault(f"check.{each.path}" if each.path else "check", each.message) for each in error.faults]
        raise DocumentError(faults) from error
    return [site for site in body.sites if site.bonded]


def pressed_by_fasteners(document: GlueUpDocument) -> bool:
    """Whether fasteners press the bonds: as said, or as a joint of the check has it."""
    if document.check is None or document.pressed_by == "fasteners":
        return document.pressed_by == "fasteners"
    return any(j.adhesive is not None and j.effective_role == "press" for j in document.check.section.joints)


def run_length(bonds: list[Bond]) -> float | None:
    """The length along the member that clamps stand on: bonds beside one another share it; None where one has none.

    It is the length of the union of where the bonds run [mm].
    """
    runs = sorted((each.start, each.end) for each in bonds if each.start is not None and each.end is not None)
    if len(runs) < len(bonds):
        return None
    covered, reached = 0.0, runs[0][0]
    for start, end in runs:
        covered += max(end, reached) - max(start, reached)
        reached = max(reached, end)
    return covered
