r"""A load-slip test of a joint with fasteners: its greatest load and its slip modulus.

The load of the first rise to a tenth and to four tenths of the reference load gives the slips v_01 and v_04 by straight
lines between readings. Units: N, mm.

References
----------
.. [1] EN 26891:1991 (ISO 6891:1983), Joints made with mechanical fasteners - General principles for the determination
   of strength and deformation characteristics, 8.1 to 8.5. From memory.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from server.errors import InputError

SLIP_LIMIT = 15.0  # mm, at which the test ends where the load still rises


def greatest_load(load: ArrayLike, slip: ArrayLike) -> float:
    r"""The greatest load up to a slip of 15 mm.

    .. math:: F_{max} = \max\{F : v \le 15\,\text{mm}\}

    Parameters
    ----------
    load, slip : array_like
        Readings in the order of the test [N], [mm].

    Returns
    -------
    float
        Load [N]; where the readings pass 15 mm, the load read off there counts too.

    Raises
    ------
    InputError
        If the readings are not two or more finite pairs, or no load is above zero.

    References
    ----------
    .. [1] EN 26891:1991, 8.1 (greatest load, or that at 15 mm).
    """
    F, v = _readings(load, slip)
    beyond = np.flatnonzero(v > SLIP_LIMIT)
    if not beyond.size:
        return float(F.max())
    stop = int(beyond[0])
    if stop == 0:
        raise InputError(
            "slip", f"the first reading is at {v[0]:g} mm, beyond {SLIP_LIMIT:g} mm; begin with the load at rest."
        )
    share = (SLIP_LIMIT - v[stop - 1]) / (v[stop] - v[stop - 1])
    return float(max(F[:stop].max(), F[stop - 1] + share * (F[stop] - F[stop - 1])))


def slip_at(load: ArrayLike, slip: ArrayLike, level: float) -> float:
    """The slip at which the load first reaches a level.

    Parameters
    ----------
    load, slip : array_like
        Readings in the order of the test [N], [mm].
    level : float
        Load [N].

    Returns
    -------
    float
        Slip, by a straight line between readings [mm]; a test that does not begin at rest begins at (0, 0).

    Raises
    ------
    InputError
        If the load never reaches the level.

    References
    ----------
    .. [1] EN 26891:1991, 8.3.
    """
    F, v = _readings(load, slip)
    if F[0] > 0:
        F, v = np.append(0.0, F), np.append(0.0, v)
    reached = np.flatnonzero(level <= F)
    if not reached.size:
        raise InputError("load", f"the load never reaches {level:g} N; its greatest is {F.max():g} N.")
    stop = int(reached[0])
    if stop == 0:
        return float(v[0])
    share = (level - F[stop - 1]) / (F[stop] - F[stop - 1])
    return float(v[stop - 1] + share * (v[stop] - v[stop - 1]))


def _readings(load: ArrayLike, slip: ArrayLike) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    F, v = np.asarray(load, dtype=float), np.asarray(slip, dtype=float)
    if F.ndim != 1 or F.shape != v.shape or F.size < 2 or not (np.isfinite(F).all() and np.isfinite(v).all()):
        raise InputError("load", "two or more readings of load and slip are needed, one slip to every load.")
    if not F.max() > 0:
        raise InputError("load", "no load is above 0; enter the loads of the test.")
    return F, v
