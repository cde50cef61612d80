"""The working of a member whose joints slip: stiffness of a joint, its slip and flow, and what is left of EI."""

from __future__ import annotations

import numpy as np

from server.checks.along import SHARED_FLOW, SLIDING_FLOW, Demand, SlidingAlong
from server.checks.crosssection import Site, Stretch
from server.checks.holds import BOND, FASTENERS, Hold, spacing_zones
from server.checks.resistance import Judge
from server.checks.slide import ULTIMATE, Slide
from server.mechanics.piecewise import evaluate
from server.mechanics.slip import Zone
from server.working import Working

METHOD = "layers that bend together and slide (Newmark, Siess and Viest 1951), solved exactly between breaks"


def write_sliding_flow(
    site: Site, along: SlidingAlong, demand: Demand, judge: Judge, group: str
) -> tuple[float, float]:
    """Stiffness, slip and flow at the governing place; return flow and slip."""
    row, slide = demand.peak, along.slide
    at, flow = float(demand.at[row]), float(demand.flow[row])
    stretch = slide.body.stretches[int(demand.stretch[row])]
    if along.by_field(site, stretch):
        return _write_share(site, along, stretch, demand, judge, group)
    hold = slide.holds.each[site.index]
    zone = _zone_at(hold, slide, site, at, row, flow)
    k = _write_stiffness(site, hold, zone, slide, judge, group)
    slip = flow / k if k > 0 else 0.0
    combination = judge.actions.strength_names[row]
    judge.working.note(
        "Slip at the governing place",
        f"{METHOD}; at {at:.6g} mm, combination {combination}.",
        value=slip,
        unit="mm",
        source="N. M. Newmark, C. P. Siess, I. M. Viest, Proc. SESA 9 (1951)",
        group=group,
        symbol="s",
    )
    q = judge.working.step(
        "Shear flow", "q", SLIDING_FLOW, {"k": (k, "N/mm2"), "s": (slip, "mm")},
        unit="N/mm", source=f"stiffness x slip; combination {combination}, at {at:.6g} mm", group=group,
    )  # fmt: skip
    return q, slip


def _write_share(
    site: Site, along: SlidingAlong, stretch: Stretch, demand: Demand, judge: Judge, group: str
) -> tuple[float, float]:
    """The layer's flow and this joint's share of it by the field."""
    row, slide = demand.peak, along.slide
    at, weight = float(demand.at[row]), abs(along.shares(stretch, site).weight[site.index])
    whole = float(demand.flow[row]) / weight if weight > 0 else 0.0
    judge.working.note(
        "Flow of all joints between the two pieces",
        f"{METHOD}; at {at:.6g} mm, combination {judge.actions.strength_names[row]}.",
        value=whole, unit="N/mm", source="layers that slide", group=group, symbol="q_L",
    )  # fmt: skip
    flow = judge.working.step(
        "Shear flow", "q", SHARED_FLOW, {"c_f": (weight, ""), "q_L": (whole, "N/mm")},
        unit="N/mm",
        source="c_f: share by the field of shear in the section, every joint with its own stiffness (finite elements)",
        group=group,
    )  # fmt: skip
    curve = slide.slips[site.index]
    return flow, float(curve.over(stretch.start, stretch.end).absolute()[0][row])


def _zone_at(hold: Hold, slide: Slide, site: Site, at: float, row: int, flow: float) -> Zone | None:
    """The zone in which the flow was found: at a change of spacing, the side that carries it."""
    curve = slide.flows[site.index]
    near = [zone for zone in hold.zones if zone.start <= at <= zone.end]
    if len(near) < 2:
        return near[0] if near else None
    left = abs(float(evaluate(curve.breaks, curve.coefficients[row], at, "left")))
    return near[0] if abs(left - flow) <= 1e-6 * max(flow, 1e-300) else near[-1]


