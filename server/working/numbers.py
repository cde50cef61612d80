"""Numbers as text: five significant digits, and as many more as a pocket calculator needs.

``canonical`` gives plain characters that any program reads back (``1.0395e6``); ``parts`` splits such a text into
what people see: digits in groups of three, and a power of ten.
"""

from __future__ import annotations

DIGITS = 5
LADDER = (5, 6, 8, 11, 17)
"""How many digits the numbers of one line may have: the first rung that brings a reader to the printed value."""
_LEAST, _MOST = 1e-3, 1e6
MOST_KEPT = 65536
ROUNDING = 1e-10
"""Of 1: the last bits of a division, far below what any strength is known to."""
_FORMATS = {digits: f"%.{digits}g" for digits in range(1, 18)}


def exceeds(utilisation: float) -> bool:
    """Whether a utilisation is over 1 by more than its own last bits, so that what is used just fully holds."""
    return utilisation > 1 + ROUNDING


class _InLine(dict[float, tuple[str, float]]):
    """Numbers as they stand in a line, by value: the same sizes, moduli and loads stand in line after line."""

    def __init__(self, digits: int) -> None:
        self.digits = digits

    def __missing__(self, value: float) -> tuple[str, float]:
        if len(self) >= MOST_KEPT:
            self.clear()
        text = canonical(value, self.digits)
        self[value] = found = (f"({text})" if text[0] == "-" else text, float(text))
        return found


IN_LINE = {digits: _InLine(digits) for digits in LADDER}
"""By digits: a number's text among others, a negative one in brackets, and the number that a reader takes from it."""


def canonical(value: float, digits: int = DIGITS) -> str:
    """A number to so many significant digits: ``35.482``, ``-0.25``, ``123456``, ``1.0395e6``, ``2.5e-4``.

    Whole digits are never dropped below a million, so 123456 stays 123456; trailing zeros are.
    """
    text = _FORMATS[digits] % value
    size = abs(value)
    if _LEAST <= size < _MOST and "e" not in text:
        return text
    if size == 0:
        return "0"
    return _scaled(value, size, digits)


def _scaled(value: float, size: float, digits: int) -> str:
    """The cases that need a power of ten, or whose plain form the short way would have given as one."""
    if _LEAST <= size < _MOST:
        plain = f"{value:.{max(digits - 6, 0)}f}"
        if abs(float(plain)) < _MOST:
            return plain
    mantissa, exponent = f"{value:.{digits - 1}e}".split("e")
    power = int(exponent)
    if "." in mantissa:
        mantissa = mantissa.rstrip("0").rstrip(".")
    if -4 < power < 0:  # 0.00099999 rounded up to 0.001
        return _FORMATS[digits] % value
    return f"{mantissa}e{power}"


def parts(text: str, gap: str = "\u2009") -> tuple[str, str]:
    """Split a canonical text into grouped digits and the power of ten ('' for none), with a real minus sign."""
    mantissa, _, power = text.partition("e")
    sign, mantissa = ("−", mantissa[1:]) if mantissa.startswith("-") else ("", mantissa)
    whole, point, fraction = mantissa.partition(".")
    if len(whole) > 4:
        whole = _grouped(whole, gap)
    if len(fraction) > 5:
        fraction = gap.join(fraction[i : i + 3] for i in range(0, len(fraction), 3))
    return sign + whole + point + fraction, power.replace("-", "−")


def _grouped(whole: str, gap: str) -> str:
    first = len(whole) % 3
    groups = [whole[:first]] if first else []
    groups += [whole[i : i + 3] for i in range(first, len(whole), 3)]
    return gap.join(groups)


def readable(value: float, digits: int = DIGITS, gap: str = "\u2009") -> str:
    """A number for people, in one line of plain characters: ``14 600``, ``1.0395×10⁶``."""
    mantissa, power = parts(canonical(value, digits), gap)
    return f"{mantissa}×10{superscript(power)}" if power else mantissa


_SUPERSCRIPTS = str.maketrans("0123456789-−+.", "⁰¹²³⁴⁵⁶⁷⁸⁹⁻⁻⁺·")


def superscript(text: str) -> str:
    """Digits and signs raised."""
    return text.translate(_SUPERSCRIPTS)


def readable_unit(unit: str) -> str:
    """A unit for people: ``N*mm2`` becomes ``N·mm²``, ``degC`` becomes ``°C``."""
    unit = "°" + unit[3:] if unit.startswith("deg") else unit
    out: list[str] = []
    after_letter = False
    for character in unit:
        raised = after_letter and character.isdigit()
        out.append("·" if character == "*" else superscript(character) if raised else character)
        after_letter = character.isalpha() or (after_letter and character.isdigit())
    return "".join(out)
