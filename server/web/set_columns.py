"""What the form of a coupon set asks of each coupon: its columns, and how a reading is typed."""

from __future__ import annotations

from dataclasses import dataclass

# Each row may have two dozen boxes, and a form sends at most 5000 (settings.max_fields). Larger sets, up to what a
# document takes, come in and are changed as files.
MOST_ROWS = 200
FIRST_ROWS = 12


@dataclass(frozen=True)
class Column:
    """One thing recorded of a coupon: ``unit`` names the box's unit (form_fields.UNITS), '' for text."""

    name: str
    label: str
    unit: str = ""
    hint: str = ""


COLUMNS: dict[str, Column] = {
    column.name: column
    for column in (
        Column("width", "Width", "size", "across the load"),
        Column("length", "Overlap", "size", "along the load"),
        Column("area", "Bonded area", "area", "instead of width and overlap"),
        Column("ram_area", "Ram area", "area", "with a gauge pressure"),
        Column("thickness", "Glue line", "size"),
        Column("lot", "Lot of adhesive"),
        Column("batch", "Batch", hint="coupons made together"),
        Column("preparation", "Preparation", hint="where it differs"),
        Column("date_bonded", "Bonded on", hint="year-month-day"),
        Column("date_tested", "Tested on", hint="year-month-day"),
        Column("temperature", "Tested at", "temperature"),
        Column("made_by", "Made by"),
        Column("tested_by", "Tested by"),
        Column("note", "Note"),
    )
}
"""Each may be said once for all coupons, and in a column of its own where it differs."""
SHARES = {
    "adhesive": ("AF", "Adhesive failure"),
    "special_cohesive": ("SCF", "Special cohesive failure, in a thin layer near a surface"),
    "cohesive": ("CF", "Cohesive failure"),
    "substrate": ("SF", "Failure in the substrate: wood, fibre, laminate, metal"),
}
"""Where it broke, in ISO 10365's words."""


@dataclass(frozen=True)
class Way:
    """How a coupon's strength was read: the coupon's field, and the unit that a bare number is in."""

    field: str
    unit: str
    label: str


WAYS: dict[str, Way] = {
    f"{way.field} {way.unit}".strip(): way
    for way in (
        Way("load", "kN", "load in kN"),
        Way("load", "N", "load in N"),
        Way("load", "kgf", "load in kgf"),
        Way("load", "lbf", "load in lbf"),
        Way("stress", "MPa", "stress in N/mm²"),
        Way("stress", "psi", "stress in psi"),
        Way("stress", "kgf/cm2", "stress in kgf/cm²"),
        Way("gauge", "bar", "gauge pressure in bar"),
        Way("gauge", "MPa", "gauge pressure in MPa"),
        Way("gauge", "psi", "gauge pressure in psi"),
    )
}
STATISTIC = ("distribution", "coverage", "confidence", "scatter", "least_scatter", "level")
DISTRIBUTIONS = (
    ("lognormal", "log-normal (EN 14358)"),
    ("normal", "normal"),
    ("weibull", "Weibull"),
    ("nonparametric", "distribution-free"),
)
DEFAULTS = {"distribution": "lognormal", "coverage": "0.95", "confidence": "0.75", "scatter": "unknown"}
ROW_BOXES = ("name", "reading", *SHARES, *COLUMNS)
