"""Kind "coupons": from test results to a characteristic value."""

from __future__ import annotations

import math
import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from datetime import date
from typing import Annotated, Any, Literal

from pydantic import Field, GetCoreSchemaHandler, GetJsonSchemaHandler, ValidationError
from pydantic_core import CoreSchema, core_schema

from server import units
from server.documents.common import Document, Model
from server.documents.quantities import Line, Quantity, Size, Temperature, Text
from server.errors import Fault, InputError
from server.mechanics.statistics_batches import LEVELS

MOST = 2000
LEAST_SCATTER = 0.05  # of the logarithms: EN 14358:2016, 3.2.2
HIGHEST, LOWEST = 1e7, 1e-9  # MPa, of a stress found from a load
TOTAL_WITHIN = 0.5  # per cent; three shares of 33.3 % still total 100
AREAS_WITHIN = 0.01

Distribution = Literal["normal", "lognormal", "weibull", "nonparametric"]


class Percent(Quantity):
    """A share of 100: 80 and '80 %' mean the same."""

    def read(self, value: object) -> float:
        """Return 80.0 for 80, '80', '80 %' and '80 percent'."""
        if isinstance(value, str) and len(value) <= units.LONGEST:
            value = re.sub(r"\s*(%|percent|per cent)\s*$", "", value)
        return super().read(value)

    def wanted(self) -> str:
        """What to type instead."""
        return "a share from 0 to 100, such as 80 or 80 %"


class Share(Quantity):
    """A part of the whole: 0.95 and '95 %' mean the same."""

    def wanted(self) -> str:
        """What to type instead."""
        return f"a share from {self.least:g} to {self.most:g}, such as 0.95 or 95 %"


class BreakingLoad(Quantity):
    """A force; a stress typed in its place is told so."""

    def read(self, value: object) -> float:
        """Return the load [N]."""
        try:
            return super().read(value)
        except InputError as error:
            if isinstance(value, str) and _is_stress(value):
                raise InputError(
                    "",
                    f"{units.given(value)} is a stress, and a load is asked for; enter the load the coupon broke at, "
                    "or call it 'stress'. (A gauge's pressure is called 'gauge'.)",
                ) from error
            raise


def _is_stress(value: str) -> bool:
    try:
        units.parse("", value, "stress")
    except InputError:
        return False
    return True


class Scatter(Quantity):
    """A scatter known beforehand; 'unknown' where the coupons themselves shall tell."""

    def read(self, value: object) -> float:
        """Return NaN for 'unknown', else the scatter."""
        if isinstance(value, str) and value.strip() == "unknown":
            return math.nan
        try:
            return super().read(value)
        except InputError:
            raise InputError("", f"{units.given(value)} is not accepted; enter {self.wanted()}.") from None

    def wanted(self) -> str:
        """What to type instead."""
        return "'unknown', or a scatter greater than 0 and of at most 1, such as 0.12 or 12 %"


class Level(Quantity):
    """A level for which critical values are published."""

    def read(self, value: object) -> float:
        """Return the level; InputError for one without critical values."""
        level = super().read(value)
        for known in LEVELS:
            if math.isclose(level, known, rel_tol=1e-9):
                return known
        raise InputError("", f"{units.given(value)} is not accepted; enter {self.wanted()}.")

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(self.read)  # no shortcut for floats within bounds

    def wanted(self) -> str:
        """What to type instead."""
        return f"one of {', '.join(f'{level:g}' for level in LEVELS)}"


@dataclass(frozen=True)
class Day:
    """Marks a date, written year-month-day so that it reads in one way only."""

    def read(self, value: object) -> date:
        """Return the date; InputError for every other spelling."""
        if isinstance(value, date):
            return value
        if isinstance(value, str) and re.fullmatch(r"\d{4}-\d{2}-\d{2}", value, re.ASCII):
            try:
                return date.fromisoformat(value)
            except ValueError:
                raise InputError("", f"{units.given(value)} is no day of the calendar; correct it.") from None
        raise InputError("", f"{units.given(value)} is not accepted; write the date as year-month-day: 2025-04-03.")

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(
            self.read, serialization=core_schema.to_string_ser_schema(when_used="json")
        )

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        return {"type": "string", "format": "date"}


FailureShare = Annotated[float, Percent("factor", least=0.0, most=100.0)]
Load = Annotated[float, BreakingLoad("force", least=0.0)]
Pressure = Annotated[float, Quantity("stress", least=0.0)]
Area = Annotated[float, Quantity("area", above=0.0)]
Content = Annotated[float, Share("factor", least=0.5, most=0.9999)]


