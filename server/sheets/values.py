"""Results written for people: one unit a column, few digits, never a rounding that changes a verdict.

Results are stored in N, mm and MPa. Forces are shown in kN and couples in kN·m (or lbf and lbf·in); all else keeps the
unit in which the working reckons, so that a number in a table is found again in the working.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal
from typing import Any

from server import units
from server.working import exceeds, readable, readable_unit

DIGITS = 4
DASH = "–"
_SI_FOR_PEOPLE = {"N": ("kN", 1e-3), "N*mm": ("kN·m", 1e-6)}
_COUNT = r"\d{1,3}(?:,\d{3})+(?:\.\d+)?|\d+(?:\.\d+)?(?:e[+-]?\d+)?"
_THOUSANDS = re.compile(r"(?<=\d),(?=\d{3}(?!\d))")
_POWER = re.compile(r"(?:(?<=/)|(?<=\d[ \u00a0]))(?:mm|cm|m|in|ft)[234](?!\w)")
_RAISED = str.maketrans("234", "²³⁴")
_PLACE = re.compile(
    r"(?<![\w.'\"/])(adhesive|fastener|clamps|member|analysis|basis|service)\.([a-z_]{3,})(?![\w.'\"/(\[])"
)
_NAME = re.compile(r"(?<![\w.'\"/])[a-z]{3,}(?:_[a-z]+)+(?![\w.'\"/])")
_IN_WORDS = re.compile(rf"(?<![\w.,])({_COUNT}) (N/mm|MPa|mm2|mm|N)(?![\w/*·²]|\d)")


@dataclass(frozen=True)
class Unit:
    """How one kind of result is shown: stored value x factor, in ``text``."""

    text: str
    factor: float

    def number(self, value: object, digits: int = DIGITS) -> str:
        """The number alone; a dash where there is none."""
        if not isinstance(value, int | float) or isinstance(value, bool):
            return DASH
        return readable(float(value) * self.factor, digits)

    def full(self, value: object, digits: int = DIGITS) -> str:
        """Number and unit."""
        text = self.number(value, digits)
        return text if text == DASH or not self.text else f"{text}\u00a0{self.text}"


def unit(stored: str, display: str) -> Unit:
    """The unit people see for results stored in ``stored`` ("N*mm2", "MPa", ...)."""
    if not stored:
        return Unit("", 1.0)
    if display == "US":
        text, factor = units.display_unit(stored, "US")
        return Unit(readable_unit(text), factor)
    text, factor = _SI_FOR_PEOPLE.get(stored, (readable_unit(stored), 1.0))
    return Unit(text, factor)


def quantity(value: object, stored: str, display: str, digits: int = DIGITS) -> str:
    """One result with its unit."""
    return unit(stored, display).full(value, digits)


def in_units(text: str, display: str) -> str:
    """A stored sentence for people: its millimetres, newtons and megapascals in the units of ``display``.

    >>> in_units("the plate stops 250 mm from the left end", "US")
    'the plate stops 9.843 in from the left end'
    >>> in_units("it hands 2,560 N over, 38.1 mm of its 1219 mm", "US")
    'it hands 575.5 lbf over, 1.5 in of its 48 in'
    """
    if display != "US":
        return text
    return _IN_WORDS.sub(lambda found: _as_exact(found[1].replace(",", ""), unit(found[2], display)), text)


def _as_exact(text: str, of: Unit) -> str:
    """A written number in another unit, to four digits.

    One that was rounded for its sentence, to four digits or more, takes the fewest that its last digit allows: 1219 mm
    are 48 in, not 47.99 in.
    """
    written, value = Decimal(text), float(text) * of.factor
    half = float(Decimal(5).scaleb(int(written.as_tuple().exponent) - 1)) * of.factor
    for digits in range(1, DIGITS) if len(written.as_tuple().digits) >= DIGITS else ():
        if abs(float(f"{value:.{digits}g}") - value) <= half:
            return f"{readable(value, digits)} {of.text}"
    return of.full(float(text)).replace("\u00a0", " ")


def spoken(text: str) -> str:
    """A stored sentence for people: names of the check file as words, thousands and powers as in the tables.

    >>> spoken("adhesive 'E7' has no creep_limit, and h_f is 70 mm")
    "adhesive 'E7' has no creep limit, and h_f is 70 mm"
    >>> spoken("Mixes: adhesive.pot_life, from its data sheet.")
    'Mixes: adhesive pot life, from its data sheet.'
    >>> spoken("taken as stiff, 10,000 N/mm3") == "taken as stiff, 10\u2009000 N/mm³"
    True
    """
    text = _NAME.sub(lambda found: found[0].replace("_", " "), _PLACE.sub(r"\1 \2", text))
    text = _THOUSANDS.sub(units.THIN, text)
    return raised(text)


def raised(text: str) -> str:
    """A typed quantity with the powers of its unit raised.

    >>> raised("420 kg/m3"), raised("piece m2 of 12 mm2")
    ('420 kg/m³', 'piece m2 of 12 mm²')
    """
    return _POWER.sub(lambda found: found[0].translate(_RAISED), text)


def utilisation(value: object) -> str:
    """A utilisation to two decimals; as many more as it takes not to show 1.00 for what is above or below 1."""
    if not isinstance(value, int | float) or isinstance(value, bool):
        return DASH
    above, below = exceeds(value), exceeds(2 - value)
    for decimals in (2, 3, 4, 6):
        text = f"{value:.{decimals}f}"
        if (float(text) > 1) == above and (float(text) < 1) == below:
            return text
    return "just above 1" if above else "just below 1" if below else "1.00"


def verdict(result: Mapping[str, Any]) -> str:
    """The verdict's word, as it is printed."""
    return str(result.get("verdict", "")).upper()


