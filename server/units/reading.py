"""Typed text to numbers in N, mm, MPa."""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from fractions import Fraction
from functools import lru_cache

from server.errors import InputError
from server.units.showing import digits
from server.units.table import FACTORS, KINDS, LENGTHS, US_NAMES, US_PARTS, WEIGHT_OF, Kind

LONGEST = 60

# Spellings beside the table's own; applied to each part of a unit between * and /.
_SPELLINGS = {
    "millimetre": "mm", "millimeter": "mm", "centimetre": "cm", "centimeter": "cm", "metre": "m", "meter": "m",
    "metres": "m", "meters": "m", "micron": "um", "inch": "in", "inches": "in", "foot": "ft", "feet": "ft",
    "yard": "yd", "yards": "yd", "mils": "mil", "thou": "mil", "lbs": "lb", "pound": "lb", "pounds": "lb",
    "lbsf": "lbf", "kips": "kip", "kilogram": "kg", "tonne": "t", "tonnes": "t", "newton": "N", "'": "ft", '"': "in",
    "''": "in", "C": "degC", "F": "degF", "celsius": "degC", "fahrenheit": "degF", "kelvin": "K", "degree": "deg",
    "degrees": "deg", "sqft": "ft2", "sqin": "in2", "sqm": "m2", "sqmm": "mm2",
    "second": "s", "seconds": "s", "sec": "s", "minute": "min", "minutes": "min", "mins": "min", "hour": "h",
    "hours": "h", "hr": "h", "hrs": "h", "day": "d", "days": "d",
}  # fmt: skip
_WHOLE_SPELLINGS = {
    "kNm": "kN*m", "Nm": "N*m", "Nmm": "N*mm", "kNmm": "kN*mm", "MNm": "MN*m", "sq*ft": "ft2", "sq*in": "in2",
    "sq*m": "m2", "sq*mm": "mm2", "lb/sq*ft": "lb/ft2", "lbf/sq*ft": "lbf/ft2", "lb/1000*sq*ft": "lb/MSGL",
    "lb/1000sqft": "lb/MSGL", "g/sq*m": "g/m2",
    "sq*ft/min": "ft2/min", "sq*ft/h": "ft2/h", "sq*m/min": "m2/min", "sq*m/h": "m2/h",
    "pli": "lbf/in", "um/m*K": "um/m/K",
}  # fmt: skip


_VULGAR = {
    "¼": "1/4", "½": "1/2", "¾": "3/4", "⅐": "1/7", "⅑": "1/9", "⅒": "1/10", "⅓": "1/3", "⅔": "2/3", "⅕": "1/5",
    "⅖": "2/5", "⅗": "3/5", "⅘": "4/5", "⅙": "1/6", "⅚": "5/6", "⅛": "1/8", "⅜": "3/8", "⅝": "5/8", "⅞": "7/8",
}  # fmt: skip
_CHARACTERS = str.maketrans(
    {
        **{sign: f" {text}" for sign, text in _VULGAR.items()},
        **dict.fromkeys("\u00a0\u2002\u2003\u2004\u2005\u2006\u2007\u2008\u2009\u200a\u202f\u205f\u3000\t", " "),
        **dict.fromkeys("×·⋅∙•∗", "*"),
        **dict.fromkeys("−–—‐‑‒", "-"),
        **dict.fromkeys("′’‘ʹ", "'"),
        **dict.fromkeys("″”“ʺ", '"'),
        **dict.fromkeys("⁄∕", "/"),
        **dict.fromkeys("µμ", "u"),
        "²": "2",
        "³": "3",
        "°": "deg",
        "℃": "degC",
        "℉": "degF",
    }
)
_DECIMAL = r"(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d{1,3})?"
_NUMBER = re.compile(
    r"""(?P<sign>[+-]?)\s*(?:
        (?:(?P<whole>\d{1,9})(?:\s+|\s?-\s?))?(?P<top>\d{1,6})\s?/\s?(?P<bottom>\d{1,6})(?![\d.,])
      | (?P<grouped>\d{1,3}(?:,\d{3})+(?:\.\d*)?|\d{1,3}(?:[ ]\d{3})+(?:[.,]\d*)?)(?![\d.,])
      | (?P<comma>\d+,\d+)(?![\d.,])
      | (?P<decimal>(?:\d+(?:\.\d*)?|\.\d+)(?:[eE][+-]?\d{1,3})?)(?![\d.,])
    )\s*(?P<unit>.*)""",
    re.VERBOSE | re.ASCII,
)
_FEET_INCHES = re.compile(
    r"""(?P<sign>[+-]?)\s*(?P<feet>\d{1,6})\s*(?:ft|feet|foot|')\.?\s*[-\s]?\s*
        (?:(?:(?P<whole>\d{1,3})(?:\s+|\s?-\s?))?(?P<top>\d{1,4})\s?/\s?(?P<bottom>\d{1,4})|(?P<inches>\d{1,3}(?:\.\d*)?))
        \s*(?:in|inch|inches|"|'')?\.?\s*""",
    re.VERBOSE | re.ASCII | re.IGNORECASE,
)
_LONE_COMMA = re.compile(r"[1-9]\d{0,2},\d{3}", re.ASCII)


