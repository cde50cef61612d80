"""What the end of a bond stands against: the adhesive's own shear yield and pull-off strength, and both surfaces.

Shared by splices, strip ends and movement. A value that is needed and was not given is named, with the test that
supplies it.
"""

from __future__ import annotations

from server import documents
from server.checks.resistance import Strength, Weigher
from server.working import Working

YIELD_SHEAR = "f_y/sqrt(3)"
VON_MISES = "von Mises' yield condition"


def shear_yield(weigher: Weigher, name: str, adhesive: documents.Adhesive, where: str = "") -> Strength | None:
    """Shear yield of an adhesive, or None and named as missing."""
    if adhesive.shear_yield is None:
        weigher.findings.miss(
            f"shear_yield of adhesive {name!r}{where}: the peak at the end of a bond stands against the yield stress "
            "of the adhesive itself, from thick-adherend shear tests (ISO 11003-2, ASTM D5656). A lap or block "
            "coupon's strength is a mean over that coupon's bond and cannot stand in for it."
        )
    return weigher.strength(
        adhesive.shear_yield,
        what=f"adhesive {name}, shear yield",
        unit="MPa",
        kind="adhesive",
        owner=name,
        holder=adhesive,
    )


def peel(weigher: Weigher, name: str, adhesive: documents.Adhesive, where: str = "") -> Strength | None:
    """Tension strength across a bond, or None and named as missing."""
    if adhesive.peel_strength is None:
        weigher.findings.miss(
            f"peel_strength of adhesive {name!r}{where}: the tension across the bond at its end stands against "
            "pull-off or flatwise tension tests of these surfaces (ISO 4624, ASTM C297); a peel test's force per "
            "width is another quantity."
        )
    return weigher.strength(
        adhesive.peel_strength, what=f"adhesive {name}, peel", unit="MPa", kind="adhesive", owner=name, holder=adhesive
    )


def surface_shear(
    weigher: Weigher, name: str, material: documents.Material, of: str, *, rolls: bool, where: str = "", book: Working
) -> Strength | None:
    """Shear strength of a surface: rolling shear where its fibres roll; of a metal, yield over root 3 if need be."""
    word = "rolling shear" if rolls else "shear"
    value = material.strengths.rolling_shear if rolls else material.strengths.shear
    if value is None and material.yield_ is not None and not rolls:
        value = book.step(
            f"Shear yield of {name}", "f_v", YIELD_SHEAR, {"f_y": (material.yield_, "MPa")}, "MPa", VON_MISES
        )
    if value is None:
        weigher.findings.miss(
            f"{word} strength of {name!r} (surface of {of}{where}): {word} tests of the piece, or its material record."
        )
    return weigher.strength(
        value, what=f"{word} in the surface of {of}", unit="MPa", kind="material", owner=name, holder=material
    )


def surface_peel(
    weigher: Weigher, name: str, material: documents.Material, of: str, *, where: str = ""
) -> Strength | None:
    """Strength of a surface against being pulled off; a metal's yield where none is given."""
    across = material.strengths.tension_across
    value = across if across is not None else material.yield_
    if value is None:
        weigher.findings.miss(
            f"tension_across of {name!r} (surface of {of}{where}): the surface layer is pulled off at the end of the "
            "bond; pull-off tests that break in it (ISO 4624) give the value."
        )
    return weigher.strength(
        value,
        what=f"tension across in the surface of {of}",
        unit="MPa",
        kind="material",
        owner=name,
        holder=material,
    )