def governing(result: Mapping[str, Any], display: str) -> str:
    """The readable line that names what governs, in the units of ``display``."""
    line = str(result.get("governing", ""))
    found = _governing_limit(result, display)
    if found is None:  # what else may govern, such as the end of a bond, says itself in words
        return in_units(line[:1].upper() + line[1:], display)
    what, limit = found
    place = quantity(limit.get("at"), "mm", display)
    return (
        f"{what}: {utilisation(limit.get('utilisation'))} of what is allowed, {place} from the left end"
        f"{': ' + limit['place'] if limit.get('place') else ''}, combination {limit.get('combination', DASH)}"
    )


def _of_the_span(each: Mapping[str, Any], of: Unit) -> str:
    word = "Long-term deflection" if each.get("long_term") else "Deflection"
    return f"{word} of the {each.get('kind', 'span')} {of.number(each.get('from'))} to {of.full(each.get('to'))}"


def _governing_limit(result: Mapping[str, Any], display: str) -> tuple[str, Mapping[str, Any]] | None:
    limits = [
        (f"{word} {part['id']}, {said(limit)}", limit)
        for word, group in (("Joint", "joints"), ("Piece", "pieces"))
        for part in result.get(group, ())
        for limit in part.get("limits", ())
    ]
    limits += [(_of_the_span(each, unit("mm", display)), each) for each in result.get("deflection_limits", ())]
    known = [(what, limit) for what, limit in limits if isinstance(limit.get("utilisation"), int | float)]
    worst = max(
        known, key=lambda each: float(f"{float(each[1]['utilisation']):.9g}"), default=None
    )  # of equals the first
    used = result.get("utilisation")
    if worst is None or not isinstance(used, int | float):
        return worst
    return worst if math.isclose(float(worst[1]["utilisation"]), used, rel_tol=1e-9) else None


def missing(result: Mapping[str, Any], display: str, *, names: bool = False) -> tuple[str, ...]:
    """What is missing, with lines that miss the same at several places on one: 'shear of X (here; there): test it'.

    With ``names`` the names of the check document stay as they are written there.
    """
    places: dict[tuple[str, str], list[str]] = {}
    for line in result.get("missing", ()):
        text = in_units(str(line), display)
        text = text if names else spoken(text)
        match = re.fullmatch(r"([^()]+) \(([^()]+)\): (.+)", text)
        key, place = ((match[1], match[3]), match[2]) if match else ((text, ""), "")
        places.setdefault(key, []).append(place)
    said_once = (f"{what} ({'; '.join(found)}): {step}" if step else what for (what, step), found in places.items())
    return tuple(line[:1].upper() + line[1:] for line in said_once)


def said(limit: Mapping[str, Any]) -> str:
    """What a limit is, with the state it is judged in where that is not the member as built."""
    return f"{limit['what']}, {limit['state']}" if limit.get("state") else str(limit.get("what", ""))
