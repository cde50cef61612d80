"""Kind "splice": overlaps, straps, scarfs and tube laps."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Annotated, Any, Literal

from pydantic import Field, TypeAdapter, ValidationError

from server import units
from server.documents.common import (
    Adhesive,
    AdhesiveEntry,
    Allowable,
    Basis,
    Document,
    LimitState,
    Material,
    MaterialEntry,
    Reference,
)
from server.documents.faults import unknown
from server.documents.lasting import Fatigue
from server.documents.model import Model
from server.documents.quantities import Force, Moment, Name, Quantity, Share, Size
from server.errors import Fault, JointError

LAYOUTS = ("single-lap", "double-lap", "strap", "double-strap", "scarf", "tube-lap")
Layout = Literal["single-lap", "double-lap", "strap", "double-strap", "scarf", "tube-lap"]
LONGEST = 1e6  # thicknesses of an adherend: beyond it no overlap is meant
THINNEST, THICKEST = 1e-4, 1e5  # mm
SOFTEST = 1e-6  # MPa

Slope = Annotated[float, Quantity("factor", above=0.0, most=1000.0)]
TemperatureChange = Annotated[float, Quantity("temperature_change")]
MoistureChange = Annotated[float, Quantity("moisture", least=-100.0)]


class Adherend(Model):
    """One of the pieces joined; ``grain`` across the load makes its surface roll.

    ``taper`` is the length over which its free end thins to ``tip``; in a scarf ``tip`` alone is its blunt end.
    """

    material: Name
    thickness: Size
    taper: Size | None = None
    tip: Size | None = None
    grain: Literal["along", "across"] = "along"


class Adherends(Model):
    """The plates or tubes: inner is the middle plate, the main plate of a strap, or the tube inside."""

    inner: Adherend
    outer: Adherend


class SpliceLoad(Model):
    """Whole forces, not per width.

    Moment and shear act in the middle of the overlap (at the butt for straps), positive as in a beam;
    ``temperature_change`` counts from cure; ``moisture_change`` in per cent of moisture content.
    """

    axial: Force = 0.0
    moment: Moment = 0.0
    shear: Force = 0.0
    torque: Moment = 0.0
    temperature_change: TemperatureChange = 0.0
    moisture_change: dict[Name, MoistureChange] = Field(default_factory=dict, max_length=10)


class SpliceDocument(Document):
    """A check of kind "splice".

    Beyond the contract: ``adherends.*.grain``, ``.taper`` and ``.tip`` (thinned free ends),
    ``load.moisture_change`` (by material, with the material's
    ``moisture_expansion``), ``sustained`` (the share of the load that stays, against the adhesive's ``creep_limit``),
    ``fatigue`` (see ``lasting``).
    """

    kind: Literal["splice"]
    basis: Basis
    layout: Layout
    adherends: Adherends
    width: Size | None = None
    overlap: Size | None = None
    slope: Slope | None = None
    diameter: Size | None = None
    bond: Name = Field(alias="adhesive")
    load: SpliceLoad
    duration: Name | None = None
    response: Literal["elastic", "elastic-plastic"] = "elastic"
    sustained: Share | None = None
    fatigue: Fatigue | None = None

    @property
    def adhesive_values(self) -> Adhesive:
        """The adhesive's values; JointError while they are still a reference."""
        entry = self.adhesives[self.bond]
        if isinstance(entry, Reference):
            raise JointError(f"adhesives.{self.bond} refers to a record; fetch its values from the library first.")
        return entry

    @property
    def length(self) -> float:
        """The overlap; of a scarf the length of its slope along the piece [mm]."""
        if self.overlap is not None:
            return self.overlap
        assert self.slope is not None
        return self.slope * (self.adherends.inner.thickness - 2 * self.blunt_tip)

    @property
    def blunt_tip(self) -> float:
        """Thickness of a scarf's blunt ends [mm], which join nothing; 0 for sharp ones and other layouts."""
        tips = [each.tip for each in (self.adherends.inner, self.adherends.outer) if each.tip is not None]
        return tips[0] if tips and self.layout == "scarf" else 0.0


def rules(document: SpliceDocument) -> list[Fault]:
    """Every fault between the fields of a document that was read whole."""
    return list(_faults(document.__dict__ | {"adhesive": document.bond}))


def rules_of_raw(raw: Mapping[str, Any]) -> list[Fault]:
    """Every fault between those fields that can be read; a field that cannot is left out of every rule."""
    found: dict[str, Any] = {}
    for own, field in SpliceDocument.model_fields.items():
        name = field.alias or own
        if name in ("kind", "format", "materials", "adhesives", "fasteners"):
            continue
        if name not in raw:
            found[name] = field.get_default(call_default_factory=True) if not field.is_required() else _UNREAD
            continue
        try:
            marked: Any = Annotated[field.annotation, *field.metadata] if field.metadata else field.annotation
            found[name] = TypeAdapter(marked).validate_python(raw[name])
        except ValidationError:
            found[name] = _UNREAD
    for group, entry in (("materials", MaterialEntry), ("adhesives", AdhesiveEntry)):
        given = raw.get(group, {})
        found[group] = {name: _readable(entry, each) for name, each in given.items()} if isinstance(given, dict) else {}
    return list(_faults(found))


_UNREAD: Any = object()


def _readable(entry: Any, value: object) -> Any:
    try:
        return TypeAdapter(entry).validate_python(value)
    except ValidationError:
        return None


def _faults(given: Mapping[str, Any]) -> Iterator[Fault]:
    known = {name: value for name, value in given.items() if value is not _UNREAD}
    layout, adherends, load = known.get("layout"), known.get("adherends"), known.get("load")
    if "adhesive" in known and known["adhesive"] not in given["adhesives"]:
        yield Fault("adhesive", unknown(known["adhesive"], "adhesive", given["adhesives"]))
    if adherends is not None:
        yield from _adherends(adherends, given["materials"])
    yield from _in_reach(given, known)
    if layout is not None:
        yield from _sizes(layout, known)
        if adherends is not None:
            yield from _shapes(layout, adherends, known)
            yield from _tapers(layout, adherends, known.get("load"))
        if load is not None:
            yield from _loads(layout, load)
    if load is not None:
        yield from _moisture(load, adherends)
    if known.get("basis") is not None and adherends is not None:
        yield from _basis(known["basis"], adherends)


def _in_reach(given: Mapping[str, Any], known: Mapping[str, Any]) -> Iterator[Fault]:
    """Sizes and moduli that no joint has are refused, so that every number of the result is one."""
    sizes: dict[str, float | None] = {name: known.get(name) for name in ("width", "overlap", "diameter")}
    adherends, adhesive = known.get("adherends"), given["adhesives"].get(known.get("adhesive"))
    moduli: dict[str, float | None] = {}
    if adherends is not None:
        for side, each in (("inner", adherends.inner), ("outer", adherends.outer)):
            sizes |= {f"adherends.{side}.{name}": getattr(each, name) for name in ("thickness", "taper", "tip")}
            material = given["materials"].get(each.material)
            if isinstance(material, Material):
                moduli |= {f"materials.{each.material}.E": material.E, f"materials.{each.material}.G": material.G}
    if isinstance(adhesive, Adhesive):
        path = f"adhesives.{known['adhesive']}"
        sizes[f"{path}.thickness"] = adhesive.thickness
        moduli |= {f"{path}.shear_modulus": adhesive.shear_modulus, f"{path}.E": adhesive.E}
    for path, size in sizes.items():
        if size is not None and not THINNEST <= size <= THICKEST:
            yield Fault(
                path, f"{size:g} mm is beyond any joint; enter {THINNEST:g} to {THICKEST:g} mm, and check the unit."
            )
    for path, modulus in moduli.items():
        if modulus is not None and modulus < SOFTEST:
            yield Fault(path, f"{modulus:g} MPa is softer than any material; check the number and its unit.")


def _adherends(adherends: Adherends, materials: Mapping[str, Any]) -> Iterator[Fault]:
    for name, each in (("inner", adherends.inner), ("outer", adherends.outer)):
        if each.material not in materials:
            yield Fault(f"adherends.{name}.material", unknown(each.material, "material", materials))


def _sizes(layout: str, known: Mapping[str, Any]) -> Iterator[Fault]:
    """The sizes a layout cannot do without, and those it has no use for."""
    if layout == "tube-lap":
        if "diameter" in known and known["diameter"] is None:
            yield Fault("diameter", "missing; a tube lap needs the outer diameter of its inner tube, such as 25 mm.")
        if known.get("width") is not None:
            yield Fault("width", "a tube lap has no width: its bond runs all around; leave it out.")
    else:
        if "width" in known and known["width"] is None:
            yield Fault("width", "missing; enter the width of the bond across the load, such as 25 mm.")
        if known.get("diameter") is not None:
            yield Fault("diameter", f"belongs to a tube lap, and the layout is '{layout}'; leave it out.")
    if layout == "scarf":
        if "slope" in known and known["slope"] is None:
            yield Fault("slope", "missing; a scarf needs its slope, length over thickness, such as 8 for 1 : 8.")
    else:
        if "overlap" in known and known["overlap"] is None:
            yield Fault("overlap", "missing; enter the length of the overlap, such as 25 mm.")
        if known.get("slope") is not None:
            yield Fault("slope", f"belongs to a scarf, and the layout is '{layout}'; leave it out.")


def _shapes(layout: str, adherends: Adherends, known: Mapping[str, Any]) -> Iterator[Fault]:
    inner, outer = adherends.inner, adherends.outer
    diameter, slope, overlap = known.get("diameter"), known.get("slope"), known.get("overlap")
    if layout == "tube-lap" and diameter is not None and inner.thickness > diameter / 2 * (1 + 1e-9):
        yield Fault(
            "adherends.inner.thickness",
            f"a wall of {units.show(inner.thickness, 'length')} does not fit in a tube of "
            f"{units.show(diameter, 'length')} diameter; a solid bar has a wall of half its diameter.",
        )
    if layout == "scarf":
        if abs(inner.thickness - outer.thickness) > 1e-6 * inner.thickness:
            yield Fault(
                "adherends.outer.thickness",
                f"a scarf joins pieces of one thickness, and the other is {units.show(inner.thickness, 'length')} "
                "thick.",
            )
        long = 0.0 if slope is None else slope * (inner.thickness - 2 * (inner.tip or outer.tip or 0.0))
        if slope is not None and overlap is not None and abs(overlap - long) > 1e-3 * overlap:
            yield Fault(
                "overlap",
                f"the slope makes the scarf {units.show(long, 'length')} long; leave the overlap "
                "out, or correct one of them.",
            )
    if overlap is not None and overlap > LONGEST * min(inner.thickness, outer.thickness):
        yield Fault("overlap", "more than a million times as long as an adherend is thick; check both and their units.")


def _tapers(layout: str, adherends: Adherends, load: SpliceLoad | None) -> Iterator[Fault]:
    """Free ends that thin: where there is one, with both of its sizes; blunt ends of scarfs, alike on both pieces."""
    sides = (("inner", adherends.inner), ("outer", adherends.outer))
    if layout == "scarf":
        tips = [each.tip for _, each in sides if each.tip is not None]
        for name, each in sides:
            if each.taper is not None:
                yield Fault(f"adherends.{name}.taper", "a scarf tapers all along; leave it out, and enter its slope.")
            if each.tip is not None and not each.tip < each.thickness / 2:
                yield Fault(f"adherends.{name}.tip", "two such tips leave no scarf; each must be under half.")
        if len(tips) == 2 and abs(tips[0] - tips[1]) > 1e-6 * tips[0]:
            yield Fault("adherends.outer.tip", "both pieces of a scarf end with the same blunt tip; enter one of them.")
        if tips and load is not None and (load.moment or load.shear):
            yield Fault(
                f"load.{'moment' if load.moment else 'shear'}",
                "a scarf with blunt tips is reckoned for axial load alone; leave the tips out, or test it in bending.",
            )
        return
    for name, each in sides:
        if each.taper is None and each.tip is None:
            continue
        if layout == "tube-lap" or (name == "inner" and layout != "single-lap"):
            why = "tubes are reckoned with even walls" if layout == "tube-lap" else "it has no free end under the bond"
            yield Fault(f"adherends.{name}.taper", f"cannot taper in a {layout}: {why}; leave it out.")
        elif each.taper is None:
            yield Fault(f"adherends.{name}.taper", "missing; enter the length over which the end thins to its tip.")
        elif each.tip is None:
            yield Fault(f"adherends.{name}.tip", "missing; enter the thickness at the tip, never quite nothing.")
        elif each.tip > each.thickness:
            yield Fault(f"adherends.{name}.tip", "the tip is thicker than the adherend; it must be thinner.")


def _loads(layout: str, load: SpliceLoad) -> Iterator[Fault]:
    if layout == "tube-lap":
        for name in ("moment", "shear"):
            if getattr(load, name):
                yield Fault(
                    f"load.{name}", f"a tube lap is reckoned for axial force and torque; there is no method for {name}."
                )
    elif load.torque:
        yield Fault("load.torque", f"torque is for tube laps, and the layout is '{layout}'; leave it out.")
    free = load.temperature_change or any(load.moisture_change.values())
    if not any((load.axial, load.moment, load.shear, load.torque, free)):
        yield Fault("load", "nothing acts on the joint; enter an axial load, another load, or a temperature change.")


def _moisture(load: SpliceLoad, adherends: Adherends | None) -> Iterator[Fault]:
    if adherends is None:
        return
    used = (adherends.inner.material, adherends.outer.material)
    for name in load.moisture_change:
        if name not in used:
            yield Fault(f"load.moisture_change.{name}", unknown(name, "adherend's material", used))


def _basis(basis: Allowable | LimitState, adherends: Adherends) -> Iterator[Fault]:
    path = f"basis.{basis.factor_field}"
    if basis.factor("adhesive") is None:
        yield Fault(f"{path}.adhesive", "missing; enter the factor the adhesive's strengths are divided by.")
    by_name = basis.factors_by_material
    for name in dict.fromkeys((adherends.inner.material, adherends.outer.material)):
        if basis.factor("material", name) is None:
            where = f"{path}.material" if by_name is None else f"{path}.material.{name}"
            yield Fault(where, "missing; the adherends and their surfaces are judged: enter the factor for them.")
