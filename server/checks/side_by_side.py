"""Fastened pieces side by side: what the fasteners hand over where supports and loads bear on some of them alone.

Pieces that stand side by side bend alike and share by stiffness only as far as something hands the load over. What
bears is named in ``member.bears_on``; then the beams and the fasteners between them are solved together (each fastener
a spring of its slip modulus, at its place), and fasteners, pieces and deflection are judged by that. Where nothing is
named, all are taken to bear alike, which a person must confirm before issue; what the fasteners would have to do if one
body bore alone is told beside that question.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks.crosssection import Body, Part, Stretch
from server.checks.fastened import fastener_of, resistances
from server.checks.joints import JointCheck
from server.checks.piece_stresses import Bent
from server.checks.pieces import PieceCheck, fibre_demands, piece_strength
from server.checks.resistance import Claim, Judge, Strength
from server.checks.rules import ULTIMATE_SLIP, Origin, chosen
from server.checks.schedule import set_out
from server.checks.sharing import sharing
from server.checks.slide import ULTIMATE
from server.errors import InputError
from server.mechanics import beam as mechanics
from server.mechanics.graph import components
from server.mechanics.side_by_side import SideBySide, Tie, solve_side_by_side

Array = NDArray[np.float64]
WORDS = ", handed over side by side"
FORCE = "sqrt(F_v**2 + F_q**2)"
STRESS = "abs(E*M_i*(u - u_i)/EI_i)"
SOURCE = "beams side by side on the springs of the fasteners (Hetenyi 1946 for the continuous case)"


@dataclass(frozen=True, eq=False)
class Held:
    """One fastened joint between two bodies: its check, the bodies, and the places and stiffness of its fasteners."""

    check: JointCheck
    first: int
    second: int
    places: tuple[float, ...]
    stiffness: float
    strength: Strength

    @property
    def ties(self) -> list[Tie]:
        return [Tie(self.first, self.second, at, self.stiffness) for at in self.places]


@dataclass(frozen=True, eq=False)
class Handing:
    """What is handed over: by the joint's number in words, and how much more the side that bears deflects."""

    told: dict[int, str]
    ratio: float = 1.0
    settled: bool = False


@dataclass(frozen=True, eq=False)
class Abreast:
    """The bodies side by side, with EI about their own centroids, and the fastened joints between them."""

    bodies: tuple[tuple[Part, ...], ...]
    EI: tuple[float, ...]
    height: tuple[float, ...]
    held: tuple[Held, ...]
    centroid: dict[int, float]

    def named(self, body: int) -> str:
        return " and ".join(part.name for part in self.bodies[body])


def judge_side_by_side(
    document: documents.MemberDocument,
    body: Body,
    joints: Sequence[JointCheck],
    pieces: Sequence[PieceCheck],
    judge: Judge,
    *,
    upper_stiffness: bool,
) -> Handing | None:
    """Add what fasteners and pieces are asked for where not every piece bears; None where nothing is side by side."""
    abreast = _abreast(document, body, joints, judge)
    named = document.member.bears_on
    if abreast is None:
        if named:
            judge.findings.caution("load sharing", "bears_on: no fastened pieces side by side here ask what bears.")
        return None
    bears = [any(part.name in named for part in each) for each in abreast.bodies]
    if all(bears):
        words = f"{' and '.join(abreast.named(i) for i in range(len(bears)))} bear alike, so nothing is handed over."
        return Handing({held.check.site.index: words for held in abreast.held}, settled=True)
    if any(bears):
        return _judged(document, body, abreast, bears, pieces, judge, upper_stiffness)
    return _tried(document, abreast, judge)


def _abreast(
    document: documents.MemberDocument, body: Body, joints: Sequence[JointCheck], judge: Judge
) -> Abreast | None:
    """The bodies between fastened joints side by side; what keeps them from being solved is named."""
    stretch = body.stretches[0]
    apart = [check for check in joints if not check.site.bonded and sharing(check.site, stretch) == "side by side"]
    if not apart or judge.actions.shear is None:
        return None
    why = ""
    if len(body.stretches) > 1:
        why = "pieces stop along the member"
    elif document.member.hinges:
        why = "the member has hinges"
    elif judge.actions.moving is not None:
        why = "axles move"
    if why:
        if document.member.bears_on:
            judge.findings.miss(f"what fasteners side by side hand over: {why}, for which there is no method here.")
        return None
    bodies, parts = _bodies(stretch, {check.site.index for check in apart}), stretch.section.parts
    of = {parts[i].index: number for number, group in enumerate(bodies) for i in group}
    held = [one for check in apart for one in [_held(check, of, document, body, judge)] if one is not None]
    if len(held) < len(apart):
        return None
    pieces = stretch.section.properties.pieces
    E = np.array([piece.E for piece in stretch.section.pieces])
    EI, height = [], []
    for group in bodies:
        weight = E[group] * pieces.area[group]
        u = float(weight @ pieces.centroid[group, 1] / weight.sum())
        EI.append(float((E[group] * pieces.inertia[group, 0]).sum() + weight @ (pieces.centroid[group, 1] - u) ** 2))
        height.append(u)
    by_body = tuple(tuple(parts[i] for i in group) for group in bodies)
    centroid = {part.index: float(pieces.centroid[i, 1]) for i, part in enumerate(parts)}
    return Abreast(by_body, tuple(EI), tuple(height), tuple(held), centroid)


