r"""The layouts of overlaps, each brought to the one solver: plates or tubes, what acts at their ends, what is found.

Units: N, mm, MPa. Places count from the end at which the inner adherend is loaded (single and double lap, tube) or the
strap ends (straps; the butt is the other end). Plates bend cylindrically, so E / (1 - nu^2) stands for E; tubes take
plain E. Arms are half the thicknesses, the bond line left out. A batch of overlaps is reckoned at once.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

from server.errors import InputError, positive
from server.mechanics.overlap_edges import hart_smith_factor, strap_factors
from server.mechanics.overlap_mesh import GROWTH, Mesh, graded
from server.mechanics.overlap_solver import GAUSS, Adherend, Array, Course, Loads, Pair, Solver

Layout = Literal["single-lap", "double-lap", "strap", "double-strap", "scarf", "tube-lap"]
PLATES = ("single-lap", "double-lap", "strap", "double-strap")
DOUBLE = ("double-lap", "double-strap")


@dataclass(frozen=True)
class Plate:
    """One adherend: modulus, thickness, Poisson's ratio, shear modulus (tubes in torque; None: E / (2 (1 + nu))).

    ``taper`` is the length over which its free end thins to ``tip`` [mm]; in a scarf, whose pieces taper all along,
    ``tip`` alone is the thickness of the blunt end.
    """

    E: float
    thickness: float
    nu: float = 0.0
    G: float | None = None
    taper: float = 0.0
    tip: float = 0.0

    @property
    def thinnest(self) -> float:
        """Thickness at its thinnest [mm]."""
        return self.tip if self.taper else self.thickness

    @property
    def plane_modulus(self) -> float:
        """E / (1 - nu^2) [MPa]."""
        return self.E / (1 - self.nu**2)

    @property
    def shear_modulus(self) -> float:
        """G, or what an isotropic material has [MPa]."""
        return self.G if self.G is not None else self.E / (2 * (1 + self.nu))


@dataclass(frozen=True)
class BondLine:
    """The adhesive: shear modulus, modulus in tension across the bond, thickness."""

    shear_modulus: float
    E: float
    thickness: float


@dataclass(frozen=True)
class Lap:
    """An overlap of any length: ``width`` of plates, outer ``diameter`` of the inner tube, ``slope`` of a scarf."""

    layout: Layout
    inner: Plate
    outer: Plate
    bond: BondLine
    width: float = 0.0
    diameter: float = 0.0
    slope: float = 0.0

    @property
    def bonds(self) -> int:
        """How many bond lines share the axial load."""
        return 2 if self.layout in DOUBLE else 1

    @property
    def bond_width(self) -> float:
        """Width of one bond line, a tube's around its bond radius [mm]."""
        return 2 * np.pi * self.bond_radius if self.layout == "tube-lap" else self.width

    @property
    def bond_radius(self) -> float:
        """Outer radius of the inner tube plus half the bond line [mm]."""
        return (self.diameter + self.bond.thickness) / 2

    @property
    def arm(self) -> float:
        """Distance between the axes of inner and outer plate, the bond line left out [mm]."""
        return (self.inner.thickness + self.outer.thickness) / 2


@dataclass(frozen=True)
class Action:
    """What acts beside the axial load: moment and shear in the middle of the overlap (at the butt for straps), positive
    as in a beam, torque, and ``strain``, the free strain of the outer adherend over that of the inner one."""

    moment: float = 0.0
    shear: float = 0.0
    torque: float = 0.0
    strain: float = 0.0


@dataclass(frozen=True, eq=False)
class Response:
    """Stresses [MPa] of a batch of overlaps, linear in the columns ``(bonds, places, columns)``.

    ``fields``: "shear", "peel", "inner", "outer" (stress along an adherend, one stack of places a face) and for tubes
    "shear_around". ``shares`` gives for an axial load of each [N] how much of each column acts.
    """

    lap: Lap
    at: Array
    fields: dict[str, Array]
    shares: Callable[[Array], Array]

    def under(self, axial: ArrayLike) -> dict[str, Array]:
        """The fields under an axial load of each overlap [N], ``(bonds, places)``."""
        load = np.array(np.broadcast_to(np.asarray(axial, dtype=float), len(self.at)))
        act = self.shares(load)
        return {name: np.einsum("bxc,bc->bx", field, act) for name, field in self.fields.items()}


