"""What the check form asks: every box with its label, its unit and the place in the document it feeds.

The form's groups of rows mirror contract.md: one table here serves reading, writing back, fault placing and the
templates, so that a box cannot be on the page without being read. Units: a box is marked with a unit for people
(``UNITS``); a bare number typed into it means that unit and is handed on with it.
"""

from __future__ import annotations

from dataclasses import dataclass

SYSTEMS = ("SI", "US")

UNITS: dict[str, tuple[str, str]] = {
    # what a bare number means in a box: (SI, US), in the spelling that units.parse reads
    "size": ("mm", "in"),
    "area": ("mm2", "in2"),
    "position": ("m", "ft"),
    "force": ("kN", "lbf"),
    "line_load": ("kN/m", "lbf/ft"),
    "couple": ("kN*m", "lbf*ft"),
    "fastener_couple": ("N*m", "lbf*in"),
    "area_load": ("kN/m2", "psf"),
    "stress": ("MPa", "psi"),
    "fastener_force": ("N", "lbf"),
    "slip": ("N/mm", "lbf/in"),
    "density": ("kg/m3", "lb/ft3"),
    "temperature": ("degC", "degF"),
    "expansion": ("1/K", "1/K"),
    "angle": ("deg", "deg"),
    "bond_area": ("m2", "ft2"),
    "spread": ("g/m2", "lb/MSGL"),
    "time": ("min", "min"),
    "assembly_rate": ("m2/min", "ft2/min"),
}
# What a plain number means in a document (contract.md), for documents written by hand or by a program.
PLAIN_UNITS: dict[str, str] = {
    "size": "mm",
    "area": "mm2",
    "position": "mm",
    "force": "N",
    "line_load": "N/mm",
    "couple": "N*mm",
    "fastener_couple": "N*mm",
    "area_load": "MPa",
    "stress": "MPa",
    "fastener_force": "N",
    "slip": "N/mm",
    "density": "kg/m3",
    "temperature": "degC",
    "expansion": "1/K",
    "angle": "deg",
    "bond_area": "mm2",
    "spread": "g/m2",
    "time": "min",
    "assembly_rate": "mm2/min",
}
_SHOWN = str.maketrans({"*": "·", "2": "²", "3": "³"})


def shown_unit(unit: str, system: str) -> str:
    """Return the unit beside a box as people read it: ``kN·m``, ``°C``, ``lbf/ft``."""
    if not unit:
        return ""
    return UNITS[unit][system == "US"].translate(_SHOWN).replace("deg", "°")


@dataclass(frozen=True)
class Box:
    """One box of the form: its name in the row, its label, unit, place in the document entry, and help."""

    name: str
    label: str
    unit: str = ""
    path: str = ""
    choices: tuple[tuple[str, str], ...] = ()
    names: str = ""  # the group whose names are offered while typing
    hint: str = ""
    more: bool = False  # seldom needed: folded away in its row
    wide: bool = False
    whole: bool = False  # a whole number
    shapes: tuple[str, ...] = ()  # the shapes of piece it belongs to; none: every shape
    lines: int = 0  # a box of several lines

    @property
    def place(self) -> str:
        """Where the box's value stands in the document's entry."""
        return self.path or self.name


@dataclass(frozen=True)
class Group:
    """Rows of one sort: what one is called, its boxes, and how many a form takes."""

    name: str
    one: str
    boxes: tuple[Box, ...]
    limit: int
    path: str

    @property
    def has_more(self) -> bool:
        """Whether some of its boxes are seldom needed."""
        return any(box.more for box in self.boxes)

    def box(self, name: str) -> Box:
        """Return the box called ``name``."""
        return next(box for box in self.boxes if box.name == name)


_YES_NO = (("", ""), ("yes", "yes"), ("no", "no"))
_SOURCE = (
    Box("source", "Source", hint="test, standard or supplier's paper the numbers come from", more=True, wide=True),
    Box("note", "Note", more=True, wide=True),
)
_STATUS = Box(
    "status",
    "Status",
    choices=(
        ("", "not stated"),
        *((s, s) for s in ("approved", "provisional", "indicative", "draft", "on hold", "withdrawn", "superseded")),
    ),
    more=True,
)
_FACTORS = (
    Box("duration_factors", "Duration factors", hint="permanent 0.6, medium-term 0.8", more=True, wide=True),
    Box("factors", "Other factors", hint="wet 0.8, workmanship 0.9", more=True, wide=True),
)

