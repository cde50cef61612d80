"""What every kind of document shares: the base models, the basis, the values and references to the library."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, Any, ClassVar, Literal

from pydantic import Discriminator, Field, PrivateAttr, Tag, model_validator

from server.documents.lasting import FatigueStrength
from server.documents.model import Model as Model
from server.documents.quantities import (
    Creep,
    Density,
    Expansion,
    Line,
    MoistureExpansion,
    Name,
    Peel,
    Poisson,
    Reduction,
    Resistance,
    Revision,
    Rows,
    Safety,
    Share,
    Size,
    Stiffness,
    Strain,
    Stress,
    Temperature,
    Text,
)
from server.errors import JointError

# A union's tag stands in pydantic's error locations; the mark tells it from a name typed by a person,
# which cannot hold control characters.
MARK = "\x00"

Status = Literal["approved", "provisional", "indicative", "draft", "on hold", "withdrawn", "superseded"]


class Lineage(Model):
    """How one number of a library record was come by: the value's revision, and the coupons behind it."""

    record: Line
    revision: Revision
    property: Line = ""
    origin: Line = ""
    status: Status
    coupon_set: Line | None = None
    coupon_set_revision: Revision | None = None
    coupons: int | None = None
    excluded: int | None = None
    statistic: Line | None = None
    approved_by: Line | None = None
    approved_at: Line | None = None
    outside_checker: Text | None = None


class Values(Model):
    """What materials, adhesives and fasteners have in common; ``record`` and ``revision`` say where they came from.

    ``lineage``, by field ("shear_strength"), is what the library knows of a number; nobody types it.
    """

    status: Status | None = None
    duration_factors: dict[Name, Reduction] = Field(default_factory=dict, max_length=50)
    factors: dict[Name, Reduction] = Field(default_factory=dict, max_length=50)
    source: Text = ""
    note: Text = ""
    record: Line | None = None
    revision: Revision | None = None
    lineage: dict[Name, Lineage] | None = None

    @model_validator(mode="after")
    def _lineage_of_a_record(self) -> Values:
        if self.lineage is not None and self.record is None:
            raise ValueError("'lineage' comes with a library record's values; leave it out.")
        return self

    @model_validator(mode="after")
    def _revision_of_a_record(self) -> Values:
        if self.revision is not None and self.record is None:
            raise ValueError('a revision belongs to a record; write {"record": KEY, "revision": n}, or leave it out.')
        return self


class Strengths(Model):
    """Characteristic strengths of a material [MPa]."""

    bending: Stress | None = None
    tension: Stress | None = None
    compression: Stress | None = None
    shear: Stress | None = None
    rolling_shear: Stress | None = None
    tension_across: Stress | None = None
    bearing: Stress | None = None

    def any(self) -> bool:
        """Whether a single strength is given."""
        return any(value is not None for value in self.__dict__.values())


class Material(Values):
    """One material: stiffness, density, strengths. ``kind`` chooses the hatching.

    ``moisture_expansion`` is the strain along the member for 1 % of moisture content.
    """

    E: Stress
    G: Stress | None = None
    G_rolling: Stress | None = None
    nu: Poisson | None = None
    density: Density | None = None
    expansion: Expansion | None = None
    moisture_expansion: MoistureExpansion | None = None
    yield_: Stress | None = Field(default=None, alias="yield")
    creep: Creep | None = None
    strengths: Strengths = Field(default_factory=Strengths)
    layered: bool = Field(default=False, strict=True)
    kind: Line = ""