def peaks(fields: dict[str, Array]) -> dict[str, Array]:
    """The largest shear, the largest tension across the bond (0 where there is none), the largest adherend stresses."""
    shear = np.hypot(fields["shear"], fields["shear_around"]) if "shear_around" in fields else np.abs(fields["shear"])
    return {
        "shear": shear.max(axis=1),
        "peel": np.maximum(fields["peel"].max(axis=1), 0.0),
        **{name: np.abs(fields[name]).max(axis=1) for name in ("inner", "outer")},
    }


def respond(lap: Lap, overlap: ArrayLike, action: Action | None = None) -> Response:
    r"""Stresses of an overlap under any axial load and the other actions.

    Parameters
    ----------
    lap : Lap
        The overlap's make; lengths in [mm], moduli in [MPa].
    overlap : array_like
        One or more overlap lengths (each side of the butt for straps; along the piece for scarfs) [mm].
    action : Action, optional
        Moment [N mm], shear [N], torque [N mm], free strain [-].

    Returns
    -------
    Response
        Stresses [MPa] along every overlap.

    Raises
    ------
    InputError
        If a size or modulus is not above zero, or the layout lacks its width, diameter or slope.

    Notes
    -----
    Linear elastic but for the edge moments, which depend on the axial load as geometry and deflection say. Adherends do
    not shear; peaks at the very ends are upper estimates, for spew fillets and shearing adherends soften them.

    References
    ----------
    .. [1] D. A. Bigwood and A. D. Crocombe, "Elastic analysis and engineering design formulae for bonded joints",
       Int. J. Adhesion and Adhesives 9 (1989), 229-242.
    """
    from server.mechanics.overlap_scarf import respond_scarf
    from server.mechanics.overlap_tube import respond_tube

    action = action or Action()
    lengths = np.atleast_1d(positive("overlap", overlap, "mm"))
    check(lap)
    if lap.layout == "tube-lap":
        return respond_tube(lap, lengths, action)
    if lap.layout == "scarf":
        return respond_scarf(lap, lengths, action)
    return _double(lap, lengths, action) if lap.layout in DOUBLE else _single(lap, lengths, action)


def check(lap: Lap) -> None:
    """Refuse sizes that no joint has, by name."""
    from server.mechanics.overlap_taper import check_taper

    for name, plate in (("inner", lap.inner), ("outer", lap.outer)):
        positive(f"{name}.E", plate.E, "MPa")
        positive(f"{name}.thickness", plate.thickness, "mm")
    positive("shear_modulus", lap.bond.shear_modulus, "MPa")
    positive("E", lap.bond.E, "MPa")
    positive("thickness", lap.bond.thickness, "mm")
    if lap.layout == "tube-lap":
        positive("diameter", lap.diameter, "mm")
        if lap.inner.thickness > lap.diameter / 2 * (1 + 1e-9):
            raise InputError(
                "inner.thickness",
                f"a wall of {lap.inner.thickness:g} mm does not fit in a diameter of {lap.diameter:g} mm.",
            )
    else:
        positive("width", lap.width, "mm")
    if lap.layout == "scarf":
        positive("slope", lap.slope, "")
        tip, t = lap.inner.tip, lap.inner.thickness
        if tip and not 0 < tip < t / 2:
            raise InputError("inner.tip", f"two blunt tips of {tip:g} mm leave no scarf in {t:g} mm of thickness.")
    check_taper(lap)