_FLANGED = ("channel", "i", "tee")
_WIDE = ("rectangle", "tube", "angle", *_FLANGED)
_SIZED = ("round", *_WIDE)
PIECES = Group(
    "pieces",
    "piece",
    (
        Box("name", "Name"),
        Box(
            "shape",
            "Shape",
            choices=(
                ("rectangle", "rectangle"),
                ("polygon", "polygon"),
                ("round", "round bar or pipe"),
                ("tube", "rectangular tube"),
                ("angle", "angle"),
                ("channel", "channel"),
                ("i", "I profile"),
                ("tee", "T profile"),
            ),
        ),
        Box("profile", "Profile", names="profiles", hint="by name, or type the sizes", shapes=_SIZED),
        Box("width", "Width", "size", shapes=_WIDE),
        Box("depth", "Depth", "size", shapes=_WIDE),
        Box("diameter", "Diameter", "size", shapes=("round",)),
        Box("wall", "Wall", "size", shapes=("round", "tube", "angle")),
        Box("web", "Web", "size", shapes=_FLANGED),
        Box("flange", "Flange", "size", shapes=_FLANGED),
        Box("points", "Points", hint="across, up; across, up; ...", wide=True, shapes=("polygon",)),
        Box("holes", "Holes", hint="as points, | between holes", wide=True, shapes=("polygon",)),
        Box("corner_radius", "Corner radius", "size", hint="outside; blank: sharp", shapes=("tube",)),
        Box("root_radius", "Root radius", "size", hint="blank: sharp", shapes=("angle", *_FLANGED)),
        Box("across", "Across", "size", "at[0]", hint="left edge, from any origin"),
        Box("up", "Up", "size", "at[1]", hint="lower edge"),
        Box("material", "Material", names="materials"),
        Box("grain", "Grain", choices=(("along", "along"), ("across", "across")), more=True),
        Box("turn", "Turned", "angle", hint="anticlockwise", more=True),
        Box("from", "Starts at", "position", hint="blank: left end", more=True),
        Box("to", "Stops at", "position", hint="blank: right end", more=True),
        Box("rounded", "Corner radius", "size", "corner_radius", more=True, shapes=("rectangle",)),
        Box("chamfer", "Chamfer", "size", hint="along either side", more=True, shapes=("rectangle",)),
        Box("toe_radius", "Toe radius", "size", more=True, shapes=("angle", *_FLANGED)),
    ),
    40,
    "section.pieces",
)
JOINTS = Group(
    "joints",
    "joint",
    (
        Box("first", "Piece", path="between[0]", names="pieces"),
        Box("second", "to piece", path="between[1]", names="pieces"),
        Box("adhesive", "Adhesive", names="adhesives", hint="blank: none"),
        Box("fastener", "Fastener", names="fasteners", hint="blank: none"),
        Box("spacing", "Spacing", "size", hint="or 0 to 1 m: 75; 1 m to 3 m: 150"),
        Box("rows", "Rows", whole=True),
        Box(
            "role",
            "Fasteners are for",
            choices=(
                ("", "not stated"),
                ("sole", "carrying alone"),
                ("fall-back", "fall-back"),
                ("peel-stop", "stopping peel"),
                ("press", "pressing"),
                ("hybrid", "as tested with the glue"),
            ),
        ),
        Box("coverage", "Glued share", hint="1 = all of it", more=True),
        Box("width", "Glued width", "size", hint="blank: all that touches", more=True),
        Box("segment", "Which contact", hint="1 = lowest, leftmost", more=True, whole=True),
    ),
    60,
    "section.joints",
)
SUPPORTS = Group(
    "supports",
    "support",
    (
        Box("at", "At", "position"),
        Box("kind", "Kind", choices=(("pin", "pin"), ("fixed", "fixed"), ("spring", "spring"))),
        Box("stiffness", "Spring stiffness", "slip", hint="springs only"),
    ),
    25,
    "member.supports",
)
HINGES = Group("hinges", "hinge", (Box("at", "At", "position", path="."),), 20, "member.hinges")
LOADS = Group(
    "loads",
    "load",
    (
        Box("case", "Case", path=".", hint="blank: as the first load"),
        Box(
            "kind",
            "Kind",
            choices=(
                ("line", "line load"),
                ("point", "point load"),
                ("couple", "couple"),
                ("area", "load on an area"),
                ("self-weight", "self-weight"),
                ("moving", "moving axles"),
            ),
        ),
        Box("at", "At", "position", hint="point load, couple"),
        Box("from", "From", "position"),
        Box("to", "To", "position"),
        Box("value", "Value", "value"),
        Box("value2", "Value at its end", "value", path="value[1]", hint="line load that varies"),
        Box("width", "Strip width", "position", hint="load on an area"),
        Box("lateral", "Sideways part", "value", hint="positive to the right", more=True),
        Box("offset", "Off the shear centre", "size", more=True),
        Box("axles", "Axles", hint="offset, force; offset, force", more=True, wide=True),
    ),
    200,
    "loads",
)
COMBINATIONS = Group(
    "combinations",
    "combination",
    (
        Box("name", "Name"),
        Box("factors", "Factor for each case", hint="dead 1.35, snow 1.5; blank: every case 1.0", wide=True),
        Box("duration", "Duration", names="durations", hint="blank: none, factor 1.0"),
        Box(
            "for",
            "Judges",
            choices=(("", "strength and deflection"), ("strength", "strength"), ("deflection", "deflection")),
        ),
        Box("sustained", "Lasting share of a case", hint="snow 0.2, imposed 0.3", more=True, wide=True),
    ),
    40,
    "combinations",
)
MATERIALS = Group(
    "materials",
    "material",
    (
        Box("name", "Name"),
        Box("record", "From the library"),
        Box("revision", "Revision", hint="blank: newest approved", whole=True),
        Box(
            "kind",
            "Drawn as",
            choices=(
                ("", "not stated"),
                *((k, k) for k in ("timber", "plywood", "steel", "aluminium", "GFRP", "foam", "other")),
            ),
        ),
        Box("E", "Modulus E", "stress", hint="along the grain"),
        Box("G", "Shear modulus G", "stress"),
        Box("bending", "Bending strength", "stress", "strengths.bending"),
        Box("shear", "Shear strength", "stress", "strengths.shear"),
        Box("rolling_shear", "Rolling shear strength", "stress", "strengths.rolling_shear"),
        Box("tension", "Tension strength", "stress", "strengths.tension"),
        Box("compression", "Compression strength", "stress", "strengths.compression"),
        Box("density", "Density", "density"),
        Box("layered", "Layered (plywood)", choices=_YES_NO),
        Box("tension_across", "Tension across", "stress", "strengths.tension_across", more=True),
        Box("bearing", "Bearing strength", "stress", "strengths.bearing", more=True),
        Box("G_rolling", "G, rolling shear", "stress", more=True),
        Box("nu", "Poisson's ratio", more=True),
        Box("expansion", "Expansion", "expansion", more=True),
        Box("moisture_expansion", "Strain for 1 % moisture", hint="along the member, such as 0.01 %", more=True),
        Box("yield", "Yield strength", "stress", more=True),
        Box("creep", "Creep factor", more=True),
        _STATUS,
        *_FACTORS,
        *_SOURCE,
    ),
    20,
    "materials",
)
ADHESIVES = Group(
    "adhesives",
    "adhesive",
    (
        Box("name", "Name"),
        Box("record", "From the library"),
        Box("revision", "Revision", hint="blank: newest approved", whole=True),
        Box("shear_strength", "Shear strength", "stress", hint="blank: you are told which to ask for"),
        Box("thickness", "Bond line", "size"),
        Box("shear_modulus", "Shear modulus", "stress"),
        Box("peel_strength", "Tension across bond", "stress", hint="pull-off, not a peel test", more=True),
        Box("E", "Modulus E", "stress", more=True),
        Box("shear_yield", "Shear yield", "stress", more=True),
        Box("shear_strain_limit", "Shear strain limit", more=True),
        Box("glass_transition", "Softens at", "temperature", hint="glass transition", more=True),
        Box("creep_limit", "Creep limit", hint="share of its resistance that may stay", more=True),
        Box("hybrid_shear_strength", "Shear strength with fasteners", "stress", hint="both tested together", more=True),
        Box("hybrid_fastener", "With the fastener", hint="its name, or the key of its record", more=True),
        Box("hybrid_spacing", "Spacing when tested", "size", more=True),
        Box("hybrid_rows", "Rows when tested", whole=True, more=True),
        Box("kind", "Family", more=True),
        _STATUS,
        *_FACTORS,
        *_SOURCE,
    ),
    20,
    "adhesives",
)
FASTENERS = Group(
    "fasteners",
    "fastener",
    (
        Box("name", "Name"),
        Box("record", "From the library"),
        Box("revision", "Revision", hint="blank: newest approved", whole=True),
        Box("shear_resistance", "Shear resistance", "fastener_force", hint="one fastener, characteristic"),
        Box("slip_modulus", "Slip modulus", "slip"),
        Box("diameter", "Diameter", "size"),
        Box("length", "Length", "size", hint="in the pieces", more=True),
        Box("spacing_min", "Least spacing", "size", more=True),
        Box("spacing_max", "Greatest spacing", "size", more=True),
        Box("end_distance", "End distance", "size", more=True),
        Box("edge_distance", "Edge distance", "size", more=True),
        Box("row_spacing", "Between rows", "size", more=True),
        Box("kind", "Kind", more=True),
        Box("creep", "Creep factor", more=True),
        _STATUS,
        *_FACTORS,
        *_SOURCE,
    ),
    20,
    "fasteners",
)
GROUPS: dict[str, Group] = {
    group.name: group
    for group in (
        PIECES,
        JOINTS,
        SUPPORTS,
        HINGES,
        LOADS,
        COMBINATIONS,
        MATERIALS,
        ADHESIVES,
        FASTENERS,
    )
}
LOAD_UNITS = {"point": "force", "line": "line_load", "couple": "couple", "area": "area_load"}
VALUE_GROUPS = ("materials", "adhesives", "fasteners")

