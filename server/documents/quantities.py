"""Field types of the documents: quantities as people type them, counts, names and texts."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass
from typing import Annotated, Any

from pydantic import AfterValidator, GetCoreSchemaHandler, GetJsonSchemaHandler, StringConstraints
from pydantic_core import CoreSchema, core_schema

from server import units
from server.errors import InputError

NEXT_TO_NOTHING = 1e-9
"""What must be above 0 is at least this, in N, mm, MPa: less is a slip of the pen, and divides beyond all numbers."""


@dataclass(frozen=True)
class Quantity:
    """Marks a float field: read by ``units.parse`` as ``kind`` and held between bounds.

    ``above`` excludes its own value, ``least`` and ``most`` include theirs; all in N, mm, MPa. ``hint`` is
    added to the message where a force per length was given.
    """

    kind: str
    above: float | None = None
    least: float | None = None
    most: float | None = None
    hint: str = ""

    def read(self, value: object) -> float:
        """Return ``value`` in N, mm, MPa; raise InputError in one readable line."""
        try:
            number = units.parse("", value, self.kind)
        except InputError as error:
            if self.hint and _is(value, "line_load"):
                raise InputError("", f"{error} {self.hint}") from None
            raise
        if self.above is not None and not number > self.above:
            raise InputError("", f"{units.given(value)} is not accepted; enter {self.wanted()}.")
        if self.above == 0 and number < NEXT_TO_NOTHING:
            raise InputError("", f"{units.given(value)} is next to nothing; enter {self.wanted()}.")
        if (self.least is not None and number < self.least) or (self.most is not None and number > self.most):
            raise InputError("", f"{units.given(value)} is not accepted; enter {self.wanted()}.")
        return number

    def wanted(self) -> str:
        """The bounds in words: 'a length greater than 0, such as 4.2 m'."""
        bounds = []
        if self.above is not None:
            bounds.append(f"greater than {self.above:g}")
        if self.least is not None:
            bounds.append(f"of at least {self.least:g}")
        if self.most is not None:
            bounds.append(f"of at most {self.most:g}")
        return f"{units.KINDS[self.kind].noun} {' and '.join(bounds)}, such as {units.KINDS[self.kind].example}"

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(_reader(self))

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        kind = units.KINDS[self.kind]
        unit = kind.unit or "no unit"
        plain = f"a plain number is in {kind.unit}" if kind.unit else "a plain number"
        return {
            "anyOf": [{"type": "number"}, {"type": "string", "maxLength": units.LONGEST}],
            "description": f"{kind.noun}; {plain}; text carries its own unit, such as {kind.example}",
            "x-unit": unit,
        }


def _is(value: object, kind: str) -> bool:
    try:
        units.parse("", value, kind)
    except InputError:
        return False
    return isinstance(value, str)


def _reader(quantity: Quantity) -> Callable[[object], float]:
    """The validator of one quantity: the common case, a plain float inside its bounds, takes one comparison."""
    low = quantity.above if quantity.above is not None else -math.inf
    low = low if quantity.above != 0 else NEXT_TO_NOTHING
    if quantity.least is not None:
        low = math.nextafter(quantity.least, -math.inf)
    high = math.nextafter(quantity.most, math.inf) if quantity.most is not None else math.inf
    low, high = max(low, -units.KINDS[quantity.kind].bound), min(high, units.KINDS[quantity.kind].bound)

    def read(value: object) -> float:
        if type(value) is float and low < value < high:
            return value
        return quantity.read(value)

    return read


@dataclass(frozen=True)
class Count:
    """Marks a whole-number field between ``least`` and ``most``."""

    least: int
    most: int

    def read(self, value: object) -> int:
        """Return ``value`` as an int; text and whole floats are accepted, booleans are not."""
        number = value
        typed = isinstance(value, str) and len(value) <= 20 and value.strip().isdecimal()
        if typed or (isinstance(value, float) and value.is_integer()):
            number = int(value)  # type: ignore[call-overload]
        if isinstance(number, bool) or not isinstance(number, int) or not self.least <= number <= self.most:
            raise InputError(
                "", f"{units.given(value)} is not accepted; enter a whole number from {self.least} to {self.most}."
            )
        return number

    def __get_pydantic_core_schema__(self, source: Any, handler: GetCoreSchemaHandler) -> CoreSchema:
        return core_schema.no_info_plain_validator_function(self.read)

    def __get_pydantic_json_schema__(self, schema: CoreSchema, handler: GetJsonSchemaHandler) -> dict[str, Any]:
        return {"type": "integer", "minimum": self.least, "maximum": self.most}


class DeflectionLimit(Quantity):
    """The number under the span: 300, also written 'L/300'."""

    def read(self, value: object) -> float:
        """Return 300.0 for 300, '300', 'L/300' and 'span / 300'."""
        if isinstance(value, str) and len(value) <= units.LONGEST:
            head, slash, tail = value.partition("/")
            if slash and head.strip().lower() in ("l", "span"):
                return super().read(tail.strip())
        return super().read(value)

    def wanted(self) -> str:
        """What to type instead."""
        return "the number under the span, from 10 to 10000, such as 300 or L/300"


def _name(text: str) -> str:
    if not text or text != text.strip() or not text.isprintable():
        raise ValueError("a name is 1 to 60 printable characters without spaces before or after.")
    return text


Name = Annotated[str, StringConstraints(strict=True, max_length=60), AfterValidator(_name)]
Line = Annotated[str, StringConstraints(strict=True, max_length=200)]
Text = Annotated[str, StringConstraints(strict=True, max_length=5000)]

Length = Annotated[float, Quantity("length")]
Size = Annotated[float, Quantity("length", above=0.0)]
Radius = Annotated[float, Quantity("length", least=0.0)]
Place = Annotated[float, Quantity("length", least=0.0)]
Force = Annotated[float, Quantity("force")]
LineForce = Annotated[float, Quantity("line_load")]
AreaForce = Annotated[float, Quantity("area_load")]
Moment = Annotated[float, Quantity("couple")]
Resistance = Annotated[float, Quantity("force", above=0.0)]
Stress = Annotated[float, Quantity("stress", above=0.0)]
Peel = Annotated[
    float,
    Quantity(
        "stress",
        above=0.0,
        hint="A peel test's N/mm is a workmanship value; give the tension strength across the bond (pull-off, flatwise "
        "tension), or leave it out.",
    ),
]
Stiffness = Annotated[float, Quantity("stiffness", above=0.0)]
Density = Annotated[float, Quantity("density", above=0.0)]
Expansion = Annotated[float, Quantity("expansion")]
MoistureExpansion = Annotated[float, Quantity("factor", least=0.0, most=1.0)]
Temperature = Annotated[float, Quantity("temperature")]
Moisture = Annotated[float, Quantity("moisture")]
Angle = Annotated[float, Quantity("angle")]
Poisson = Annotated[float, Quantity("factor", least=0.0, most=0.99)]
Creep = Annotated[float, Quantity("factor", least=0.0, most=100.0)]
Strain = Annotated[float, Quantity("factor", above=0.0, most=10.0)]
Share = Annotated[float, Quantity("factor", least=0.0, most=1.0)]
Coverage = Annotated[float, Quantity("factor", above=0.0, most=1.0)]
Reduction = Annotated[float, Quantity("factor", above=0.0, most=10.0)]
Safety = Annotated[float, Quantity("factor", least=1.0, most=100.0)]
LoadFactor = Annotated[float, Quantity("factor", least=-100.0, most=100.0)]
SpanOver = Annotated[float, DeflectionLimit("factor", least=10.0, most=10000.0)]
Rows = Annotated[int, Count(1, 100)]
Segment = Annotated[int, Count(1, 100)]
Revision = Annotated[int, Count(1, 1_000_000)]