def plate_beam(plate: Plate, width: float, share: float = 1.0) -> Adherend:
    """A plate in cylindrical bending; ``share`` of its stiffness."""
    stiffness = plate.plane_modulus * plate.thickness * width * share
    return Adherend(1 / stiffness, 12 / (stiffness * plate.thickness**2), plate.thickness / 2)


def mesh_for(lap: Lap, lengths: Array, growth: float = GROWTH) -> Mesh:
    """A mesh that resolves shear and peel of plates at both ends."""
    from server.mechanics.overlap_taper import breaks_of

    c = [plate_beam(replace(plate, thickness=plate.thinnest), 1.0) for plate in (lap.inner, lap.outer)]
    softness = sum(float(np.asarray(a.stretch)) + float(np.asarray(a.arm)) ** 2 * float(np.asarray(a.bend)) for a in c)
    shear = np.sqrt(2 * lap.bond.shear_modulus / lap.bond.thickness * softness)
    peel = (lap.bond.E / lap.bond.thickness * sum(float(np.asarray(a.bend)) for a in c)) ** 0.25
    return graded(lengths, np.full(len(lengths), max(shear, peel)), growth=growth, places=breaks_of(lap, lengths))


def axial_system(lap: Lap, lengths: Array, strain: float, growth: float = GROWTH) -> tuple[Solver, Loads]:
    """Plates under axial load: the solver with its columns.

    Columns of a single lap or strap: axial, edge moments of inner and outer adherend, moment, shear, free strain; of a
    double one (half of it by symmetry): axial, free strain.
    """
    mesh, bond, b = mesh_for(lap, lengths, growth), lap.bond, lap.width
    stiffness = (bond.shear_modulus * b / bond.thickness, bond.E * b / bond.thickness)
    outer, inner = _beams(lap, mesh, lengths)
    ones = np.ones(len(lengths))
    zero = 0 * ones
    if lap.layout in DOUBLE:
        # one outer plate and half of the middle one, which stays straight
        half = Adherend(2 / (lap.inner.plane_modulus * lap.inner.thickness * b), 0.0, lap.inner.thickness / 2)
        loads = Loads(
            left=(np.zeros((len(lengths), 2)),) * 3,
            right=(np.stack((ones / 2, zero), 1), np.zeros((len(lengths), 2)), np.zeros((len(lengths), 2))),
            axial=np.stack((ones / 2, zero), 1),
            moment=_moments(np.zeros((len(lengths), 2)), np.zeros((len(lengths), 2))),
            mismatch=np.stack((zero, ones * strain), 1),
        )
        right: Literal["loads", "guided"] = "guided" if lap.layout == "double-strap" else "loads"
        return Solver(Pair(outer, half, *stiffness), mesh, right=right), loads
    h, L = lap.arm, lengths
    none = np.zeros((len(lengths), 6))
    # the edge moment of the inner plate hogs (its axis lies below the load's line), that of the outer one sags
    start = np.stack((zero, -ones, zero, ones, -L / 2, zero), 1)
    slope = np.stack((-h / L, 1 / L, 1 / L, zero, ones, zero), 1)
    at_right = np.stack((zero, zero, ones, ones, L / 2, zero), 1)
    along = np.stack((ones, zero, zero, zero, zero, zero), 1)
    loads = Loads(
        left=(none, none, none),
        right=(along, slope, at_right),
        axial=along,
        moment=_about_inner(lap, lengths, along, _moments(start, slope)),
        mismatch=np.stack((zero, zero, zero, zero, zero, ones * strain), 1),
    )
    return Solver(Pair(outer, inner, *stiffness), mesh), loads


def _beams(lap: Lap, mesh: Mesh, lengths: Array) -> tuple[Adherend, Adherend]:
    """Outer plate, which ends at the left, and inner one, which ends at the right, tapered or not."""
    from server.mechanics.overlap_taper import beam_at

    points = mesh.inside(GAUSS)
    outer = beam_at(lap.outer, lap.width, points, lengths, "left") if lap.outer.taper else None
    inner = beam_at(lap.inner, lap.width, points, lengths, "right") if lap.inner.taper else None
    return outer or plate_beam(lap.outer, lap.width), inner or plate_beam(lap.inner, lap.width)


