r"""Scarf joints: both pieces taper over the length of the slope, so their force is handed over all along.

Units: N, mm, MPa. With :math:`\tan\theta = 1/n` for a slope of 1 : n, a stress :math:`\sigma` in the piece puts
:math:`\tau = \sigma \sin\theta\cos\theta` and :math:`\sigma_n = \sigma \sin^2\theta` on the bond (statics).
"""

from __future__ import annotations

import numpy as np

from server.errors import InputError
from server.mechanics.overlap_laps import Action, Lap, Response
from server.mechanics.overlap_mesh import GROWTH, graded
from server.mechanics.overlap_solver import GAUSS, Adherend, Array, Loads, Pair, Solver


def scarf_system(lap: Lap, lengths: Array, strain: float, growth: float = GROWTH) -> tuple[Solver, Loads]:
    """The shear-lag problem of two tapered bars; columns axial, free strain."""
    b, t, bond = lap.width, lap.inner.thickness, lap.bond
    blunt = lap.inner.tip / t
    soft = [1 / (plate.plane_modulus * t * b) for plate in (lap.inner, lap.outer)]
    stiffness = bond.shear_modulus * b / bond.thickness / _cosine(lap, lengths)
    mesh = graded(lengths, np.sqrt(4 * stiffness * sum(soft)), growth=growth)
    share = mesh.inside(GAUSS) / lengths[:, None, None]
    ones, none = np.ones(len(lengths)), np.zeros((len(lengths), 2))
    along = np.stack((ones, 0 * ones), 1)
    loads = Loads(
        left=(none, none, none),
        right=(along, none, none),
        axial=along,
        moment=lambda x: np.zeros((*x.shape, 2)),
        mismatch=np.stack((0 * ones, strain * ones), 1),
    )
    # the outer piece grows from its tip at the left, the inner one runs out at the right
    own = blunt + (1 - 2 * blunt) * share
    rest = np.maximum(1 - own, np.finfo(float).eps)  # the last place of a long scarf may round to its end
    pair = Pair(Adherend(soft[1] / own), Adherend(soft[0] / rest), stiffness[:, None, None], bending=False)
    return Solver(pair, mesh), loads


def scarfed(lap: Lap) -> float:
    """The thickness that the slope runs through [mm]: all of it but two blunt tips, which join nothing."""
    return lap.inner.thickness - 2 * lap.inner.tip


def _cosine(lap: Lap, lengths: Array) -> Array:
    """The cosine of the slope's angle."""
    slope = lengths / scarfed(lap)
    return np.asarray(slope / np.hypot(1.0, slope))


def scarf_limits(lap: Lap, lengths: Array, stress: float, strain: float) -> tuple[Array, Array]:
    """Flow along the piece [N/mm] and slip along it [mm] at which stress and strain on the slope reach these."""
    cosine = _cosine(lap, lengths)
    return stress * lap.width / cosine**2, strain * lap.bond.thickness / cosine


def respond_scarf(lap: Lap, lengths: Array, action: Action) -> Response:
    r"""Stresses on the slope of a scarf and in its pieces.

    The flow from the bars' shear lag (of stiffness :math:`G b / (t_a \cos\theta)`) acts along the piece; on the slope
    it is :math:`\tau = q\cos^2\theta / b`, :math:`\sigma_n = q \sin\theta\cos\theta / b`. Moment and shear act with the
    stresses that a solid piece of the thickness would have there.

    Parameters
    ----------
    lap : Lap
        Pieces [mm, MPa] of one thickness; ``slope`` is length over thickness [-].
    lengths : numpy.ndarray
        Lengths of the slope along the piece [mm].
    action : Action
        Moment [N mm], shear [N], free strain [-].

    Returns
    -------
    Response
        Stresses [MPa].

    Raises
    ------
    InputError
        If sizes are beyond all numbers, or a scarf with blunt tips is bent.

    References
    ----------
    .. [1] L. J. Hart-Smith, "Analysis and design of advanced composite bonded joints", NASA CR-112237 (1973).
    """
    if lap.inner.tip and (action.moment or action.shear):
        raise InputError("inner.tip", "a scarf with blunt tips is reckoned for axial load; bent ones have no method.")
    solver, loads = scarf_system(lap, lengths, action.strain)
    course = solver.solve(loads)
    b, t = lap.width, lap.inner.thickness
    slope = lengths / scarfed(lap)
    blunt = lap.inner.tip / t
    cosine2 = _cosine(lap, lengths) ** 2
    flow = np.asarray(solver.pair.shear) * course.slip
    # a solid piece: bending stress from one face to the other, shear stress as a parabola (tip of the outer one below)
    height = (0.5 - blunt) * (1 - 2 * course.at / lengths[:, None])
    bending = 12 * height / (b * t**2)
    parabola = 1.5 * (1 - 4 * height**2) / (b * t)
    across = (cosine2 / slope)[:, None]  # sin cos
    twice = (cosine2 - cosine2 / slope**2)[:, None]  # cos^2 - sin^2
    shear = [cosine2[:, None, None] * flow / b, across * bending, twice * parabola]
    peel = [across[..., None] * flow / b, across / slope[:, None] * bending, -2 * across * parabola]
    share = course.at / lengths[:, None]
    thick = blunt + (1 - 2 * blunt) * share
    own = np.clip(np.stack((1 - thick, thick)), 1e-9, None)
    force = np.stack((loads.axial[:, None] - course.force, course.force))
    inner, outer = force / (b * t * own[..., None])
    ends = np.zeros_like(own[0])
    if not blunt:
        inner, outer = _at_root(inner, 0), _at_root(outer, -1)
    fields = {
        "shear": _columns(shear),
        "peel": _columns(peel),
        "inner": _columns([inner, bending + ends, ends]),
        "outer": _columns([outer, bending + ends, ends]),
    }
    ones = np.ones(len(lengths))
    return Response(
        lap,
        course.at,
        fields,
        lambda load: np.stack((load, ones, action.moment * ones, action.shear * ones), 1),
    )


def _columns(parts: list[Array]) -> Array:
    return np.concatenate([part if part.ndim == 3 else part[..., None] for part in parts], axis=-1)


def _at_root(stress: Array, place: int) -> Array:
    """Stress in a piece; at its sharp tip 0/0 stands, and the value beside it holds there."""
    fixed = stress.copy()
    tip = -1 if place == 0 else 0
    fixed[:, tip] = stress[:, -2 if tip == -1 else 1]
    return fixed
