"""Kind "strip-end": the ends of a strip or plate bonded to a member in bending."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import replace
from typing import Annotated, Any, Literal

from pydantic import Field, ValidationError

from server import units
from server.documents import rules as member_rules
from server.documents.common import Adhesive, Basis, Document
from server.documents.faults import unknown
from server.documents.member import (
    Combination,
    LoadEntry,
    Member,
    MemberDocument,
    Section,
    Service,
    all_cases,
)
from server.documents.model import Model
from server.documents.parts import Parts, parts_of, salvage
from server.documents.quantities import Name, Place, Size
from server.errors import Fault

STRIP = "strip"


class BondedStrip(Model):
    """The strip: where it runs, how wide and thick it is; ``grain`` as of a piece."""

    material: Name
    width: Size
    thickness: Size
    from_: Place = Field(alias="from")
    to: Place
    grain: Literal["along", "across"] = "along"


class StripEndDocument(Document):
    """A check of kind "strip-end".

    Beyond the contract: ``before_bonding`` (load cases that act, unpropped, before the strip is bonded: only what is
    added afterwards is shared), ``service`` as in "member", ``strip.grain``.
    """

    kind: Literal["strip-end"]
    basis: Basis
    strip: BondedStrip
    face: Literal["bottom", "top"]
    host: Section
    member: Member
    bond: Name = Field(alias="adhesive")
    loads: dict[Name, Annotated[list[LoadEntry], Field(max_length=1000)]] = Field(min_length=1, max_length=100)
    combinations: dict[Name, Combination] = Field(default_factory=all_cases, min_length=1, max_length=100)
    before_bonding: list[Name] = Field(default_factory=list, max_length=100)
    service: Service | None = None

    @property
    def strip_name(self) -> str:
        """What the strip is called among the pieces."""
        name = STRIP
        while name in self.host.pieces:
            name += "'"
        return name

    def as_member(self, at: tuple[float, float], joined: list[str]) -> MemberDocument:
        """The member with the strip as one of its pieces, bonded to the ``joined`` pieces of its host."""
        strip = self.strip
        piece = {
            "shape": "rectangle",
            "width": strip.width,
            "depth": strip.thickness,
            "at": at,
            "material": strip.material,
            "grain": strip.grain,
            "from": strip.from_,
            "to": strip.to,
        }
        joints = [{"between": [self.strip_name, other], "adhesive": self.bond} for other in joined]
        return MemberDocument.model_validate(
            {
                "format": self.format,
                "kind": "member",
                "title": self.title,
                "display": self.display,
                "materials": self.materials,
                "adhesives": self.adhesives,
                "fasteners": self.fasteners,
                "basis": self.basis,
                "section": {
                    "pieces": {self.strip_name: piece, **self.host.pieces},
                    "joints": [*joints, *self.host.joints],
                },
                "member": self.member,
                "loads": self.loads,
                "combinations": self.combinations,
                "service": self.service,
            }
        )


def rules(document: StripEndDocument) -> list[Fault]:
    """Every fault between the fields of a document that was read whole."""
    first = next(iter(document.host.pieces))
    parts = parts_of(document.as_member((0.0, 0.0), [first]))
    return [*_own(document.__dict__ | {"adhesive": document.bond}), *_of_member(parts, document.strip_name)]


def rules_of_raw(raw: Mapping[str, Any]) -> list[Fault]:
    """Every fault between those fields that can be read."""
    parts = salvage({**raw, "section": raw.get("host")})
    known: dict[str, Any] = dict(raw)
    for name, model in (("strip", BondedStrip),):
        known[name] = _readable(model, raw.get(name))
    known["materials"] = parts.materials or {}
    known["adhesives"] = parts.adhesives or {}
    known["loads"] = parts.loads or {}
    known["member"] = None if parts.length is None else parts.length
    return [*_own(known), *_of_member(parts, "")]


def _readable(model: type[Any], value: object) -> Any:
    try:
        return model.model_validate(value)
    except ValidationError:
        return None


def _of_member(parts: Parts, strip: str) -> Iterator[Fault]:
    """The rules of a member, with the places called as they are here; the strip's own are said by its own rules."""
    for fault in member_rules.faults(parts):
        path = fault.path
        if strip and path.startswith(f"section.pieces.{strip}"):
            continue
        if path.startswith("section.joints[0]") and strip:
            continue
        if strip and path.startswith("section.joints["):
            number, rest = path.removeprefix("section.joints[").split("]", 1)
            path = f"host.joints[{int(number) - 1}]{rest}"
        path = path.replace("section.", "host.", 1) if path.startswith("section.") else path
        yield replace(fault, path=path)


def _own(known: Mapping[str, Any]) -> Iterator[Fault]:
    strip, adhesive = known.get("strip"), known.get("adhesive")
    adhesives, materials, loads = known.get("adhesives") or {}, known.get("materials") or {}, known.get("loads") or {}
    if isinstance(adhesive, str) and adhesive not in adhesives:
        yield Fault("adhesive", unknown(adhesive, "adhesive", adhesives))
    if isinstance(strip, BondedStrip):
        if strip.material not in materials:
            yield Fault("strip.material", unknown(strip.material, "material", materials))
        length = known["member"].length if isinstance(known.get("member"), Member) else known.get("member")
        yield from _run(strip, length if isinstance(length, float) else None)
        entry = adhesives.get(adhesive) if isinstance(adhesive, str) else None
        if isinstance(entry, Adhesive) and entry.thickness is not None and entry.thickness > strip.width:
            yield Fault(
                f"adhesives.{adhesive}.thickness", "the bond line is thicker than the strip is wide; check both."
            )
    before = known.get("before_bonding") or []
    for index, case in enumerate(before if isinstance(before, list) else []):
        if isinstance(case, str) and case not in loads:
            yield Fault(f"before_bonding[{index}]", unknown(case, "load case", loads))


def _run(strip: BondedStrip, length: float | None) -> Iterator[Fault]:
    if strip.from_ >= strip.to:
        shown = units.show(strip.to, "length"), units.show(strip.from_, "length")
        yield Fault("strip.to", f"{shown[0]} is not to the right of 'from' ({shown[1]}); enter a larger place.")
    for name, place in (("from", strip.from_), ("to", strip.to)):
        if length is not None and place > length * (1 + 1e-9):
            yield Fault(
                f"strip.{name}",
                f"{units.show(place, 'length')} is beyond the end of the member, {units.show(length, 'length')}.",
            )
