"""The most loaded ribs of a panel, checked once more with their own tributary width.

Units: N, mm, MPa. Bending of the whole section makes ribs share a load by their stiffness; a skin does not carry it
across between ribs that stand further apart than the panel is deep. So a rib that bends more under the load on its own
width is also checked alone: its pieces with its strip of the skins, under the strip's part of the load. The worse
governs.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np

from server.checks.crosssection import Body, CrossSection, Part, Site, lines_of
from server.checks.joints import JointCheck
from server.checks.piece_stresses import Bent
from server.checks.pieces import PieceCheck, fibre_demands, piece_strength
from server.checks.resistance import Claim, Judge
from server.checks.rules import Origin, Printed
from server.checks.wide_bonds import extent
from server.mechanics.flow import JointFlow, joint_flows
from server.mechanics.graph import components
from server.mechanics.section import Piece, SectionProperties, properties
from server.working.record import Given

WORDS = ", the rib with its own width"
SOURCE = "the rib alone, under the load on its own width of the skin (common practice)"
STRESS = "abs(E*k_t*M*(u - u_r)/EI_r)"
_LEVEL = 0.02  # rise over run up to which a bond lies level


@dataclass(frozen=True, eq=False)
class Rib:
    """A rib with its strips of the skins.

    ``parts`` of the rib itself; ``pieces`` and ``whole`` of rib and strips; ``width`` tributary, ``panel`` of the
    whole skin [mm]; ``flows`` by the joint's index.
    """

    parts: tuple[Part, ...]
    pieces: tuple[Piece, ...]
    width: float
    panel: float
    whole: SectionProperties
    flows: Mapping[int, JointFlow]

    @property
    def load(self) -> float:
        """The rib's part of the load."""
        return self.width / self.panel


def loaded_ribs(section: CrossSection) -> list[Rib]:
    """The ribs that bend more alone than in the whole panel."""
    skins = [part for part in section.parts if part.lies_flat and len(_bonds(part, section.sites)) > 1]
    if not skins:
        return []
    ribs = _ribs(section, skins)
    deep = float(section.properties.edges.boxes()[1][:, 1].max() - section.properties.edges.boxes()[0][:, 1].min())
    if len(ribs) < 2 or min(right[0] - left[1] for (left, _), (right, _) in pairwise(ribs)) <= deep:
        return []
    skin = max(skins, key=lambda part: section.centroids[part.index])
    between = [(left[1] + right[0]) / 2 for (left, _), (right, _) in pairwise(ribs)]
    edges = [float(skin.box[0][0]), *between, float(skin.box[1][0])]
    found = [
        _alone(section, skins, parts, strip, edges[-1] - edges[0])
        for (_, parts), strip in zip(ribs, pairwise(edges), strict=True)
    ]
    return [rib for rib in found if rib.load * section.properties.EI > rib.whole.EI * (1 + 1e-6)]


def add_rib_claims(
    joints: Sequence[JointCheck], pieces: Sequence[PieceCheck], body: Body, judge: Judge, *, sliding: bool
) -> None:
    """Set the demands of the most loaded ribs, each alone, against the same strengths.

    With joints ``sliding`` a rib alone is taken to have as many times the demand of the whole as with rigid joints.
    """
    ribs = {t: found for t, stretch in enumerate(body.stretches) if (found := loaded_ribs(stretch.section))}
    if not ribs:
        return
    for joint in joints:
        own = {t: rib for t, found in ribs.items() for rib in found if joint.site.index in rib.flows}
        _joint_claims(joint, own, body, judge)
    for piece in pieces:
        if piece.bent is not None and piece.claims:
            held = {t: rib for t, found in ribs.items() for rib in found if piece.part in rib.parts}
            alone = _bent_more(piece, held, body) if sliding else _piece_claims(piece, piece.bent, held, judge)
            piece.claims = [*piece.claims, *alone]


def _bonds(part: Part, sites: Sequence[Site]) -> list[Site]:
    """The level joints of a piece."""
    return [site for site in sites if part in (site.first, site.second) and _level(site)]


def _level(site: Site) -> bool:
    (left, low), (right, high) = site.contact.start.tolist(), site.contact.end.tolist()
    return bool(abs(high - low) <= _LEVEL * abs(right - left))


