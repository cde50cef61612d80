"""The properties a value may be of, and where in a check each of them goes."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal


@dataclass(frozen=True)
class Property:
    """``field`` is the place in an entry of a document's ``section`` ("strengths.bending"); '' where no check uses it.

    ``takes`` says what of a coupon set becomes the value: strengths are characteristic values, stiffnesses means.
    """

    name: str
    section: Literal["adhesives", "fasteners", "materials"]
    field: str
    kind: str
    takes: Literal["characteristic", "mean"] = "characteristic"
    note: str = ""


PROPERTIES = {
    each.name: each
    for each in (
        Property("bond shear", "adhesives", "shear_strength", "stress"),
        Property("pull-off", "adhesives", "peel_strength", "stress", note="tension across the bond, flatwise tension"),
        Property("bond shear modulus", "adhesives", "shear_modulus", "stress", "mean"),
        Property("adhesive modulus", "adhesives", "E", "stress", "mean"),
        Property("bond shear yield", "adhesives", "shear_yield", "stress"),
        Property("bond shear strain limit", "adhesives", "shear_strain_limit", "factor"),
        Property(
            "hybrid joint shear", "adhesives", "hybrid_shear_strength", "stress", note="glue and fasteners together"
        ),
        Property("peel", "adhesives", "", "line_load", note="a workmanship value; no check uses it"),
        Property("fastener shear", "fasteners", "shear_resistance", "force"),
        Property("slip modulus", "fasteners", "slip_modulus", "stiffness", "mean"),
        Property("bending strength", "materials", "strengths.bending", "stress"),
        Property("tension strength", "materials", "strengths.tension", "stress"),
        Property("compression strength", "materials", "strengths.compression", "stress"),
        Property("shear strength", "materials", "strengths.shear", "stress"),
        Property("rolling shear strength", "materials", "strengths.rolling_shear", "stress"),
        Property("tension strength across", "materials", "strengths.tension_across", "stress"),
        Property("bearing strength", "materials", "strengths.bearing", "stress"),
        Property("yield strength", "materials", "yield", "stress"),
        Property("modulus of elasticity", "materials", "E", "stress", "mean"),
        Property("shear modulus", "materials", "G", "stress", "mean"),
        Property("rolling shear modulus", "materials", "G_rolling", "stress", "mean"),
        Property("density", "materials", "density", "density", "mean"),
    )
}
BY_FIELD = {(each.section, each.field): each for each in PROPERTIES.values() if each.field}
# What coupons can be broken for: their stress, or for a fastener their load.
FROM_COUPONS = tuple(each.name for each in PROPERTIES.values() if each.kind in ("stress", "force"))
HYBRID = "hybrid joint shear"
HYBRID_FIELDS = ("hybrid_fastener", "hybrid_spacing", "hybrid_rows")
"""What a strength of glue and fasteners together holds for; a value has it from its coupons, a bond from its value."""
PINNED = "value:"


def role_of(field: str) -> str:
    """Return the link role under which a bond, fastener or material pins the value of ``field``.

    >>> role_of("shear_strength")
    'value:shear_strength'
    """
    return PINNED + field
