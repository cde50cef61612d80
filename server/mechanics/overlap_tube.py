r"""Tube in tube: shear lag under axial force and torque, and the radial stress that goes with the axial one.

Units: N, mm, MPa. Plain E; the bond's radius is the inner tube's outer radius plus half the bond line.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.overlap_laps import Action, Lap, Response
from server.mechanics.overlap_mesh import GROWTH, Mesh, graded
from server.mechanics.overlap_solver import Adherend, Array, Loads, Pair, Solver


def walls(lap: Lap) -> tuple[tuple[float, float], tuple[float, float]]:
    """Inner and outer radius of the inner tube, then of the outer one [mm]."""
    out = lap.diameter / 2
    bore = out + lap.bond.thickness
    return (max(out - lap.inner.thickness, 0.0), out), (bore, bore + lap.outer.thickness)


def sections(lap: Lap) -> tuple[tuple[float, float], tuple[float, float]]:
    """Area [mm2] and polar second moment [mm4] of the inner tube, then of the outer one."""
    found = [(np.pi * (o**2 - i**2), np.pi / 2 * (o**4 - i**4)) for i, o in walls(lap)]
    return found[0], found[1]


def tube_system(lap: Lap, lengths: Array, strain: float, growth: float = GROWTH) -> tuple[Solver, Loads]:
    """Axial shear lag; columns axial, free strain."""
    (A_i, _), (A_o, _) = sections(lap)
    return _lag(lap, lengths, (1 / (lap.inner.E * A_i), 1 / (lap.outer.E * A_o)), strain, growth)


def torque_system(lap: Lap, lengths: Array, growth: float = GROWTH) -> tuple[Solver, Loads]:
    """Shear lag around the axis, with torque over bond radius in the place of the force; columns torque / radius, 0."""
    (_, J_i), (_, J_o) = sections(lap)
    r2 = lap.bond_radius**2
    soft = (r2 / (lap.inner.shear_modulus * J_i), r2 / (lap.outer.shear_modulus * J_o))
    return _lag(lap, lengths, soft, 0.0, growth)


def _lag(lap: Lap, lengths: Array, soft: tuple[float, float], strain: float, growth: float) -> tuple[Solver, Loads]:
    stiffness = lap.bond.shear_modulus * lap.bond_width / lap.bond.thickness
    mesh = graded(lengths, np.full(len(lengths), np.sqrt(stiffness * sum(soft))), growth=growth)
    ones, none = np.ones(len(lengths)), np.zeros((len(lengths), 2))
    along = np.stack((ones, 0 * ones), 1)
    loads = Loads(
        left=(none, none, none),
        right=(along, none, none),
        axial=along,
        moment=lambda x: np.zeros((*x.shape, 2)),
        mismatch=np.stack((0 * ones, strain * ones), 1),
    )
    return Solver(Pair(Adherend(soft[1]), Adherend(soft[0]), stiffness, bending=False), mesh), loads


def respond_tube(lap: Lap, lengths: Array, action: Action) -> Response:
    r"""Stresses of a tube lap.

    .. math::
       \delta^2 = \frac{2\pi a G}{t_a}\Big(\frac{1}{E_iA_i} + \frac{1}{E_oA_o}\Big) \ \text{(axial)}, \qquad
       \delta^2 = \frac{2\pi a^3 G}{t_a}\Big(\frac{1}{G_iJ_i} + \frac{1}{G_oJ_o}\Big) \ \text{(torque)}

    Parameters
    ----------
    lap : Lap
        The tubes [mm, MPa].
    lengths : numpy.ndarray
        Overlaps [mm].
    action : Action
        Torque [N mm], free strain along the axis [-].

    Returns
    -------
    Response
        Stresses [MPa]; "shear" along the axis, "shear_around" it, "inner" and "outer" along the walls.

    Raises
    ------
    InputError
        If a moment or a shear force acts: a tube lap that bends has no method here.

    Notes
    -----
    Bending of the walls does not act back on the shear. A free strain across the bond (one tube growing faster than the
    other) is left out.

    References
    ----------
    .. [1] R. D. Adams and N. A. Peppiatt, "Stress analysis of adhesive bonded tubular lap joints", J. Adhesion 9
       (1977), 1-18.
    .. [2] J. L. Lubkin and E. Reissner, "Stress distribution and design data for adhesive lap joints between circular
       tubes", Trans. ASME 78 (1956), 1213-1221.
    """
    if action.moment or action.shear:
        raise InputError(
            "moment" if action.moment else "shear", "a tube lap is reckoned for axial force and torque only."
        )
    solver, loads = tube_system(lap, lengths, action.strain)
    course = solver.solve(loads)
    (A_i, _), (A_o, _) = sections(lap)
    modulus = lap.bond.shear_modulus / lap.bond.thickness
    shear = modulus * course.slip
    peel, bent_inner, bent_outer = _radial(lap, solver.mesh, shear)
    along = (loads.axial[:, None] - course.force) / A_i, course.force / A_o
    fields = {
        "shear": shear,
        "peel": peel,
        "inner": np.concatenate((along[0] + bent_inner, along[0] - bent_inner), axis=1),
        "outer": np.concatenate((along[1] + bent_outer, along[1] - bent_outer), axis=1),
    }
    fields = {name: np.concatenate((field, np.zeros((*field.shape[:2], 1))), axis=-1) for name, field in fields.items()}
    around = np.zeros_like(fields["shear"])
    if action.torque:
        turned, torque = torque_system(lap, lengths)
        turn = turned.solve(torque)
        for each in range(len(lengths)):
            around[each, :, -1] = np.interp(course.at[each], turn.at[each], modulus * turn.slip[each, :, 0])
    fields["shear_around"] = around
    ones = np.ones(len(lengths))
    return Response(
        lap, course.at, fields, lambda load: np.stack((load, ones, action.torque / lap.bond_radius * ones), 1)
    )


_SHARES = np.array([0.0, 0.25, 0.5, 0.75, 1.0])
_BOOLE = np.array([7.0, 32.0, 12.0, 32.0, 7.0]) / 90


def _hermite(steps: Array, shares: Array) -> tuple[Array, Array, Array]:
    """Cubic shapes of (w, w') at either end of elements, ``(..., shares, 4)``: value, first, second derivative."""
    h, r = steps[..., None], shares
    value = np.stack(
        np.broadcast_arrays(1 - 3 * r**2 + 2 * r**3, h * (r - 2 * r**2 + r**3), 3 * r**2 - 2 * r**3, h * (r**3 - r**2)),
        axis=-1,
    )
    first = np.stack(
        np.broadcast_arrays((6 * r**2 - 6 * r) / h, 1 - 4 * r + 3 * r**2, (6 * r - 6 * r**2) / h, 3 * r**2 - 2 * r),
        axis=-1,
    )
    second = np.stack(
        np.broadcast_arrays((12 * r - 6) / h**2, (6 * r - 4) / h, (6 - 12 * r) / h**2, (6 * r - 2) / h), axis=-1
    )
    return value, first, second


def _radial(lap: Lap, mesh: Mesh, shear: Array) -> tuple[Array, Array, Array]:
    r"""Radial stress of the bond and edge bending stress of both walls that the shear stress brings about.

    .. math:: D w'''' + \frac{E t}{R^2} w = \mp\sigma + \frac{t}{2} \tau', \qquad \sigma = \frac{E_a}{t_a}(w_o - w_i)

    Walls as long shells beyond the overlap, cubic elements on the mesh of the shear lag.
    """
    from scipy.linalg import solveh_banded

    radii = [(i + o) / 2 for i, o in walls(lap)]
    t = [lap.inner.thickness, lap.outer.thickness]
    E = [lap.inner.E, lap.outer.E]
    D = [E[k] * t[k] ** 3 / 12 for k in (0, 1)]
    hoop = [E[k] * t[k] / radii[k] ** 2 for k in (0, 1)]
    bond = lap.bond.E / lap.bond.thickness
    gauss = np.polynomial.legendre.leggauss(4)
    shares, weights = (gauss[0] + 1) / 2, gauss[1] / 2
    bonds, _, columns = shear.shape
    peel, bent = np.zeros_like(shear), np.zeros((2, *shear.shape))
    for each in range(bonds):
        h = mesh.steps[each]
        value, _first, second = _hermite(h, shares)
        mass = np.einsum("e,g,egi,egj->eij", h, weights, value, value)
        bend = np.einsum("e,g,egi,egj->eij", h, weights, second, second)
        element = np.zeros((len(h), 8, 8))
        own, other = slice(0, 4), slice(4, 8)
        element[:, own, own] = D[0] * bend + (hoop[0] + bond) * mass
        element[:, other, other] = D[1] * bend + (hoop[1] + bond) * mass
        element[:, own, other] = element[:, other, own] = -bond * mass
        dofs = 4 * np.arange(len(h))[:, None] + np.array([0, 1, 4, 5, 2, 3, 6, 7])
        band = np.zeros((8, 4 * len(h) + 4))
        _add(band, element, dofs)
        for place, k, sign in ((0, 0, -1.0), (4 * len(h) + 2, 1, 1.0)):  # the wall that runs on
            beta = (hoop[k] / (4 * D[k])) ** 0.25
            end = D[k] * np.array([[4 * beta**3, sign * 2 * beta**2], [sign * 2 * beta**2, 2 * beta]])
            _add(band, end[None], np.array([[place, place + 1]]))
        inside = shear[each][4 * np.arange(len(h))[:, None] + np.arange(5)]  # (elements, 5, columns)
        slopes = _hermite(h, _SHARES)[1]
        turned = np.einsum("e,p,epi,epc->eic", h, _BOOLE, slopes, inside)
        given = np.zeros((4 * len(h) + 4, columns))
        for k, places_of in enumerate((dofs[:, :4], dofs[:, 4:])):
            np.add.at(given, places_of, -t[k] / 2 * turned)
        try:
            found = solveh_banded(band, given, lower=True, check_finite=False)
        except np.linalg.LinAlgError as error:  # elements so short beside the walls that their stiffness drowns
            raise InputError(
                "overlap", "this overlap is too short beside the tubes' walls for its radial stresses to be reckoned."
            ) from error
        value, _first, second = _hermite(h, _SHARES)
        w = [np.einsum("epi,eic->epc", value, found[dofs[:, s]]) for s in (own, other)]
        peel[each] = _strung(bond * (w[1] - w[0]))
        for k, s in enumerate((own, other)):
            curvature = np.einsum("epi,eic->epc", second, found[dofs[:, s]])
            bent[k, each] = _strung(6 * D[k] / t[k] ** 2 * curvature)
    if not (np.isfinite(peel).all() and np.isfinite(bent).all()):
        raise InputError("overlap", "the tubes' radial stresses are beyond all numbers; check sizes and moduli.")
    return peel, bent[0], bent[1]


def _add(band: Array, element: Array, dofs: NDArray[np.intp]) -> None:
    """Add element matrices to a symmetric band, lower part."""
    rows, columns = np.broadcast_arrays(dofs[:, :, None], dofs[:, None, :])
    lower = rows >= columns
    np.add.at(band, (rows[lower] - columns[lower], columns[lower]), element[lower])


def _strung(values: Array) -> Array:
    """Values at five places of every element as one row, shared ends once."""
    return np.concatenate((values[:, :-1].reshape(-1, values.shape[-1]), values[-1:, -1]))
