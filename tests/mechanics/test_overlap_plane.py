"""The beam model of a bond against plane elasticity: three layers as a continuum, by scikit-fem.

Beams and springs leave out the adherends' own shear and the free edge of the adhesive. So the continuum is reckoned
twice: with adherends that hardly shear, which the model must match a little away from the free edge, and with real
ones, for which the model must be an upper estimate.
"""

from __future__ import annotations

import numpy as np
import pytest
import skfem
from skfem.helpers import sym_grad

from server.mechanics.overlap_laps import Action, BondLine, Lap, Plate, respond
from server.mechanics.overlap_strip import Host, Strip, strip_course


def places(length, first, growth=1.25):
    """Grid lines, fine towards both ends."""
    steps = first * growth ** np.arange(200)
    half = np.concatenate(([0.0], np.cumsum(steps)))
    half = half[half < 0.48 * length]
    return np.concatenate((half, [length / 2], length - half[::-1]))


def layered(length, lower, bond, upper, tractions, *, rolled=False, strain=0.0, rigid=True):
    """Shear and peel in the middle of the bond of three layers (E, thickness), Poisson's ratios 0, unit width.

    ``tractions``: (layer, end) -> function of height above the layer's axis giving (along, up). ``rolled``: the
    bottom face cannot lift. ``strain``: free strain of the upper layer. ``rigid``: adherends fifty times as stiff
    across and in shear as along.
    """
    (E1, t1), (Ea, ta), (E2, t2) = lower, bond, upper
    up = np.concatenate((np.linspace(0, t1, 7), t1 + np.linspace(0, ta, 5)[1:], t1 + ta + np.linspace(0, t2, 7)[1:]))
    mesh = skfem.MeshQuad.init_tensor(places(length, ta / 4), up)
    basis = skfem.Basis(mesh, skfem.ElementVector(skfem.ElementQuad2()))
    height = mesh.p[1][mesh.t].mean(axis=0)
    E = np.where(height < t1, E1, np.where(height < t1 + ta, Ea, E2))
    grown = np.where(height > t1 + ta, strain, 0.0)
    flat = basis.with_element(skfem.ElementQuad0())
    more = np.where((height < t1) | (height > t1 + ta), 50.0 if rigid else 1.0, 1.0)
    modulus, free, across = flat.interpolate(E), flat.interpolate(grown), flat.interpolate(E * more)

    def stored(u, v, w):
        e, g = sym_grad(u), sym_grad(v)
        return w.E * e[0, 0] * g[0, 0] + w.across * (e[1, 1] * g[1, 1] + 2 * e[0, 1] * g[0, 1])

    K = skfem.BilinearForm(stored).assemble(basis, E=modulus, across=across)
    f = skfem.LinearForm(lambda v, w: w.E * w.free * sym_grad(v)[0, 0]).assemble(basis, E=modulus, free=free)
    bounds = {"lower": (0.0, t1), "upper": (t1 + ta, t1 + ta + t2)}
    for (layer, end), traction in tractions.items():
        low, high = bounds[layer]
        side = 0.0 if end == "left" else length
        facets = mesh.facets_satisfying(
            lambda p, s=side, a=low, b=high: (np.abs(p[0] - s) < 1e-9) & (p[1] > a) & (p[1] < b), boundaries_only=True
        )
        face = skfem.FacetBasis(mesh, basis.elem, facets=facets)
        axis = (low + high) / 2

        def load(v, w, traction=traction, axis=axis):
            along, lift = traction(w.x[1] - axis)
            return along * v[0] + lift * v[1]

        f += skfem.LinearForm(load).assemble(face)
    corner = basis.get_dofs(lambda p: (np.abs(p[0] - length / 2) < 1e-6) & (np.abs(p[1]) < 1e-9)).all("u^1")
    held = (
        basis.get_dofs(lambda p: np.abs(p[1]) < 1e-9).all("u^2")
        if rolled
        else basis.get_dofs(lambda p: (np.abs(p[1]) < 1e-9) & ((p[0] < 1e-9) | (p[0] > length - 1e-9))).all("u^2")
    )
    u = skfem.solve(*skfem.condense(K, f, D=np.unique(np.concatenate((corner, held)))))
    x = np.linspace(0, length, 400)[1:-1]
    probe = np.vstack((x, np.full_like(x, t1 + ta / 2)))
    cells = mesh.element_finder()(*probe)
    local = mesh.mapping().invF(probe[:, :, None], cells)
    gradient = np.zeros((2, 2, len(x)))
    for i in range(basis.Nbfun):
        each = basis.elem.gbasis(mesh.mapping(), local, i, tind=cells)[0]
        gradient += each.grad[..., 0] * u[basis.element_dofs[i, cells]]
    return x, Ea / 2 * (gradient[0, 1] + gradient[1, 0]), Ea * gradient[1, 1]


def stress_of(N, M, V, t):
    """Traction on a right-hand face: force, sagging moment, upward shear on the right part."""
    return lambda y: (N / t - 12 * M / t**3 * y, -1.5 * V / t * (1 - 4 * y**2 / t**2))


def opposite(traction):
    return lambda y: tuple(-part for part in traction(y))


