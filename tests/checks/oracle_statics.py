"""Statics of a member by its initial parameters: the oracle's own way, which shares nothing with the program.

The deflection and slope at the left end, the reactions, and the kinks at the hinges are the unknowns. Between two
breaks the load is linear, so shear, moment, slope and deflection follow from their values at the left break by Taylor's
terms; the conditions at supports, hinges and the right end give one small dense system (initial parameters, also known
as Macaulay's method; any structural analysis text; from memory).

N, mm, MPa; x from the left; loads and deflection downward, reactions upward, couples anticlockwise, moment sagging.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
SAMPLES = 400  # between two breaks; the parabola through the largest three then leaves about 1e-9


@dataclass
class Loads:
    """``forces`` upward, ``couples`` anticlockwise at places; ``lines`` downward: from, to, value at either."""

    forces: list[tuple[float, float]] = field(default_factory=list)
    couples: list[tuple[float, float]] = field(default_factory=list)
    lines: list[tuple[float, float, float, float]] = field(default_factory=list)


@dataclass(frozen=True)
class Support:
    """``stiffness`` None: does not give way."""

    at: float
    fixed: bool = False
    stiffness: float | None = None


@dataclass(frozen=True)
class Stretch:
    """A length with one EI and GA (infinite where shear deformation is left out)."""

    start: float
    end: float
    EI: float
    GA: float


@dataclass(frozen=True)
class Fields:
    """Samples of shear, moment, slope, deflection: segments x samples, ``x`` likewise; reactions by support."""

    x: Array
    shear: Array
    moment: Array
    slope: Array
    deflection: Array
    force: Array
    couple: Array

    def __add__(self, other: Fields) -> Fields:
        return self._with(*(getattr(self, name) + getattr(other, name) for name in _NAMES))

    def __mul__(self, factor: float) -> Fields:
        return self._with(*(getattr(self, name) * factor for name in _NAMES))

    def _with(self, *arrays: Array) -> Fields:
        return Fields(self.x, *arrays)


_NAMES = ("shear", "moment", "slope", "deflection", "force", "couple")


@dataclass(frozen=True)
class Member:
    """A member ready to be solved for any loads; ``breaks`` are all places where something may jump."""

    supports: Sequence[Support]
    hinges: Sequence[float]
    stretches: Sequence[Stretch]
    breaks: Sequence[float]

    def solve(self, loads: Loads) -> Fields:
        """The response to ``loads``, from the conditions at supports, hinges and the right end."""
        zero = Loads()
        units = [self._run(zero, first=(1.0, 0.0)), self._run(zero, first=(0.0, 1e-3))]
        units += [self._run(Loads(forces=[(s.at, 1e3)])) for s in self.supports]
        units += [self._run(Loads(couples=[(s.at, 1e6)])) for s in self.supports if s.fixed]
        units += [self._run(zero, kinks=[(at, 1e-3)]) for at in self.hinges]
        given = self._run(loads)
        springs = np.zeros((len(self.supports), len(units)))
        for i, support in enumerate(self.supports):
            if support.stiffness is not None:
                springs[i, 2 + i] = 1e3 / support.stiffness
        matrix = np.array([self._conditions(unit) for unit in units]).T
        matrix[: len(self.supports)] -= springs
        size = np.abs(matrix).max(axis=1, keepdims=True)
        found = np.linalg.solve(matrix / size, -self._conditions(given) / size[:, 0])
        total = given
        for amount, unit in zip(found, units, strict=True):
            total = total + unit * float(amount)
        count = len(self.supports)
        force = found[2 : 2 + count] * 1e3
        couple, left = np.zeros(count), list(found[2 + count :] * 1e6)
        for i, support in enumerate(self.supports):
            if support.fixed:
                couple[i] = left.pop(0)
        return Fields(total.x, total.shear, total.moment, total.slope, total.deflection, force, couple)

    def _conditions(self, run: Fields) -> Array:
        """What must vanish: deflection at supports, slope where fixed, moment at hinges, both forces at the end."""
        rows = [self._at(run.x, run.deflection, s.at) for s in self.supports]
        rows += [self._at(run.x, run.slope, s.at) for s in self.supports if s.fixed]
        rows += [self._at(run.x, run.moment, at) for at in self.hinges]
        return np.array([*rows, run.shear[-1, -1] + run.force[0], run.moment[-1, -1] - run.couple[0]])

    @staticmethod
    def _at(x: Array, values: Array, at: float) -> float:
        """A quantity that does not jump, at a break."""
        starts = np.flatnonzero(x[:, 0] == at)
        return float(values[starts[0], 0] if starts.size else values[-1, -1])

    def _run(
        self, loads: Loads, first: tuple[float, float] = (0.0, 0.0), kinks: Sequence[tuple[float, float]] = ()
    ) -> Fields:
        """Walk from the left end; ``force`` and ``couple`` hold what stands at the right end itself."""
        deflection, slope, shear, moment = first[0], first[1], 0.0, 0.0
        rows: list[tuple[Array, ...]] = []
        for start, end in pairwise(self.breaks):
            shear += sum(force for at, force in loads.forces if at == start)
            moment -= sum(couple for at, couple in loads.couples if at == start)
            slope += sum(turn for at, turn in kinks if at == start)
            stretch = next(s for s in self.stretches if s.start <= start and end <= s.end)
            q, dq = self._line(loads, start, end)
            t = np.linspace(0.0, end - start, SAMPLES + 1)
            V = shear - q * t - dq * t**2 / 2
            M = moment + shear * t - q * t**2 / 2 - dq * t**3 / 6
            turned = slope - (moment * t + shear * t**2 / 2 - q * t**3 / 6 - dq * t**4 / 24) / stretch.EI
            bent = moment * t**2 / 2 + shear * t**3 / 6 - q * t**4 / 24 - dq * t**5 / 120
            sheared = shear * t - q * t**2 / 2 - dq * t**3 / 6
            w = deflection + slope * t - bent / stretch.EI + sheared / stretch.GA
            rows.append((start + t, V, M, turned, w))
            shear, moment, slope, deflection = float(V[-1]), float(M[-1]), float(turned[-1]), float(w[-1])
        last = self.breaks[-1]
        ends = [np.array([sum(v for at, v in some if at == last)]) for some in (loads.forces, loads.couples)]
        return Fields(*(np.array(column) for column in zip(*rows, strict=True)), *ends)

    @staticmethod
    def _line(loads: Loads, start: float, end: float) -> tuple[float, float]:
        """Line load at the start of a segment, and its rise per length."""
        q = dq = 0.0
        for a, b, va, vb in loads.lines:
            if a <= start and end <= b:
                rise = (vb - va) / (b - a)
                q += va + rise * (start - a)
                dq += rise
        return q, dq


@dataclass(frozen=True)
class Extreme:
    """The largest value with its place, and the segment it was found in."""

    value: float
    at: float
    row: int = 0


def largest(x: Array, values: Array) -> Extreme:
    """The largest value over all segments, sharpened by the parabola through its neighbours."""
    found = Extreme(-np.inf, 0.0)
    for number, (places, row) in enumerate(zip(x, values, strict=True)):
        top = int(row.argmax())
        value, at = float(row[top]), float(places[top])
        i = min(max(top, 1), len(row) - 2)
        below, above = row[i] - row[i - 1], row[i] - row[i + 1]
        shift = 0.5 * (below - above) / (below + above) if below + above > 0 else 2.0
        if abs(shift) < 1:
            value = float(row[i] + 0.25 * (below - above) * shift)
            at = float(places[i] + shift * (places[1] - places[0]))
        if value > found.value + 1e-12 * abs(value):
            found = Extreme(value, at, number)
    return found
