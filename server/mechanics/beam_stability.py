"""Whether a member stands: asked of its geometry alone, before any stiffness is looked at.

A member can move without bending when a line that is straight between hinges fits all supports. The values of such
a line at the two ends and at the hinges describe it fully; every support gives one condition on them, a fixed support
two. Units: mm.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.beam_model import SAME_PLACE, Beam

Array = NDArray[np.float64]


def require_stable(beam: Beam) -> None:
    """Refuse a member that can move without bending, and say which part moves.

    Parameters
    ----------
    beam : Beam
        The member [mm].

    Raises
    ------
    InputError
        Field "supports" or "hinges"; the message names the places.

    Notes
    -----
    Springs count as supports however soft they are. The rank is that of the conditions with entries of order 1,
    so it does not depend on units or stiffness.

    References
    ----------
    .. [1] S. P. Timoshenko and D. H. Young, "Theory of Structures", 2nd ed. (1965), chapter 2.
    """
    supports = beam.supports
    if not supports:
        raise InputError("supports", "the member has no supports; give two, or one that is fixed.")
    if len(supports) == 1 and supports[0].kind != "fixed":
        raise InputError(
            "supports",
            f"the member turns about its only support at {supports[0].at:g} mm; add a second support, or make this one"
            " fixed.",
        )
    if beam.hinges:
        moving = _moving_parts(beam)
        if moving:
            raise InputError("hinges", _explanation(beam, moving))


def _moving_parts(beam: Beam) -> list[tuple[float, float]]:
    """Return the parts between hinges and ends that can move, from left to right."""
    points = np.array([0.0, *sorted(beam.hinges), beam.length])
    conditions = np.zeros((0, len(points)))
    for support in beam.supports:
        part = int(np.clip(np.searchsorted(points, support.at, "right") - 1, 0, len(points) - 2))
        share = (support.at - points[part]) / (points[part + 1] - points[part])
        rows = np.zeros((2 if support.kind == "fixed" else 1, len(points)))
        rows[0, part : part + 2] = 1 - share, share
        if support.kind == "fixed":
            rows[1, part : part + 2] = -1, 1
        conditions = np.vstack([conditions, rows])
    _, sizes, directions = np.linalg.svd(conditions)
    rank = int(np.sum(sizes > SAME_PLACE))
    motion = np.linalg.norm(directions[rank:], axis=0)
    moves = motion > 1e-6
    return [
        (float(left), float(right))
        for left, right, move in zip(points, points[1:], moves[:-1] | moves[1:], strict=False)
        if move
    ]


def _explanation(beam: Beam, moving: list[tuple[float, float]]) -> str:
    touched = [hinge for hinge in sorted(beam.hinges) if any(left <= hinge <= right for left, right in moving)]
    parts = " and ".join(f"from {left:g} to {right:g} mm" for left, right in moving)
    hinges = ", ".join(f"{hinge:g}" for hinge in touched)
    return (
        f"the part{'s' if len(moving) > 1 else ''} {parts} can move freely because of the"
        f" hinge{'s' if len(touched) > 1 else ''} at {hinges} mm; add a support there or leave a hinge out."
    )
