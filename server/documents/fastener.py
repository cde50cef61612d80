"""Kind "fastener": resistance of one dowel-type fastener, per shear plane."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Annotated, Any, Literal

from pydantic import Field, ValidationError

from server import units
from server.documents.common import Document, Model
from server.documents.quantities import Count, Line, Name, Quantity, Reduction, Resistance, Size, Stress
from server.errors import Fault, InputError

LARGEST = 100.0  # mm, of a diameter: beyond it no method here has a meaning
METALS = ("steel", "aluminium")

Method = Literal["EN 1995-1-1", "yield-limit", "thin metal"]
Sort = Literal["nail", "screw", "bolt", "dowel", "rivet"]
Shape = Literal["round", "square", "grooved", "other"]
PartKind = Literal["timber", "lvl", "plywood", "osb", "particleboard", "hardboard", "steel", "aluminium"]


class BendingYield(Quantity):
    """A stress; a moment typed in its place is told so."""

    def read(self, value: object) -> float:
        """Return the bending yield strength [MPa]."""
        try:
            return super().read(value)
        except InputError as error:
            if isinstance(value, str) and _is_couple(value):
                raise InputError(
                    "", f"{units.given(value)} is a moment; a declared yield moment is called 'yield_moment'."
                ) from error
            raise


def _is_couple(value: str) -> bool:
    try:
        units.parse("", value, "couple")
    except InputError:
        return False
    return True


Diameter = Annotated[float, Quantity("length", above=0.0, most=LARGEST)]
Gravity = Annotated[float, Quantity("factor", least=0.05, most=1.5)]
Density = Annotated[float, Quantity("density", least=50.0, most=1600.0)]
Grain = Annotated[float, Quantity("angle", least=0.0, most=90.0)]
Plate = Annotated[float, Quantity("length", above=0.0, most=10000.0)]
Strength = Annotated[float, Quantity("stress", above=0.0, most=10000.0)]


class Dowel(Model):
    """The fastener itself.

    ``diameter``: nails, bolts, dowels, rivets: the shank; screws: the outer diameter of the thread. ``root_diameter``
    is that of a thread's core. ``withdrawal`` is the characteristic resistance to being pulled out [N]; ``tested`` the
    shop's or maker's own tested shear resistance [N].
    """

    type: Sort
    diameter: Diameter
    shape: Shape = "round"
    root_diameter: Diameter | None = None
    length: Size | None = None
    ultimate: Strength | None = None
    yield_: Strength | None = Field(default=None, alias="yield")
    bending_yield: Annotated[float, BendingYield("stress", above=0.0, most=10000.0)] | None = None
    yield_moment: Annotated[float, Quantity("couple", above=0.0, most=1e9)] | None = None
    withdrawal: Annotated[float, Quantity("force", least=0.0)] | None = None
    tested: Resistance | None = None


class Part(Model):
    """One of the members joined. ``angle`` is between force and grain; ``embedment`` replaces what density gives."""

    thickness: Plate
    kind: PartKind = "timber"
    wood: Literal["softwood", "hardwood"] = "softwood"
    density: Density | None = None
    density_mean: Density | None = None
    specific_gravity: Gravity | None = None
    embedment: Stress | None = None
    ultimate: Strength | None = None
    angle: Grain = 0.0
    splits: bool = Field(default=False, strict=True)
    name: Line = ""

    @property
    def metal(self) -> bool:
        """Whether it is a metal plate."""
        return self.kind in METALS


class Row(Model):
    """Fasteners one behind another in the direction of the grain."""

    count: Annotated[int, Count(1, 1000)]
    spacing: Size | None = None


class FastenerDocument(Document):
    """One fastener between a side member and a main member. A basis is accepted and not used."""

    kind: Literal["fastener"]
    basis: Any = None
    method: Method
    dowel: Dowel = Field(alias="fastener")
    side: Part
    main: Part
    shear_planes: Annotated[int, Count(1, 2)] = 1
    predrilled: bool = Field(default=False, strict=True)
    row: Row | None = None
    end_distance: Size | None = None
    adjustments: dict[Name, Reduction] = Field(default_factory=dict, max_length=20)


Piece = tuple[str, Part | None]


def rules(document: FastenerDocument) -> list[Fault]:
    """Every fault between the fields of a document that was read whole."""
    parts: list[Piece] = [("side", document.side), ("main", document.main)]
    return list(_faults(document.method, document.dowel, parts, document.shear_planes, document.adjustments))


def rules_of_raw(raw: Mapping[str, Any]) -> list[Fault]:
    """Every fault between those fields that can be read."""
    parts = [(name, _readable(Part, raw.get(name))) for name in ("side", "main")]
    adjustments = raw.get("adjustments")
    method = raw.get("method")
    return list(
        _faults(
            method if isinstance(method, str) else "",
            _readable(Dowel, raw.get("fastener")),
            parts,
            2 if raw.get("shear_planes") in (2, "2", 2.0) else 1,
            adjustments if isinstance(adjustments, Mapping) else {},
        )
    )


def _readable(model: type[Any], value: object) -> Any:
    try:
        return model.model_validate(value)
    except ValidationError:
        return None


def _faults(
    method: str, dowel: Dowel | None, parts: list[Piece], planes: int, adjustments: Mapping[str, object]
) -> Iterator[Fault]:
    if method == "thin metal":
        yield from _thin_metal(dowel, parts)
        return
    if dowel is not None:
        yield from _dowel(method, dowel)
    yield from _wood(parts)
    if method == "EN 1995-1-1" and adjustments:
        yield Fault(
            "adjustments",
            "belong to method 'yield-limit'; with EN 1995-1-1 duration and moisture enter where the fastener is used "
            "(duration factors). Leave them out.",
        )
    unknown = [name for name in adjustments if name not in ADJUSTMENTS]
    for name in unknown if method == "yield-limit" else ():
        known = ", ".join(f"'{each}'" for each in ADJUSTMENTS)
        yield Fault(f"adjustments.{name}", f"is no adjustment of this method; known: {known}.")
    if dowel is not None and dowel.type in ("nail", "screw") and planes == 2 and dowel.length is not None:
        outer = parts[0][1]
        inner = parts[1][1]
        if outer is not None and inner is not None and dowel.length <= outer.thickness + inner.thickness:
            yield Fault(
                "fastener.length",
                f"{dowel.length:g} mm does not reach the second outer member behind {outer.thickness:g} + "
                f"{inner.thickness:g} mm; two shear planes need a longer one.",
            )


ADJUSTMENTS = {
    "duration": "C_D",
    "wet": "C_M",
    "temperature": "C_t",
    "group": "C_g",
    "geometry": "C_Delta",
    "penetration": "C_d",
    "end grain": "C_eg",
    "diaphragm": "C_di",
    "toe-nail": "C_tn",
}
"""Adjustment factors of the yield-limit method, with the symbols of the NDS."""


def _dowel(method: str, dowel: Dowel) -> Iterator[Fault]:
    if dowel.type == "rivet":
        yield Fault("fastener.type", "a rivet is no dowel in wood; choose method 'thin metal', or another type.")
        return
    if dowel.root_diameter is not None and dowel.root_diameter > dowel.diameter:
        yield Fault(
            "fastener.root_diameter",
            f"{dowel.root_diameter:g} mm is larger than the diameter, {dowel.diameter:g} mm; correct one of them.",
        )
    if method == "EN 1995-1-1" and not (dowel.ultimate or dowel.bending_yield or dowel.yield_moment):
        yield Fault(
            "fastener.ultimate",
            "missing; enter the tensile strength of the fastener's steel, such as 600 MPa, or its bending_yield or "
            "declared yield_moment.",
        )


def _wood(parts: list[Piece]) -> Iterator[Fault]:
    known = [(name, part) for name, part in parts if part is not None]
    if len(known) == 2 and all(part.metal for _, part in known):
        yield Fault("main.kind", "both members are metal; choose method 'thin metal', or enter the wooden member.")
    for name, part in known:
        if part.kind == "aluminium":
            yield Fault(
                f"{name}.kind", "rules for plates on wood are for steel; enter 'steel', or method 'thin metal'."
            )
        if part.metal or part.embedment is not None or part.kind == "hardboard":
            continue
        if part.density is None and part.specific_gravity is None:
            yield Fault(
                f"{name}.density",
                "missing; enter the characteristic density, such as 350 kg/m3, or the specific_gravity.",
            )


def _thin_metal(dowel: Dowel | None, parts: list[Piece]) -> Iterator[Fault]:
    if dowel is not None and dowel.tested is None:
        yield Fault(
            "fastener.tested",
            "missing; enter the tested or declared shear resistance of one fastener, such as 1.6 kN.",
        )
    for name, part in parts:
        if part is None:
            continue
        if not part.metal:
            yield Fault(f"{name}.kind", f"'{part.kind}' is no metal; choose 'steel' or 'aluminium', or another method.")
        elif part.ultimate is None:
            yield Fault(f"{name}.ultimate", "missing; bearing needs the sheet's tensile strength, such as 360 MPa.")
