"""Moving axles in a member check: every combination with them is written out, one row for each position that governs.

For each action the exact envelope over all positions (`server.mechanics.moving_envelope`) tells where its extremes
lie and where the axles stand for them. A combination then stands in the check once for each of these positions, with
its axles as loads that stay: what is extreme over all positions is extreme over the rows, and every number can be
followed from axles at places that are named. Where joints slip, the envelopes of the rigid member do not know the
worst position for a joint; rows at even steps, and closer ones where a joint carries most, find it.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.mechanics.beam import Beam, Load, Response
from server.mechanics.influence import Influence, Lines, Quantity
from server.mechanics.moving import Placing, Train, placing, travel
from server.mechanics.moving_envelope import Envelope, Runner, standing

Array = NDArray[np.float64]
Ranges = tuple[tuple[float, float], ...]
STEPS = 36  # positions over the reach of a train at which slip is looked at first
ARMS = (0.0, 40.0, -40.0, 400.0, -400.0)  # mm, between moment and shear where a bond ends
INSIDE = (0.0, 6.0, -6.0, 12.0, -12.0, 25.0, -25.0, 60.0, -60.0, 150.0, -150.0)  # mm, of an axle from such an end
SAME_PLACE = 1e-6  # mm, within which axles stand alike


@dataclass(frozen=True)
class Mover:
    """One moving load: the number of its case, and its train."""

    case: int
    train: Train


@dataclass(frozen=True)
class Row:
    """One combination with its axles at one position: a placing for each of its movers."""

    combination: int
    placings: tuple[Placing, ...]

    @property
    def key(self) -> tuple[object, ...]:
        """What tells two rows apart."""
        return (
            self.combination,
            *((tuple(round(at / SAME_PLACE) for at in each.at), each.forces) for each in self.placings),
        )


@dataclass(frozen=True)
class Wants:
    """What the check found that it needs beyond the ordinary rows: further ranges of shear, and rows."""

    ranges: Ranges = ()
    rows: tuple[Row, ...] = ()


@dataclass(frozen=True)
class Question:
    """The combinations of a member with movers, and over which parts of it each action is asked for.

    ``beam`` and ``soft`` are the member as built and after creep; ``still`` and ``still_soft`` what each case's other
    loads do on them; ``factors`` and ``shares`` one row a combination, one column a case.
    """

    movers: tuple[Mover, ...]
    beam: Beam
    soft: Beam | None
    still: Response
    still_soft: Response | None
    factors: Array
    shares: Array
    strength: tuple[bool, ...]
    deflection: tuple[bool, ...]
    shear: Ranges
    moment: Ranges
    spans: Ranges
    stepped: bool
    wants: Wants = field(default_factory=Wants)

    @cached_property
    def influence(self) -> Influence:
        """Influence lines of the member as built."""
        return Influence(self.beam)

    @cached_property
    def influence_soft(self) -> Influence:
        """Influence lines of the member after creep."""
        assert self.soft is not None
        return Influence(self.soft)

    def moves(self, combination: int) -> list[Mover]:
        """The movers with a part in a combination."""
        return [m for m in self.movers if self.factors[combination, m.case] or self.shares[combination, m.case]]

    def envelope(self, combination: int, quantity: Quantity, *, long_term: bool = False) -> Envelope:
        """The envelope of one quantity in one combination."""
        factors, shares = self.factors[combination], self.shares[combination]
        runners = []
        for mover in self.moves(combination):
            f, s = float(factors[mover.case]), float(shares[mover.case])
            states = [(self.influence, f - s), (self.influence_soft, s)] if long_term else [(self.influence, f)]
            runners.append(Runner(mover.train, states))
        curves = getattr(self.still, quantity)
        if long_term:
            assert self.still_soft is not None
            soft = getattr(self.still_soft, quantity)
            static = np.tensordot(factors - shares, curves, 1) + np.tensordot(shares, soft, 1)
        else:
            static = np.tensordot(factors, curves, 1)
        return Envelope(runners, quantity, standing(self.still.breaks, static), self.still.breaks)


@dataclass(frozen=True)
class WrittenOut:
    """The combinations row by row: whose row it is, factors and shares (rows, cases), the loads of every case.

    The first cases are the document's own; behind them stands one for every row and mover, with its axles.
    """

    combination: tuple[int, ...]
    factors: Array
    shares: Array
    loads: tuple[tuple[Load, ...], ...]
    parked: tuple[tuple[Placing, ...], ...]
    envelopes: Mapping[str, tuple[Envelope, ...]]


def movers_of(document: documents.MemberDocument) -> tuple[Mover, ...]:
    """Every moving load of the document, with the number of its case."""
    found = []
    for number, loads in enumerate(document.loads.values()):
        for load in loads:
            if isinstance(load, documents.MovingLoad):
                offsets, forces = zip(*load.axles, strict=True)
                start = 0.0 if load.from_ is None else load.from_
                end = document.member.length if load.to is None else load.to
                found.append(Mover(number, Train(offsets, forces, start, end)))
    return tuple(found)


def write_out(question: Question, still: Sequence[tuple[Load, ...]]) -> WrittenOut:
    """Write every combination out in rows; one without a mover stays one row."""
    rows: dict[tuple[object, ...], Row] = {}
    for k in range(len(question.factors)):
        listed = _rows(question, k) if question.moves(k) else iter([Row(k, ())])
        for row in listed:
            rows.setdefault(row.key, row)
    kept = sorted(rows.values(), key=lambda row: row.combination)
    cases = [
        (r, mover)
        for r, row in enumerate(kept)
        for mover in zip(question.moves(row.combination), row.placings, strict=True)
    ]
    base = question.factors.shape[1]
    factors, shares = np.zeros((2, len(kept), base + len(cases)))
    of = [row.combination for row in kept]
    factors[:, :base], shares[:, :base] = question.factors[of], question.shares[of]
    loads = list(still)
    for column, (r, (mover, placed)) in enumerate(cases, base):
        factors[r, column] = question.factors[of[r], mover.case]
        shares[r, column] = question.shares[of[r], mover.case]
        loads.append(tuple(placed.loads()))
    parked = tuple(row.placings for row in kept)
    return WrittenOut(tuple(of), factors, shares, tuple(loads), parked, _envelopes(question))


def _rows(question: Question, k: int) -> Iterator[Row]:
    """Every position of one combination that governs something."""
    if question.strength[k]:
        yield from _of(k, question.envelope(k, "shear"), (*question.shear, *question.wants.ranges))
        yield from _of(k, question.envelope(k, "moment"), question.moment)
        yield from _about_ends(question, k)
    if question.deflection[k]:
        yield from _of(k, question.envelope(k, "deflection"), question.spans)
        if question.soft is not None:
            yield from _of(k, question.envelope(k, "deflection", long_term=True), question.spans)
    yield from _of_reactions(question, k)
    if question.stepped:
        yield from _stepped(question, k)
    yield from (row for row in question.wants.rows if row.combination == k)


def _of(k: int, envelope: Envelope, ranges: Ranges) -> Iterator[Row]:
    for pair in envelope.extremes(ranges):
        for extreme in pair:
            yield Row(k, extreme.placings)


def _about_ends(question: Question, k: int) -> Iterator[Row]:
    """Where pieces begin and stop: the worst positions for weighted sums of moment and shear there.

    The end of a bond answers to both at once, M + l V with a length l of its own; what stays on the member does not
    change the worst position for one place, so the lines of the moving load alone decide. The bond picks its force up
    over a short length, so an axle is worst somewhat inside the end: each one stands at several short distances too.
    """
    length, influence = question.beam.length, question.influence
    ends = [end for _, end in question.moment if end < length]
    if not ends:
        return
    x = np.repeat(np.array(ends), 2 * len(ARMS))
    right = np.tile(np.repeat([False, True], len(ARMS)), len(ends))
    arms = np.tile(np.array(ARMS), 2 * len(ends))[:, None, None]
    moment, shear = influence.moment(x, right), influence.shear(x, right)
    runs = []
    for mover in question.moves(k):
        f = float(question.factors[k, mover.case])
        left, after = f * (moment.left + arms * shear.left), f * (moment.right + arms * shear.right)
        runs.append((mover, travel(Lines(x, left, after), influence.knots, mover.train)))
    for index in range(len(x)):
        for sense in (0, 1):
            placed = [placing(mover.train, run[sense], index, influence, ends) for mover, run in runs]
            yield Row(k, tuple(placed))
            if index % len(ARMS) == 0 and not right[index]:
                yield from _beside(k, x[index], [mover for mover, _ in runs], placed)


def _beside(k: int, end: float, movers: Sequence[Mover], placed: Sequence[Placing]) -> Iterator[Row]:
    """Every axle at short distances from an end, the other trains as they stand."""
    for position, mover in enumerate(movers):
        for turned, faced in ((False, mover.train), (True, mover.train.turned)):
            for offset in faced.offsets:
                for distance in INSIDE:
                    moved = list(placed)
                    moved[position] = stand(mover.train, end + distance - offset, turned=turned)
                    if moved[position].at:
                        yield Row(k, tuple(moved))


def _of_reactions(question: Question, k: int) -> Iterator[Row]:
    """Where every support's force and couple is greatest and least."""
    influence, movers = question.influence, question.moves(k)
    for lines in influence.reactions():
        runs = []
        for mover in movers:
            f = float(question.factors[k, mover.case])
            runs.append(travel(Lines(lines.x, f * lines.left, f * lines.right), influence.knots, mover.train))
        for support in range(len(lines.x)):
            for sense in (0, 1):
                yield Row(
                    k,
                    tuple(
                        placing(mover.train, run[sense], support, influence, exact=True)
                        for mover, run in zip(movers, runs, strict=True)
                    ),
                )


