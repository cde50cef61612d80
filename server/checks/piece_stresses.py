"""Normal and shear stresses of every piece where they are greatest, by plane sections or as the joints slide."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from server.checks.actions import Actions
from server.checks.crosssection import Body, Part, Stretch
from server.checks.pieces_both_ways import CornerStress, CutShear, corner_stress, cut_shear
from server.checks.scan import Scan
from server.checks.slide import Slide
from server.checks.slip_pieces import SlidingShear, fibres, sliding_shear
from server.checks.twist import Twist, twisted_shear
from server.working import formula

BENDING = "-E*M*(u - u_0)/EI"
SHEAR = "V*S/(EI*b)"


class Bent(NamedTuple):
    """Normal stresses of one piece: fibres x entries x combinations, an entry for each stretch x moment extreme.

    Where the member bends both ways: an entry for each place that a corner's stress is greatest at; ``range`` the
    highest and the lowest corner there (2, entries, combinations), ``corners`` where each entry comes from.
    """

    stress: NDArray[np.float64]
    moment: NDArray[np.float64]
    at: NDArray[np.float64]
    stretch: NDArray[np.intp]
    range: NDArray[np.float64] | None = None
    corners: tuple[tuple[CornerStress, int], ...] = ()


class Sheared(NamedTuple):
    """Largest shear stress on horizontal cuts through one piece: stretches x combinations.

    ``cuts`` stretch by stretch where the joints slide, with the piece's place among those of the stretch; ``torque``
    likewise to ``shear`` where loads are eccentric.
    """

    stress: NDArray[np.float64]
    shear: NDArray[np.float64]
    at: NDArray[np.float64]
    stretch: tuple[int, ...]
    cuts: tuple[tuple[SlidingShear, int], ...] = ()
    torque: NDArray[np.float64] | None = None
    both_ways: CutShear | None = None


def bend(body: Body, scan: Scan, actions: Actions, slide: Slide | None) -> dict[int, Bent]:
    """Normal stresses of every piece, by its index."""
    if slide is not None:
        return _bend_sliding(body, slide)
    return _bend(body, scan) if actions.across is None else _bend_both_ways(body, actions)


def shear(body: Body, scan: Scan, actions: Actions, slide: Slide | None, twist: Twist | None) -> dict[int, Sheared]:
    """Shear stresses of every piece, by its index."""
    if slide is not None:
        return _shear_sliding(body, slide)
    if actions.across is not None:
        return _shear_both_ways(body, actions, twist)
    return _shear(body, scan) if twist is None else _shear_twisted(body, twist)


def _bend(body: Body, scan: Scan) -> dict[int, Bent]:
    """One evaluation for all pieces along the same stretches: fibres, stretches, extremes and combinations."""
    found: dict[int, Bent] = {}
    for run in body.runs if scan.moment else ():
        extremes = [scan.moment[t] for t in run.along]
        moment = np.array([each.value[:2] for each in extremes])  # greatest and least
        at = np.array([each.at[:2] for each in extremes])
        stress = formula(BENDING).array({"M": moment, **run.bending})
        entries = (2 * len(run.along), moment.shape[2])
        stress, moment, at = stress.reshape(-1, 3, *entries), moment.reshape(entries), at.reshape(entries)
        where = np.array(run.along, dtype=np.intp).repeat(2)
        found |= {part.index: Bent(own, moment, at, where) for part, own in zip(run.parts, stress, strict=True)}
    return found


def heights(part: Part, stretch: Stretch) -> tuple[float, float, float]:
    """Heights of the fibres: top, bottom, centroid."""
    return part.top, part.bottom, stretch.section.centroids[part.index]


def _shear(body: Body, scan: Scan) -> dict[int, Sheared]:
    """Largest shear stress on a horizontal cut through every piece, for all pieces along the same stretches at once."""
    found: dict[int, Sheared] = {}
    for run in body.runs if scan.shear else ():
        shear, at = (np.array(each) for each in zip(*(scan.shear[t] for t in run.along), strict=True))
        stress = formula(SHEAR).array({"V": shear, **run.shearing})
        found |= {part.index: Sheared(own, shear, at, run.along) for part, own in zip(run.parts, stress, strict=True)}
    return found


def _shear_twisted(body: Body, twist: Twist) -> dict[int, Sheared]:
    """Shear on horizontal cuts and by torsion together, piece by piece."""
    found = {}
    for part in body.parts:
        stretches = body.stretches_of(part)
        if stretches:
            each = twisted_shear(twist, part.index, stretches)
            found[part.index] = Sheared(each.stress, each.shear, each.at, each.stretch, torque=each.torque)
    return found


def _bend_both_ways(body: Body, actions: Actions) -> dict[int, Bent]:
    """Normal stresses at the corners of every piece where any of them is greatest."""
    found: dict[int, Bent] = {}
    for part in body.parts:
        rows = [(t, corner_stress(actions, part, stretch)) for t, stretch in body.stretches_of(part)]
        if not rows:
            continue
        each = [one for _, one in rows]
        found[part.index] = Bent(
            np.concatenate([one.fibres() for one in each], axis=1),
            np.concatenate([one.moments[0] for one in each]),
            np.concatenate([one.at for one in each]),
            np.repeat(np.array([t for t, _ in rows], dtype=np.intp), [len(one.at) for one in each]),
            np.concatenate([one.range() for one in each], axis=1),
            tuple((one, entry) for one in each for entry in range(len(one.at))),
        )
    return found


def _shear_both_ways(body: Body, actions: Actions, twist: Twist | None) -> dict[int, Sheared]:
    """Shear on level and upright cuts of every piece, with that of torsion."""
    found = {}
    for part in body.parts:
        each = cut_shear(actions, twist, body, part)
        if each is not None:
            found[part.index] = Sheared(each.stress, each.causes[..., 0], each.at, each.stretch, both_ways=each)
    return found


def _bend_sliding(body: Body, slide: Slide) -> dict[int, Bent]:
    """Normal stresses where any fibre of a piece is greatest or least, from its own force and bending."""
    found: dict[int, Bent] = {}
    for t, stretch in enumerate(body.stretches):
        for part in stretch.section.parts:
            stress, at = fibres(slide, part, stretch).extremes(stretch.start, stretch.end)
            here = Bent(stress, np.zeros_like(at), at, np.full(len(at), t, dtype=np.intp))
            found[part.index] = _longer(found[part.index], here) if part.index in found else here
    return found


def _longer(left: Bent, right: Bent) -> Bent:
    return Bent(
        np.concatenate([left.stress, right.stress], axis=1),
        np.concatenate([left.moment, right.moment]),
        np.concatenate([left.at, right.at]),
        np.concatenate([left.stretch, right.stretch]),
    )


def _shear_sliding(body: Body, slide: Slide) -> dict[int, Sheared]:
    """Largest shear stress on a horizontal cut through every piece, by what the forces above it change by."""
    rows: dict[int, list[tuple[SlidingShear, int, int]]] = {}
    for t, stretch in enumerate(body.stretches):
        found = sliding_shear(slide, stretch)
        for position, part in enumerate(stretch.section.parts):
            rows.setdefault(part.index, []).append((found, position, t))
    return {
        index: Sheared(
            np.array([cut.stress[i] for cut, i, _ in each]),
            np.zeros((len(each), each[0][0].stress.shape[1])),
            np.array([cut.at[i] for cut, i, _ in each]),
            tuple(t for _, _, t in each),
            tuple((cut, i) for cut, i, _ in each),
        )
        for index, each in rows.items()
    }