class Adhesive(Values):
    """One adhesive as bonded and tested by the shop.

    ``glass_transition``: temperature at which it softens; ``creep_limit``: the share of its resistance that a lasting
    load may use; ``fatigue``: what it bears of a load that repeats. ``hybrid_shear_strength`` is that of glue and
    fasteners tested together, over the bonded width, with ``hybrid_fastener`` in ``hybrid_rows`` at ``hybrid_spacing``.
    """

    shear_strength: Stress | None = None
    peel_strength: Peel | None = None
    shear_modulus: Stress | None = None
    E: Stress | None = None
    thickness: Size | None = None
    creep: Creep | None = None
    shear_yield: Stress | None = None
    shear_strain_limit: Strain | None = None
    glass_transition: Temperature | None = None
    creep_limit: Share | None = None
    fatigue: FatigueStrength | None = None
    hybrid_shear_strength: Stress | None = None
    hybrid_fastener: Line = ""
    hybrid_spacing: Size | None = None
    hybrid_rows: Rows | None = None
    kind: Line = ""


class Fastener(Values):
    """One fastener, for one shear plane."""

    shear_resistance: Resistance | None = None
    slip_modulus: Stiffness | None = None
    diameter: Size | None = None
    length: Size | None = None
    spacing_min: Size | None = None
    spacing_max: Size | None = None
    row_spacing: Size | None = None
    edge_distance: Size | None = None
    end_distance: Size | None = None
    creep: Creep | None = None
    kind: Line = ""


class Reference(Model):
    """Stands for values that the library holds; without ``revision`` the newest approved one."""

    record: Annotated[Line, Field(min_length=1)]
    revision: Revision | None = None


def _entry_tag(value: object) -> str:
    """Values, or a reference to the library; a mixture is refused, as typed values would pose as the record's."""
    if isinstance(value, Reference) or (isinstance(value, Mapping) and "record" in value):
        return MARK + "reference"
    return MARK + "values"


_Reference = Annotated[Reference, Tag(MARK + "reference")]
MaterialEntry = Annotated[Annotated[Material, Tag(MARK + "values")] | _Reference, Discriminator(_entry_tag)]
AdhesiveEntry = Annotated[Annotated[Adhesive, Tag(MARK + "values")] | _Reference, Discriminator(_entry_tag)]
FastenerEntry = Annotated[Annotated[Fastener, Tag(MARK + "values")] | _Reference, Discriminator(_entry_tag)]


def number_or(kind: type | tuple[type, ...], tag: str) -> Discriminator:
    """A discriminator between a number (or typed quantity) and a ``kind`` such as list or dict."""

    def choose(value: object) -> str:
        return MARK + (tag if isinstance(value, kind) else "number")

    return Discriminator(choose)


Number = Tag(MARK + "number")


class Factors(Model):
    """One factor for each kind that may be judged; ``material`` may name each material."""

    adhesive: Safety | None = None
    fastener: Safety | None = None
    material: (
        Annotated[
            Annotated[Safety, Number] | Annotated[dict[Name, Safety], Tag(MARK + "names")], number_or(dict, "names")
        ]
        | None
    ) = None


FactorEntry = Annotated[
    Annotated[Safety, Number] | Annotated[Factors, Tag(MARK + "factors")], number_or(dict, "factors")
]


class _Basis(Model):
    fall_back_factor: Safety | None = None

    @property
    def factor_field(self) -> str:
        """The field that holds the factors: 'safety_factor' or 'partial_factor'."""
        raise NotImplementedError

    @property
    def given(self) -> float | Factors:
        """The factors as given."""
        factors: float | Factors = getattr(self, self.factor_field)
        return factors

    def factor(self, group: Literal["adhesive", "fastener", "material"], name: str = "") -> float | None:
        """The factor strengths of ``group`` are divided by (``name``: which material); None where none was given."""
        given = self.given
        if not isinstance(given, Factors):
            return given
        if group == "material":
            material = given.material
            return material.get(name) if isinstance(material, dict) else material
        return given.adhesive if group == "adhesive" else given.fastener

    @property
    def factors_by_material(self) -> Mapping[str, float] | None:
        """The factors that name their material; None where one number serves, or none is given."""
        material = self.given.material if isinstance(self.given, Factors) else None
        return material if isinstance(material, dict) else None

    def fall_back(self) -> float | None:
        """The factor for what is judged with the glue gone: fall_back_factor, or else the fastener's."""
        return self.fall_back_factor if self.fall_back_factor is not None else self.factor("fastener")