def _about_inner(lap: Lap, lengths: Array, axial: Array, moment: Callable[[Array], Array]) -> Callable[[Array], Array]:
    """Moments of the whole joint about the inner plate's axis, which rises towards the bond where that plate thins."""
    from server.mechanics.overlap_taper import thickness_at

    if not lap.inner.taper:
        return moment

    def shifted(x: Array) -> Array:
        rise = (lap.inner.thickness - thickness_at(lap.inner, x, lengths, "right")) / 2
        return np.asarray(moment(x) + rise[..., None] * axial[:, None, None])

    return shifted


def _moments(start: Array, slope: Array) -> Callable[[Array], Array]:
    return lambda x: start[:, None, None] + slope[:, None, None] * x[..., None]


def edge_moments(lap: Lap, lengths: Array) -> Callable[[Array], tuple[Array, Array]]:
    """Axial loads [N] -> edge moments of the inner and the outer plate [N mm], both as positive numbers."""
    stiffness = [p.plane_modulus * p.thickness**3 / 12 * lap.width for p in (lap.inner, lap.outer)]

    def single(load: Array) -> tuple[Array, Array]:
        at = [hart_smith_factor(np.maximum(load, 0.0), lengths, bending_stiffness=D) for D in stiffness]
        return at[0] * load * lap.arm / 2, at[1] * load * lap.arm / 2

    def strap(load: Array) -> tuple[Array, Array]:
        along = [p.plane_modulus * p.thickness * lap.width for p in (lap.inner, lap.outer)]
        edge, butt = strap_factors(
            np.maximum(load, 0.0),
            lengths,
            stretching=(along[0], along[1]),
            bending=(stiffness[0], stiffness[1]),
            arm=lap.arm,
        )
        return edge * load * lap.arm, butt * load * lap.arm

    return strap if lap.layout == "strap" else single


def _single(lap: Lap, lengths: Array, action: Action) -> Response:
    solver, loads = axial_system(lap, lengths, action.strain)
    course = solver.solve(loads)
    return Response(lap, course.at, plate_fields(lap, course, loads, lengths), single_shares(lap, lengths, action))


def single_shares(lap: Lap, lengths: Array, action: Action) -> Callable[[Array], Array]:
    """How much of the six columns of a single lap or strap acts under an axial load."""
    moments, ones = edge_moments(lap, lengths), np.ones(len(lengths))

    def shares(load: Array) -> Array:
        inner, outer = moments(load)
        return np.stack((load, inner, outer, action.moment * ones, action.shear * ones, ones), 1)

    return shares


def double_shares(action: Action, count: int) -> Callable[[Array], Array]:
    """How much of axial load, free strain, moment and shear acts, in this order."""
    ones = np.ones(count)
    return lambda load: np.stack((load, ones, action.moment * ones, action.shear * ones), 1)


def plate_fields(lap: Lap, course: Course, loads: Loads, lengths: Array) -> dict[str, Array]:
    """Stresses from the course of one outer plate over one bond line; the inner one follows from equilibrium."""
    from server.mechanics.overlap_taper import thickness_at

    count = course.slip.shape[-1]
    b = lap.width
    t_outer = thickness_at(lap.outer, course.at, lengths, "left")[..., None]
    t_inner = thickness_at(lap.inner, course.at, lengths, "right")[..., None]
    axial = np.concatenate((loads.axial, np.zeros((len(lengths), count - loads.axial.shape[1]))), axis=1)
    inner_force = axial[:, None] - course.force
    fields = {
        "shear": lap.bond.shear_modulus / lap.bond.thickness * course.slip,
        "peel": lap.bond.E / lap.bond.thickness * course.opening,
        "outer": _faces(course.force, course.moment, t_outer, b),
    }
    if lap.layout in DOUBLE:
        fields["inner"] = 2 * inner_force / (b * lap.inner.thickness)
        return fields
    total = loads.moment(course.at[:, :, None])[:, :, 0]
    if total.shape[-1] < count:
        total = np.concatenate((total, np.zeros((*total.shape[:2], count - total.shape[-1]))), axis=-1)
    inner_moment = total + (t_outer + t_inner) / 2 * course.force - course.moment
    fields["inner"] = _faces(inner_force, inner_moment, t_inner, b)
    return fields


