"""The kinds of quantity and their units, as exact fractions of the plain unit of each kind."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from types import MappingProxyType

GRAVITY = 9.80665  # m/s2, standard gravity by definition (CGPM 1901)

_G = Fraction("9.80665")
LB = Fraction("0.45359237")
LENGTHS = {
    "mm": Fraction(1),
    "cm": Fraction(10),
    "m": Fraction(1000),
    "km": Fraction(1_000_000),
    "um": Fraction(1, 1000),
    "in": Fraction("25.4"),
    "ft": Fraction("304.8"),
    "yd": Fraction("914.4"),
    "mil": Fraction("0.0254"),
}
_MASSES = {"kg": Fraction(1), "g": Fraction(1, 1000), "t": Fraction(1000), "lb": LB, "oz": LB / 16}
FORCES = {
    "N": Fraction(1),
    "daN": Fraction(10),
    "kN": Fraction(1000),
    "MN": Fraction(1_000_000),
    "lbf": LB * _G,
    "kip": 1000 * LB * _G,
    "kgf": _G,
    "gf": _G / 1000,
    "tf": 1000 * _G,
}
WEIGHT_OF = {"kg": "kgf", "g": "gf", "t": "tf", "lb": "lbf"}
_AREAS = {f"{name}2": size**2 for name, size in LENGTHS.items() if name not in ("mil", "um", "km")}
_TIMES = {"s": Fraction(1, 60), "min": Fraction(1), "h": Fraction(60), "d": Fraction(1440)}
US_PARTS = frozenset(("in", "ft", "yd", "mil", "lb", "oz", "lbf", "kip", "in2", "ft2", "yd2", "in3", "ft3", "degF"))
US_NAMES = frozenset(("psi", "ksi", "psf", "ksf", "plf", "klf", "pcf", "lb/MSGL", "lb/1000ft2", "lb/1000*ft2"))


def _over(forces: Mapping[str, Fraction], sizes: Mapping[str, Fraction]) -> dict[str, Fraction]:
    return {f"{force}/{size}": f / s for force, f in forces.items() for size, s in sizes.items()}


def _times(forces: Mapping[str, Fraction], lengths: Mapping[str, Fraction]) -> dict[str, Fraction]:
    both = {f"{force}*{length}": f * s for force, f in forces.items() for length, s in lengths.items()}
    return both | {f"{length}*{force}": f * s for force, f in forces.items() for length, s in lengths.items()}


_SPANS = {name: LENGTHS[name] for name in ("mm", "cm", "m", "in", "ft", "yd")}
_PLF = FORCES["lbf"] / LENGTHS["ft"]
PSI = FORCES["lbf"] / _AREAS["in2"]
_PSF = FORCES["lbf"] / _AREAS["ft2"]
_STRESSES = _over(FORCES, _AREAS) | {
    "Pa": Fraction(1, 1_000_000),
    "kPa": Fraction(1, 1000),
    "MPa": Fraction(1),
    "GPa": Fraction(1000),
    "bar": Fraction(1, 10),
    "psi": PSI,
    "ksi": 1000 * PSI,
    "psf": _PSF,
    "ksf": 1000 * _PSF,
}
_M3 = Fraction(10) ** 9
_MSGL = Fraction(1000) * LB / (1000 * _AREAS["ft2"] / Fraction(10) ** 6)  # g/m2; of single glue line


@dataclass(frozen=True)
class Kind:
    """One kind of quantity.

    ``noun`` and ``example`` go into messages; ``unit`` is that of a plain number; ``bound`` is the largest size
    accepted (``lowest`` the least, where that is not its negative); ``units`` are factors to the plain unit.
    """

    name: str
    noun: str
    unit: str
    example: str
    bound: float
    units: Mapping[str, Fraction]
    lowest: float | None = None

    @property
    def low(self) -> float:
        """The least value accepted."""
        return -self.bound if self.lowest is None else self.lowest


_PERCENT = {"%": Fraction(1, 100), "percent": Fraction(1, 100)}
_KINDS = (
    Kind("length", "a length", "mm", "4.2 m, 90 mm or 13 ft 9-1/2 in", 1e6, LENGTHS),
    Kind("force", "a force", "N", "2.5 kN or 560 lbf", 1e10, FORCES),
    Kind(
        "line_load",
        "a line load (force per length)",
        "N/mm",
        "2.5 kN/m or 45 lbf/ft",
        1e7,
        _over(FORCES, _SPANS) | {"plf": _PLF, "klf": 1000 * _PLF},
    ),
    Kind(
        "area_load",
        "an area load (force per area)",
        "N/mm2",
        "2.5 kN/m2, 125 psf or 250 kg/m2",
        1e4,
        _STRESSES | {"kg/m2": _G / 10**6, "lb/ft2": _PSF},
    ),
    Kind("couple", "a couple (force times length)", "N*mm", "1.2 kN*m or 900 lbf*ft", 1e14, _times(FORCES, _SPANS)),
    Kind("stress", "a stress", "MPa", "6.2 MPa or 900 psi", 1e7, _STRESSES),
    Kind("temperature", "a temperature", "degC", "20 degC or 68 degF", 5000.0, {}, -273.15),
    Kind("temperature_change", "a temperature change", "K", "30 K or 54 degF", 5000.0, {}),
    Kind(
        "density",
        "a density",
        "kg/m3",
        "420 kg/m3 or 26 lb/ft3",
        1e5,
        {
            "kg/m3": Fraction(1),
            "g/cm3": Fraction(1000),
            "t/m3": Fraction(1000),
            "lb/ft3": LB * _M3 / LENGTHS["ft"] ** 3,
            "lb/in3": LB * _M3 / LENGTHS["in"] ** 3,
            "pcf": LB * _M3 / LENGTHS["ft"] ** 3,
        },
    ),
    Kind(
        "spread",
        "a spread rate (mass per area)",
        "g/m2",
        "250 g/m2 or 50 lb/MSGL",
        1e5,
        {
            "g/m2": Fraction(1),
            "kg/m2": Fraction(1000),
            "lb/MSGL": _MSGL,
            "lb/1000ft2": _MSGL,
            "lb/1000*ft2": _MSGL,
            "lb/ft2": 1000 * _MSGL,
        },
    ),
    Kind("stiffness", "a stiffness (force per length)", "N/mm", "900 N/mm or 5.1 kip/in", 1e12, _over(FORCES, _SPANS)),
    Kind("angle", "an angle", "deg", "30 deg", 3600.0, {"deg": Fraction(1)}),
    Kind("area", "an area", "mm2", "1200 mm2 or 1.86 in2", 1e12, _AREAS),
    Kind("time", "a time", "min", "25 min or 2 h", 1e7, _TIMES),
    Kind(
        "assembly_rate",
        "a rate of assembly (area per time)",
        "mm2/min",
        "0.1 m2/min, 6 m2/h or 1 ft2/min",
        1e12,
        _over(_AREAS, _TIMES),
    ),
    Kind("mass", "a mass", "kg", "12 kg or 26 lb", 1e9, _MASSES),
    Kind("factor", "a plain number", "", "1.35 or 80 %", 1e9, _PERCENT),
    Kind(
        "moisture", "a moisture content in percent", "%", "4 or 4 %", 300.0, {"%": Fraction(1), "percent": Fraction(1)}
    ),
    Kind(
        "expansion",
        "a thermal expansion",
        "1/K",
        "12e-6 1/K or 23 um/m/K",
        1.0,
        {
            "1/K": Fraction(1),
            "/K": Fraction(1),
            "1/degC": Fraction(1),
            "/degC": Fraction(1),
            "um/m/K": Fraction(1, 10**6),
            "um/m/degC": Fraction(1, 10**6),
            "ppm/K": Fraction(1, 10**6),
            "1/degF": Fraction(9, 5),
            "/degF": Fraction(9, 5),
            "in/in/degF": Fraction(9, 5),
        },
    ),
)
KINDS: Mapping[str, Kind] = MappingProxyType({kind.name: kind for kind in _KINDS})

# To degC: scale, then offset. A change has the scale alone.
_TEMPERATURES = {
    "degC": (Fraction(1), Fraction(0)),
    "K": (Fraction(1), Fraction("-273.15")),
    "degF": (Fraction(5, 9), Fraction(-160, 9)),
}
_RADIAN = Fraction(180.0 / math.pi)


def _scales(kind: Kind) -> dict[str, tuple[Fraction, Fraction]]:
    if kind.name == "temperature":
        return _TEMPERATURES
    table = {unit: (factor, Fraction(0)) for unit, factor in kind.units.items()}
    if kind.name == "temperature_change":
        table |= {unit: (scale, Fraction(0)) for unit, (scale, _) in _TEMPERATURES.items()}
    if kind.name == "angle":
        table |= dict.fromkeys(("rad", "radian", "radians"), (_RADIAN, Fraction(0)))
    return table


FACTORS = {name: _scales(kind) for name, kind in KINDS.items()}