SINGLES: dict[str, Box] = {
    # boxes that stand once on the page, by their field name
    box.name: box
    for box in (
        Box("mark", "Mark", hint="as on the drawing, such as B1"),
        Box("title", "What it is", path="title"),
        Box("note", "Note", path="note", wide=True),
        Box("shop_note", "Note for the shop", path="shop_note", wide=True),
        Box("display", "Units shown", path="display", choices=(("SI", "SI"), ("US", "US customary"))),
        Box("made_by", "Prepared by"),
        Box("reason", "Reason for the change", hint="printed with the new revision"),
        Box("span", "Span", "position", path="member.length"),
        Box("load", "Load, uniform over the whole length", "line_load"),
        Box("load_case", "Case of that load"),
        Box(
            "basis.method",
            "Method",
            path="basis.method",
            choices=(("allowable", "allowable stress"), ("limit-state", "limit state")),
        ),
        Box("basis.adhesive", "Factor on adhesives"),
        Box("basis.fastener", "Factor on fasteners"),
        Box("basis.material", "Factor on materials", hint="one number, or NAME 3, NAME 2.5"),
        Box(
            "basis.fall_back_factor", "Factor on fall-backs", path="basis.fall_back_factor", hint="blank: as fasteners"
        ),
        Box(
            "held_sideways",
            "Held sideways",
            path="member.held_sideways",
            choices=(("yes", "yes, along its length"), ("no", "no, at its supports only")),
        ),
        Box(
            "bears_on",
            "Supports and loads bear on",
            path="member.bears_on",
            wide=True,
            hint="pieces side by side: those that bear; blank: not said",
        ),
        Box("deflection_limit", "Deflection limit", path="member.deflection_limit", hint="span over; blank: none"),
        Box(
            "slip",
            "Joints slip",
            path="analysis.slip",
            choices=(("auto", "where fasteners alone carry"), ("yes", "yes"), ("no", "no")),
        ),
        Box(
            "shear_deformation",
            "Shear deformation",
            path="analysis.shear_deformation",
            choices=(("yes", "counted"), ("no", "left out")),
        ),
        Box(
            "field",
            "Field method",
            path="analysis.field",
            choices=(("auto", "where needed"), ("always", "always"), ("never", "never")),
        ),
        Box("spacing_step", "Step of spacings", "size", path="analysis.spacing_step", hint="blank: 25 mm or 1 in"),
        Box("rules", "Rules applied", path="analysis.rules", hint="EN 1995-1-1 9.1.1, ...", wide=True),
        Box("lowest", "Lowest temperature", "temperature", path="service.temperature[0]"),
        Box("highest", "Highest temperature", "temperature", path="service.temperature[1]"),
        Box("cure", "Cured at", "temperature", path="service.cure_temperature"),
        Box("moisture", "Moisture change", path="service.moisture_change", hint="MATERIAL 6 %, MATERIAL 4 %"),
    )
}