def _ribs(section: CrossSection, skins: Sequence[Part]) -> list[tuple[tuple[float, float], tuple[Part, ...]]]:
    """What is left without the skins, body by body: where it is joined to the upper skin, from left to right."""
    place = {part.index: i for i, part in enumerate(section.parts)}
    upper = max(skins, key=lambda part: section.centroids[part.index])
    names = {part.index for part in skins}
    ends = [(place[site.first.index], place[site.second.index]) for site in section.sites]
    cut = {k for k, site in enumerate(section.sites) if {site.first.index, site.second.index} & names}
    found = []
    for group in components(len(section.parts), ends, cut):
        parts = tuple(section.parts[i] for i in group if section.parts[i].index not in names)
        own = {part.index for part in parts}
        reach = [
            x
            for site in _bonds(upper, section.sites)
            if own & {site.first.index, site.second.index}
            for x in (float(site.contact.start[0]), float(site.contact.end[0]))
        ]
        if reach:
            found.append(((min(reach), max(reach)), parts))
    return sorted(found, key=lambda each: each[0])


def _alone(
    section: CrossSection, skins: Sequence[Part], own: tuple[Part, ...], strip: tuple[float, float], panel: float
) -> Rib:
    """A rib with the strip of every skin that it is joined to; strips count as much as their skin does."""
    shares = section.shares or (1.0,) * len(section.parts)
    kept = {part.index: 1.0 for part in own}
    for skin, share in zip(section.parts, shares, strict=True):
        if skin in skins:
            left, right = max(strip[0], float(skin.box[0][0])), min(strip[1], float(skin.box[1][0]))
            joined = any(
                site.first is other or site.second is other for site in _bonds(skin, section.sites) for other in own
            )
            if joined and right > left:
                kept[skin.index] = share * (right - left) / extent(skin, 0)
    places = [i for i, part in enumerate(section.parts) if part.index in kept]
    parts = tuple(section.parts[i] for i in places)
    pieces = [
        replace(section.pieces[i], E=section.pieces[i].E * kept[section.parts[i].index] / shares[i]) for i in places
    ]
    sites = [site for site in section.sites if site.first in parts and site.second in parts]
    whole = properties(pieces)
    flows = joint_flows(pieces, whole, lines_of(parts, sites))
    by_index = {site.index: flow for site, flow in zip(sites, flows, strict=True)}
    return Rib(own, tuple(pieces), strip[1] - strip[0], panel, whole, by_index)


def _joint_claims(joint: JointCheck, ribs: Mapping[int, Rib], body: Body, judge: Judge) -> None:
    """Scale the joint's claims by the rib's flow over the whole section's."""
    index = joint.site.index
    before: dict[int, tuple[Printed, ...]] = {}
    times: dict[int, float] = {}
    for t, rib in ribs.items():
        alone, together = rib.flows[index], body.stretches[t].section.flows.get(index)
        if together is None or not alone.share or not together.share:
            continue
        before[t] = _flow_steps(rib, alone.share, together.share, body.stretches[t].section)
        times[t] = before[t][-1].value
    if joint.demand is None or not any(value > 1 for value in times.values()):
        return
    factor = np.array([times.get(t, 1.0) for t in joint.demand.stretch.tolist()])
    joint.times = np.maximum(factor, 1.0)
    joint.claims += [_scaled(claim, times, before) for claim in joint.claims if claim.symbol in ("tau", "F")]
    if joint.fastening is not None:
        own = np.array([times.get(t, 1.0) for t in joint.fastening.demand.stretch.tolist()])
        joint.fastening = replace(joint.fastening, times=np.maximum(own, 1.0))
        judge.findings.caution(
            "rib with its own width",
            f"{joint.site.id}: alone with its own width of the skin the rib has {max(times.values()):.3f} times the "
            "flow that it has in the whole section. The fasteners are judged with that"
            + (", with the glue gone as well" if joint.site.bonded else "")
            + ", and the spacing needed and its zones have it in them.",
        )


def _scaled(claim: Claim, times: Mapping[int, float], before: Mapping[int, tuple[Printed, ...]]) -> Claim:
    unit = claim.strength.unit
    factor = np.array([times.get(t, 1.0) for t in claim.stretch.tolist()])
    origin = Origin(
        "Demand with the rib's own width",
        f"k_r*{claim.symbol}",
        {"k_r": (factor, ""), claim.symbol: (claim.demand, unit)},
        {},
        SOURCE,
        before,
    )
    strength = claim.strength._replace(what=claim.strength.what + WORDS)
    return claim._replace(strength=strength, symbol=f"{claim.symbol}_r", demand=origin.demand(), origin=origin)