class Failure(Model):
    """Where a coupon broke, in shares of its bonded area (ISO 10365); they total 100.

    ``special_cohesive`` is failure in a thin layer of adhesive close to a surface.
    """

    adhesive: FailureShare = 0.0
    cohesive: FailureShare = 0.0
    substrate: FailureShare = 0.0
    special_cohesive: FailureShare = 0.0

    @property
    def total(self) -> float:
        """The sum of the shares [%]."""
        return self.adhesive + self.cohesive + self.substrate + self.special_cohesive


class Coupon(Model):
    """One broken coupon: stress, or load with area, or load with width and length; the load may come from a gauge."""

    load: Load | None = None
    width: Size | None = None
    length: Size | None = None
    area: Area | None = None
    stress: Pressure | None = None
    gauge: Pressure | None = None
    ram_area: Area | None = None
    failure: Failure | None = None
    batch: Line = ""
    excluded: Text | None = None
    prevented_by: Text = ""
    name: Line = ""
    preparation: Line = ""
    thickness: Size | None = None
    date_bonded: Annotated[date, Day()] | None = None
    date_tested: Annotated[date, Day()] | None = None
    temperature: Temperature | None = None
    lot: Line = ""
    made_by: Line = ""
    tested_by: Line = ""
    note: Text = ""

    @property
    def measured(self) -> Literal["stress", "load", "gauge"]:
        """Which field the strength was read from."""
        return "stress" if self.stress is not None else "load" if self.load is not None else "gauge"

    @property
    def counts(self) -> bool:
        """Whether the coupon was not excluded."""
        return self.excluded is None


def _unknown() -> float:
    return math.nan


class Statistic(Model):
    """How the characteristic value is found; ``scatter`` NaN is unknown beforehand."""

    distribution: Distribution = "lognormal"
    coverage: Content = 0.95
    confidence: Content = 0.75
    scatter: Annotated[float, Scatter("factor", above=0.0, most=1.0)] = Field(default_factory=_unknown)
    least_scatter: Annotated[float, Quantity("factor", least=0.0, most=1.0)] | None = None
    level: Annotated[float, Level("factor", above=0.0, most=1.0)] = 0.05

    @property
    def known_scatter(self) -> float | None:
        """The scatter known beforehand, or None."""
        return None if math.isnan(self.scatter) else self.scatter

    @property
    def floor(self) -> float:
        """The least scatter that is reckoned with; 0 for none."""
        if self.least_scatter is not None:
            return self.least_scatter
        return LEAST_SCATTER if self.distribution == "lognormal" else 0.0


class CouponsDocument(Document):
    """A set of broken coupons and the characteristic value wanted of them. A basis is accepted and not used."""

    kind: Literal["coupons"]
    basis: Any = None
    coupons: Annotated[list[Coupon], Field(min_length=1, max_length=MOST)]
    statistic: Statistic = Field(default_factory=Statistic)


def rules(document: CouponsDocument) -> list[Fault]:
    """Every fault between the fields of a document that was read whole."""
    return list(_faults(document.coupons, document.statistic))


def rules_of_raw(raw: Mapping[str, Any]) -> list[Fault]:
    """Every fault between those fields that can be read."""
    listed = raw.get("coupons")
    coupons = [_readable(Coupon, each) for each in listed[:MOST]] if isinstance(listed, list) else []
    statistic = _readable(Statistic, raw.get("statistic", {}))
    return list(_faults(coupons, statistic))


def _readable(model: type[Any], value: object) -> Any:
    try:
        return model.model_validate(value)
    except ValidationError:
        return None


def label(index: int, coupon: Coupon) -> str:
    """How people find a coupon: 'coupon 8', or 'coupon 8 (A-17)'."""
    number = str(index + 1)
    return f"coupon {number} ({coupon.name})" if coupon.name not in ("", number) else f"coupon {number}"


def _faults(coupons: Sequence[Coupon | None], statistic: Statistic | None) -> Iterator[Fault]:
    for index, coupon in enumerate(coupons):
        if coupon is not None:
            path = f"coupons[{index}]"
            found = [*_source(path, coupon)]
            yield from found
            if not found:
                yield from _size(path, coupon, statistic)
            yield from _record(path, index, coupon)
    if coupons and all(coupon is not None and coupon.excluded is not None for coupon in coupons):
        yield Fault("coupons", "every coupon is excluded, so none is left to reckon with; keep at least one.")
    if statistic is not None:
        yield from _statistic(statistic)


