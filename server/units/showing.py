"""Numbers in N, mm, MPa to the units people see."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from fractions import Fraction
from functools import lru_cache
from types import MappingProxyType

from server.units.table import FACTORS, FORCES, LB, LENGTHS, PSI

THIN = "\u2009"
_PEOPLE: Mapping[str, Mapping[str, tuple[str, str]]] = MappingProxyType(
    {
        # kind: {display: (unit as people see it, the table's unit)}
        "length": {"SI": ("mm", "mm"), "US": ("in", "in")},
        "force": {"SI": ("kN", "kN"), "US": ("lbf", "lbf")},
        "line_load": {"SI": ("kN/m", "kN/m"), "US": ("lbf/ft", "lbf/ft")},
        "area_load": {"SI": ("kN/m²", "kN/m2"), "US": ("psf", "psf")},
        "couple": {"SI": ("kN·m", "kN*m"), "US": ("lbf·ft", "lbf*ft")},
        "stress": {"SI": ("MPa", "MPa"), "US": ("psi", "psi")},
        "temperature": {"SI": ("°C", "degC"), "US": ("°F", "degF")},
        "temperature_change": {"SI": ("K", "K"), "US": ("°F", "degF")},
        "density": {"SI": ("kg/m³", "kg/m3"), "US": ("lb/ft³", "lb/ft3")},
        "spread": {"SI": ("g/m²", "g/m2"), "US": ("lb/MSGL", "lb/MSGL")},
        "stiffness": {"SI": ("N/mm", "N/mm"), "US": ("lbf/in", "lbf/in")},
        "angle": {"SI": ("°", "deg"), "US": ("°", "deg")},
        "area": {"SI": ("mm²", "mm2"), "US": ("in²", "in2")},
        "time": {"SI": ("min", "min"), "US": ("min", "min")},
        "assembly_rate": {"SI": ("m²/min", "m2/min"), "US": ("ft²/min", "ft2/min")},
        "mass": {"SI": ("kg", "kg"), "US": ("lb", "lb")},
        "factor": {"SI": ("", ""), "US": ("", "")},
        "moisture": {"SI": ("%", "%"), "US": ("%", "%")},
        "expansion": {"SI": ("1/K", "1/K"), "US": ("1/°F", "1/degF")},
    }
)
_SMALLER = {"force": ("N", "N"), "couple": ("N·m", "N*m")}  # SI, below 1 kN and 1 kN·m


def unit_of(kind: str, display: str = "SI") -> str:
    """The unit people see for ``kind``: 'kN', 'MPa', 'lbf-ft'. (That of a plain number is ``KINDS[kind].unit``.)"""
    return _PEOPLE[kind][display][0]


def scale_of(kind: str, display: str = "SI") -> float:
    """What a value in N, mm, MPa is multiplied by to be read in ``unit_of(kind, display)``; temperatures have none."""
    if kind == "temperature":
        raise ValueError("a temperature is not converted by a factor alone; use show().")
    unit = _PEOPLE[kind][display][1]
    return float(1 / FACTORS[kind][unit][0]) if unit else 1.0


def show(value: float, kind: str, display: str = "SI") -> str:
    """``value`` (N, mm, MPa) for people: '4 200 mm', '2.5 kN', '13 ft 9.5 in', '1,200 psi'.

    SI lengths are in mm as on workshop drawings; forces and couples under 1 kN and 1 kN·m in N and N·m; US lengths of
    10 ft and more in feet and decimal inches. Four significant digits; whole digits are kept up to a million.
    """
    separator = THIN if display == "SI" else ","
    if not math.isfinite(value):
        return "-"
    if kind == "temperature":
        number = value if display == "SI" else value * 1.8 + 32
        return f"{digits(number, separator)} {_PEOPLE[kind][display][0]}"
    if kind == "length" and display == "US" and abs(value) >= 10 * 304.8:
        return _in_feet(value)
    unit, table = _PEOPLE[kind][display]
    if display == "SI" and kind in _SMALLER and abs(value) < FACTORS[kind][table][0]:
        unit, table = _SMALLER[kind]
    number = value / float(FACTORS[kind][table][0]) if table else value
    text = digits(number, separator, whole=1e12 if kind == "length" else 1e6)
    if not unit:
        return text
    return f"{text}{unit}" if unit == "°" else f"{text} {unit}"


def degrees(text: str) -> str:
    """Return a typed quantity with the sign of a degree where the unit was spelt for the keyboard.

    >>> degrees("-10 degC to 104 degF")
    '-10 °C to 104 °F'
    """
    return text.replace("degC", "°C").replace("degF", "°F")


def digits(number: float, separator: str = THIN, whole: float = 1e6) -> str:
    """Four significant digits without trailing noughts; whole digits below ``whole`` are kept, in groups of three."""
    size = abs(number)
    if size == 0:
        return "0"
    if size < 1e-4 or size >= 1e15:
        mantissa, exponent = f"{number:.3e}".split("e")
        return f"{mantissa.rstrip('0').rstrip('.')}e{int(exponent)}"
    if size >= whole:
        number = float(f"{number:.4g}")
    places = max(0, 3 - math.floor(math.log10(size)))
    text = f"{number:,.{places}f}"
    if "." in text:
        text = text.rstrip("0").rstrip(".")
    return text.replace(",", separator)


def _in_feet(value: float) -> str:
    inches = round(abs(value) / 25.4, 3)
    feet, rest = int(inches // 12), round(inches % 12, 3)
    if rest >= 12:
        feet, rest = feet + 1, 0.0
    text = f"{'-' if value < 0 else ''}{feet:,} ft"
    return f"{text} {f'{rest:.3f}'.rstrip('0').rstrip('.')} in" if rest else text


_CONSISTENT = {
    "N": ("lbf", Fraction(1) / FORCES["lbf"]),
    "kN": ("kip", Fraction(1) / FORCES["lbf"]),
    "MPa": ("psi", Fraction(1) / PSI),
    "mm": ("in", Fraction(1) / LENGTHS["in"]),
    "m": ("ft", LENGTHS["m"] / LENGTHS["ft"]),
    "kg": ("lb", Fraction(1) / LB),
    "g": ("lb", Fraction(1, 1000) / LB),
}
_PART = re.compile(r"([A-Za-z%]+)(\d?)")


@lru_cache(maxsize=512)
def display_unit(unit: str, display: str) -> tuple[str, float]:
    """The unit a result is printed in and the factor to it, in consistent inch-pound units for "US".

    'N/mm' -> ('lbf/in', ..), 'N*mm2' -> ('lbf*in2', ..), 'MPa' and 'N/mm2' -> 'psi'. A unit without an inch-pound
    counterpart (deg, K, 1, %) stays as it is.
    """
    if display != "US" or not unit:
        return unit, 1.0
    if unit == "N/mm2":
        unit = "MPa"
    factor, sign, parts = Fraction(1), 1, []
    for part in re.split(r"([*/])", unit):
        if part in ("*", "/"):
            sign = -1 if part == "/" else 1
            parts.append(part)
            continue
        match = _PART.fullmatch(part)
        if match is None or match[1] not in _CONSISTENT:
            parts.append(part)
            continue
        name, size = _CONSISTENT[match[1]]
        factor *= size ** (sign * int(match[2] or 1))
        parts.append(name + match[2])
    return "".join(parts), float(factor)
