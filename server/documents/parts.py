"""The parts of a member document that could be read, so that its rules also speak when a field elsewhere is wrong.

Rules that look across fields run on these parts. A part that could not be read is None: its name still counts as
defined, and no rule judges it.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from functools import lru_cache
from typing import Any, Literal

from pydantic import TypeAdapter, ValidationError

from server import units
from server.documents.common import (
    MARK,
    AdhesiveEntry,
    Allowable,
    Basis,
    Fastener,
    FastenerEntry,
    LimitState,
    Material,
    MaterialEntry,
)
from server.documents.member import (
    Combination,
    Joint,
    Load,
    LoadEntry,
    MemberDocument,
    Piece,
    PieceEntry,
    Service,
    Support,
)
from server.errors import InputError


@dataclass
class Parts:
    """What could be read of a member document; a table that is none at all, or empty where it must not be, is None."""

    display: Literal["SI", "US"] = "SI"
    basis: Allowable | LimitState | None = None
    materials: dict[str, Any] | None = None
    adhesives: dict[str, Any] | None = None
    fasteners: dict[str, Any] | None = None
    pieces: dict[str, Piece | None] | None = None
    joints: list[Joint | None] = field(default_factory=list)
    length: float | None = None
    supports: list[Support | None] = field(default_factory=list)
    hinges: list[float | None] = field(default_factory=list)
    bears_on: list[str] = field(default_factory=list)
    held_sideways: bool = True
    loads: dict[str, list[Load | None]] | None = None
    combinations: dict[str, Combination | None] = field(default_factory=dict)
    service: Service | None = None

    def material(self, name: str) -> Material | None:
        """The material's values, where they are given and readable."""
        entry = (self.materials or {}).get(name)
        return entry if isinstance(entry, Material) else None

    def fastener(self, name: str) -> Fastener | None:
        """The fastener's values, where they are given and readable."""
        entry = (self.fasteners or {}).get(name)
        return entry if isinstance(entry, Fastener) else None


def parts_of(document: MemberDocument) -> Parts:
    """The parts of a document that was read whole."""
    member = document.member
    return Parts(
        display=document.display,
        basis=document.basis,
        materials=dict(document.materials),
        adhesives=dict(document.adhesives),
        fasteners=dict(document.fasteners),
        pieces=dict(document.section.pieces),
        joints=list(document.section.joints),
        length=member.length,
        supports=list(member.supports),
        hinges=list(member.hinges),
        bears_on=list(member.bears_on),
        held_sideways=member.held_sideways,
        loads={case: list(loads) for case, loads in document.loads.items()},
        combinations=dict(document.combinations),
        service=document.service,
    )


def salvage(raw: Mapping[str, Any]) -> Parts:
    """What can be read of a document that has faults."""
    section, member = _object(raw.get("section")) or {}, _object(raw.get("member")) or {}
    loads = _object(raw.get("loads"))
    joints, supports, hinges = section.get("joints"), member.get("supports"), member.get("hinges")
    return Parts(
        display="US" if raw.get("display") == "US" else "SI",
        basis=_one("basis", raw.get("basis")),
        materials=_table("material", raw.get("materials", {})),
        adhesives=_table("adhesive", raw.get("adhesives", {})),
        fasteners=_table("fastener", raw.get("fasteners", {})),
        pieces=_table("piece", section.get("pieces")) or None,
        joints=_row("joint", joints),
        length=_place(member.get("length")) or None,
        supports=_row("support", supports),
        hinges=[_place(hinge) for hinge in hinges] if isinstance(hinges, list) else [],
        bears_on=[name for name in _list(member.get("bears_on")) if isinstance(name, str)],
        held_sideways=member.get("held_sideways", True) is not False,
        loads={case: _row("load", rows) for case, rows in loads.items()} if loads else None,
        combinations=_table("combination", raw.get("combinations", {})) or {},
        service=_one("service", raw.get("service")),
    )


def _list(value: object) -> list[object]:
    return value if isinstance(value, list) else []


def _object(value: object) -> dict[str, Any] | None:
    return value if isinstance(value, dict) else None


_KINDS: Mapping[str, Any] = {
    "basis": Basis,
    "material": MaterialEntry,
    "adhesive": AdhesiveEntry,
    "fastener": FastenerEntry,
    "piece": PieceEntry,
    "joint": Joint,
    "support": Support,
    "load": LoadEntry,
    "combination": Combination,
    "service": Service,
}


@lru_cache(maxsize=len(_KINDS))
def _adapter(kind: str) -> TypeAdapter[Any]:
    return TypeAdapter(_KINDS[kind])  # built when first needed: good documents never come here


# Fields no rule looks at: where one of them is wrong, this stands in for it, and the rules speak about the rest.
_STAND_INS: Mapping[str, Mapping[str, object]] = {
    "joint": {"coverage": 1.0, "width": None, "rows": 1},
    "load": {"value": 0.0, "offset": 0.0, "width": 1.0},
    "combination": {"for": "both", "duration": None},
    "material": {
        **{"E": 1.0, "layered": False, "kind": "", "source": "", "note": "", "duration_factors": {}, "factors": {}},
        **dict.fromkeys(("G", "G_rolling", "nu", "expansion", "yield", "creep", "status")),
    },
}


def _one(kind: str, value: object) -> Any:
    try:
        return _adapter(kind).validate_python(value)
    except ValidationError as error:
        mended = _mended(kind, value, error)
    try:
        return _adapter(kind).validate_python(mended) if mended is not None else None
    except ValidationError:
        return None


def _mended(kind: str, value: object, error: ValidationError) -> dict[str, Any] | None:
    """``value`` with stand-ins for its wrong fields and without unknown names; None where a rule would look at them."""
    if kind == "piece":
        return _without_its_shape(value)
    stand_ins = _STAND_INS.get(kind)
    if stand_ins is None or not isinstance(value, dict):
        return None
    mended = dict(value)
    for details in error.errors(include_url=False):
        plain = [part for part in details["loc"] if not (isinstance(part, str) and part.startswith(MARK))]
        name = str(plain[0] if plain else details.get("ctx", {}).get("field"))
        if details["type"] == "extra_forbidden" and len(plain) == 1:
            del mended[name]
        elif name in stand_ins:
            mended[name] = stand_ins[name]
        else:
            return None
    return mended


def _without_its_shape(value: object) -> dict[str, Any] | None:
    """A piece as a rectangle of no matter which size: rules look at its material and at where it runs."""
    if not isinstance(value, dict):
        return None
    looked_at = {key: value[key] for key in ("material", "from", "to") if key in value}
    return {"shape": "rectangle", "width": 1.0, "depth": 1.0, "at": [0, 0], **looked_at}


def _table(kind: str, value: object) -> dict[str, Any] | None:
    table = _object(value)
    return {name: _one(kind, entry) for name, entry in table.items()} if table is not None else None


def _row(kind: str, value: object) -> list[Any]:
    return [_one(kind, entry) for entry in value] if isinstance(value, list) else []


def _place(value: object) -> float | None:
    try:
        length = units.parse("", value, "length")
    except InputError:
        return None
    return length if length >= 0 else None