def _faces(force: Array, moment: Array, thickness: ArrayLike, width: float) -> Array:
    """Stress on both faces of a plate, one stack of places after the other."""
    thick = np.asarray(thickness)
    mean, edge = force / (width * thick), 6 * moment / (width * thick**2)
    return np.concatenate((mean + edge, mean - edge), axis=1)


def _double(lap: Lap, lengths: Array, action: Action) -> Response:
    """Axial load and free strain by symmetry, moment and shear by antisymmetry, for both bond lines."""
    solver, loads = axial_system(lap, lengths, action.strain)
    course = solver.solve(loads)
    even = plate_fields(lap, course, loads, lengths)
    shares = double_shares(action, len(lengths))
    if not (action.moment or action.shear):
        fields = {name: np.concatenate((f, 0 * f), axis=-1) for name, f in even.items()}
        return Response(lap, course.at, fields, shares)
    odd = _odd_fields(lap, solver.mesh, lengths)
    fields = {}
    for name, field in even.items():
        if name == "inner":  # the odd part bends the middle plate, the even one only stretches it
            field = np.concatenate((field, field), axis=1)
            fields[name] = np.concatenate((field, odd[name]), axis=-1)
        else:
            fields[name] = np.concatenate(
                [np.concatenate((field, side * odd[name]), axis=-1) for side in (1.0, -1.0)], axis=1
            )
    return Response(lap, course.at, fields, shares)


def _odd_fields(lap: Lap, mesh: Mesh, lengths: Array) -> dict[str, Array]:
    """Upper half of a double lap that bends: the middle plate only turns, the outer ones are opposite."""
    from server.mechanics.overlap_taper import thickness_at

    b, h, ones = lap.width, lap.arm, np.ones(len(lengths))
    outer, half = plate_beam(lap.outer, b), plate_beam(lap.inner, b, 0.5)
    inner = Adherend(0.0, half.bend, lap.inner.thickness / 2)
    D, EA = 1 / float(np.asarray(outer.bend)), 1 / float(np.asarray(outer.stretch))
    bent = 0.5 / (D + EA * h**2)  # curvature of the two outer plates under a moment of 1
    at_end = np.stack((ones, lengths / 2), 1)
    loads = Loads(
        left=(np.zeros((len(lengths), 2)),) * 3,
        right=(-EA * h * bent * at_end, np.stack((0 * ones, ones / 2), 1), D * bent * at_end),
        axial=np.zeros((len(lengths), 2)),
        moment=_moments(np.stack((ones / 2, -lengths / 4), 1), np.stack((0 * ones, ones / 2), 1)),
        mismatch=np.zeros((len(lengths), 2)),
    )
    bond = lap.bond
    thinning = _beams(lap, mesh, lengths)[0]
    pair = Pair(thinning, inner, bond.shear_modulus * b / bond.thickness, bond.E * b / bond.thickness)
    course = Solver(pair, mesh).solve(loads)
    total = loads.moment(course.at[:, :, None])[:, :, 0]
    thick = thickness_at(lap.outer, course.at, lengths, "left")[..., None]
    moment = 2 * (total + (thick + lap.inner.thickness) / 2 * course.force - course.moment)
    return {
        "shear": bond.shear_modulus / bond.thickness * course.slip,
        "peel": bond.E / bond.thickness * course.opening,
        "outer": _faces(course.force, course.moment, thick, b),
        "inner": _faces(0 * moment, moment, lap.inner.thickness, b),
    }
