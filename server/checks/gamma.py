"""EN 1995-1-1 Annex B beside the exact solution: mechanically jointed members of two or three layers, step by step.

Shown as the code has it, for comparison; the check itself stands on the exact solution. Where strength is reckoned in
limit states the slip modulus is K_u = 2/3 K_ser (2.2.2), for deflection K_ser.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from server import documents
from server.checks.actions import Actions
from server.checks.crosssection import Body
from server.checks.curves import largest
from server.checks.holds import Hold
from server.checks.sag_steps import spans
from server.checks.slide import ULTIMATE, Slide, layers
from server.mechanics.graph import neighbours
from server.working import Working
from server.working.record import Given

GAMMA = "1/(1 + pi**2*EA/(k*L**2))"
MIDDLE_TWO = "g_1*EA_1*r_1/(g_1*EA_1 + EA_2)"
MIDDLE_THREE = "(g_1*EA_1*r_1 - g_3*EA_3*r_3)/(g_1*EA_1 + EA_2 + g_3*EA_3)"
EI_EF = "sum(EI_i) + sum(g*EA*a**2)"
FLOW = "g*EA*a*V/EI_ef"
CODE = "EN 1995-1-1:2004 Annex B"


@dataclass(frozen=True)
class Group:
    """Pieces that act as one layer of Annex B: alike in height and stiffness, each joined to the same neighbours."""

    names: tuple[str, ...]
    EA: float
    EI: float
    height: float


@dataclass(frozen=True)
class Stack:
    """Two or three layers from the top down, and the stiffness between neighbours."""

    groups: tuple[Group, ...]
    between: tuple[float, ...]


def stack_of(body: Body, each: Sequence[Hold], share: float = 1.0) -> Stack | None:
    """The layers as Annex B has them; None where the section is no stack of two or three full-length layers."""
    length = body.length
    if any(part.start > 0 or part.end < length for part in body.parts):
        return None
    found = layers(body)
    keys: dict[tuple[float, ...], list[int]] = {}
    for index, layer in enumerate(found):
        keys.setdefault(tuple(float(f"{x:.9g}") for x in (layer.height, layer.EA, layer.EI)), []).append(index)
    if not 2 <= len(keys) <= 3:
        return None
    groups = sorted(
        (
            (tuple(members), Group(
                tuple(body.parts[i].name for i in members),
                sum(found[i].EA for i in members),
                sum(found[i].EI for i in members),
                found[members[0]].height,
            ))
            for members in keys.values()
        ),
        key=lambda pair: -pair[1].height,
    )  # fmt: skip
    of = {i: place for place, (members, _) in enumerate(groups) for i in members}
    between: dict[tuple[int, int], float] = {}
    for hold in each:
        ends = sorted((of[hold.site.first.index], of[hold.site.second.index]))
        k = _even(hold, length)
        if k is None or ends[1] - ends[0] != 1:
            return None
        pair = (ends[0], ends[1])
        between[pair] = between.get(pair, 0.0) + k * (share if hold.by == "fasteners" else 1.0)
    if any(between.get(pair, 0.0) <= 0 for pair in pairwise(range(len(groups)))):
        return None
    joined = neighbours(len(body.parts), [(hold.site.first.index, hold.site.second.index) for hold in each])
    alike = all(
        len({tuple(sorted(of[other] for other, _ in joined[i])) for i in members}) == 1 for members, _ in groups
    )
    if not alike:
        return None
    return Stack(
        tuple(group for _, group in groups),
        tuple(between[pair] for pair in pairwise(range(len(groups)))),
    )


def _even(hold: Hold, length: float) -> float | None:
    """Stiffness with s_ef = 0.75 s_min + 0.25 s_max (9.1.3(3)); None where the spacings differ by more than 4."""
    if not hold.zones:
        return None
    k = np.array([zone.stiffness for zone in hold.zones])
    covered = sum(min(zone.end, length) - max(zone.start, 0.0) for zone in hold.zones)
    if covered < length * (1 - 1e-9) or k.min() <= 0 or k.max() > 4 * k.min() * (1 + 1e-9):
        return None
    return float(1 / (0.75 / k.max() + 0.25 / k.min()))


def write_annex_b(
    document: documents.MemberDocument, slide: Slide, actions: Actions, working: Working, group: str
) -> dict[str, object] | None:
    """The steps of Annex B and its block of the result; None where Annex B does not cover the member."""
    strength = ULTIMATE if document.basis.method == "limit-state" else 1.0
    stacks = [stack_of(slide.body, slide.holds.each, share) for share in (1.0, strength)]
    serving, carrying = stacks
    if serving is None or carrying is None or document.member.hinges or actions.shear is None:
        return None
    length, words = _length(document)
    V = largest(*actions.shear.whole.absolute())
    found: dict[str, object] = {"length": length}
    EI_ef = _stiffness(serving, length, words, working, group, "")[0]
    found["EI_ef"] = EI_ef
    where = ""
    if strength != 1.0:
        where = ", K_u = 2/3 K_ser"
    EI_strength, gammas, arms = _stiffness(carrying, length, words, working, group, where) if where else (
        _stiffness(serving, length, words, Working(record=False), group, "")
    )  # fmt: skip
    found["gamma"] = gammas
    flows = []
    for i in (0, len(carrying.groups) - 1) if len(carrying.groups) == 3 else (0,):
        layer = carrying.groups[i]
        flows.append(
            working.step(
                f"Flow at {_named(layer)}{where}", "q_B", FLOW,
                {
                    "g": (gammas[i], ""), "EA": (layer.EA, "N"), "a": (abs(arms[i]), "mm"), "V": (V.value, "N"),
                    "EI_ef": (EI_strength, "N*mm2"),
                },
                unit="N/mm", source=f"{CODE}, (B.10) over the spacing; greatest shear", group=group,
            )
        )  # fmt: skip
    found["flow"] = flows
    return found


def _named(layer: Group) -> str:
    return layer.names[0] if len(layer.names) == 1 else f"{layer.names[0]} and {len(layer.names) - 1} alike"


def _length(document: documents.MemberDocument) -> tuple[float, str]:
    """Span of Annex B (B.1.2): the span, 0.8 of it in continuous members, twice a cantilever."""
    parts = spans(document.member)
    inner = [(b - a, 1.0 if len(document.member.supports) == 2 else 0.8) for a, b, kind in parts if kind == "span"]
    outer = [(b - a, 2.0) for a, b, kind in parts if kind == "overhang"]
    span, factor = max(inner or outer, key=lambda each: each[0] * each[1])
    words = {1.0: "the span", 0.8: "0.8 x the span of a continuous member", 2.0: "twice the cantilever"}[factor]
    return span * factor, words


def _stiffness(
    stack: Stack, length: float, words: str, working: Working, group: str, where: str
) -> tuple[float, list[float], list[float]]:
    """Effective bending stiffness, gamma of each layer from the top down, and each layer's arm."""
    layers_, k = stack.groups, stack.between
    three = len(layers_) == 3
    gammas = [1.0] * len(layers_)
    outer = ((0, k[0]), (2, k[1])) if three else ((0, k[0]),)
    for i, stiffness in outer:
        gammas[i] = working.step(
            f"Share of composite action of {_named(layers_[i])}{where}", f"gamma_{i + 1}", GAMMA,
            {"EA": (layers_[i].EA, "N"), "k": (stiffness, "N/mm2"), "L": (length, "mm")},
            unit="", source=f"{CODE}, (B.5); k: K/s of all its joints, L: {words}", group=group,
        )  # fmt: skip
    r_1 = layers_[0].height - layers_[1].height
    values: dict[str, Given] = {
        "g_1": (gammas[0], ""), "EA_1": (layers_[0].EA, "N"), "EA_2": (layers_[1].EA, "N"), "r_1": (r_1, "mm"),
    }  # fmt: skip
    if three:
        r_3 = layers_[1].height - layers_[2].height
        values |= {"g_3": (gammas[2], ""), "EA_3": (layers_[2].EA, "N"), "r_3": (r_3, "mm")}
    a_2 = working.step(
        f"Distance of {_named(layers_[1])} from the neutral axis{where}", "a_2",
        MIDDLE_THREE if three else MIDDLE_TWO, values,
        unit="mm", source=f"{CODE}, (B.6); r: between centroids", group=group,
    )  # fmt: skip
    arms = [r_1 - a_2, a_2] + ([r_3 + a_2] if three else [])
    EI_ef = working.step(
        f"Effective bending stiffness by Annex B{where}", "EI_ef", EI_EF,
        {
            "EI_i": ([layer.EI for layer in layers_], "N*mm2"), "g": (gammas, ""),
            "EA": ([layer.EA for layer in layers_], "N"), "a": (arms, "mm"),
        },
        unit="N*mm2", source=f"{CODE}, (B.1)", group=group,
    )  # fmt: skip
    return EI_ef, gammas, arms