def _bodies(stretch: Stretch, apart: set[int]) -> list[list[int]]:
    place = {part.index: i for i, part in enumerate(stretch.section.parts)}
    ends = [(place[s.first.index], place[s.second.index]) for s in stretch.section.sites if s.index not in apart]
    return [list(group) for group in components(len(place), ends)]


def _held(
    check: JointCheck, of: dict[int, int], document: documents.MemberDocument, body: Body, judge: Judge
) -> Held | None:
    """One joint's fasteners as springs; what is lacking is named, unless it is named already."""
    site, fastening = check.site, check.fastening
    if fastening is None or fastening.strength is None or not site.spec.spacing:
        return None
    name, fastener = fastener_of(site, document)
    if fastener.slip_modulus is None:
        judge.findings.miss(f"slip modulus of fastener {name!r} (joint {site.id}): what it hands over side by side.")
        return None
    out = set_out(document, body, site, None)
    places = () if out is None else tuple(float(str(x)) for x in np.ravel(np.asarray(out["places"])))
    first, second = of[site.first.index], of[site.second.index]
    if first == second or len(places) < 2:
        judge.findings.miss(f"joint {site.id}: two fasteners at least hand a load over side by side.")
        return None
    ultimate = document.basis.method == "limit-state" and ULTIMATE_SLIP in chosen(document)
    K = fastener.slip_modulus * (ULTIMATE if ultimate else 1.0) * site.spec.rows
    return Held(check, first, second, places, K, fastening.strength)


def _solve(document: documents.MemberDocument, abreast: Abreast, bears: Sequence[bool], judge: Judge) -> SideBySide:
    supports = [mechanics.Support(s.at, s.kind, s.stiffness or 0.0) for s in document.member.supports]
    ties = [tie for held in abreast.held for tie in held.ties]
    loads = judge.actions.case_loads
    return solve_side_by_side(document.member.length, abreast.EI, bears, supports, ties, loads)


def _forces(abreast: Abreast, solved: SideBySide, judge: Judge) -> Iterator[tuple[Held, Array, Array]]:
    """Of every joint: upright force on one fastener under each strength combination where it is greatest, and where."""
    actions, first = judge.actions, 0
    for held in abreast.held:
        count = len(held.places)
        force = np.abs(solved.tie[first : first + count] @ actions.factors[list(actions.strength)].T)
        first += count
        force /= held.check.site.spec.rows
        worst = (force >= force.max(axis=0) * (1 - 1e-6)).argmax(axis=0)
        yield held, force.max(axis=0), np.asarray(held.places)[worst]


def _along(held: Held) -> Array:
    """Force on one fastener from the flow along the joint, under each strength combination."""
    fastening = held.check.fastening
    assert fastening is not None
    claim = fastening.claim
    return np.zeros(len(fastening.demand.flow)) if claim is None else claim.demand


def _judged(
    document: documents.MemberDocument,
    body: Body,
    abreast: Abreast,
    bears: Sequence[bool],
    pieces: Sequence[PieceCheck],
    judge: Judge,
    upper_stiffness: bool,
) -> Handing:
    try:
        solved = _solve(document, abreast, bears, judge)
    except InputError as error:
        judge.findings.miss(f"what fasteners side by side hand over: {error}")
        return Handing({})
    on = " and ".join(abreast.named(i) for i, yes in enumerate(bears) if yes)
    told = {}
    for held, upright, at in _forces(abreast, solved, judge):
        values = {"F_v": (upright, "N"), "F_q": (_along(held), "N")}
        words = f"{SOURCE}; supports and loads bear on {on}. F_v: upright, F_q: from the flow along the joint"
        origin = Origin("Force on the fastener that hands over most", FORCE, values, {}, words)
        strength = held.strength._replace(what=held.strength.what + WORDS)
        stretch = np.zeros(len(at), dtype=np.intp)
        held.check.claims.append(Claim(strength, "F_h", origin.demand(), at, stretch, origin))
        most = int(upright.argmax())
        held.check.result["handed_by_one"] = float(upright[most])
        told[held.check.site.index] = (
            f"supports and loads bear on {on}; the fastener at {at[most]:.6g} mm hands {upright[most]:,.4g} N over."
        )
    if not upper_stiffness:
        by_name = {check.part.name: check for check in pieces}
        for number, parts in enumerate(abreast.bodies):
            for part in parts:
                check = by_name[part.name]
                if check.claims:
                    check.claims = [*check.claims, *_bending(part, number, abreast, solved, judge)]
    return Handing(told, _ratio(document, abreast, bears, solved, judge), settled=True)


