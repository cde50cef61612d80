"""From a splice document to the overlap that mechanics reckons: stiffnesses, free strain, what of them is missing."""

from __future__ import annotations

from dataclasses import dataclass

from server import documents
from server.checks.resistance import Findings
from server.errors import DocumentError, Fault, InputError
from server.mechanics.overlap_laps import Action, BondLine, Lap, Plate
from server.working import Working

SIDES = ("inner", "outer")
ISOTROPIC = 2.7  # E over G of an adhesive with a Poisson's ratio of 0.35 (common practice for epoxies)
FREE_STRAIN = "(alpha_o - alpha_i)*Delta_T"
MOISTURE_STRAIN = "beta_o*Delta_u_o - beta_i*Delta_u_i"


@dataclass(frozen=True)
class Model:
    """One splice as reckoned; ``lap`` None where a stiffness of the bond is missing."""

    document: documents.SpliceDocument
    adhesive: documents.Adhesive
    materials: tuple[documents.Material, documents.Material]
    lap: Lap | None
    action: Action
    length: float
    axial: float

    @property
    def thicknesses(self) -> tuple[float, float]:
        """Of the inner and the outer adherend [mm]."""
        adherends = self.document.adherends
        return adherends.inner.thickness, adherends.outer.thickness

    @property
    def names(self) -> tuple[str, str]:
        """The materials of the inner and the outer adherend."""
        adherends = self.document.adherends
        return adherends.inner.material, adherends.outer.material

    def rolls(self, side: int) -> bool:
        """Whether shear at an adherend's surface rolls its fibres."""
        adherends = self.document.adherends
        grain = (adherends.inner, adherends.outer)[side].grain
        return grain == "across" or self.materials[side].layered


def model_of(document: documents.SpliceDocument, book: Working, findings: Findings) -> Model:
    """The overlap of a document; what is missing for it is named in the findings."""
    adhesive = document.adhesive_values
    inner, outer = (document.material(name) for name in _names(document))
    strain = free_strain(document, (inner, outer), book, findings)
    load = document.load
    action = Action(moment=load.moment, shear=load.shear, torque=load.torque, strain=strain)
    lap = _lap(document, adhesive, (inner, outer), findings)
    return Model(document, adhesive, (inner, outer), lap, action, document.length, load.axial)


def _names(document: documents.SpliceDocument) -> tuple[str, str]:
    return document.adherends.inner.material, document.adherends.outer.material


def _lap(
    document: documents.SpliceDocument,
    adhesive: documents.Adhesive,
    materials: tuple[documents.Material, documents.Material],
    findings: Findings,
) -> Lap | None:
    name = document.bond
    for value, what, tests in (
        (adhesive.shear_modulus, "shear modulus", "thick-adherend shear tests (ISO 11003-2), or the maker's figure"),
        (adhesive.thickness, "bond-line thickness", "measure it on cut coupons and hold it with wire or beads"),
    ):
        if value is None:
            findings.miss(f"{what} of adhesive {name!r}, without which no stress along the bond is known: {tests}.")
    if adhesive.shear_modulus is None or adhesive.thickness is None:
        return None
    across = adhesive.E
    if across is None:
        across = ISOTROPIC * adhesive.shear_modulus
        findings.caution(
            "peel stiffness",
            f"Adhesive {name!r} has no E: {across:.5g} MPa was taken across the bond (2.7 times its shear modulus, "
            "that of a solid of Poisson's ratio 0.35). Rubber-like layers are far stiffer across: enter E for them.",
            answer=True,
        )
    plates = [
        Plate(
            material.E, side.thickness, material.nu or 0.0, material.G, side.taper or 0.0,
            document.blunt_tip or side.tip or 0.0,
        )
        for material, side in zip(materials, (document.adherends.inner, document.adherends.outer), strict=True)
    ]  # fmt: skip
    return Lap(
        layout=document.layout,
        inner=plates[0],
        outer=plates[1],
        bond=BondLine(adhesive.shear_modulus, across, adhesive.thickness),
        width=document.width or 0.0,
        diameter=document.diameter or 0.0,
        slope=document.slope or 0.0,
    )


def free_strain(
    document: documents.SpliceDocument,
    materials: tuple[documents.Material, documents.Material],
    book: Working,
    findings: Findings,
) -> float:
    """What the outer adherend would grow by over the inner one, if it were free, from temperature and moisture."""
    names, load = _names(document), document.load
    if names[0] == names[1]:
        return 0.0
    book.begin("Free strain")
    total = 0.0
    if load.temperature_change:
        lacking = [name for name, m in zip(names, materials, strict=True) if m.expansion is None]
        for name in dict.fromkeys(lacking):
            findings.miss(
                f"thermal expansion of {name!r}: without it the stress from the temperature change is not known."
            )
        if not lacking:
            total += book.step(
                "Free strain of the outer adherend over the inner one, from temperature",
                "Delta_epsilon",
                FREE_STRAIN,
                {
                    "alpha_o": (materials[1].expansion or 0.0, "1/K"),
                    "alpha_i": (materials[0].expansion or 0.0, "1/K"),
                    "Delta_T": (load.temperature_change, "K"),
                },
                source="temperature change counted from cure",
            )
    change = [load.moisture_change.get(name, 0.0) for name in names]
    if any(change):
        lacking = [n for n, m, d in zip(names, materials, change, strict=True) if d and m.moisture_expansion is None]
        for name in lacking:
            findings.miss(
                f"moisture expansion of {name!r}: without it the stress from the moisture change is not known."
            )
        if not lacking:
            total += book.step(
                "Free strain of the outer adherend over the inner one, from moisture",
                "Delta_epsilon_u",
                MOISTURE_STRAIN,
                {
                    "beta_o": (materials[1].moisture_expansion or 0.0, "1/%"),
                    "beta_i": (materials[0].moisture_expansion or 0.0, "1/%"),
                    "Delta_u_o": (change[1], "%"),
                    "Delta_u_i": (change[0], "%"),
                },
                source="moisture change counted from the glue-up",
            )
    return total


def named(error: InputError) -> DocumentError:
    """What mechanics refuses, with the field of the document."""
    field = error.field
    known = ("overlap", "width", "diameter", "slope")
    path = f"adherends.{field}" if field.startswith(("inner.", "outer.")) else field if field in known else ""
    return DocumentError([Fault(path, str(error)[:1].upper() + str(error)[1:])])