def _own_steps(rib: Rib) -> tuple[Printed, ...]:
    """The rib's part of the load, its neutral axis and its bending stiffness."""
    parts = rib.whole.pieces
    load = Printed(
        "The rib's part of the load",
        "k_t",
        "b_t/b",
        {"b_t": (rib.width, "mm"), "b": (rib.panel, "mm")},
        "",
        "b_t: half the way to either neighbour, or to the skin's edge; b: the skin's whole width",
    )
    values: dict[str, Given] = {
        "E": ([piece.E for piece in rib.pieces], "MPa"),
        "A": (parts.area.tolist(), "mm2"),
        "u": (parts.centroid[:, 1].tolist(), "mm"),
    }
    names = f"in order: {', '.join(piece.name for piece in rib.pieces)}; a skin's E times the share its strip has of it"
    axis = Printed("Neutral axis of the rib alone", "u_r", "sum(E*A*u)/sum(E*A)", values, "mm", names)
    stiffness = Printed(
        "Bending stiffness of the rib alone",
        "EI_r",
        "sum(E*(I + A*(u - u_r)**2))",
        {**values, "I": (parts.inertia[:, 0].tolist(), "mm4"), "u_r": (axis.value, "mm")},
        "N*mm2",
        names,
    )
    return load, axis, stiffness


def _flow_steps(rib: Rib, alone: float, together: float, section: CrossSection) -> tuple[Printed, ...]:
    """The steps to the rib's flow over that of the whole section, which comes last."""
    load, axis, stiffness = _own_steps(rib)
    ratio = Printed(
        "Flow of the rib alone over that in the whole section",
        "k_r",
        "k_t*S_r*EI/(EI_r*S)",
        {
            "k_t": (load.value, ""),
            "S_r": (abs(alone), "N*mm"),
            "EI": (section.properties.EI, "N*mm2"),
            "EI_r": (stiffness.value, "N*mm2"),
            "S": (abs(together), "N*mm"),
        },
        "",
        SOURCE,
    )
    return load, axis, stiffness, ratio


def _piece_claims(check: PieceCheck, bent: Bent, ribs: Mapping[int, Rib], judge: Judge) -> Iterator[Claim]:
    """Bending of a piece of the rib, in the rib alone."""
    entries = [entry for entry, t in enumerate(bent.stretch.tolist()) if t in ribs]
    if not entries:
        return
    stretches = bent.stretch[entries]
    steps = {t: _own_steps(rib) for t, rib in ribs.items()}
    k_t, u_r, EI_r = (np.array([steps[t][k].value for t in stretches.tolist()])[:, None] for k in range(3))
    moment, at, part = bent.moment[entries], bent.at[entries], check.part
    levels = np.array(_levels(part, ribs[int(stretches[0])]))[:, None, None]
    stress = -part.material.E * k_t * moment * (levels - u_r) / EI_r
    alone = Bent(stress, moment, at, stretches)
    for word, demand in fibre_demands(part, alone):
        entry, columns = demand.argmax(axis=0), np.arange(demand.shape[1])
        worst = demand[entry, columns]
        strength = piece_strength(part, word, f"{word} in {part.name}{WORDS}", judge)
        if worst.max() <= 0 or strength is None:
            continue
        fibre = np.abs(np.abs(stress[:, entry, columns]) - worst).argmin(axis=0)
        origin = Origin(
            "Normal stress of the rib alone",
            STRESS,
            {
                "k_t": (k_t[entry, 0], ""),
                "M": (moment[entry, columns], "N*mm"),
                "u": (levels[fibre, 0, 0], "mm"),
                "u_r": (u_r[entry, 0], "mm"),
                "EI_r": (EI_r[entry, 0], "N*mm2"),
            },
            {"E": (part.material.E, "MPa")},
            SOURCE,
            steps,
        )
        over = np.where(worst > 0, origin.demand(), 0.0)
        yield Claim(strength, "sigma_r", over, at[entry, columns], stretches[entry], origin)


def _bent_more(check: PieceCheck, ribs: Mapping[int, Rib], body: Body) -> Iterator[Claim]:
    """The piece's bending claims times the curvature of the rib alone over that of the whole section."""
    before = {t: (*_own_steps(rib), _curvature(rib, body.stretches[t].section)) for t, rib in ribs.items()}
    times = {t: steps[-1].value for t, steps in before.items()}
    if times:
        yield from (_scaled(claim, times, before) for claim in check.claims if claim.symbol == "sigma")


def _curvature(rib: Rib, section: CrossSection) -> Printed:
    return Printed(
        "Curvature of the rib alone over that of the whole section",
        "k_r",
        "k_t*EI/EI_r",
        {
            "k_t": (rib.load, ""),
            "EI": (section.properties.EI, "N*mm2"),
            "EI_r": (rib.whole.EI, "N*mm2"),
        },
        "",
        SOURCE,
    )


def _levels(part: Part, rib: Rib) -> tuple[float, float, float]:
    """Top, bottom and centroid of a piece."""
    own = next(k for k, piece in enumerate(rib.pieces) if piece.name == part.name)
    return part.top, part.bottom, float(rib.whole.pieces.centroid[own, 1])
