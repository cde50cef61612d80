"""From the document's loads and combinations to shear, moment, reactions and deflection along the member."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from functools import cached_property
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks import moving, sideways
from server.checks.crosssection import Body, both_ways
from server.checks.curves import Among, Curve, Together
from server.errors import DocumentError, Fault, InputError
from server.mechanics import beam as mechanics
from server.mechanics.beam import Beam, Couple, LineLoad, PointLoad, Response, solve_alike

GRAVITY = 9.80665  # m/s2, standard (ISO 80000-3)


@dataclass(frozen=True, eq=False)
class Moving:
    """What rows with moving axles are: the position of each, the true envelopes, how many cases are the document's."""

    question: moving.Question
    written: moving.WrittenOut
    cases: int


@dataclass(frozen=True, eq=False)
class Actions:
    """Responses of the member: every combination, and the curves of those that are for strength or deflection.

    ``shear`` and ``moment`` are None where no combination is for strength, ``sag`` and ``long_term`` where none is
    for deflection; ``long_term`` also where no material creeps. ``sustained`` shares of each case that stay;
    ``each_case`` what every case does by itself with joints that do not slip; ``slips`` whether the joints' slip is in
    all the rest. With ``moving`` axles a combination has several rows, one for each position of the axles that governs
    something.
    """

    names: tuple[str, ...]
    durations: tuple[str | None, ...]
    strength: tuple[int, ...]
    deflection: tuple[int, ...]
    factors: NDArray[np.float64]
    cases: tuple[str, ...]
    case_loads: tuple[tuple[mechanics.Load, ...], ...]
    response: Response
    shear: Curve | None
    moment: Curve | None
    sag: Curve | None
    long_term: Curve | None
    shear_deformation: bool
    sustained: NDArray[np.float64]
    each_case: Response
    slips: bool = False
    moving: Moving | None = None
    across: Actions | None = None
    """Where the member bends about both axes: the lateral plane, to the right as this one is downward."""

    @property
    def breaks(self) -> NDArray[np.float64]:
        return self.response.breaks

    @cached_property
    def strength_names(self) -> tuple[str, ...]:
        return tuple(self.names[k] for k in self.strength)

    @cached_property
    def labels(self) -> tuple[str, ...]:
        """The combination of every row, with the place of its axles where they move."""
        if self.moving is None:
            return self.names
        placed = (moving.words(each) for each in self.moving.written.parked)
        return tuple(f"{name} ({where})" if where else name for name, where in zip(self.names, placed, strict=True))

    @property
    def asked(self) -> tuple[tuple[float, float], ...]:
        """The parts of the member whose shear was asked for without being foreseen, where axles move."""
        if self.moving is None or self.shear is None or self.shear.asked is None:
            return ()
        known = {*self.moving.question.shear, *self.moving.question.wants.ranges}
        return tuple(each for each in self.shear.asked if each not in known)


@dataclass(frozen=True)
class _Rows:
    """The rows of the combinations, and the cases that stand in them."""

    combination: tuple[int, ...]
    factors: NDArray[np.float64]
    shares: NDArray[np.float64]
    loads: tuple[tuple[mechanics.Load, ...], ...]
    moving: Moving | None = None


def act(document: documents.MemberDocument, body: Body, wants: moving.Wants | None = None) -> Actions:
    """Solve every case once and combine; mechanics' complaints come back with the document's path.

    ``wants`` what an earlier round of a check with moving axles found that it needs.
    """
    if both_ways(document, body):
        return _act_both_ways(document, body)
    deform = document.analysis.shear_deformation and all(s.section.shear_stiffness is not None for s in body.stretches)
    rows = _rows(document, body, deform, wants or moving.Wants())
    creeps = any(part.material.creep is not None for part in body.parts)
    beams = [_beam(document, body, deform), *([_beam(document, body, deform, creep=True)] if creeps else [])]
    solved, *softened = _solve(beams, rows.loads)
    return _actions(document, rows, solved, softened[0] if softened else None, deform, _parts(document, body))


