"""Kind "glue-up": what the shop floor needs for one bonded member."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Annotated, Any, Literal

from pydantic import Field, Tag, ValidationError

from server import units
from server.documents import rules as member_rules
from server.documents.common import MARK, Document, Model, Number, number_or
from server.documents.faults import unknown
from server.documents.member import MemberDocument
from server.documents.parts import parts_of, salvage
from server.documents.quantities import Count, Density, Line, Name, Quantity, Resistance, Size, Temperature
from server.errors import Fault

MOST_AREAS = 400

BondArea = Annotated[float, Quantity("area", above=0.0)]
Minutes = Annotated[float, Quantity("time", above=0.0)]
Pressure = Annotated[float, Quantity("stress", least=0.0, most=20.0)]


class Area(Model):
    """One area to be bonded: its width and length, or the area alone."""

    name: Line = ""
    width: Size | None = None
    length: Size | None = None
    area: BondArea | None = None


AreaEntry = Annotated[
    Annotated[BondArea, Number] | Annotated[Area, Tag(MARK + "sizes")], number_or((dict, Area), "sizes")
]


class Glue(Model):
    """How the adhesive is worked, by its data sheet.

    ``spread`` is the mass on each face that is spread [g/m2], ``sides`` how many of the two faces are; ``waste`` the
    share that is mixed beyond that; ``pressure`` 0 is contact pressure. ``rated_at`` is the temperature that the times
    hold for.
    """

    product: Line = ""
    spread: Annotated[float, Quantity("spread", above=0.0)] | None = None
    sides: Annotated[int, Count(1, 2)] = 1
    density: Density | None = None
    pot_life: Minutes | None = None
    open_time: Minutes | None = None
    press_time: Minutes | None = None
    pressure: Pressure | None = None
    waste: Annotated[float, Quantity("factor", least=0.0, most=1.0)] = 0.1
    rated_at: Temperature | None = None


class Clamps(Model):
    """The clamps: what one presses with, the length it presses, how many there are.

    ``area`` is what is pressed where bonds lie one over another, so that a clamp presses several at once; left out, all
    of it.
    """

    force: Resistance | None = None
    reach: Size | None = None
    area: BondArea | None = None
    available: Annotated[int, Count(1, 100_000)] | None = None


class GlueUpDocument(Document):
    """The glue-up of one bonded member. A basis is accepted and not used.

    Beyond the contract: ``bond`` (of a check with several adhesives, the one that is spread), ``areas_from`` (where the
    areas come from, in words), ``shop_temperature``, ``pressed_by``, the names and sizes of an area,
    ``product``, ``rated_at``, the clamps' ``area`` and ``available``. ``adhesives`` may name the library's
    record of the bond.
    """

    kind: Literal["glue-up"]
    basis: Any = None
    areas: Annotated[list[AreaEntry], Field(min_length=1, max_length=MOST_AREAS)] | None = None
    areas_from: Line = ""
    check: MemberDocument | None = None
    bond: Name | None = None
    glue: Glue = Field(alias="adhesive")
    clamps: Clamps = Field(default_factory=Clamps)
    assembly_rate: Annotated[float, Quantity("assembly_rate", above=0.0)] | None = None
    shop_temperature: Temperature | None = None
    pressed_by: Literal["clamps", "fasteners"] = "clamps"

    @property
    def held(self) -> Mapping[str, Document]:
        """The member check that the areas follow from."""
        return {} if self.check is None else {"check": self.check}


def rules(document: GlueUpDocument) -> list[Fault]:
    """Every fault between the fields of a document that was read whole."""
    found = list(_faults(document.areas, document.check is not None, document.clamps))
    if document.check is not None:
        found += [_inside(fault) for fault in member_rules.faults(parts_of(document.check))]
        if document.bond is not None and document.bond not in document.check.adhesives:
            found.append(Fault("bond", unknown(document.bond, "adhesive", document.check.adhesives)))
    elif document.bond is not None:
        found.append(Fault("bond", "belongs to a member check, which is not given; leave it out."))
    return found


def rules_of_raw(raw: Mapping[str, Any]) -> list[Fault]:
    """Every fault between those fields that can be read."""
    listed, check = raw.get("areas"), raw.get("check")
    areas = [_readable(each) for each in listed[:MOST_AREAS]] if isinstance(listed, list) else None
    found = list(_faults(areas if listed is not None else None, check is not None, None, listed is not None))
    if isinstance(check, Mapping):
        found += [_inside(fault) for fault in member_rules.faults(salvage(check))]
    return found


def _inside(fault: Fault) -> Fault:
    return Fault(f"check.{fault.path}" if fault.path else "check", fault.message)


def _readable(value: object) -> float | Area | None:
    if not isinstance(value, Mapping):
        return 1.0
    try:
        return Area.model_validate(value)
    except ValidationError:
        return None


def _faults(
    areas: list[Any] | None, check: bool, clamps: Clamps | None, areas_given: bool | None = None
) -> Iterator[Fault]:
    given = areas is not None if areas_given is None else areas_given
    if given and check:
        yield Fault("areas", "a member check is given too, from which they follow; keep one of the two.")
    if not given and not check:
        yield Fault("areas", "missing; enter the areas to be bonded, or a member check from which they follow.")
    for index, each in enumerate(areas or []):
        if isinstance(each, Area):
            yield from _area(f"areas[{index}]", each)
    sizes = [total_of(each) for each in areas or []]
    if clamps is not None and clamps.area is not None and sizes and None not in sizes:
        total = sum(size for size in sizes if size is not None)
        if clamps.area > total * (1 + 1e-9):
            yield Fault("clamps.area", too_large(clamps.area, total))


def too_large(pressed: float, total: float) -> str:
    """What to say where more is to be pressed than is bonded."""
    return (
        f"{units.show(pressed, 'area')} is more than is bonded ({units.show(total, 'area')}); enter at most that, or "
        "leave it out for all of it."
    )


def total_of(each: float | Area | None) -> float | None:
    """An entry's area [mm2]; None where it cannot be told."""
    if not isinstance(each, Area):
        return each
    if each.area is not None:
        return each.area
    return None if each.width is None or each.length is None else each.width * each.length


def _area(path: str, each: Area) -> Iterator[Fault]:
    sized = [name for name in ("width", "length") if getattr(each, name) is not None]
    if each.area is not None and sized:
        yield Fault(f"{path}.area", f"'{sized[0]}' is given too; enter the area, or its width and length.")
    elif each.area is None and len(sized) < 2:
        lacking = "length" if sized == ["width"] else "width"
        yield Fault(f"{path}.{lacking}", "missing; enter width and length of the bond, or its area alone.")
