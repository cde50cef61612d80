"""A member check computed again by plain means, from the check file alone and by the words of the contract.

Nothing of the program is imported. Statics by initial parameters (``oracle_statics``), sections as rectangles
(``oracle_section``), V S / EI for flow, and the contract's rules for resistance and verdict, each spelled out here once
more. What the program's working prints is compared with this too (``test_oracle``), so that breaking a formula of the
working makes the two disagree.
"""

from __future__ import annotations

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from tests.checks.oracle_section import Box, Section, Touch, touch
from tests.checks.oracle_statics import Extreme, Fields, Loads, Member, Stretch, Support, largest

Array = NDArray[np.float64]
LBF = 0.45359237 * 9.80665  # N; the pound and standard gravity by definition
UNITS = {
    "mm": 1.0, "cm": 10.0, "m": 1000.0, "in": 25.4, "ft": 304.8, "N": 1.0, "kN": 1000.0, "lbf": LBF, "N/mm": 1.0,
    "kN/m": 1.0, "lbf/ft": LBF / 304.8, "kN/m2": 1e-3, "psf": LBF / 304.8**2, "MPa": 1.0, "GPa": 1000.0,
    "psi": LBF / 25.4**2, "kN*m": 1e6, "kg/m3": 1.0, "lb/ft3": 0.45359237 / 0.3048**3, "lbf/in": LBF / 25.4,
}  # fmt: skip
DOUBTFUL = ("indicative", "draft", "on hold", "withdrawn")


def number(value: Any) -> float:
    """A plain number, or a text such as "13 ft 9-1/2 in": parts of one quantity, each with its unit."""
    if not isinstance(value, str):
        return float(value)
    parts = re.findall(r"(-?[\d.]+(?:e-?\d+)?)(?:-(\d+)/(\d+)|/(\d+))?\s*([A-Za-z][A-Za-z0-9*/]*)", value)
    assert parts, f"the oracle does not read {value!r}"
    total = 0.0
    for whole, over, under, alone, unit in parts:
        size = float(whole) / float(alone or 1) + (float(over) / float(under) if over else 0.0)
        total += size * UNITS[unit]
    return total


@dataclass(frozen=True)
class Limit:
    """A demand by strength combination against its resistance there."""

    what: str
    demand: Array
    resistance: Array

    @property
    def utilisation(self) -> float:
        return float((self.demand / self.resistance).max())

    @property
    def row(self) -> int:
        return int((self.demand / self.resistance).argmax())