def _write_stiffness(site: Site, hold: Hold, zone: Zone | None, slide: Slide, judge: Judge, group: str) -> float:
    if zone is None:
        return 0.0
    working, document = judge.working, judge.document
    if hold.by == "bond" and not hold.assumed:
        assert site.spec.adhesive is not None
        adhesive = document.adhesive(site.spec.adhesive)
        return working.step(
            "Stiffness of the bond along the member", "k", BOND,
            {
                "G_a": (adhesive.shear_modulus or 0.0, "MPa"), "b": (site.width, "mm"),
                "c": (site.spec.coverage, ""), "t_a": (adhesive.thickness or 1.0, "mm"),
            },
            unit="N/mm2", source=f"layer of {site.spec.adhesive} in shear", group=group,
        )  # fmt: skip
    if hold.by == "bond":
        working.note(
            "Stiffness of the bond along the member",
            "Not given; a stiff bond stands in for it.",
            value=zone.stiffness,
            unit="N/mm2",
            group=group,
            symbol="k",
        )
        return zone.stiffness
    assert site.spec.fastener is not None
    fastener = document.fastener(site.spec.fastener)
    spacing = next(s for start, _, s in spacing_zones(site, slide.body.length) if start == zone.start)
    K = (fastener.slip_modulus or 0.0, "N/mm")
    if slide.ultimate:
        K = (
            working.step(
                "Slip modulus for strength", "K_u", "2/3*K", {"K": K},
                unit="N/mm", source="EN 1995-1-1:2004 expression (2.1)", group=group,
            ),
            "N/mm",
        )  # fmt: skip
    return working.step(
        "Stiffness of the fasteners along the member", "k", FASTENERS,
        {"n": (site.spec.rows, ""), "K": K, "s": (spacing, "mm")},
        unit="N/mm2", source=f"rows x slip modulus of {site.spec.fastener} / spacing", group=group,
    )  # fmt: skip


def write_method(slide: Slide, working: Working, group: str) -> None:
    """Say which method found the curves, how fine it is, and how well its own equilibrium holds."""
    stations = slide.response.stations
    joints = sum(1 for hold in slide.holds.each if hold.zones)
    steepest = float(slide.response.stacks.rate.max())
    words = (
        f"{len(slide.body.parts)} layers, each plane by itself, {joints} joints that give; deflection and rotation in "
        f"common. {METHOD}; curves drawn through exact values at {len(stations.places)} places, closest where a wave "
        f"with exp(-{steepest:.3g} x/mm) dies away. Shear deformation by the section's GA."
    )
    working.note(
        "Layers that slide",
        f"{words} Equilibrium: axial forces of all pieces sum to {_unbalanced(slide):.1e} of the largest.",
        value=float(len(stations.places)),
        source="U. A. Girhammar, D. H. Pan, Int. J. Mech. Sci. 49 (2007) 239-255; N. M. Newmark et al. (1951)",
        group=group,
    )
    if slide.ultimate:
        working.note(
            "Slip modulus for strength",
            "Shear, flow and stresses stand on K_u = 2/3 K_ser of every fastener, deflection on K_ser.",
            value=ULTIMATE,
            source="EN 1995-1-1:2004 expression (2.1)",
            group=group,
        )


def _unbalanced(slide: Slide) -> float:
    axial = slide.strength_curves.axial[..., 0]
    largest = float(np.abs(axial).max(initial=0.0))
    return float(np.abs(axial.sum(axis=0)).max(initial=0.0)) / largest if largest > 0 else 0.0


def write_effective(slide: Slide, EI: float, working: Working, group: str) -> float:
    """Bending stiffness left, from the greatest deflections of the rigid and the sliding member."""
    return working.step(
        "Effective bending stiffness", "EI_eff", "EI*u_r/u_s",
        {"EI": (EI, "N*mm2"), "u_r": (slide.rigid_sag, "mm"), "u_s": (slide.sliding_sag, "mm")},
        unit="N*mm2",
        source="greatest deflections with rigid joints and with slip, shear deformation left out of both",
        group=group,
    ) if slide.sliding_sag > 0 else EI  # fmt: skip
