"""The working of the member's statics: from the loads to reactions, shear, moment and deflection, by hand.

The solver has found the numbers; these steps reach the governing ones again by plain equilibrium, so
that a reader can follow them with a pocket calculator.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import NamedTuple

from server import documents
from server.checks.actions import GRAVITY, Actions
from server.checks.crosssection import Body, CrossSection
from server.checks.curves import Peak, largest
from server.mechanics.beam import Couple, LineLoad
from server.working import Working
from server.working.record import Given

STATICS = "equilibrium"
REACTION = "(sum(W*(a - x_1)) - C)/(x_2 - x_1)"
SHEAR = "sum(F)"
MOMENT = "sum(F*(x - a)) - C"


Placed = tuple[float, float]
"""A place along the member, and the force or couple there."""


class Resultants(NamedTuple):
    """Forces of one combination at their places, and the sum of its couples, up to a place along the member."""

    force: list[float]
    at: list[float]
    couple: float


@dataclass(frozen=True)
class Words:
    """How the quantities of one plane are called."""

    reaction: str
    shear: str
    moments: tuple[str, str]
    symbols: tuple[str, str, str]
    signs: str
    group: str


UPRIGHT = Words(
    "Reaction", "Shear", ("sagging moment", "hogging moment"), ("R", "V", "M"), "reactions up, loads down", "Member"
)
SIDEWAYS = Words(
    "Lateral reaction",
    "Lateral shear",
    ("lateral moment, right-hand side in tension", "lateral moment, left-hand side in tension"),
    ("R_l", "V_l", "M_l"),
    "reactions to the left, loads to the right",
    "Member, sideways",
)


class Statics:
    """Adds the steps for the places that govern, each once."""

    def __init__(
        self, document: documents.MemberDocument, body: Body, actions: Actions, working: Working, words: Words = UPRIGHT
    ) -> None:
        self.document, self.body, self.actions, self.working, self.words = document, body, actions, working, words
        self.aside: Statics | None = None
        if actions.across is not None:
            self.aside = Statics(document, body, actions.across, working, SIDEWAYS)
        self._shear_done: set[tuple[float, int]] = set()
        self._held: dict[int, list[tuple[float, float, float]]] = {}

    def loads(self) -> None:
        """Area loads on their width, and self-weight from the pieces' densities."""
        for case, loads in self.document.loads.items():
            for number, load in enumerate(loads, 1):
                if isinstance(load, documents.AreaLoad):
                    self.working.step(
                        f"Area load {number} of case {case} as a line load", "w", "p*b",
                        {"p": (load.value, "MPa"), "b": (load.width, "mm")},
                        unit="N/mm", source="load x loaded width", group="Loads",
                    )  # fmt: skip
                elif isinstance(load, documents.SelfWeight):
                    for section in _distinct(self.body):
                        self._self_weight(case, section)

    def _self_weight(self, case: str, section: CrossSection) -> None:
        weights = [(p.density or 0.0) * GRAVITY * 1e-9 for p in section.pieces]
        self.working.step(
            f"Self-weight of case {case}", "w", "sum(A*gamma)",
            {"A": (section.properties.pieces.area.tolist(), "mm2"), "gamma": (weights, "N/mm3")},
            unit="N/mm", source="gamma = density x 9.80665 m/s2", group="Loads",
        )  # fmt: skip

    def section(self) -> None:
        """Neutral axis and bending stiffness of every distinct section."""
        distinct = _distinct(self.body)
        for section in distinct:
            extent = "" if len(distinct) == 1 else f" ({_extent(self.body, section)})"
            parts = section.properties.pieces
            values: dict[str, Given] = {
                "E": ([p.E for p in section.pieces], "MPa"),
                "A": (parts.area.tolist(), "mm2"),
                "u": (parts.centroid[:, 1].tolist(), "mm"),
            }
            u_0 = self.working.step(
                f"Neutral axis, E-weighted{extent}", "u_0", "sum(E*A*u)/sum(E*A)", values,
                unit="mm", source=f"in order: {', '.join(p.name for p in section.parts)}", group="Section",
            )  # fmt: skip
            self.working.step(
                f"Bending stiffness{extent}", "EI", "sum(E*(I + A*(u - u_0)**2))",
                {**values, "I": (parts.inertia[:, 0].tolist(), "mm4"), "u_0": (u_0, "mm")},
                unit="N*mm2", source="parallel axes (Steiner), E-weighted", group="Section",
            )  # fmt: skip
            if self.aside is not None:
                self._both_ways(section, extent)
            GA = section.shear_stiffness if self.aside is None else None
            if self.actions.shear_deformation and GA is not None:
                how = (
                    "tau from the field of shear (warping of the section included)."
                    if section.by_field
                    else "tau = V S/(EI b) on horizontal cuts; integrated exactly between the corners of the pieces "
                    "(Gauss-Legendre)."
                )
                self.working.note(
                    f"Shear stiffness{extent}",
                    f"GA = V^2 / integral of tau^2/G over the section, with {how}",
                    value=GA, unit="N", source="strain energy of shear (form factor)", group="Section",
                )  # fmt: skip

    def _both_ways(self, section: CrossSection, extent: str) -> None:
        """Lateral bending stiffness and product, and what bending about both axes rests on."""
        parts, whole = section.properties.pieces, section.properties
        E, A = ([p.E for p in section.pieces], "MPa"), (parts.area.tolist(), "mm2")
        a = (parts.centroid[:, 0].tolist(), "mm")
        a_0 = self.working.step(
            f"Neutral axis across, E-weighted{extent}", "a_0", "sum(E*A*a)/sum(E*A)", {"E": E, "A": A, "a": a},
            unit="mm", source=f"in order: {', '.join(p.name for p in section.parts)}", group="Section",
        )  # fmt: skip
        self.working.step(
            f"Lateral bending stiffness{extent}", "EI_l", "sum(E*(I + A*(a - a_0)**2))",
            {"E": E, "A": A, "a": a, "a_0": (a_0, "mm"), "I": (parts.inertia[:, 1].tolist(), "mm4")},
            unit="N*mm2", source="parallel axes (Steiner), E-weighted", group="Section",
        )  # fmt: skip
        self.working.step(
            f"Product of bending stiffness{extent}", "EI_p", "sum(E*(I + A*(a - a_0)*(u - u_0)))",
            {
                "E": E, "A": A, "a": a, "a_0": (a_0, "mm"), "u": (parts.centroid[:, 1].tolist(), "mm"),
                "u_0": (float(whole.neutral_axis[1]), "mm"), "I": (parts.inertia[:, 2].tolist(), "mm4"),
            },
            unit="N*mm2", source="parallel axes, E-weighted; I: own products", group="Section",
        )  # fmt: skip
        if self.actions.shear_deformation and section.shear_flexibility is not None:
            for symbol, (i, j), word in (
                ("g_v", (0, 0), "down under shear down"),
                ("g_l", (1, 1), "sideways under shear sideways"),
                ("g_p", (0, 1), "across to each other"),
            ):
                self.working.note(
                    f"Shear strain per force, {word}{extent}",
                    "Strain energy of the shear field under both forces.",
                    value=float(section.shear_flexibility[i, j]), unit="1/N",
                    source="strain energy of shear (form factor)", group="Section", symbol=symbol,
                )  # fmt: skip

    def member(self) -> None:
        """Reactions of the governing combinations, and the greatest shear and moment."""
        actions = self.actions
        if actions.shear is None or actions.moment is None:
            return
        chosen, found = list(actions.strength), actions.moment.whole
        shear = largest(*actions.shear.whole.absolute())
        moments = [largest(found.max, found.at_max), largest(-found.min, found.at_min)]
        rows = dict.fromkeys([shear.row, *(m.row for m in moments if m.value > 0)])
        for row in rows:
            self._reactions(chosen[row])
        self.shear(shear.at, chosen[shear.row], shear.value)
        for peak, upper in zip(moments, (True, False), strict=True):
            if peak.value > 1e-9 * max(abs(moments[0].value), abs(moments[1].value), 1e-300):
                self._moment(peak, chosen[peak.row], upper)
        if self.aside is not None:
            self.aside.member()

    def _reactions(self, k: int) -> None:
        actions, supports = self.actions, sorted(self.document.member.supports, key=lambda s: s.at)
        name, group = actions.labels[k], self.words.group
        word, (R, _, _) = self.words.reaction, self.words.symbols
        whole = _resultants(*self._up_to(k, self.body.length))
        if len(supports) == 2 and not self.document.member.hinges and all(s.kind != "fixed" for s in supports):
            first, second = supports
            first_of, second_of = (f"{R}{n}" if "_" in R else f"{R}_{n}" for n in (1, 2))
            right = self.working.step(
                f"{word} at {second.at:g} mm, combination {name}", second_of, REACTION,
                {
                    "W": (whole.force, "N"), "a": (whole.at, "mm"), "C": (whole.couple, "N*mm"),
                    "x_1": (first.at, "mm"), "x_2": (second.at, "mm"),
                },
                unit="N", source=f"{STATICS}: moments about the left support", group=group,
            )  # fmt: skip
            self.working.step(
                f"{word} at {first.at:g} mm, combination {name}", first_of, f"sum(W) - {second_of}",
                {"W": (whole.force, "N"), second_of: (right, "N")}, unit="N", source=STATICS, group=group,
            )  # fmt: skip
            return
        forces = actions.response.reaction_force[k]
        given = sorted(zip((s.at for s in self.document.member.supports), forces, strict=True))
        listed = "; ".join(f"{at:g} mm: {force:,.5g} N" for at, force in given)
        self.working.note(
            f"{word}s, combination {name}",
            f"Direct stiffness method with exact fixed-end forces. {listed}. Equilibrium: the reactions sum to "
            f"{forces.sum():,.6g} N against {sum(whole.force):,.6g} N of load.",
            value=float(forces.sum()), unit="N", source="direct stiffness (matrix structural analysis)", group=group,
        )  # fmt: skip

    def shear(self, at: float, k: int, size: float, group: str = "") -> None:
        """Shear at a governing place, from the forces on its left; each place and combination once."""
        if not self.working.record or (at, k) in self._shear_done:
            return
        self._shear_done.add((at, k))
        left = min(self._both_sides(k, at), key=lambda side: abs(abs(sum(side.force)) - size))
        self.working.step(
            f"{self.words.shear} at {at:.6g} mm, combination {self.actions.labels[k]}", self.words.symbols[1], SHEAR,
            {"F": (left.force, "N")}, unit="N",
            source=f"{STATICS} of the part to the left: {self.words.signs}", group=group or self.words.group,
        )  # fmt: skip

    def _moment(self, peak: Peak, k: int, upper: bool) -> None:
        signed, word = peak.value if upper else -peak.value, self.words.moments[0 if upper else 1]
        left = min(self._both_sides(k, peak.at), key=lambda side: abs(_moment_of(side, peak.at) - signed))
        title = f"Greatest {word}, at {peak.at:.6g} mm, combination {self.actions.labels[k]}"
        self.working.step(
            title, self.words.symbols[2], MOMENT,
            {
                "F": (left.force, "N"), "a": (left.at, "mm"), "x": (peak.at, "mm"), "C": (left.couple, "N*mm"),
            },
            unit="N*mm", source=f"{STATICS} of the part to the left: {self.words.signs}", group=self.words.group,
        )  # fmt: skip

    def _both_sides(self, k: int, at: float) -> list[Resultants]:
        """Upward forces left of a place, without and with what stands there; at the left end that always counts."""
        forces, couples = self._up_to(k, at)
        held = [each for each in self._reactions_of(k) if each[0] <= at]
        upward = [(place, force) for place, force, _ in held] + [(place, -force) for place, force in forces]
        couples += [(place, turned) for place, _, turned in held]
        both = [(upward, couples)]
        if at > 0:
            both.insert(0, ([each for each in upward if each[0] < at], [each for each in couples if each[0] < at]))
        return [_resultants(forces or [(0.0, 0.0)], couples) for forces, couples in both]

    def _reactions_of(self, k: int) -> list[tuple[float, float, float]]:
        """Place, force and couple of every support in one combination."""
        if k not in self._held:
            response = self.actions.response
            places = [s.at for s in self.document.member.supports]
            forces, couples = response.reaction_force[k].tolist(), response.reaction_couple[k].tolist()
            self._held[k] = list(zip(places, forces, couples, strict=True))
        return self._held[k]

    def _up_to(self, k: int, at: float) -> tuple[list[Placed], list[Placed]]:
        """Downward forces and couples of one combination, left of a place and at it."""
        forces: list[Placed] = []
        couples: list[Placed] = []
        for factor, loads in zip(self.actions.factors[k].tolist(), self.actions.case_loads, strict=True):
            if factor == 0:
                continue
            for load in loads:
                if isinstance(load, LineLoad):
                    if load.start < at:
                        forces += [(place, factor * force) for place, force in _line_resultants(load, at)]
                elif load.at <= at:
                    (couples if isinstance(load, Couple) else forces).append((load.at, factor * load.value))
        return forces, couples


