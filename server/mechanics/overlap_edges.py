r"""Edge moments of eccentric overlaps under tension: how far the joint turns into the line of the load.

Units: N, mm, MPa. The adherends run on far beyond the overlap and are not held against deflection.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from server.errors import InputError, positive
from server.mechanics.overlap_solver import Array


def _not_negative(load: ArrayLike) -> Array:
    force = np.asarray(load, dtype=float)
    if not (np.isfinite(force) & (force >= 0)).all():
        raise InputError("load", "the load is not a finite number of at least 0 N; these factors are for tension.")
    return force


def hart_smith_factor(load: ArrayLike, overlap: ArrayLike, *, bending_stiffness: ArrayLike) -> Array:
    r"""Edge moment factor of a single lap: moment at the overlap's edge over P t / 2.

    .. math:: k = \frac{1}{1 + \xi c + (\xi c)^2/6}, \qquad \xi^2 = P/D, \quad c = \ell/2

    Parameters
    ----------
    load : array_like
        Tension P of the whole width [N].
    overlap : array_like
        Overlap length [mm].
    bending_stiffness : array_like
        D of one adherend, whole width [N mm2].

    Returns
    -------
    numpy.ndarray
        Factor [-], 1 for no load, towards 0 for a long overlap under great load.

    Raises
    ------
    InputError
        If the load is negative, or another input is not above zero.

    References
    ----------
    .. [1] L. J. Hart-Smith, "Adhesive-bonded single-lap joints", NASA CR-112236 (1973).
    """
    force, c = _not_negative(load), positive("overlap", overlap, "mm") / 2
    xi_c = np.sqrt(force / positive("bending_stiffness", bending_stiffness, "N mm2")) * c
    return np.asarray(1 / (1 + xi_c + xi_c**2 / 6))


def goland_reissner_factor(load: ArrayLike, overlap: ArrayLike, *, bending_stiffness: ArrayLike) -> Array:
    r"""Edge moment factor of a balanced single lap whose overlap bends as one plate of double thickness.

    .. math:: k = \frac{1}{1 + 2\sqrt2 \tanh(\xi c / (2\sqrt2))}, \qquad \xi^2 = P/D

    Parameters
    ----------
    load : array_like
        Tension P of the whole width [N].
    overlap : array_like
        Overlap length [mm].
    bending_stiffness : array_like
        D of one adherend, whole width [N mm2].

    Returns
    -------
    numpy.ndarray
        Factor [-], from 1 for no load to 0.261 for great load.

    Raises
    ------
    InputError
        If the load is negative, or another input is not above zero.

    References
    ----------
    .. [1] M. Goland and E. Reissner, "The stresses in cemented joints", J. Appl. Mech. 11 (1944), A17-A27.
    """
    force, c = _not_negative(load), positive("overlap", overlap, "mm") / 2
    xi_c = np.sqrt(force / positive("bending_stiffness", bending_stiffness, "N mm2")) * c
    return np.asarray(1 / (1 + 2 * np.sqrt(2) * np.tanh(xi_c / (2 * np.sqrt(2)))))


def strap_factors(
    load: ArrayLike,
    overlap: ArrayLike,
    *,
    stretching: tuple[float, float],
    bending: tuple[float, float],
    arm: float,
) -> tuple[Array, Array]:
    r"""Edge moments of a one-sided strap, over P h: of the plate at the strap's end, and of the strap at the butt.

    .. math::
       y'' = \xi_1^2 y \ \text{(plate)}, \qquad y'' = \xi_c^2 (y + e) \ \text{(overlap)}, \qquad
       e = h \frac{EA_o}{EA_i + EA_o}

    with :math:`\xi_1^2 = P/D_i`, :math:`\xi_c^2 = P/D_c`, no slope at the butt, D_c of both together.

    Parameters
    ----------
    load : array_like
        Tension P of the whole width [N].
    overlap : array_like
        Overlap on each side of the butt [mm].
    stretching : tuple of float
        EA of plate and strap [N].
    bending : tuple of float
        D of plate and strap [N mm2].
    arm : float
        Distance h between their axes [mm].

    Returns
    -------
    tuple of numpy.ndarray
        Both factors [-]: 0 and 1 for no load, for then all of the eccentricity is met by the strap at the butt.

    Raises
    ------
    InputError
        If the load is negative, or another input is not above zero.

    References
    ----------
    .. [1] Own derivation, after the beam-column of Goland and Reissner (1944).
    """
    force, length = _not_negative(load), positive("overlap", overlap, "mm")
    (EA_i, EA_o), (D_i, D_o) = stretching, bending
    positive("stretching", [EA_i, EA_o], "N")
    positive("bending", [D_i, D_o], "N mm2")
    h = float(positive("arm", arm, "mm"))
    e = h * EA_o / (EA_i + EA_o)
    together = D_i + D_o + h * e * EA_i
    plate, both = np.sqrt(force / D_i), np.sqrt(force / together)
    # both rates go with the root of the load, so their ratio stays defined for none
    ratio = np.sqrt(D_i / together)
    turn = ratio * np.tanh(both * length)
    edge = e / h * turn / (1 + turn)
    butt = 1 - e / h + e / h / ((1 + turn) * np.cosh(np.minimum(both * length, 700.0)))
    return np.asarray(edge + 0 * plate), np.asarray(butt)
