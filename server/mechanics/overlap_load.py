r"""The load up to which a joint stays within its bounds, everywhere along its bonds at once.

Units: any, the same throughout. A quantity is linear in load columns, and what acts of each column nearly so in the
load: every place then allows a range of loads, and all places together the range that is common to them.
"""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from server.mechanics.overlap_solver import Array

Shares = Callable[[Array], Array]
MOST_ROUNDS = 60


def summed(columns: Array, act: Array) -> Array:
    """All columns times what acts of each; a last column beyond them (what yielded parts do) counts once."""
    whole: Array = np.einsum("b...c,bc->b...", columns[..., : act.shape[1]], act)
    return whole + columns[..., -1] if columns.shape[-1] > act.shape[1] else whole


def greatest_load(
    columns: Array, shares: Shares, low: Array, high: Array, guess: Array
) -> tuple[Array, NDArray[np.bool_]]:
    r"""The greatest load at which a quantity lies between two bounds at every place.

    .. math:: \min_x \frac{b(x) - f_0(x)}{f'(x)}, \qquad f = f_0 + f' P

    Parameters
    ----------
    columns : numpy.ndarray
        The quantity for a unit of each column, ``(bonds, places, columns)``.
    shares : callable
        Loads of the bonds -> what acts of each column, ``(bonds, columns)``.
    low, high : numpy.ndarray
        Bounds, ``(bonds, places)``; infinite where there is none.
    guess : numpy.ndarray
        Loads to begin with.

    Returns
    -------
    tuple of numpy.ndarray
        The loads, infinite where none reaches a bound, 0 where none above zero keeps within them; and whether one does.

    Raises
    ------
    ZeroDivisionError
        Never.

    References
    ----------
    .. [1] Own derivation: Newton's method on what acts, exact in one round where that is linear in the load.
    """
    load = guess
    found = np.ones(len(guess), dtype=bool)
    for turn in range(MOST_ROUNDS):
        finite = np.where(np.isfinite(load), load, 0.0)
        step = np.maximum(1e-4 * finite, 1e-9 if turn else 1e-6)
        act = shares(finite)
        change = (shares(finite + step) - act) / step[:, None]
        value = summed(columns, act)
        slope: Array = np.einsum("bxc,bc->bx", columns[..., : act.shape[1]], change)
        still = np.abs(slope) <= 1e-14 * np.abs(slope).max(axis=1, keepdims=True)
        safe = np.where(still, 1.0, slope)
        towards, away = np.where(safe > 0, high, low), np.where(safe > 0, low, high)
        out = still & ((value > high) | (value < low))
        most = finite + np.where(still, np.inf, (towards - value) / safe).min(axis=1)
        least = finite + np.where(still, -np.inf, (away - value) / safe).max(axis=1)
        found = (most > least) & (most > 0) & ~out.any(axis=1)
        fresh = np.where(found, most, 0.0)
        with np.errstate(invalid="ignore"):  # nothing limits it now and nothing did before: inf - inf
            done = (fresh == load) | (np.abs(fresh - load) <= 1e-10 * np.abs(fresh))
        load = fresh
        if done.all():
            break
    return load, found