def parse(field: str, value: object, kind: str, bound: float | None = None) -> float:
    """Return ``value``, a number or a typed quantity of ``kind``, in N, mm, MPa (``KINDS[kind].unit``).

    ``bound`` replaces the kind's largest accepted size. Raises InputError for ``field``, one readable line saying what
    was given and an example of what is wanted.
    """
    known = KINDS[kind]
    if isinstance(value, (float, int)) and value is not True and value is not False:
        number = value
    elif isinstance(value, str):
        try:
            number = _read(value, kind)
        except InputError as error:
            raise InputError(field, str(error)) from None
    else:
        raise InputError(field, f"{given(value)} is not {known.noun}; enter {_example(known)}.")
    high = known.bound if bound is None else bound
    low = known.low if bound is None or known.lowest is not None else -bound
    if low <= number <= high:
        return float(number)
    raise InputError(field, _out_of_bounds(value, known, low, high))


def given(value: object) -> str:
    """What was given, short enough for a message and on one line."""
    if value is None:
        return "null"
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        text = "".join(c if c.isprintable() else " " for c in value[: LONGEST + 1])
        return f"'{text}'" if len(value) <= LONGEST else f"'{text[:30]}...' ({len(value)} characters)"
    if isinstance(value, int):
        return str(value) if abs(value) < 10**20 else "a whole number of more than 20 digits"
    if isinstance(value, float):
        return {"nan": "NaN", "inf": "Infinity", "-inf": "-Infinity"}.get(repr(value), f"{value:g}")
    if isinstance(value, Mapping):
        return "an object {...}"
    return "a list [...]" if isinstance(value, (list, tuple)) else f"a {type(value).__name__}"


def _example(kind: Kind) -> str:
    """'a length, such as 4.2 m (a plain number is in mm)'."""
    plain = f" (a plain number is in {kind.unit})" if kind.unit else ""
    return f"{kind.noun}, such as {kind.example}{plain}"


def _out_of_bounds(value: object, kind: Kind, low: float, high: float) -> str:
    if isinstance(value, float) and not math.isfinite(value):
        return f"{given(value)} is not a finite number; enter {_example(kind)}."
    unit = f" {kind.unit}" if kind.unit else ""
    return (
        f"{given(value)} is beyond what this program takes for {kind.noun} ({low:g} to {high:g}{unit}); "
        f"check the number and its unit, such as {kind.example}."
    )


@lru_cache(maxsize=4096)
def _read(text: str, kind: str) -> float:
    """Return typed ``text`` in the plain unit of ``kind``."""
    known = KINDS[kind]
    if len(text) > LONGEST:
        raise InputError("", f"{given(text)} is longer than {LONGEST} characters; enter {_example(known)}.")
    plain = text.translate(_CHARACTERS).strip()
    if not plain:
        raise InputError("", f"Nothing was entered; enter {_example(known)}.")
    if kind == "length":
        feet = _FEET_INCHES.fullmatch(plain)
        if feet:
            return _feet_inches(text, feet)
    match = _NUMBER.fullmatch(plain)
    if match is None:
        raise InputError("", f"{given(text)} is not {known.noun}; enter {_example(known)}.")
    spelled, unit = match["unit"], ""
    if spelled:
        unit = _unit(spelled, kind)
        if unit not in FACTORS[kind]:
            raise InputError("", _wrong_unit(text, spelled, unit, known, match))
    number = _number(text, match, unit, known)
    if unit:
        scale, offset = FACTORS[kind][unit]
        number = number * scale + offset
    try:
        return float(number)
    except OverflowError:
        return math.inf if number > 0 else -math.inf


def _number(text: str, match: re.Match[str], unit: str, kind: Kind) -> Fraction:
    sign = -1 if match["sign"] == "-" else 1
    if match["decimal"]:
        return sign * Fraction(match["decimal"])
    if match["bottom"]:
        return sign * (int(match["whole"] or 0) + _fraction(text, match, kind))
    if match["comma"]:
        return sign * Fraction(match["comma"].replace(",", "."))
    grouped = match["grouped"]
    if _LONE_COMMA.fullmatch(grouped) and not _is_us(unit):
        raise InputError("", _either(text, grouped, match["unit"]))
    if " " in grouped:
        return sign * Fraction(grouped.replace(" ", "").replace(",", "."))
    if grouped.startswith("0"):
        if grouped.count(",") == 1 and "." not in grouped:
            return sign * Fraction(grouped.replace(",", "."))  # 0,250: no thousands begin with a nought
        raise InputError("", f"{given(text)} is not {kind.noun}; enter {_example(kind)}.")
    return sign * Fraction(grouped.replace(",", ""))