def added_after(document: documents.MemberDocument, actions: Actions, before: Sequence[str]) -> Actions:
    """The same rows of combinations, with the same places of the axles, but without the cases that act ``before``.

    What stays on the member moves no axle's worst place for the force at a bond's end, so the rows serve both.
    """
    assert actions.moving is not None
    written = actions.moving.written
    dropped = [number for number, case in enumerate(actions.cases) if case in before]
    column = actions.moving.cases  # behind the document's cases stands one for every row and mover
    for combination in written.combination:
        for mover in actions.moving.question.moves(combination):
            dropped += [column] if actions.cases[mover.case] in before else []
            column += 1
    factors, shares = actions.factors.copy(), actions.sustained.copy()
    factors[:, dropped] = shares[:, dropped] = 0.0
    rows = _Rows(written.combination, factors, shares, actions.case_loads, actions.moving)
    return _actions(document, rows, actions.each_case, None, actions.shear_deformation, ())


def _act_both_ways(document: documents.MemberDocument, body: Body) -> Actions:
    """Both planes together; the lateral one stands beside the vertical one."""
    sideways.refuse_moving(document)
    deform = document.analysis.shear_deformation and all(
        s.section.shear_flexibility is not None for s in body.stretches
    )
    rows = _rows(document, body, deform=False, wants=moving.Wants())
    across = replace(rows, loads=sideways.lateral_loads(document))
    beam = _beam(document, body, deform=False)
    solved = sideways.solve_both(beam, body, rows.loads, across.loads, deform=deform)
    soft: tuple[Response | None, Response | None] = (None, None)
    if any(part.material.creep is not None for part in body.parts):
        soft = sideways.solve_both(beam, body, rows.loads, across.loads, deform=deform, creep=True)
    parts = _parts(document, body)
    down, right = (
        _actions(document, of, hard, late, deform, parts)
        for of, hard, late in zip((rows, across), solved, soft, strict=True)
    )
    return replace(down, across=right)


def _parts(document: documents.MemberDocument, body: Body) -> list[tuple[float, float]]:
    """The parts of the member that are asked about: its stretches, and what lies between supports and beyond them."""
    marks = sorted({0.0, body.length, *(support.at for support in document.member.supports)})
    return [*((stretch.start, stretch.end) for stretch in body.stretches), *pairwise(marks)]


def _actions(
    document: documents.MemberDocument,
    rows: _Rows,
    solved: Response,
    softened: Response | None,
    deform: bool,
    parts: Sequence[tuple[float, float]],
) -> Actions:
    combinations = list(document.combinations.values())
    combined = solved.combine(rows.factors)
    names = tuple(list(document.combinations)[k] for k in rows.combination)
    kinds = [combinations[k].for_ for k in rows.combination]
    strength = tuple(k for k, kind in enumerate(kinds) if kind in ("both", "strength"))
    deflection = tuple(k for k, kind in enumerate(kinds) if kind in ("both", "deflection"))

    curves = [combined.shear, combined.moment, combined.deflection]
    if softened is not None:
        curves.append(_long_term(combined, solved, softened, rows.shares))
    together = Together(combined.breaks, curves, parts)

    def curve(place: int, chosen: tuple[int, ...], asked: list[tuple[float, float]] | None = None) -> Curve | None:
        if place >= len(curves) or not chosen:
            return None
        own = slice(None) if len(chosen) == len(names) else list(chosen)
        picked = tuple(names[k] for k in chosen)
        return Curve(combined.breaks, curves[place][own], picked, asked, Among(together, place, own))

    return Actions(
        names=names,
        durations=tuple(combinations[k].duration for k in rows.combination),
        strength=strength,
        deflection=deflection,
        factors=rows.factors,
        cases=tuple(document.loads),
        case_loads=rows.loads,
        response=combined,
        shear=curve(0, strength, None if rows.moving is None else []),
        moment=curve(1, strength),
        sag=curve(2, deflection),
        long_term=curve(3, deflection),
        shear_deformation=deform,
        sustained=rows.shares,
        each_case=solved,
        moving=rows.moving,
    )


