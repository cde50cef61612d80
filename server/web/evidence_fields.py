"""What the forms of the library's evidence ask: adhesive products, preparations, cures, lots, values.

The boxes are those of form_fields.py, so that one table serves reading, filling, fault placing and the templates.
"""

from __future__ import annotations

from server.library import PROPERTIES
from server.library.groups import LINK_LABELS
from server.web.form_fields import Box
from server.web.set_columns import DISTRIBUTIONS

ORIGINS = (
    ("coupon set", "found from a coupon set of the shop"),
    ("published", "published: a standard's or a handbook's value"),
    ("data sheet", "a supplier's data sheet (stays indicative)"),
)
_THICKNESS = (
    Box("thickness_least", "Glue line from", "size", "thickness[0]"),
    Box("thickness_most", "Glue line up to", "size", "thickness[1]"),
)
_SERVICE = (
    Box("service_lowest", "In service from", "temperature", "service_temperature[0]"),
    Box("service_highest", "In service up to", "temperature", "service_temperature[1]"),
    Box("glass_transition", "Glass transition", "temperature", hint="service stays 20 K below, by common practice"),
)
BOXES: dict[str, tuple[Box, ...]] = {
    "products": (
        Box("maker", "Maker"),
        Box("family", "Family", hint="resorcinol, epoxy, polyurethane, methacrylate ..."),
        Box("parts", "Parts", whole=True, hint="1 or 2"),
        *_THICKNESS,
        *_SERVICE,
    ),
    "preparations": (
        Box("steps", "Steps, in their order", wide=True, hint="one a line: clean, abrade, prime ..."),
        Box("time_window", "Bond within", hint="24 h after planing; 2 h after blasting"),
    ),
    "cures": (
        Box("temperature", "Cured at", "temperature"),
        Box("time", "For how long", hint="12 h under pressure"),
        Box("pressure", "Pressure", "stress"),
        Box("days_before_load", "Days before load or test", hint="coupons tested earlier are asked about"),
    ),
    "lots": (
        Box("number", "Lot number", hint="as on the label"),
        Box("hardener_lot", "Hardener's lot"),
        Box("maker_expiry", "Maker's expiry", hint="year-month-day"),
        Box("received", "Received on", hint="year-month-day"),
        Box("opened", "Opened on", hint="year-month-day"),
        Box("days_after_opening", "Days of use once opened", hint="the earlier of that and the maker's expiry counts"),
    ),
    "values": (
        Box("property", "Property", choices=tuple((name, name) for name in PROPERTIES)),
        Box("origin", "Where it comes from", choices=ORIGINS),
        Box("value", "Value", hint="with its unit; blank: what the coupons show. It may be typed lower, never higher"),
        *_THICKNESS,
        *_SERVICE,
        Box("hybrid_fastener", "With the fastener", hint="glue and fasteners together: from the set", more=True),
        Box("hybrid_spacing", "Spacing when tested", "size", more=True),
        Box("hybrid_rows", "Rows when tested", whole=True, more=True),
        Box(
            "distribution",
            "Distribution",
            path="statistic.distribution",
            choices=(("", "as in the set"), *DISTRIBUTIONS),
            more=True,
        ),
        Box("coverage", "Share above", path="statistic.coverage", hint="blank: as in the set", more=True),
        Box("confidence", "Confidence", path="statistic.confidence", hint="blank: as in the set", more=True),
        Box("scatter", "Scatter known", path="statistic.scatter", hint="blank: from the coupons", more=True),
        Box("least_scatter", "Least scatter", path="statistic.least_scatter", hint="EN 14358: 0.05", more=True),
    ),
}
VALUE_UNITS = {"stress": "stress", "force": "fastener_force", "stiffness": "slip", "density": "density"}
"""The unit of a bare number in a value's box, by the unit kind of its property."""
LINKS = LINK_LABELS
TITLES = {
    "bonds": "Bonds",
    "values": "Values",
    "sets": "Coupon sets",
    "products": "Adhesive products",
    "lots": "Lots of adhesive",
    "preparations": "Surface preparations",
    "cures": "Cures",
    "fasteners": "Fasteners",
    "materials": "Materials",
}
"""The groups of the library, in the order in which a shop meets them."""
