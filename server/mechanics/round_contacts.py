"""Rounds that sit in each other: a bar or tube in a tube touches it all round.

Units: mm. Round tubes are drawn with straight sides, and the contacts of straight sides would be many short ones, so a
pair of rounds is known by its centres and radii.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from itertools import permutations

import numpy as np

from server.mechanics.contacts import DUST, TOUCH, Contact
from server.mechanics.polygon import Array

_STEPS = 64


@dataclass(frozen=True)
class Round:
    """``piece`` its place in the section; ``centre`` across and up; ``outer`` and ``inner`` radii, 0 if solid [mm]."""

    piece: int
    centre: tuple[float, float]
    outer: float
    inner: float


def round_contacts(rounds: Sequence[Round], reach: Array) -> list[Contact]:
    """Find the rounds that touch all round, one in the other.

    Parameters
    ----------
    rounds : sequence of Round
        The round pieces of a section of n pieces [mm].
    reach : numpy.ndarray
        (n, n) widest gap that still counts as a contact of that pair [mm].

    Returns
    -------
    list of Contact
        One for each pair, closed: it starts and ends at its lowest point; its length is that of the circle midway in
        the gap.

    Notes
    -----
    As for flat faces, the gap may vary by up to 0.05 mm round about, and the rounds may dip into each other as much.

    References
    ----------
    .. [1] Own derivation; the 0.05 mm are the check file's rule.

    Examples
    --------
    >>> tubes = [Round(0, (30.0, 30.0), 30.0, 25.0), Round(1, (30.0, 30.0), 25.0, 0.0)]
    >>> round(round_contacts(tubes, np.full((2, 2), 0.05))[0].length, 6)  # 2 pi 25
    157.079633
    """
    found = []
    for inside, outside in permutations(rounds, 2):
        off = math.dist(inside.centre, outside.centre)
        gap = outside.inner - inside.outer
        low, high = gap - off, gap + off
        allowed = max(float(reach[inside.piece, outside.piece]), float(reach[outside.piece, inside.piece]))
        if outside.inner > 0 and low >= -TOUCH - DUST and high - low <= TOUCH and high <= allowed + DUST:
            found.append(_ring(inside, outside, max(high, 0.0)))
    return found


def _ring(inside: Round, outside: Round, gap: float) -> Contact:
    radius = (inside.outer + outside.inner) / 2
    centre = np.array([(inside.centre[i] + outside.centre[i]) / 2 for i in (0, 1)])
    angle = np.linspace(-0.5 * math.pi, 1.5 * math.pi, _STEPS + 1)
    line = centre + radius * np.stack((np.cos(angle), np.sin(angle)), axis=1)
    line[-1] = line[0]
    first, second = sorted((inside.piece, outside.piece))
    return Contact(first, second, line[0], line[0], 2 * math.pi * radius, gap, line)