def _resultants(forces: Sequence[Placed], couples: Sequence[Placed]) -> Resultants:
    turned = sum((couple for _, couple in couples), 0.0)
    return Resultants([force for _, force in forces], [place for place, _ in forces], turned)


def _line_resultants(load: LineLoad, at: float) -> list[Placed]:
    """Centroids and forces of the part of a line load left of a place.

    One force; two triangles where the load changes sign, as its single resultant would lie outside it, or be nil beside
    a couple.
    """
    stop = min(load.end, at)
    first, length = load.value_start, stop - load.start
    last = first + (load.value_end - first) * length / (load.end - load.start)
    if first * last < 0:
        return [(load.start + length / 3, first * length / 2), (load.start + 2 * length / 3, last * length / 2)]
    if first + last == 0:
        return [(load.start + length / 2, 0.0)]
    return [(load.start + length * (first + 2 * last) / (3 * (first + last)), (first + last) / 2 * length)]


def _moment_of(left: Resultants, at: float) -> float:
    return sum(force * (at - place) for force, place in zip(left.force, left.at, strict=True)) - left.couple


def _distinct(body: Body) -> list[CrossSection]:
    found: list[CrossSection] = []
    for stretch in body.stretches:
        if not any(stretch.section is section for section in found):
            found.append(stretch.section)
    return found


def _extent(body: Body, section: CrossSection) -> str:
    return ", ".join(f"{s.start:g} to {s.end:g} mm" for s in body.stretches if s.section is section)