class Allowable(_Basis):
    """Strengths are divided by a safety factor."""

    method: Literal["allowable"]
    safety_factor: FactorEntry

    @property
    def factor_field(self) -> str:
        """The field that holds the factors."""
        return "safety_factor"


class LimitState(_Basis):
    """Strengths are divided by a partial factor; loads carry their own in the combinations."""

    method: Literal["limit-state"]
    partial_factor: FactorEntry

    @property
    def factor_field(self) -> str:
        """The field that holds the factors."""
        return "partial_factor"


def tag_of(field: str, known: frozenset[str]) -> Discriminator:
    """A discriminator by the text in ``field``; the fault for a text that is not known is worded in ``faults``."""

    def choose(value: object) -> str | None:
        text = value.get(field) if isinstance(value, Mapping) else getattr(value, field, None)
        return MARK + text if isinstance(text, str) and text in known else None

    return Discriminator(
        choose,
        custom_error_type="choice",
        custom_error_message="not a known {field}",
        custom_error_context={"field": field, "known": ", ".join(sorted(known))},
    )


Basis = Annotated[
    Annotated[Allowable, Tag(MARK + "allowable")] | Annotated[LimitState, Tag(MARK + "limit-state")],
    tag_of("method", frozenset(("allowable", "limit-state"))),
]


class Document(Model):
    """What every check document carries."""

    groups: ClassVar[tuple[str, ...]] = ("materials", "adhesives", "fasteners")

    format: Literal["bondwright/1"]
    kind: str
    title: Line = ""
    note: Text = ""
    shop_note: Text = ""
    display: Literal["SI", "US"] = "SI"
    materials: dict[Name, MaterialEntry] = Field(default_factory=dict, max_length=100)
    adhesives: dict[Name, AdhesiveEntry] = Field(default_factory=dict, max_length=100)
    fasteners: dict[Name, FastenerEntry] = Field(default_factory=dict, max_length=100)

    _raw: dict[str, Any] = PrivateAttr(default_factory=dict)

    @property
    def raw(self) -> Mapping[str, Any]:
        """The document exactly as typed."""
        return self._raw

    @property
    def head(self) -> dict[str, Any]:
        """What every result repeats of its document before its verdict."""
        return {each: getattr(self, each) for each in ("format", "kind", "title", "note", "display")}

    def unresolved(self) -> list[str]:
        """Paths of the entries whose values still stand in the library."""
        found = [
            f"{group}.{name}"
            for group in self.groups
            for name, entry in getattr(self, group).items()
            if isinstance(entry, Reference)
        ]
        return [*found, *(f"{at}.{path}" for at, inner in self.held.items() for path in inner.unresolved())]

    @property
    def held(self) -> Mapping[str, Document]:
        """Documents that this one holds, by the field they stand in: their references are filled like its own."""
        return {}

    def material(self, name: str) -> Material:
        """The material's values; JointError while they are still a reference."""
        entry = self.materials[name]
        if isinstance(entry, Reference):
            raise _unfilled("materials", name, entry)
        return entry

    def adhesive(self, name: str) -> Adhesive:
        """The adhesive's values; JointError while they are still a reference."""
        entry = self.adhesives[name]
        if isinstance(entry, Reference):
            raise _unfilled("adhesives", name, entry)
        return entry

    def fastener(self, name: str) -> Fastener:
        """The fastener's values; JointError while they are still a reference."""
        entry = self.fasteners[name]
        if isinstance(entry, Reference):
            raise _unfilled("fasteners", name, entry)
        return entry


def _unfilled(group: str, name: str, entry: Reference) -> JointError:
    return JointError(
        f"{group}.{name} refers to record {entry.record}, and its values were not fetched from the library; "
        "run the check where the library is, or type the values."
    )
