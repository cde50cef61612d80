"""Joints, pieces, deflection and verdict of the oracle: the contract's sentences, one after the other."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property
from itertools import pairwise
from typing import Any

import numpy as np

from tests.checks.oracle import Array, Limit, Oracle, number
from tests.checks.oracle_section import Section, rib_alone
from tests.checks.oracle_statics import Fields, largest

RIB = ", the rib with its own width"


@dataclass
class Found:
    """What one joint or piece comes to: numbers by the contract's key, and its limits."""

    numbers: dict[str, Any]
    limits: dict[str, Limit] = field(default_factory=dict)

    @property
    def utilisation(self) -> float | None:
        return max((limit.utilisation for limit in self.limits.values()), default=None)


class Verdict(Oracle):
    """The whole check."""

    @cached_property
    def slipping(self) -> bool:
        """Fasteners carry a joint and slip is not asked for: pieces and deflection stay unjudged."""
        return any("adhesive" not in joint for joint in self.raw["section"]["joints"])

    def here(self, run: Fields, names: tuple[str, ...]) -> list[tuple[int, Section]]:
        """Segments where all the named pieces are, each with its section."""
        found = []
        for row, places in enumerate(run.x):
            section = next(s for a, b, s in self.sections if a <= places[0] and places[-1] <= b)
            if set(names) <= {box.name for box in section.boxes}:
                found.append((row, section))
        return found

    # --- joints -------------------------------------------------------------------------------------------------------

    @cached_property
    def joints(self) -> list[Found]:
        return [self._joint(joint) for joint in self.raw["section"]["joints"]]

    def _joint(self, joint: dict[str, Any]) -> Found:
        contact = self.touch(joint)
        width, coverage = number(joint.get("width") or contact.length), joint.get("coverage", 1.0)
        flows, top, split = [], (0.0, 0.0, "", 0.0), ""
        for name in self.strength:
            run = self.response(name)
            rows = self.here(run, tuple(joint["between"]))
            shares = [section.share_of(tuple(joint["between"])) for _, section in rows]
            per_newton = [S * share / section.EI for (_, S, share), (_, section) in zip(shares, rows, strict=True)]
            x = run.x[[row for row, _ in rows]]
            flow = np.abs(run.shear[[row for row, _ in rows]]) * np.array(per_newton)[:, None]
            peak = largest(x, flow)
            if peak.value > top[0] * (1 + 1e-9):
                split, S, _ = shares[peak.row]
                top = (peak.value, peak.at, name, S)
            flows.append((x, flow, peak.value))
        first = next(iter(self.pieces.values()))
        numbers = {
            "contact_length": contact.length, "bonded_width": width, "shear_flow": top[0], "at": top[1],
            "combination": top[2], "first_moment": top[3] / first.E, "split": split,
        }  # fmt: skip
        found = Found(numbers)
        peaks = np.array([peak for _, _, peak in flows])
        if "adhesive" in joint:
            self._bond(joint, found, peaks / (width * coverage))
            numbers["stress"] = top[0] / (width * coverage)
            self._rib_bond(joint, found, peaks / (width * coverage))
            if len(found.limits) in (3, 6):
                numbers["width_needed"] = width * max(limit.utilisation for limit in found.limits.values())
        else:
            self._fasteners(joint, found, flows)
        return found

    def _bond(self, joint: dict[str, Any], found: Found, stress: Array) -> None:
        name = joint["adhesive"]
        unit = self.resistance("adhesive", name, 1.0)
        found.numbers["strength_needed"] = float((stress / unit).max())
        strength = self.raw["adhesives"][name].get("shear_strength")
        if strength is None:
            self.reasons.append(f"shear strength of {name}")
        else:
            found.limits[f"adhesive {name}"] = Limit("", stress, number(strength) * unit)
        for piece in joint["between"]:
            rolls = self.rolls(piece, bool(self.material(piece).get("layered")))
            word = "rolling_shear" if rolls else "shear"
            self._limit(found, piece, word, stress)

    def _rib_bond(self, joint: dict[str, Any], found: Found, stress: Array) -> None:
        """The bond of the most loaded rib once more, the rib alone with its own width of the skin."""
        between = tuple(joint["between"])
        for _, _, section in self.sections:
            alone = rib_alone(section)
            if alone is None or alone[0] not in between:
                continue
            _, S, share = section.share_of(between)
            rib, load, own = alone
            times = load * own.first_moment({rib}) / own.EI / (S * share / section.EI)
            for what, limit in list(found.limits.items()):
                found.limits[what + RIB] = Limit(what + RIB, limit.demand * times, limit.resistance)
            unit = self.resistance("adhesive", joint["adhesive"], 1.0)
            found.numbers["strength_needed"] = float((stress * max(times, 1.0) / unit).max())

    def _limit(self, found: Found, piece: str, word: str, demand: Array) -> None:
        """Set a demand on a piece against one of its material's strengths."""
        material = self.raw["section"]["pieces"][piece]["material"]
        strength = self.material(piece).get("strengths", {}).get(word)
        if strength is None:
            self.reasons.append(f"{word} of {material}")
            return
        what = f"{word.replace('_', ' ')} in {piece}"
        found.limits[what] = Limit(what, demand, self.resistance("material", material, number(strength)))

    def _fasteners(self, joint: dict[str, Any], found: Found, flows: list[tuple[Array, Array, float]]) -> None:
        name, rows = joint["fastener"], joint.get("rows", 1)
        fastener = self.raw["fasteners"][name]
        if "shear_resistance" not in fastener:
            self.reasons.append(f"shear resistance of {name}")
            return
        resistance = self.resistance("fastener", name, number(fastener["shear_resistance"]))
        peaks = np.array([peak for _, _, peak in flows])
        found.numbers["spacing_needed"] = float((rows * resistance / peaks).min())
        zones = joint["spacing"]
        if not isinstance(zones, list):
            zones = [{"from": 0, "to": self.length, "spacing": zones}]
        demand = []
        for x, flow, _ in flows:
            force = 0.0
            for zone in zones:
                inside = (x[:, 0] >= number(zone["from"])) & (x[:, -1] <= number(zone["to"]))
                if inside.any():
                    force = max(force, largest(x[inside], flow[inside]).value * number(zone["spacing"]) / rows)
            demand.append(force)
        for zone in zones:
            low, high = fastener.get("spacing_min", 0), fastener.get("spacing_max", 1e9)
            if not number(low) <= number(zone["spacing"]) <= number(high):
                self.reasons.append(f"spacing of {name}")
        found.limits[f"fastener {name}"] = Limit("", np.array(demand), resistance)

    # --- pieces -------------------------------------------------------------------------------------------------------

    @cached_property
    def judged_pieces(self) -> dict[str, Found]:
        return {name: self._piece(name) for name in self.pieces}

    def _piece(self, name: str) -> Found:
        box, strengths = self.pieces[name], self.material(name).get("strengths", {})
        demands: dict[str, list[float]] = {"bending": [], "tension": [], "compression": [], "shear": []}
        places: list[dict[str, float]] = []
        for combination in self.strength:
            run = self.response(combination)
            x, top, bottom, mean, shear = self._stresses(run, name)
            sides = np.maximum(top, bottom), -np.minimum(top, bottom)
            pulled, pushed = (mean, -mean) if "bending" in strengths else sides
            for word, values in (
                ("bending", np.maximum(np.abs(top), np.abs(bottom))), ("tension", pulled), ("compression", pushed),
                ("shear", shear),
            ):  # fmt: skip
                peak = largest(x, values)
                demands[word].append(max(peak.value, 0.0))
                if word != "shear":
                    index = np.unravel_index(int(values.argmax()), values.shape)
                    places.append({"top": float(top[index]), "bottom": float(bottom[index]), "word": word})  # type: ignore[dict-item]
        found = Found({"shear_stress": max(demands["shear"])})
        if self.slipping or not strengths:
            return found
        for word in ("bending", "tension", "compression"):
            wanted = word in strengths or ("bending" not in strengths and word != "bending")
            if wanted and max(demands[word]) > 1e-9 * max(demands["bending"]):
                self._limit(found, name, word, np.array(demands[word]))
        self._edges(found, places)
        self._rib_piece(found, name)
        rolls = self.rolls(name, box.right - box.left > box.top - box.bottom)
        self._limit(found, name, "rolling_shear" if rolls else "shear", np.array(demands["shear"]))
        return found

    def _rib_piece(self, found: Found, name: str) -> None:
        """Bending of the most loaded rib once more, alone with its own width of the skin."""
        for start, end, section in self.sections:
            alone = rib_alone(section)
            if alone is None or alone[0] != name:
                continue
            _, load, own = alone
            box = self.pieces[name]
            demands: dict[str, list[float]] = {what.split(" ")[0]: [] for what in found.limits}
            for combination in self.strength:
                x, M = self.curve("moment", combination)
                M = load * M[(x[:, 0] >= start) & (x[:, -1] <= end)]
                top, bottom, mean = (
                    -box.E * M * (u - own.axis[1]) / own.EI for u in (box.top, box.bottom, box.middle[1])
                )
                for word, values in (
                    ("bending", np.maximum(np.abs(top), np.abs(bottom))), ("tension", mean), ("compression", -mean),
                ):  # fmt: skip
                    if word in demands:
                        demands[word].append(max(float(values.max()), 0.0))
            for word, values in demands.items():
                limit = found.limits[f"{word} in {name}"]
                found.limits[limit.what + RIB] = Limit(limit.what + RIB, np.array(values), limit.resistance)

    def _stresses(self, run: Fields, name: str) -> tuple[Array, Array, Array, Array, Array]:
        """Places, and normal stress at top, bottom and centroid, and the largest shear stress on a level cut."""
        box = self.pieces[name]
        rows = self.here(run, (name,))
        chosen = [row for row, _ in rows]
        per_moment = np.array([box.E / s.EI for _, s in rows])[:, None]
        axis = np.array([s.axis[1] for _, s in rows])[:, None]
        M, V = run.moment[chosen], run.shear[chosen]
        sigma = [-per_moment * M * (up - axis) for up in (box.top, box.bottom, box.middle[1])]
        shear = np.abs(V) * np.array([s.intensity(name) for _, s in rows])[:, None]
        return run.x[chosen], sigma[0], sigma[1], sigma[2], shear

    def _edges(self, found: Found, places: list[dict[str, Any]]) -> None:
        """Stress at the upper and lower edge where the normal stress uses the piece most."""
        if not found.limits:
            return
        governing = max(found.limits, key=lambda what: found.limits[what].utilisation)
        row = found.limits[governing].row
        here = [p for p in places if p["word"] == governing.split(" ")[0]][row]
        found.numbers["stress_top"], found.numbers["stress_bottom"] = here["top"], here["bottom"]

    # --- deflection and verdict ---------------------------------------------------------------------------------------

    @cached_property
    def sags(self) -> list[tuple[float, float, bool, float, float]]:
        """From, to, long-term, limit, deflection: span / limit between supports, twice the length beyond them."""
        limit = self.raw["member"].get("deflection_limit")
        if limit is None or self.slipping:
            return []
        if not self.sagging:
            self.reasons.append("no combination for deflection")
            return []
        at = sorted(number(s["at"]) for s in self.raw["member"]["supports"])
        spans = [(a, b, 1) for a, b in pairwise(at)]
        spans += [(0.0, at[0], 2)] if at[0] > 0 else []
        spans += [(at[-1], self.length, 2)] if at[-1] < self.length else []
        found = []
        for quantity in ("deflection", "deflection_long_term")[: 2 if self.creeps else 1]:
            for start, end, times in sorted(spans):
                worst = 0.0
                for combination in self.sagging:
                    x, w = self.curve(quantity, combination)
                    inside = (x[:, 0] >= start) & (x[:, -1] <= end)
                    worst = max(worst, largest(x[inside], np.abs(w[inside])).value)
                found.append((start, end, quantity != "deflection", times * (end - start) / number(limit), worst))
        return found

    @cached_property
    def utilisation(self) -> float | None:
        groups = [found.utilisation for found in (*self.joints, *self.judged_pieces.values())]
        groups += [deflection / limit for _, _, _, limit, deflection in self.sags]
        return max((each for each in groups if each is not None), default=None)

    @cached_property
    def verdict(self) -> str:
        if self.utilisation is not None and self.utilisation > 1:
            return "fail"
        inside = [at for name in self._bonded() for at in self.spans[name] if 0 < at < self.length]
        if inside:
            self.reasons.append("a bonded piece stops inside the member")
        if self.slipping:
            self.reasons.append("slip is not reckoned")
        return "not proven" if self.reasons or self.utilisation is None else "pass"

    def _bonded(self) -> set[str]:
        return {name for joint in self.raw["section"]["joints"] if "adhesive" in joint for name in joint["between"]}
