"""Kind "member": a built-up member in bending."""

from __future__ import annotations

from typing import Annotated, Any, Literal

from pydantic import Field, Tag

from server.documents.common import MARK, Basis, Document, Model, Number, number_or, tag_of
from server.documents.lasting import Fatigue
from server.documents.quantities import (
    Angle,
    AreaForce,
    Coverage,
    Force,
    Length,
    Line,
    LineForce,
    LoadFactor,
    Moisture,
    Moment,
    Name,
    Place,
    Radius,
    Rows,
    Segment,
    Share,
    Size,
    SpanOver,
    Stiffness,
    Temperature,
)

Role = Literal["sole", "fall-back", "peel-stop", "press", "hybrid"]


class _Piece(Model):
    """What pieces of every shape have in common; ``profile`` is a label, the sizes themselves are what counts."""

    profile: Line = ""
    material: Name
    grain: Literal["along", "across"] = "along"
    turn: Angle = 0.0
    from_: Place | None = Field(default=None, alias="from")
    to: Place | None = None


class _Placed(_Piece):
    """A piece placed by ``at``, the lower left corner of its bounding box after ``turn``."""

    at: tuple[Length, Length]


class Rectangle(_Placed):
    """A rectangular piece, its four corners sharp, rounded or cut off at 45 degrees."""

    shape: Literal["rectangle"]
    width: Size
    depth: Size
    corner_radius: Radius = 0.0
    chamfer: Radius = 0.0


MOST_AXLES = 30
Points = Annotated[list[tuple[Length, Length]], Field(min_length=3, max_length=500)]


class Polygon(_Piece):
    """A piece from its corners, where they stand unless ``at`` is given; ``holes`` in the same coordinates."""

    shape: Literal["polygon"]
    at: tuple[Length, Length] | None = None
    points: Points
    holes: Annotated[list[Points], Field(max_length=30)] = Field(default_factory=list)


class Round(_Placed):
    """A round bar, or with ``wall`` a round tube."""

    shape: Literal["round"]
    diameter: Size
    wall: Size | None = None


class Tube(_Placed):
    """A rectangular tube; ``corner_radius`` is that of its outside."""

    shape: Literal["tube"]
    width: Size
    depth: Size
    wall: Size
    corner_radius: Radius = 0.0


class AngleProfile(_Placed):
    """An angle, its corner at the lower left before turning; ``toe_radius`` on the inner edge of the legs' ends."""

    shape: Literal["angle"]
    width: Size
    depth: Size
    wall: Size
    root_radius: Radius = 0.0
    toe_radius: Radius = 0.0


class _WebAndFlange(_Placed):
    width: Size
    depth: Size
    web: Size
    flange: Size
    root_radius: Radius = 0.0
    toe_radius: Radius = 0.0


class Channel(_WebAndFlange):
    """A channel, its web at the left before turning."""

    shape: Literal["channel"]


class IProfile(_WebAndFlange):
    """An I or H profile of two like flanges."""

    shape: Literal["i"]


class Tee(_WebAndFlange):
    """A tee, its flange on top before turning."""

    shape: Literal["tee"]


SHAPES = frozenset(("rectangle", "polygon", "round", "tube", "angle", "channel", "i", "tee"))
Piece = Rectangle | Polygon | Round | Tube | AngleProfile | Channel | IProfile | Tee
PieceEntry = Annotated[
    Annotated[Rectangle, Tag(MARK + "rectangle")]
    | Annotated[Polygon, Tag(MARK + "polygon")]
    | Annotated[Round, Tag(MARK + "round")]
    | Annotated[Tube, Tag(MARK + "tube")]
    | Annotated[AngleProfile, Tag(MARK + "angle")]
    | Annotated[Channel, Tag(MARK + "channel")]
    | Annotated[IProfile, Tag(MARK + "i")]
    | Annotated[Tee, Tag(MARK + "tee")],
    tag_of("shape", SHAPES),
]


class SpacingZone(Model):
    """Fastener spacing over a part of the member."""

    from_: Place = Field(alias="from")
    to: Place
    spacing: Size


Spacing = Annotated[
    Annotated[Size, Number] | Annotated[list[SpacingZone], Field(min_length=1, max_length=100), Tag(MARK + "zones")],
    number_or(list, "zones"),
]


class Joint(Model):
    """Where two pieces touch: an adhesive, fasteners, or both."""

    between: tuple[Name, Name]
    adhesive: Name | None = None
    coverage: Coverage = 1.0
    width: Size | None = None
    fastener: Name | None = None
    spacing: Spacing | None = None
    rows: Rows = 1
    role: Role | None = None
    segment: Segment = 1

    @property
    def id(self) -> str:
        """'web/flange', with '#2' for a further contact segment of the pair."""
        return "/".join(self.between) + (f"#{self.segment}" if self.segment > 1 else "")

    @property
    def effective_role(self) -> Role | None:
        """What the fasteners are for: as given, else 'sole' without adhesive and 'press' beside one; None without."""
        if self.fastener is None:
            return None
        return self.role or ("press" if self.adhesive is not None else "sole")