def _source(path: str, coupon: Coupon) -> Iterator[Fault]:
    """One way to the stress, and all that it takes."""
    given = [name for name in ("stress", "load", "gauge") if getattr(coupon, name) is not None]
    if not given:
        yield Fault(
            f"{path}.load",
            "missing, and there is no stress either; enter a load with area, a load with width and length, a gauge "
            "pressure with ram_area in the load's place, or a stress.",
        )
        return
    if len(given) > 1:
        yield Fault(f"{path}.{given[1]}", f"'{given[0]}' is given too; keep the one that was measured.")
        return
    if coupon.gauge is not None and coupon.ram_area is None:
        yield Fault(f"{path}.ram_area", "missing; a gauge pressure needs the area of the ram, such as 1200 mm2.")
    if coupon.gauge is None and coupon.ram_area is not None:
        yield Fault(f"{path}.ram_area", "goes with a gauge pressure; enter 'gauge' too, or leave it out.")
    if given == ["stress"]:
        return
    if coupon.area is None:
        if coupon.width is None and coupon.length is None:
            yield Fault(
                f"{path}.area", "missing; a load needs the bonded area, or its width and length, to give a stress."
            )
        elif coupon.width is None or coupon.length is None:
            lacking = "width" if coupon.width is None else "length"
            yield Fault(f"{path}.{lacking}", f"missing; enter the {lacking} of the bonded area, or give its area.")
    elif coupon.width is not None and coupon.length is not None:
        product = coupon.width * coupon.length
        if abs(product - coupon.area) > AREAS_WITHIN * coupon.area:
            yield Fault(
                f"{path}.area",
                f"{coupon.area:g} mm2 is given, and width times length makes {product:g} mm2; correct one, or leave "
                "the area out.",
            )


def stress_of(coupon: Coupon) -> float:
    """The stress of a coupon whose fields are complete [MPa]; infinity where it is beyond all numbers."""
    if coupon.stress is not None:
        return coupon.stress
    load = coupon.load if coupon.load is not None else (coupon.gauge or 0.0) * (coupon.ram_area or 0.0)
    area = coupon.area if coupon.area is not None else (coupon.width or 0.0) * (coupon.length or 0.0)
    return load / area if area else math.inf


def _size(path: str, coupon: Coupon, statistic: Statistic | None) -> Iterator[Fault]:
    stress, field = stress_of(coupon), f"{path}.{coupon.measured}"
    needs_more = statistic is not None and statistic.distribution in ("lognormal", "weibull")
    if stress == 0:
        if needs_more and coupon.counts and statistic is not None:
            yield Fault(
                field,
                f"a strength of 0 has no logarithm, which distribution '{statistic.distribution}' needs; choose "
                "'normal' or 'nonparametric', or exclude the coupon and write the cause.",
            )
    elif not LOWEST <= stress <= HIGHEST:
        yield Fault(
            field,
            f"the stress comes to {stress:.3g} MPa, which no coupon has; check the number, the sizes and their units.",
        )


def _record(path: str, index: int, coupon: Coupon) -> Iterator[Fault]:
    failure = coupon.failure
    if failure is not None and abs(failure.total - 100) > TOTAL_WITHIN:
        yield Fault(
            f"{path}.failure",
            f"the shares of {label(index, coupon)} total {failure.total:g}; where it broke must total 100 (per cent of "
            "the bonded area).",
        )
    if coupon.excluded is not None and not coupon.excluded.strip():
        yield Fault(
            f"{path}.excluded", "nothing was written; a coupon is excluded for a cause: write it, or leave this out."
        )
    if coupon.prevented_by and coupon.excluded is None:
        yield Fault(
            f"{path}.prevented_by",
            "says what now stops the cause of an exclusion, and the coupon is not excluded; leave it out.",
        )
    if coupon.date_bonded and coupon.date_tested and coupon.date_tested < coupon.date_bonded:
        yield Fault(
            f"{path}.date_tested",
            f"{coupon.date_tested} is before the day of bonding, {coupon.date_bonded}; correct one of them.",
        )


def _statistic(statistic: Statistic) -> Iterator[Fault]:
    name = statistic.distribution
    without_scatter = name in ("weibull", "nonparametric")
    if without_scatter and statistic.known_scatter is not None:
        yield Fault(
            "statistic.scatter",
            f"a scatter known beforehand is used with 'normal' and 'lognormal', not with '{name}'; enter 'unknown', or "
            "another distribution.",
        )
    if without_scatter and statistic.least_scatter is not None:
        yield Fault(
            "statistic.least_scatter",
            f"is used with 'normal' and 'lognormal', not with '{name}'; leave it out, or choose another distribution.",
        )
    if name == "lognormal" and statistic.floor < LEAST_SCATTER:
        yield Fault(
            "statistic.least_scatter",
            f"{statistic.floor:g} is below {LEAST_SCATTER:g}, the least that EN 14358 reckons with for 'lognormal'; "
            "enter that or more, or leave it out.",
        )