def _bending(part: Part, body: int, abreast: Abreast, solved: SideBySide, judge: Judge) -> Iterator[Claim]:
    """Bending of a piece by the moment that its own body has, as the fasteners hand it over."""
    actions = judge.actions
    moment = solved.moment[body] @ actions.factors[list(actions.strength)].T  # (2, k, c)
    flat, places = moment.reshape(-1, moment.shape[-1]), np.tile(solved.places, 2)
    ends = [flat.argmax(axis=0), flat.argmin(axis=0)]
    columns = np.arange(flat.shape[1])
    M, at = np.stack([flat[i, columns] for i in ends]), np.stack([places[i] for i in ends])
    levels = np.array([part.top, part.bottom, abreast.centroid[part.index]])[:, None, None]
    E, EI, u = part.material.E, abreast.EI[body], abreast.height[body]
    stress = -E * M * (levels - u) / EI
    bent = Bent(stress, M, at, np.zeros(2, dtype=np.intp))
    for word, demand in fibre_demands(part, bent):
        entry = demand.argmax(axis=0)
        worst = demand[entry, columns]
        strength = piece_strength(part, word, f"{word} in {part.name}{WORDS}", judge)
        if worst.max() <= 0 or strength is None:
            continue
        fibre = np.abs(np.abs(stress[:, entry, columns]) - worst).argmin(axis=0)
        arrays = {"M_i": (M[entry, columns], "N*mm"), "u": (levels[fibre, 0, 0], "mm")}
        given = {"E": (E, "MPa"), "u_i": (u, "mm"), "EI_i": (EI, "N*mm2")}
        words = f"{SOURCE}; M_i, EI_i of {abreast.named(body)} alone"
        origin = Origin("Normal stress, side by side", STRESS, arrays, given, words)
        over = np.where(worst > 0, origin.demand(), 0.0)
        yield Claim(strength, "sigma_h", over, at[entry, columns], np.zeros(len(columns), dtype=np.intp), origin)


def _ratio(
    document: documents.MemberDocument, abreast: Abreast, bears: Sequence[bool], solved: SideBySide, judge: Judge
) -> float:
    """Greatest deflection of what bears over that of all bodies as one, under the combinations for deflection."""
    actions = judge.actions
    factors = actions.factors[list(actions.deflection or actions.strength)].T
    supports = [mechanics.Support(s.at, s.kind, s.stiffness or 0.0) for s in document.member.supports]
    one = solve_side_by_side(document.member.length, [sum(abreast.EI)], [True], supports, [], actions.case_loads)
    whole = float(np.abs(one.deflection @ factors).max())
    own = float(np.abs(solved.deflection @ factors).max())
    return max(own / whole, 1.0) if whole > 0 else 1.0


def _tried(document: documents.MemberDocument, abreast: Abreast, judge: Judge) -> Handing:
    """Nothing says what bears: every body alone in turn, for the question that somebody must answer."""
    worst: dict[int, tuple[float, str, float]] = {}
    for number in range(len(abreast.bodies)):
        bears = [i == number for i in range(len(abreast.bodies))]
        try:
            solved = _solve(document, abreast, bears, judge)
        except InputError as error:
            judge.findings.miss(f"what fasteners side by side hand over: {error}")
            return Handing({})
        for held, upright, at in _forces(abreast, solved, judge):
            use = np.hypot(upright, _along(held)) / resistances(held.strength)
            row = int(np.nan_to_num(use).argmax())
            found = (float(np.nan_to_num(use)[row]), abreast.named(number), float(at[row]))
            index = held.check.site.index
            worst[index] = max(worst.get(index, (0.0, "", 0.0)), found)
    told = {}
    for held in abreast.held:
        most, name, place = worst[held.check.site.index]
        told[held.check.site.index] = (
            f"if supports and loads bore on {name} alone, the fastener at {place:.6g} mm would be used to {most:.3g}; "
            "name what bears in member.bears_on, and it is judged."
        )
    return Handing(told)
