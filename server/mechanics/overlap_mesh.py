r"""Places along a bond, close together where its stresses change fast.

Units: mm, 1/mm. Everything is done for a whole batch of bonds at once: the first axis of every array counts them.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.errors import InputError, positive

Array = NDArray[np.float64]
FIRST = 0.2  # first element over the decay length of the fastest stress
GROWTH = 1.3
FEWEST = 16  # elements on each half


@dataclass(frozen=True, eq=False)
class Mesh:
    """Nodes of a batch of bonds, ``(bonds, elements + 1)``, from 0 to the length of each, and ``steps`` between them.

    The steps [mm] are kept beside the nodes: at the far end of a very long bond they are less than the last digit of
    the places.
    """

    nodes: Array
    steps: Array

    def inside(self, shares: Array) -> Array:
        """Places at these shares of every element, ``(bonds, elements, shares)`` [mm]."""
        return self.nodes[:, :-1, None] + self.steps[:, :, None] * shares


def graded(length: ArrayLike, rate: ArrayLike, *, growth: float = GROWTH, places: ArrayLike = ()) -> Mesh:
    r"""Nodes that grow geometrically from both ends of each bond towards its middle.

    .. math:: h_1 = 0.2/\mu, \qquad h_{i+1} = g\,h_i, \qquad h_1 \frac{g^m - 1}{g - 1} = \ell/2

    Parameters
    ----------
    length : array_like
        Length of each bond [mm].
    rate : array_like
        Rate :math:`\mu` at which the fastest stress of each decays [1/mm].
    growth : float
        Largest ratio of neighbouring elements [-]; nearer to 1 where something happens away from the ends.
    places : array_like
        Further places to be nodes, such as where a load stands, alike for all bonds or one row a bond [mm].

    Returns
    -------
    Mesh
        As many elements for every bond of the batch.

    Raises
    ------
    InputError
        If a length or rate is not a finite number above zero.

    Notes
    -----
    The number of elements grows with the logarithm of length x rate only, so a bond of any length can be meshed.

    References
    ----------
    .. [1] Own derivation: a step in proportion to the distance from the end resolves every slower decay.
    """
    half = np.atleast_1d(positive("length", length, "mm")) / 2
    rate = positive("rate", rate, "1/mm")
    first = np.minimum(FIRST / rate, half / FEWEST)
    if not np.all(first > 0):
        raise InputError("rate", "the bond is too long for its own stiffness to be reckoned; check lengths and moduli.")
    wanted = np.log1p(half / first * (growth - 1)) / np.log(growth)
    count = max(FEWEST, int(np.ceil(wanted.max())))
    powers = np.expm1(np.outer(np.log(_growth(half / first, count)), np.arange(count + 1)))
    left = half[:, None] * powers / powers[:, -1:]
    left[:, -1] = half
    nodes = np.concatenate((left, 2 * half[:, None] - left[:, -2::-1]), axis=1)
    nodes[:, 0] = 0.0
    further = np.asarray(places, dtype=float)
    fixed = np.broadcast_to(further, (len(half), further.shape[-1]))
    if fixed.size:
        nodes = _apart(np.sort(np.concatenate((nodes, fixed), axis=1), axis=1))
        return Mesh(nodes, np.diff(nodes, axis=1))
    steps = np.diff(left, axis=1)
    return Mesh(nodes, np.concatenate((steps, steps[:, ::-1]), axis=1))


def _growth(total: Array, count: int) -> Array:
    """The ratio g of a geometric series of ``count`` terms, the first of them 1, with this ``total``."""
    low, high = np.full_like(total, 1e-9), np.full_like(total, 4.0)
    for _ in range(60):
        middle = (low + high) / 2
        over = np.expm1(count * np.log1p(middle)) / middle > total
        low, high = np.where(over, low, middle), np.where(over, middle, high)
    return 1 + (low + high) / 2


def _apart(nodes: Array) -> Array:
    """Sorted nodes moved apart where two of them nearly coincide, so that no element is empty."""
    least = 1e-7 * nodes[:, -1:]
    steps = np.maximum(np.diff(nodes, axis=1), least)
    moved = np.concatenate((np.zeros((len(nodes), 1)), np.cumsum(steps, axis=1)), axis=1)
    return np.asarray(moved * (nodes[:, -1:] / moved[:, -1:]))
