"""Lettering of quantities on drawings and dimension lines, as on a drafting board.

A drawing has one unit for one kind of quantity, chosen by its greatest value, so that a reader compares numbers and
not units. Lengths of sections are dimensioned in mm, or in inches with the fractions of a rule where a size is one;
places along a member in m, or in feet and inches.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache
from itertools import groupby

from server import units
from server.sheets.svg import CAP, FONT_SIZE, Drawing, spread, text_width
from server.working import readable, readable_unit

INCH = 25.4
FOOT = 304.8
ROW = 13.0
"""Step between two rows of texts below a chain."""
MINUS = "−"


@dataclass(frozen=True)
class Scale:
    """One unit for every number of a drawing: result value x factor = the number that is lettered."""

    unit: str
    factor: float

    def text(self, value: float) -> str:
        """The number alone, four digits."""
        return number(value * self.factor)

    def full(self, value: float) -> str:
        """Number and unit."""
        return f"{number(value * self.factor)} {self.unit}"


def _consistent(stored: str) -> tuple[float, str, float]:
    unit, factor = units.display_unit(stored, "US")
    return float("inf"), readable_unit(unit), factor


# (upper limit in result units, unit, factor) in rising order; the last has no limit. Units as in the tables.
_SCALES: dict[str, dict[str, tuple[tuple[float, str, float], ...]]] = {
    "SI": {
        "force": ((1e3, "N", 1.0), (float("inf"), "kN", 1e-3)),
        "couple": ((1e5, "N·m", 1e-3), (float("inf"), "kN·m", 1e-6)),
        "line_load": ((0.1, "N/m", 1e3), (float("inf"), "kN/m", 1.0)),
        "flow": ((float("inf"), "N/mm", 1.0),),
        "deflection": ((float("inf"), "mm", 1.0),),
        "place": ((600.0, "mm", 1.0), (float("inf"), "m", 1e-3)),
    },
    "US": {
        "force": (_consistent("N"),),
        "couple": (_consistent("N*mm"),),
        "line_load": ((float("inf"), units.unit_of("line_load", "US"), units.scale_of("line_load", "US")),),
        "flow": (_consistent("N/mm"),),
        "deflection": (_consistent("mm"),),
        "place": ((2 * FOOT, "in", 1 / INCH), (float("inf"), "ft", 1 / FOOT)),
    },
}


def scale_for(kind: str, greatest: float, display: str) -> Scale:
    """The unit in which a drawing letters one kind of quantity, given its greatest absolute value."""
    choices = _SCALES["US" if display == "US" else "SI"][kind]
    unit, factor = next((unit, factor) for limit, unit, factor in choices if abs(greatest) < limit)
    return Scale(unit, factor)


@lru_cache(maxsize=4096)
def number(value: float, digits: int = 4) -> str:
    """A number as the tables letter it."""
    return "0" if abs(value) < 1e-12 else readable(value, digits)


@lru_cache(maxsize=4096)
def size_text(mm: float, display: str) -> str:
    """A section's dimension without its unit: 12.5, or 3-1/2 where the inches are a rule's fraction, else 0.703."""
    if display != "US":
        return f"{mm:.2f}".rstrip("0").rstrip(".") if mm < 10 else f"{mm:.1f}".removesuffix(".0")
    inches = mm / INCH
    sixteenths = round(inches * 16)
    if sixteenths and abs(inches - sixteenths / 16) < 0.0005:
        return inch_fraction(sixteenths)
    return f"{inches:.3f}".rstrip("0").rstrip(".")


def inch_fraction(sixteenths: int) -> str:
    """A count of sixteenths in words of a rule: 56 -> 3-1/2."""
    whole, rest = divmod(sixteenths, 16)
    if not rest:
        return str(whole)
    fraction = str(Fraction(rest, 16))
    return f"{whole}-{fraction}" if whole else fraction


@lru_cache(maxsize=4096)
def place_text(mm: float, display: str) -> str:
    """A place or a length along a member with its unit: 2.76 m, 850 mm, 13 ft 9-1/2 in."""
    if abs(mm) < 1e-9:
        return "0"
    if display != "US":
        if abs(mm) < 600:
            return f"{mm:.1f}".removesuffix(".0").replace("-", MINUS) + " mm"
        return f"{mm / 1000:.3f}".rstrip("0").rstrip(".").replace("-", MINUS) + " m"
    inches = mm / INCH
    sixteenths = round(inches * 16)
    if inches < 0 or abs(inches - sixteenths / 16) > 0.0005:
        return f"{mm / FOOT:.3f}".rstrip("0").rstrip(".").replace("-", MINUS) + " ft"
    feet, rest = divmod(sixteenths, 192)
    if not rest:
        return f"{feet} ft"
    return f"{feet} ft {inch_fraction(rest)} in" if feet else f"{inch_fraction(rest)} in"


@dataclass(frozen=True)
class Chain:
    """A chain of dimensions along one line: ticks in pixels, and texts with the places they belong to."""

    ticks: tuple[float, ...]
    texts: tuple[tuple[float, str], ...]
    rows: int = 1

    def row(self, index: int) -> list[tuple[float, str]]:
        """The texts of one row, in rising order of place."""
        return sorted(self.texts)[index :: self.rows]


def chain(
    levels: Sequence[float], pixels: Sequence[float], texts: Sequence[str], room_of: float | None
) -> Chain | None:
    """Dimensions between levels, or None where they do not fit.

    ``texts[i]`` belongs between level i and i+1; ``room_of`` is the height a text takes in a vertical chain (None:
    its own width, as in a horizontal one). Layers thinner than two pixels get ticks and no text; equal neighbours are
    lettered once, "12 × 20"; where one row is too short for a horizontal chain, two take turns.
    """
    spans = [(i, i + 1, text) for i, text in enumerate(texts) if abs(pixels[i + 1] - pixels[i]) >= 2.0]
    for found in (spans, _grouped(spans)):
        texts_at = tuple((0.5 * (pixels[i] + pixels[j]), text) for i, j, text in found)
        for rows in (1, 2) if room_of is None else (1,):
            made = Chain(_ticks(pixels), texts_at, rows)
            if found and all(_fits(made.row(i), room_of, min(pixels), max(pixels)) for i in range(rows)):
                return made
    return None


def _fits(row: Sequence[tuple[float, str]], room_of: float | None, low: float, high: float) -> bool:
    """Whether texts stand side by side without moving far from their places."""
    sizes = [room_of or text_width(text) for _, text in row]
    if sum(sizes) + 3 * len(sizes) > 0.9 * (high - low):
        return False
    placed = spread([place for place, _ in row], sizes, low, high, 3)
    return all(abs(place - x) <= 14 for (place, _), x in zip(row, placed, strict=True))


def _ticks(pixels: Sequence[float]) -> tuple[float, ...]:
    """Both ends, and what lies between them two pixels apart or more."""
    ticks = [pixels[0]]
    for place in pixels[1:-1]:
        if abs(place - ticks[-1]) >= 2.0 and abs(place - pixels[-1]) >= 2.0:
            ticks.append(place)
    return (*ticks, pixels[-1])


def _grouped(spans: Sequence[tuple[int, int, str]]) -> list[tuple[int, int, str]]:
    """Runs of equal neighbours as one text: "5 × 20"."""
    found = []
    for text, run in groupby(spans, key=lambda span: span[2]):
        members = list(run)
        found.append((members[0][0], members[-1][1], text if len(members) == 1 else f"{len(members)} × {text}"))
    return found


def ticks_across(drawing: Drawing, y: float, ticks: Sequence[float]) -> None:
    """A horizontal dimension line with oblique strokes."""
    thin, heavy = drawing.pen("thin"), drawing.pen("outline")
    thin.append(f"M{min(ticks) - 4:.1f} {y:.1f}H{max(ticks) + 4:.1f}")
    heavy.extend([f"M{x - 2.5:.1f} {y + 2.5:.1f}l5 -5" for x in ticks])


def ticks_up(drawing: Drawing, x: float, ticks: Sequence[float]) -> None:
    """A vertical dimension line with oblique strokes."""
    thin, heavy = drawing.pen("thin"), drawing.pen("outline")
    thin.append(f"M{x:.1f} {min(ticks) - 4:.1f}V{max(ticks) + 4:.1f}")
    heavy.extend([f"M{x - 2.5:.1f} {y + 2.5:.1f}l5 -5" for y in ticks])


def dimension_across(drawing: Drawing, y: float, dimensions: Chain) -> None:
    """A horizontal chain with its texts below in one row or two; one that moved keeps a line to its place."""
    ticks_across(drawing, y, dimensions.ticks)
    for index in range(dimensions.rows):
        row = dimensions.row(index)
        widths = [text_width(text) for _, text in row]
        placed = spread([x for x, _ in row], widths, min(dimensions.ticks) + 2, max(dimensions.ticks) - 2, 4)
        for x, (want, text) in zip(placed, row, strict=True):
            moved = abs(x - want) > 4
            if moved:
                drawing.line("thin", want, y, x, y + 6)
            drop = ROW * index + (3.0 if moved and not index else 0.0)
            drawing.text(x, y + 5 + drop + 2 * CAP * FONT_SIZE, text, "middle")


def dimension_up(drawing: Drawing, x: float, dimensions: Chain) -> None:
    """A vertical chain with its texts, upright, at the left of the line."""
    ticks_up(drawing, x, dimensions.ticks)
    order = sorted(dimensions.texts)
    wanted = [y for y, _ in order]
    placed = spread(wanted, [FONT_SIZE] * len(order), min(dimensions.ticks) + 1, max(dimensions.ticks) - 1, 1)
    for y, want, (_, text) in zip(placed, wanted, order, strict=True):
        if abs(y - want) > 3:
            drawing.line("thin", x, want, x - 7, y)
        drawing.text(x - (8 if abs(y - want) > 3 else 5), y + CAP * FONT_SIZE, text, "end")