def _rows(document: documents.MemberDocument, body: Body, deform: bool, wants: moving.Wants) -> _Rows:
    """One row a combination; several where axles move."""
    combinations = list(document.combinations.values())
    factors, shares = (
        np.array([[getattr(c, name).get(case, 0.0) for case in document.loads] for c in combinations])
        for name in ("factors", "sustained")
    )
    loads = tuple(tuple(_loads(document, body, case)) for case in document.loads)
    movers = moving.movers_of(document)
    if not movers:
        return _Rows(tuple(range(len(combinations))), factors, shares, loads)
    beam = _beam(document, body, deform)
    creeps = any(part.material.creep is not None for part in body.parts)
    soft = _beam(document, body, deform, creep=True) if creeps else None
    still, *still_soft = _solve([beam] if soft is None else [beam, soft], loads)
    stretches = tuple((s.start, s.end) for s in body.stretches)
    question = moving.Question(
        movers=movers,
        beam=beam,
        soft=soft,
        still=still,
        still_soft=still_soft[0] if still_soft else None,
        factors=factors,
        shares=shares,
        strength=tuple(c.for_ in ("both", "strength") for c in combinations),
        deflection=tuple(c.for_ in ("both", "deflection") for c in combinations),
        shear=stretches,
        moment=stretches,
        spans=tuple((a, b) for a, b, _ in mechanics.span_ends(beam)),
        stepped=document.analysis.slip or any(j.effective_role == "fall-back" for j in document.section.joints),
        wants=wants,
    )
    written = moving.write_out(question, loads)
    whole = Moving(question, written, len(loads))
    return _Rows(written.combination, written.factors, written.shares, written.loads, whole)


def _solve(beams: Sequence[Beam], loads: Sequence[Sequence[mechanics.Load]]) -> list[Response]:
    try:
        return solve_alike(beams, loads)
    except InputError as error:
        raise DocumentError([Fault(f"member.{error.field}", str(error))]) from error


def _beam(document: documents.MemberDocument, body: Body, deform: bool, creep: bool = False) -> Beam:
    member = document.member
    stretches = []
    for s in body.stretches:
        if creep:
            EI, GA = s.section.softened
        else:
            EI, GA = s.section.properties.EI, s.section.shear_stiffness
        stretches.append(mechanics.Stretch(s.start, s.end, EI, GA if deform and GA is not None else np.inf))
    supports = [mechanics.Support(s.at, s.kind, s.stiffness or 0.0) for s in member.supports]
    return Beam(member.length, tuple(supports), tuple(member.hinges), tuple(stretches))


def _loads(document: documents.MemberDocument, body: Body, case: str) -> Iterable[mechanics.Load]:
    for load in document.loads[case]:
        if load.kind == "point":
            yield PointLoad(load.at, load.value)
        elif load.kind == "couple":
            yield Couple(load.at, load.value)
        elif load.kind == "line":
            yield LineLoad(load.from_, load.to, *load.ends)
        elif load.kind == "area":
            per_length = load.value * load.width
            yield LineLoad(load.from_, load.to, per_length, per_length)
        elif load.kind == "self-weight":
            yield from _self_weight(body)


def _self_weight(body: Body) -> Iterable[LineLoad]:
    for stretch in body.stretches:
        mass = stretch.section.properties.mass_per_length
        assert mass is not None  # documents refuses self-weight of a piece without density
        weight = mass * GRAVITY / 1000  # kg/m -> N/mm
        yield LineLoad(stretch.start, stretch.end, weight, weight)


def _long_term(
    combined: Response, solved: Response, softened: Response, shares: NDArray[np.float64]
) -> NDArray[np.float64]:
    """Deflection with the sustained part on the softened member (EN 1995-1-1:2004 2.2.3), (rows, m, 6).

    The sustained share is taken of the case itself, before the combination's factor. What stays sags by that much more
    than it does at once.
    """
    creep = softened.deflection - solved.deflection
    more = shares @ creep.reshape(len(creep), -1)
    return combined.deflection + more.reshape(combined.deflection.shape)
