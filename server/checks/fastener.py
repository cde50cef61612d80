"""Kind "fastener": one fastener between two members, from the document to its resistance."""

from __future__ import annotations

from typing import Any

from server import ENGINE, units
from server.checks import fastener_en, fastener_thin, fastener_yield
from server.checks.fastener_parts import Case, Found
from server.checks.resistance import Findings
from server.documents.fastener import FastenerDocument
from server.errors import DocumentError, Fault, InputError
from server.working import Working

METHODS = {"EN 1995-1-1": fastener_en.find, "yield-limit": fastener_yield.find, "thin metal": fastener_thin.find}
NOT_CHECKED = (
    "splitting, plug and block shear of the wood around a group of fasteners",
    "the members themselves, with their cross-section reduced by holes",
    "eccentricity of the joint, and forces along the fastener other than the pull that helps it",
    "withdrawal, pull-through and corrosion of the fastener",
    "duration of load and moisture: they enter where the value is used, unless adjustments are given here",
    "whether holes, tolerances and driving are as the method takes for granted",
)


def run(document: FastenerDocument, *, working: bool = True) -> dict[str, object]:
    """Find the resistance of one fastener as contract.md's kind "fastener" says.

    ``working`` false leaves the steps out.

    Raises
    ------
    DocumentError
        If the fastener does not reach, or the numbers given have no answer.
    """
    case = Case(document, Working(record=working), Findings())
    try:
        found = METHODS[document.method](case)
    except InputError as error:
        message = f"these sizes and values have no answer: {error}"
        raise DocumentError([Fault("fastener", message)]) from error
    if not found.resistance > 0:
        case.findings.miss("a resistance above 0: the values given leave none.")
    if document.shear_planes == 2:
        case.book.note(
            "Resistance of the fastener",
            "Two shear planes.",
            2 * found.resistance,
            "N",
            symbol="F_both",
            group="Result",
        )
    missing = case.findings.missing
    return {
        **document.head,
        "verdict": "not proven" if missing else "pass",
        "utilisation": None,
        "governing": _governing(document, found),
        "method": document.method,
        "modes": found.modes,
        "governing_mode": found.governing,
        "mode_words": {key: mode.words for key, mode in found.shapes.items()},
        "shear_resistance": found.resistance,
        "resistance_per_fastener": document.shear_planes * found.resistance,
        "shear_planes": document.shear_planes,
        **found.more,
        "drawing": _drawing(document, found),
        "cautions": case.findings.cautions,
        "missing": missing,
        "not_checked": list(NOT_CHECKED),
        "steps": case.book.steps,
        "values_used": {"materials": {}, "adhesives": {}, "fasteners": {}},
        "engine": ENGINE,
    }


def _governing(document: FastenerDocument, found: Found) -> str:
    words = found.shapes[found.governing].words
    value = units.show(found.resistance, "force")
    return f"mode {found.governing}: {words}; {value} a shear plane ({document.method})"


def _drawing(document: FastenerDocument, found: Found) -> dict[str, Any]:
    """What a drawing of the modes needs: sizes, kinds and how the fastener lies in each."""
    return {
        "type": document.dowel.type,
        "diameter": document.dowel.diameter,
        "length": document.dowel.length,
        "shear_planes": document.shear_planes,
        "members": {
            name: {"thickness": part.thickness, "kind": part.kind, "angle": part.angle}
            for name, part in (("side", document.side), ("main", document.main))
        },
        "modes": {
            key: {
                name: [_member(document, each) for each in getattr(mode, name)]
                for name in ("turns", "hinges", "crushed")
            }
            for key, mode in found.shapes.items()
        },
    }


def _member(document: FastenerDocument, name: str) -> str:
    """The member that a mode speaks of: beside a plate "plate" and the other one are the metal and the wood."""
    if not (document.side.metal or document.main.metal) or document.method != "EN 1995-1-1":
        return name
    plate = "side" if document.side.metal else "main"
    if document.shear_planes == 2:
        return plate if name == "plate" else name
    return plate if name == "plate" else ("main" if plate == "side" else "side")
