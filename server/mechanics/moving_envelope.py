"""The envelope of an action along a member: loads that stay, and trains of axles that travel independently.

The value at one place is exact (`server.mechanics.moving`); along the member the envelope is looked at on both sides of
every place where it may jump, at places between, and ever closer around its tops. Units: N, mm, N*mm.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.mechanics.influence import Influence, Lines, Quantity
from server.mechanics.moving import SAME, Both, Placing, Train, placing, travel
from server.mechanics.piecewise import evaluate

Array = NDArray[np.float64]
SAMPLES = 24  # places between two special ones where an envelope is looked at before the search closes in
MOST_TOPS = 3
CLOSER, ROUNDS = 12, 3  # parts into which the neighbourhood of the best place is cut, and how often
MOST_BENDS = 600
NEAR_BEST = 0.05  # share of an envelope's range within which a lower top may hide the highest


@dataclass(frozen=True)
class Extreme:
    """One extreme of an envelope: its value, its place, and where every train stands for it."""

    value: float
    at: float
    placings: tuple[Placing, ...]


Static = Callable[[Array, NDArray[np.bool_]], Array]


@dataclass(frozen=True)
class Runner:
    """A train that travels on its own, and what its axles act on.

    Parameters
    ----------
    train : Train
        Its axles [mm, N].
    on : sequence of (Influence, float)
        The states of the member that carry it with the factor of each, such as the member as built, and as it is after
        creep for the part of the load that stays [-].
    """

    train: Train
    on: Sequence[tuple[Influence, float]]


@dataclass(frozen=True)
class Envelope:
    """What trains that travel independently of each other add to the actions of loads that stay.

    Parameters
    ----------
    runners : sequence of Runner
        The trains; all states are of one member, with the same supports and breaks [mm, N, -].
    quantity : str
        "shear", "moment" or "deflection" [-].
    static : callable
        What the other loads give at places x [mm], just left or just right of them.
    breaks : numpy.ndarray
        Where that curve may jump or bend [mm].
    """

    runners: Sequence[Runner]
    quantity: Quantity
    static: Static
    breaks: Array

    @property
    def _member(self) -> Influence:
        return self.runners[0].on[0][0]

    def at(self, x: Array, right: NDArray[np.bool_]) -> tuple[Array, list[Both]]:
        """The envelope at places x: greatest and least values (2, n), and where every train stands for them.

        Parameters
        ----------
        x : numpy.ndarray
            Places [mm].
        right : numpy.ndarray
            Whether just right of each place, else just left [-].
        """
        total = np.array([self.static(x, right)] * 2, dtype=float)
        known: dict[int, Lines] = {}
        runs: list[Both] = []
        for runner in self.runners:
            left, after = np.zeros(1), np.zeros(1)
            for influence, factor in runner.on:
                if id(influence) not in known:
                    known[id(influence)] = influence.lines(self.quantity, x, right)
                lines = known[id(influence)]
                left, after = left + factor * lines.left, after + factor * lines.right
            run = travel(Lines(x, left, after), self._member.knots, runner.train)
            total += np.array([run[0].value, run[1].value])
            runs.append(run)
        return total, runs

    def extremes(self, ranges: Sequence[tuple[float, float]]) -> list[tuple[Extreme, Extreme]]:
        """The greatest and the least value in every range, inside it on both sides of every jump.

        Parameters
        ----------
        ranges : sequence of (float, float)
            From where to where [mm].
        """
        same = self._member.beam.same_place
        x, right = self._sampled(ranges)
        values, _ = self.at(x, right)
        best: list[_Best] = []
        near: list[_Near] = []
        for number, (low, high) in enumerate(ranges):
            there = np.flatnonzero((x >= low - same) & (x <= high + same))
            there = there[~((x[there] <= low + same) & ~right[there]) & ~((x[there] >= high - same) & right[there])]
            for sense in (0, 1):
                signed = (1 - 2 * sense) * values[sense, there]
                best.append(_best(x[there], right[there], signed))
                near += [
                    _Near(2 * number + sense, *ends)
                    for top in _tops(signed)
                    if (ends := _neighbours(x[there], right[there], top, same)) is not None
                ]
        for _ in range(ROUNDS):
            near = self._closer(near, best)
        return self._written(best, sorted({end for each in ranges for end in each}))

    def _closer(self, near: list[_Near], best: list[_Best]) -> list[_Near]:
        """Look between the neighbours of every top once more; keep what is better."""
        if not near:
            return []
        x = np.linspace([each.low for each in near], [each.high for each in near], CLOSER + 1, axis=1)
        right = np.ones(x.shape, dtype=bool)
        right[:, -1] = False
        values = self.at(x.ravel(), right.ravel())[0].reshape(2, *x.shape)
        closer = []
        for row, each in enumerate(near):
            signed = (1 - 2 * (each.of % 2)) * values[each.of % 2, row]
            found = _best(x[row], right[row], signed)
            if found.signed > best[each.of].signed + SAME * abs(found.signed):
                best[each.of] = found
            top = int(signed.argmax())
            closer.append(_Near(each.of, float(x[row, max(top - 1, 0)]), float(x[row, min(top + 1, CLOSER)])))
        return closer

    def _written(self, best: Sequence[_Best], ends: Sequence[float]) -> list[tuple[Extreme, Extreme]]:
        """The extremes with the positions of all trains, in pairs."""
        values, runs = self.at(np.array([each.at for each in best]), np.array([each.right for each in best]))
        found = [
            Extreme(
                float(values[i % 2, i]),
                each.at,
                tuple(
                    placing(runner.train, run[i % 2], i, self._member, ends)
                    for runner, run in zip(self.runners, runs, strict=True)
                ),
            )
            for i, each in enumerate(best)
        ]
        return list(zip(found[::2], found[1::2], strict=True))

    def _sampled(self, ranges: Sequence[tuple[float, float]]) -> tuple[Array, NDArray[np.bool_]]:
        """Places over all ranges: both sides of every special one, and some between."""
        same = self._member.beam.same_place
        low, high = min(r[0] for r in ranges), max(r[1] for r in ranges)
        wanted = [*self._member.knots, *self.breaks]
        wanted += [end for runner in self.runners for end in (runner.train.start, runner.train.end)]
        wanted += [end for each in ranges for end in each]
        specials = np.unique([low, high, *(place for place in wanted if low + same < place < high - same)])
        specials = specials[np.append(True, np.diff(specials) > same)]
        x = np.linspace(specials[:-1], specials[1:], SAMPLES + 1, axis=1)
        right = np.ones(x.shape, dtype=bool)
        right[:, -1] = False
        bends = self._bends(low, high)
        places, sides = np.append(x.ravel(), bends), np.append(right.ravel(), np.ones(len(bends), dtype=bool))
        order = np.lexsort((sides, places))
        return places[order], sides[order]

    def _bends(self, low: float, high: float) -> Array:
        """Where one axle stands while another meets a key place or an end of its stretch: the envelope may bend."""
        found = []
        for train in (runner.train for runner in self.runners):
            offset = np.array(train.offsets)
            apart = np.unique((offset[:, None] - offset).ravel())
            at = np.array([*self._member.knots, train.start, train.end])
            if apart.size * at.size > MOST_BENDS:
                at = at[-2:]
            found.append((at[:, None] + apart).ravel()[:MOST_BENDS])
        bends = np.unique(np.concatenate(found))
        return bends[(bends > low) & (bends < high)]


@dataclass(frozen=True)
class _Best:
    """The best value so far of one range and sense, signed so that more is better."""

    signed: float
    at: float
    right: bool


@dataclass(frozen=True)
class _Near:
    """Where the search closes in for one range and sense (number ``of``)."""

    of: int
    low: float
    high: float


def _best(x: Array, right: NDArray[np.bool_], signed: Array) -> _Best:
    """The best of some places; the leftmost wins a tie."""
    top = float(signed.max())
    first = int((signed >= top - SAME * max(abs(top), 1e-300)).argmax())
    return _Best(float(signed[first]), float(x[first]), bool(right[first]))


def _tops(signed: Array) -> list[int]:
    """The best few places that are higher than their neighbours."""
    padded = np.concatenate([[-np.inf], signed, [-np.inf]])
    tops = np.flatnonzero((signed >= padded[:-2]) & (signed >= padded[2:]))
    tops = tops[signed[tops] >= signed.max() - NEAR_BEST * np.ptp(signed)]
    return [int(i) for i in tops[np.argsort(-signed[tops], kind="stable")][:MOST_TOPS]]


def _neighbours(x: Array, right: NDArray[np.bool_], centre: int, same: float) -> tuple[float, float] | None:
    """The two neighbours of a place, as far as no special place lies between; None at a lone one."""
    low = x[centre - 1] if centre and (right[centre - 1] and x[centre] - x[centre - 1] > same) else x[centre]
    high = x[centre + 1] if centre + 1 < len(x) and right[centre] else x[centre]
    return (float(low), float(high)) if high - low > same else None


def standing(breaks: Array, coefficients: Array) -> Static:
    """A piecewise polynomial as the part of an envelope that stays.

    Parameters
    ----------
    breaks, coefficients : numpy.ndarray
        Places [mm], and ascending coefficients of one curve, (m, d) [unit/mm^k].

    Returns
    -------
    callable
        Values at places, just left or just right of them.

    References
    ----------
    .. [1] None needed.
    """

    def at(x: Array, right: NDArray[np.bool_]) -> Array:
        before = evaluate(breaks, coefficients, x, "left")
        return np.asarray(np.where(right, evaluate(breaks, coefficients, x), before))

    return at