def compare(x, found, at, expected, *, margin, within):
    inside = (x > margin) & (x < at[-1] - margin)
    reckoned = np.interp(x, at, expected)
    assert np.abs(found - reckoned)[inside].max() < within * np.abs(reckoned[inside]).max()


WITHIN = 0.12  # of the largest stress: a free edge, and arms with half a bond line, are left out of the model
BOND = BondLine(1000.0, 2000.0, 0.3)  # Poisson's ratio 0, so that springs and continuum have the same stiffness


def upper_estimate(x, found, at, expected):
    """Real adherends shear: the end is relieved, by no more than half."""
    inside = (x > 0.6) & (x < at[-1] - 0.6)
    ratio = np.abs(found[inside]).max() / np.abs(np.interp(x, at, expected)[inside]).max()
    assert 0.3 < ratio < 1.02


def test_double_lap():
    L, P, inner, outer = 40.0, 300.0, Plate(70e3, 4.0), Plate(70e3, 2.0)
    tractions = {
        ("lower", "left"): opposite(stress_of(P / 2, 0, 0, 2.0)),
        ("upper", "right"): stress_of(P / 2, 0, 0, 2.0),
    }
    x, shear, peel = layered(L, (70e3, 2.0), (2000.0, 0.3), (70e3, 2.0), tractions, rolled=True)
    response = respond(Lap("double-lap", inner, outer, BOND, width=1.0), L)
    fields = response.under(P)
    compare(x, shear, response.at[0], fields["shear"][0], margin=0.6, within=WITHIN)
    compare(x, peel, response.at[0], fields["peel"][0], margin=0.6, within=WITHIN)
    x, shear, _ = layered(L, (70e3, 2.0), (2000.0, 0.3), (70e3, 2.0), tractions, rolled=True, rigid=False)
    assert np.trapezoid(shear, x) == pytest.approx(P / 2, rel=0.03)
    upper_estimate(x, shear, response.at[0], fields["shear"][0])


def test_single_lap_under_its_end_loads():
    L, P, plate = 30.0, 200.0, Plate(70e3, 2.0)
    lap = Lap("single-lap", plate, plate, BOND, width=1.0)
    response = respond(lap, L)
    fields = response.under(P)
    D = 70e3 * 2.0**3 / 12
    k = 1 / (1 + (c := np.sqrt(P / D) * L / 2) + c**2 / 6)
    # the continuum's axes are a bond line further apart, which its shear balances
    M = k * P * 1.0
    V = (2 * M - P * 2.3) / L
    tractions = {
        ("lower", "left"): opposite(stress_of(P, -M, V, 2.0)),
        ("upper", "right"): stress_of(P, M, V, 2.0),
    }
    x, shear, peel = layered(L, (70e3, 2.0), (2000.0, 0.3), (70e3, 2.0), tractions)
    compare(x, shear, response.at[0], fields["shear"][0], margin=0.6, within=WITHIN)
    compare(x, peel, response.at[0], fields["peel"][0], margin=0.6, within=WITHIN)
    x, shear, _ = layered(L, (70e3, 2.0), (2000.0, 0.3), (70e3, 2.0), tractions, rigid=False)
    upper_estimate(x, shear, response.at[0], fields["shear"][0])


def test_free_strain_of_unlike_layers():
    L, strain = 60.0, 4e-4
    x, shear, _ = layered(L, (11e3, 12.0), (2000.0, 0.3), (70e3, 2.0), {}, strain=strain)
    response = respond(
        Lap("single-lap", Plate(11e3, 12.0), Plate(70e3, 2.0), BOND, width=1.0), L, Action(strain=strain)
    )
    fields = response.under(0.0)
    compare(x, shear, response.at[0], fields["shear"][0], margin=0.6, within=WITHIN)
    x, shear, _ = layered(L, (11e3, 12.0), (2000.0, 0.3), (70e3, 2.0), {}, strain=strain, rigid=False)
    upper_estimate(x, shear, response.at[0], fields["shear"][0])


def test_strip_end_under_a_moment():
    L, M, host, strip = 80.0, 4e4, (30e3, 20.0), (70e3, 2.0)
    at_host = stress_of(0, -M, 0, 20.0)  # the strip lies on top of the continuum, under the member here
    x, shear, peel = layered(
        L, host, (2000.0, 0.3), strip, {("lower", "left"): opposite(at_host), ("lower", "right"): at_host}
    )
    course = strip_course(
        Host(30e3 * 20, 30e3 * 20**3 / 12, 10.0),
        Strip(70e3, 1.0, 2.0),
        shear_modulus=1000.0,
        E=2000.0,
        bond_line=0.3,
        length=L,
        moment=lambda places: np.full((*places.shape, 1), M),
        strain=0.0,
    )
    compare(x, shear, course.at, course.shear[:, 0], margin=0.6, within=WITHIN)
    half = x < L / 2
    force = np.trapezoid(shear[half], x[half])
    assert force == pytest.approx(course.force[len(course.at) // 2, 0], rel=0.03)
    assert peel[3] > 0
    assert course.peel[0, 0] > 0
    tractions = {("lower", "left"): opposite(at_host), ("lower", "right"): at_host}
    x, shear, _ = layered(L, host, (2000.0, 0.3), strip, tractions, rigid=False)
    upper_estimate(x, shear, course.at, course.shear[:, 0])