class Section(Model):
    """The pieces of a cut and the joints between them."""

    pieces: dict[Name, PieceEntry] = Field(min_length=1, max_length=200)
    joints: list[Joint] = Field(default_factory=list, max_length=400)


class Support(Model):
    """A support: 'pin' carries a force, 'fixed' also a couple, 'spring' gives way by force / stiffness."""

    at: Place
    kind: Literal["pin", "fixed", "spring"]
    stiffness: Stiffness | None = None


class Member(Model):
    """The member's length and how it is held; ``bears_on`` are the pieces that supports and loads bear on."""

    length: Size
    supports: list[Support] = Field(min_length=1, max_length=100)
    hinges: list[Place] = Field(default_factory=list, max_length=100)
    bears_on: list[Name] = Field(default_factory=list, max_length=200)
    held_sideways: bool = Field(default=True, strict=True)
    deflection_limit: SpanOver | None = None


class PointLoad(Model):
    """A force at a place; ``offset`` is its distance across from the shear centre."""

    kind: Literal["point"]
    at: Place
    value: Force
    lateral: Force = 0.0
    offset: Length = 0.0


LineValue = Annotated[
    Annotated[LineForce, Number] | Annotated[tuple[LineForce, LineForce], Tag(MARK + "pair")],
    number_or((list, tuple), "pair"),
]


class LineLoad(Model):
    """A force per length, constant or running from one value to another."""

    kind: Literal["line"]
    from_: Place = Field(alias="from")
    to: Place
    value: LineValue
    lateral: LineForce = 0.0
    offset: Length = 0.0

    @property
    def ends(self) -> tuple[float, float]:
        """The value at ``from`` and at ``to`` [N/mm]."""
        return self.value if isinstance(self.value, tuple) else (self.value, self.value)


class CoupleLoad(Model):
    """A couple at a place, positive anticlockwise."""

    kind: Literal["couple"]
    at: Place
    value: Moment


class AreaLoad(Model):
    """A force per area on a loaded width."""

    kind: Literal["area"]
    from_: Place = Field(alias="from")
    to: Place
    value: AreaForce
    width: Size


class SelfWeight(Model):
    """The pieces' own weight, from their densities."""

    kind: Literal["self-weight"]


class MovingLoad(Model):
    """Axles that travel over the member: places right of a datum that moves, and forces.

    An axle carries on ``from`` to ``to`` alone; left out, these are the member's ends.
    """

    kind: Literal["moving"]
    axles: Annotated[list[tuple[Length, Force]], Field(min_length=1, max_length=MOST_AXLES)]
    from_: Place | None = Field(default=None, alias="from")
    to: Place | None = None


LOADS = frozenset(("point", "line", "couple", "area", "self-weight", "moving"))
Load = PointLoad | LineLoad | CoupleLoad | AreaLoad | SelfWeight | MovingLoad
LoadEntry = Annotated[
    Annotated[PointLoad, Tag(MARK + "point")]
    | Annotated[LineLoad, Tag(MARK + "line")]
    | Annotated[CoupleLoad, Tag(MARK + "couple")]
    | Annotated[AreaLoad, Tag(MARK + "area")]
    | Annotated[SelfWeight, Tag(MARK + "self-weight")]
    | Annotated[MovingLoad, Tag(MARK + "moving")],
    tag_of("kind", LOADS),
]


class Combination(Model):
    """Cases with their factors, what they serve for, how much of each case stays, and how the whole repeats."""

    factors: dict[Name, LoadFactor] = Field(min_length=1, max_length=100)
    duration: Name | None = None
    for_: Literal["both", "strength", "deflection"] = Field(default="both", alias="for")
    sustained: dict[Name, Share] = Field(default_factory=dict, max_length=100)
    fatigue: Fatigue | None = None


class Analysis(Model):
    """How the member is reckoned. ``before_bonding``: load cases that act, unpropped, before the glue has set."""

    slip: bool = Field(default=False, strict=True)
    shear_deformation: bool = Field(default=True, strict=True)
    field: Literal["auto", "always", "never"] = "auto"
    rules: list[Line] = Field(default_factory=list, max_length=50)
    before_bonding: list[Name] = Field(default_factory=list, max_length=100)
    spacing_step: Size | None = None


class Service(Model):
    """Service conditions; they only ever add cautions."""

    temperature: tuple[Temperature, Temperature] | None = None
    cure_temperature: Temperature | None = None
    moisture_change: dict[Name, Moisture] = Field(default_factory=dict, max_length=100)


def all_cases(data: dict[str, Any]) -> dict[str, Combination]:
    """The combination that stands where none is given: all cases x 1.0, without a duration."""
    return {"all": Combination(factors=dict.fromkeys(data.get("loads", {}), 1.0))}


class MemberDocument(Document):
    """A check of kind "member"."""

    kind: Literal["member"]
    basis: Basis
    section: Section
    member: Member
    loads: dict[Name, Annotated[list[LoadEntry], Field(max_length=1000)]] = Field(min_length=1, max_length=100)
    combinations: dict[Name, Combination] = Field(default_factory=all_cases, min_length=1, max_length=100)
    analysis: Analysis = Field(default_factory=Analysis)
    service: Service | None = None