class Oracle:
    """Everything that the contract asks of one document, computed when it is asked for."""

    def __init__(self, raw: Mapping[str, Any]) -> None:
        self.raw = raw
        self.length = number(raw["member"]["length"])
        self.reasons: list[str] = []  # why a pass is not proven
        self.pieces = {name: self._box(name) for name in raw["section"]["pieces"]}
        self.spans = {name: self._extent(piece) for name, piece in raw["section"]["pieces"].items()}
        self.combinations = raw.get("combinations") or {"all": {"factors": dict.fromkeys(raw["loads"], 1.0)}}
        self.strength = [n for n, c in self.combinations.items() if c.get("for", "both") != "deflection"]
        self.sagging = [n for n, c in self.combinations.items() if c.get("for", "both") != "strength"]

    # --- the member ---------------------------------------------------------------------------------------------------

    def material(self, piece: str) -> dict[str, Any]:
        found: dict[str, Any] = self.raw["materials"][self.raw["section"]["pieces"][piece]["material"]]
        return found

    def _box(self, name: str) -> Box:
        piece, material = self.raw["section"]["pieces"][name], self.material(name)
        width, depth = number(piece["width"]), number(piece["depth"])
        if piece.get("turn", 0) in (90, -90, 270):
            width, depth = depth, width
        across, up = (number(each) for each in piece["at"])
        G = material.get("G")
        if self.rolls(name, width > depth) and "G_rolling" in material:
            G = material["G_rolling"]
        return Box(
            name, across, up, across + width, up + depth, number(material["E"]),
            None if G is None else number(G),
            number(material["density"]) if "density" in material else None,
        )  # fmt: skip

    def rolls(self, name: str, flat: bool) -> bool:
        """Whether level cuts roll the fibres: grain across, or through the thickness of a layered piece."""
        across = self.raw["section"]["pieces"][name].get("grain") == "across"
        return bool(across or (flat and self.material(name).get("layered")))

    def _extent(self, piece: Mapping[str, Any]) -> tuple[float, float]:
        return number(piece.get("from") or 0.0), number(piece["to"]) if "to" in piece else self.length

    @cached_property
    def sections(self) -> list[tuple[float, float, Section]]:
        """The sections between piece ends, left to right."""
        ends = sorted({0.0, self.length, *(at for span in self.spans.values() for at in span)})
        found = []
        for start, end in pairwise(ends):
            here = [n for n, (a, b) in self.spans.items() if a <= start and end <= b]
            touches = [self.touch(j) for j in self.raw["section"]["joints"] if set(j["between"]) <= set(here)]
            found.append((start, end, Section(tuple(self.pieces[n] for n in here), tuple(touches))))
        return found

    def touch(self, joint: Mapping[str, Any]) -> Touch:
        first, second = joint["between"]
        return touch(self.pieces[first], self.pieces[second])

    def _member(self, creep: bool) -> Member:
        supports = [
            Support(number(s["at"]), s["kind"] == "fixed", number(s["stiffness"]) if s["kind"] == "spring" else None)
            for s in self.raw["member"]["supports"]
        ]
        hinges = [number(at) for at in self.raw["member"].get("hinges", [])]
        stretches = []
        for start, end, section in self.sections:
            worked = self.softened(section) if creep else section
            stretches.append(Stretch(start, end, worked.EI, worked.GA if self.shears and worked.GA else math.inf))
        places = {0.0, self.length, *hinges, *(s.at for s in supports), *(s.start for s in stretches)}
        for loads in self.loads.values():
            places |= {at for at, _ in (*loads.forces, *loads.couples)} | {
                at for line in loads.lines for at in line[:2]
            }
        for joint in self.raw["section"]["joints"]:
            if isinstance(joint.get("spacing"), list):
                places |= {number(zone[end]) for zone in joint["spacing"] for end in ("from", "to")}
        return Member(supports, hinges, stretches, sorted(places))

    @cached_property
    def shears(self) -> bool:
        wanted = self.raw.get("analysis", {}).get("shear_deformation", True)
        return bool(wanted and all(box.G is not None for box in self.pieces.values()))

    def softened(self, section: Section) -> Section:
        """The section with each piece's moduli over 1 + creep."""
        return Section(tuple(self._softened(box) for box in section.boxes), section.touches)

    def _softened(self, box: Box) -> Box:
        soft = 1 + self.material(box.name).get("creep", 0.0)
        return Box(box.name, box.left, box.bottom, box.right, box.top, box.E / soft, box.G and box.G / soft)

    @cached_property
    def loads(self) -> dict[str, Loads]:
        return {case: self._case(loads) for case, loads in self.raw["loads"].items()}

    def _case(self, loads: list[dict[str, Any]]) -> Loads:
        found = Loads()
        for load in loads:
            if load["kind"] == "point":
                found.forces.append((number(load["at"]), -number(load["value"])))
            elif load["kind"] == "couple":
                found.couples.append((number(load["at"]), number(load["value"])))
            elif load["kind"] == "self-weight":
                for start, end, section in self.sections:
                    weight = (section.mass or 0.0) * 9.80665 / 1000
                    found.lines.append((start, end, weight, weight))
            else:
                value = load["value"]
                first, last = value if isinstance(value, list) else (value, value)
                wide = number(load["width"]) if load["kind"] == "area" else 1.0
                found.lines.append(
                    (number(load["from"]), number(load["to"]), number(first) * wide, number(last) * wide)
                )
        return found

    @cached_property
    def cases(self) -> dict[str, Fields]:
        member = self._member(creep=False)
        return {case: member.solve(loads) for case, loads in self.loads.items()}

    @cached_property
    def soft_cases(self) -> dict[str, Fields]:
        member = self._member(creep=True)
        return {case: member.solve(loads) for case, loads in self.loads.items()}

    def response(self, combination: str) -> Fields:
        """One combination: the sum of its cases."""
        return _sum([self.cases[case] * factor for case, factor in self.combinations[combination]["factors"].items()])

    def long_term(self, combination: str) -> Fields:
        """The part that does not stay on full stiffness, the part that stays on stiffness over 1 + creep."""
        chosen = self.combinations[combination]
        parts = []
        for case, factor in chosen["factors"].items():
            share = chosen.get("sustained", {}).get(case, 0.0)
            parts += [self.cases[case] * (factor - share), self.soft_cases[case] * share]
        return _sum(parts)

    @cached_property
    def creeps(self) -> bool:
        return any("creep" in self.material(name) for name in self.pieces)

    def envelope(self, quantity: str) -> dict[str, Extreme] | None:
        """Largest and least over the combinations concerned, of shear, moment, deflection, deflection_long_term."""
        names = self.strength if quantity in ("shear", "moment") else self.sagging
        if not names:
            return None
        runs = [self.curve(quantity, name) for name in names]
        high = max((largest(x, y) for x, y in runs), key=lambda e: e.value)
        low = max((largest(x, -y) for x, y in runs), key=lambda e: e.value)
        return {"max": high, "min": Extreme(-low.value, low.at)}

    def curve(self, quantity: str, combination: str) -> tuple[Array, Array]:
        if quantity == "deflection_long_term":
            run = self.long_term(combination)
            return run.x, run.deflection
        run = self.response(combination)
        return run.x, getattr(run, quantity)

    # --- resistance ---------------------------------------------------------------------------------------------------

    def resistance(self, kind: str, name: str, strength: float) -> Array:
        """strength x duration factor x product of factors / (safety or partial factor), by strength combination."""
        entry = self.raw[f"{kind}s"][name]
        table = {key: number(value) for key, value in entry.get("duration_factors", {}).items()}
        durations = [self.combinations[c].get("duration") for c in self.strength]
        factor = [table[d] if d is not None and table else 1.0 for d in durations]
        rest = math.prod(entry.get("factors", {}).values()) / self.divisor(kind, name)
        if entry.get("status") in DOUBTFUL:
            self.reasons.append(f"status of {kind} {name}")
        found: Array = strength * np.array(factor) * rest
        return found

    def divisor(self, kind: str, name: str) -> float:
        basis = self.raw["basis"]
        given = basis["safety_factor" if basis["method"] == "allowable" else "partial_factor"]
        if isinstance(given, dict):
            given = given[kind]
        return float(given[name] if isinstance(given, dict) else given)


def _sum(parts: list[Fields]) -> Fields:
    total = parts[0]
    for part in parts[1:]:
        total = total + part
    return total