def _either(text: str, grouped: str, unit: str) -> str:
    tail = f" {unit}" if unit else ""
    return (
        f"{given(text)} can be read in two ways; write {grouped.replace(',', '')}{tail} or "
        f"{grouped.replace(',', '.')}{tail}."
    )


def _fraction(text: str, match: re.Match[str], kind: Kind) -> Fraction:
    top, bottom = int(match["top"]), int(match["bottom"])
    if bottom == 0 or (match["whole"] is not None and top >= bottom):
        raise InputError("", f"{given(text)} holds no proper fraction; enter {_example(kind)}.")
    return Fraction(top, bottom)


def _feet_inches(text: str, match: re.Match[str]) -> float:
    kind = KINDS["length"]
    if match["bottom"]:
        top, bottom = int(match["top"]), int(match["bottom"])
        if bottom == 0 or top >= bottom:
            raise InputError("", f"{given(text)} holds no proper fraction; enter {_example(kind)}.")
        inches = int(match["whole"] or 0) + Fraction(top, bottom)
    else:
        inches = Fraction(match["inches"].rstrip("."))
    if inches >= 12:
        raise InputError("", f"{given(text)} has 12 or more inches beside the feet; enter {_example(kind)}.")
    length = float((12 * int(match["feet"]) + inches) * LENGTHS["in"])
    return -length if match["sign"] == "-" else length


def _is_us(unit: str) -> bool:
    return unit in US_NAMES or any(part in US_PARTS for part in re.split(r"[*/]", unit))


_TIDY = (
    (re.compile(r"\*\*|\^"), ""),
    (re.compile(r"(?<=[A-Za-z])\.(?=\s|$|/)"), ""),
    (re.compile(r"\s*([*/])\s*"), r"\1"),
    (re.compile(r"(?<=[A-Za-z\d])[ \t]*-[ \t]*(?=[A-Za-z])|(?<=[A-Za-z\d)])\s+(?=[A-Za-z(])"), "*"),
    (re.compile(r"[()]"), ""),
    (re.compile(r"\bdeg\*(?=[CFcf]\b)"), "deg"),
)


@lru_cache(maxsize=1024)
def _unit(spelled: str, kind: str) -> str:
    """The table's spelling of a typed unit, or the tidied text where the table has none."""
    table = FACTORS[kind]
    if spelled in table:
        return spelled
    text = spelled
    for pattern, replacement in _TIDY:
        text = pattern.sub(replacement, text)
    text = text.strip()
    text = _WHOLE_SPELLINGS.get(text, text)
    if text in table:
        return text
    parts = [_SPELLINGS.get(part) or _SPELLINGS.get(part.lower(), part) for part in re.split(r"([*/])", text)]
    text = "".join(parts)
    if text in table:
        return text
    # Capitals are forgiven except where they decide a size: mN is no MN.
    alike = [unit for unit in table if unit.lower() == text.lower() and not _milli_for_mega(text, unit)]
    return alike[0] if len(alike) == 1 else text


def _milli_for_mega(text: str, unit: str) -> bool:
    return unit.startswith("M") and text.startswith("m") and not (text.islower() and unit.startswith("MPa"))


def _wrong_unit(text: str, spelled: str, unit: str, kind: Kind, match: re.Match[str]) -> str:
    """Why a unit is refused: a mass for a force, another kind's unit, or no unit at all."""
    weight = "/".join("*".join(WEIGHT_OF.get(p, p) for p in part.split("*")) for part in unit.split("/"))
    if weight != unit and weight in FACTORS[kind.name]:
        try:
            number = _number(text, match, unit, kind)
        except InputError as error:
            return str(error)
        newtons = float(number * FACTORS[kind.name][weight][0])
        return (
            f"{given(text)} is {_MASS_NOUNS.get(kind.name, 'a mass')}, not {kind.noun}; it weighs "
            f"{_plain(float(number))} {weight} ({_plain(newtons)} {kind.unit}): write "
            f"{_plain(float(number))} {weight} if that is meant."
        )
    for other in KINDS.values():
        if other.name != kind.name and _unit(spelled, other.name) in FACTORS[other.name]:
            return f"{given(text)} is {other.noun}, not {kind.noun}; enter {_example(kind)}."
    return f"{given(text)} has no unit that fits {kind.noun}; enter {_example(kind)}."


_MASS_NOUNS = {
    "line_load": "a mass per length",
    "area_load": "a mass per area",
    "stress": "a mass per area",
    "couple": "a mass times a length",
}


def _plain(number: float) -> str:
    """Four significant digits, no grouping: for messages that may be typed back."""
    return digits(number, "")
