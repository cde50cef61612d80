"""What the shop's own evidence says beside its texts: products, preparations, cures, lots, coupon sets, values."""

from __future__ import annotations

from datetime import date
from typing import Annotated, Literal

from pydantic import Field

from server.documents.common import Model
from server.documents.coupons import MOST, Coupon, Day, Statistic
from server.documents.quantities import (
    Count,
    Line,
    Name,
    Quantity,
    Reduction,
    Revision,
    Rows,
    Size,
    Stress,
    Temperature,
    Text,
)

Date = Annotated[date, Day()]
Days = Annotated[float, Quantity("factor", least=0.0, most=3650.0)]
Range = tuple[Size, Size]
Temperatures = tuple[Temperature, Temperature]


class Product(Model):
    """An adhesive as bought: what its maker says of it."""

    maker: Line = ""
    family: Line = ""
    parts: Annotated[int, Count(1, 3)] | None = None
    thickness: Range | None = None
    service_temperature: Temperatures | None = None
    glass_transition: Temperature | None = None


class Preparation(Model):
    """How a surface is made ready, and within which time it must be bonded."""

    steps: Text = ""
    time_window: Line = ""


class Cure(Model):
    """How a bond cures; ``days_before_load`` is what must pass before it is loaded or tested."""

    temperature: Temperature | None = None
    time: Line = ""
    pressure: Stress | None = None
    days_before_load: Days | None = None


class Lot(Model):
    """One lot of an adhesive as its label names it; once opened it keeps for ``days_after_opening``."""

    number: Annotated[Line, Field(min_length=1)]
    hardener_lot: Line = ""
    maker_expiry: Date | None = None
    received: Date | None = None
    opened: Date | None = None
    days_after_opening: Days | None = None


class CouponSet(Model):
    """Broken coupons of one kind: one product, two surfaces, one cure, one test.

    Of glue and fasteners together: which fastener, at which spacing, in how many rows.
    """

    property: Name
    coupons: Annotated[list[Coupon], Field(min_length=1, max_length=MOST)]
    statistic: Statistic = Field(default_factory=Statistic)
    thickness: Size | None = None
    temperature: Temperature | None = None
    cured_days: Days | None = None
    hybrid_fastener: Line = ""
    hybrid_spacing: Size | None = None
    hybrid_rows: Rows | None = None
    display: Literal["SI", "US"] = "SI"


class Value(Model):
    """One tested, published or bought value; ``value`` is read by the unit of its property."""

    property: Name
    origin: Literal["coupon set", "data sheet", "published"]
    value: float | str | None = None
    statistic: Statistic | None = None
    thickness: Range | None = None
    service_temperature: Temperatures | None = None
    glass_transition: Temperature | None = None
    hybrid_fastener: Line = ""
    hybrid_spacing: Size | None = None
    hybrid_rows: Rows | None = None


class Factor(Model):
    """One link of a knock-down chain; ``dry`` and ``conditioned`` are the coupon sets a retention was found from."""

    name: Name
    value: Reduction | None = None
    source: Line = ""
    evidence: Text = ""
    dry: tuple[Line, Revision] | None = None
    conditioned: tuple[Line, Revision] | None = None