def _stepped(question: Question, k: int) -> Iterator[Row]:
    """Every train at even steps over its reach, both ways; the others stand where the moment is greatest meanwhile."""
    movers = question.moves(k)
    whole = ((0.0, question.beam.length),)
    ((most, _),) = question.envelope(k, "moment").extremes(whole)
    for position, mover in enumerate(movers):
        for train in (mover.train, mover.train.turned):
            low, high = train.reach
            for datum in np.linspace(low, high, STEPS + 1):
                placed = list(most.placings)
                placed[position] = stand(mover.train, float(datum), turned=train is not mover.train)
                if placed[position].at:
                    yield Row(k, tuple(placed))


def stand(train: Train, datum: float, *, turned: bool) -> Placing:
    """The train with its datum at one place."""
    faced = train.turned if turned else train
    on = [
        (min(max(datum + o, train.start), train.end), f)
        for o, f in zip(faced.offsets, faced.forces, strict=True)
        if train.start - SAME_PLACE <= datum + o <= train.end + SAME_PLACE
    ]
    return Placing(tuple(at for at, _ in on), tuple(f for _, f in on), datum, turned)


def closer(row: Row, movers: Sequence[Mover]) -> Iterator[Row]:
    """Rows about one at a step: its axles moved by parts of the step, one train at a time."""
    for position, mover in enumerate(movers):
        low, high = mover.train.reach
        step = (high - low) / STEPS
        placed = row.placings[position]
        for part in (-0.75, -0.5, -0.25, 0.25, 0.5, 0.75):
            at = placed.datum + part * step
            if low <= at <= high:
                moved = list(row.placings)
                moved[position] = stand(mover.train, at, turned=placed.turned)
                if moved[position].at:
                    yield Row(row.combination, tuple(moved))


def _envelopes(question: Question) -> dict[str, tuple[Envelope, ...]]:
    """The envelopes to be drawn, by the name of the diagram."""
    names: tuple[tuple[str, Quantity, tuple[bool, ...], bool], ...] = (
        ("shear", "shear", question.strength, False),
        ("moment", "moment", question.strength, False),
        ("deflection", "deflection", question.deflection, False),
        ("deflection_long_term", "deflection", question.deflection, True),
    )
    return {
        name: tuple(
            question.envelope(k, quantity, long_term=late)
            for k, wanted in enumerate(chosen)
            if wanted and question.moves(k)
        )
        for name, quantity, chosen, late in names
        if not late or question.soft is not None
    }


def words(placings: Sequence[Placing]) -> str:
    """Where the axles of a row stand: 'axles at 1200 mm, 2400 mm'."""
    places = [f"{at:.6g} mm" for each in placings for at in each.at]
    if not places:
        return ""
    turned = ", turned round" if any(each.turned for each in placings) else ""
    return f"axle{'s' if len(places) > 1 else ''} at {', '.join(places)}{turned}"
