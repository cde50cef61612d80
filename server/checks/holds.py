"""How stiffly each joint holds along the member: as built, or with the glue gone.

A bond holds by its layer of adhesive, fasteners by their slip modulus and spacing; the two are never added. What a
joint's stiffness needs and does not have is named here.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Literal

from server import documents
from server.checks.crosssection import Body, Site
from server.mechanics.slip import Zone
from server.mechanics.spacing import SpacedZone
from server.working import formula

BOND = "G_a*b*c/t_a"
FASTENERS = "n*K/s"
STIFF_BOND = 10_000.0  # N/mm3: about G = 2000 MPa at 0.2 mm; stands in for a bond whose stiffness is not given

State = Literal["as built", "glue gone"]
SpacingZone = tuple[float, float, float]  # from, to, spacing


@dataclass(frozen=True)
class Hold:
    """What one joint's stiffness is made of in one state of the member.

    ``zones`` stiffness along the member [N/mm2], empty where nothing holds; ``creep`` divides it in time by 1 + creep;
    ``assumed`` where a bond's stiffness was not given and a stiff one stands in.
    """

    site: Site
    by: Literal["bond", "fasteners", "nothing"]
    zones: tuple[Zone, ...] = ()
    creep: float = 0.0
    assumed: bool = False

    def softened(self, share: float = 1.0) -> tuple[Zone, ...]:
        """The zones after creep, or with a share of the stiffness of fasteners."""
        by = (1 + self.creep) / share
        return tuple(Zone(zone.start, zone.end, zone.stiffness / by) for zone in self.zones)


@dataclass(frozen=True)
class Holds:
    """Every joint in one state, in the order of the document, and in words what is missing."""

    state: State
    each: tuple[Hold, ...]
    missing: tuple[str, ...]

    @property
    def solvable(self) -> bool:
        """Whether every fastener that carries has a stiffness; a bond without one counts as stiff."""
        return all(hold.by != "fasteners" or hold.zones for hold in self.each)


def holds(document: documents.MemberDocument, body: Body, state: State) -> Holds:
    """The stiffness of every joint in a state; what it lacks is named."""
    each: list[Hold] = []
    missing: list[str] = []
    for site in body.sites:
        if state == "as built" and site.bonded:
            each.append(_bond(document, site, body.length, missing))
        elif site.spec.effective_role in ("sole", "fall-back"):
            each.append(_fasteners(document, site, body.length, missing))
        else:
            each.append(Hold(site, "nothing"))
    return Holds(state, tuple(each), tuple(dict.fromkeys(missing)))


def _bond(document: documents.MemberDocument, site: Site, length: float, missing: list[str]) -> Hold:
    assert site.spec.adhesive is not None
    name = site.spec.adhesive
    adhesive = document.adhesive(name)
    creep = adhesive.creep or 0.0
    lacking = [
        words
        for words, value in (("shear modulus", adhesive.shear_modulus), ("bond-line thickness", adhesive.thickness))
        if value is None
    ]
    if adhesive.shear_modulus is None or adhesive.thickness is None:
        missing.append(
            f"{' and '.join(lacking)} of adhesive {name!r}: the bond's slip needs it (thick-adherend shear tests, the "
            f"supplier's sheet); until then the bond is taken as stiff, {STIFF_BOND:,.0f} N/mm3."
        )
        return Hold(site, "bond", (Zone(0.0, length, STIFF_BOND * site.width * site.spec.coverage),), creep, True)
    k = formula(BOND).array(
        {"G_a": adhesive.shear_modulus, "b": site.width, "c": site.spec.coverage, "t_a": adhesive.thickness}
    )
    return Hold(site, "bond", (Zone(0.0, length, float(k)),), creep)


def _fasteners(document: documents.MemberDocument, site: Site, length: float, missing: list[str]) -> Hold:
    assert site.spec.fastener is not None
    name = site.spec.fastener
    fastener = document.fastener(name)
    if fastener.slip_modulus is None:
        missing.append(
            f"slip modulus of fastener {name!r} (joint {site.id}): load-slip tests of the fastener in these pieces "
            "(EN 26891), a yield-limit calculation, or its record."
        )
    zones = spacing_zones(site, length)
    if not zones:
        missing.append(f"spacing of {name!r} in joint {site.id}: its stiffness along the member needs it.")
    if fastener.slip_modulus is None:
        return Hold(site, "fasteners", (), fastener.creep or 0.0)
    stiffness = formula(FASTENERS)
    found = tuple(
        Zone(start, end, float(stiffness.array({"n": site.spec.rows, "K": fastener.slip_modulus, "s": spacing})))
        for start, end, spacing in zones
    )
    return Hold(site, "fasteners", found, fastener.creep or 0.0)


def respaced(document: documents.MemberDocument, held: Holds, chosen: Mapping[int, Sequence[SpacedZone]]) -> Holds:
    """The same joints with other spacings of their fasteners, by the joint's number."""
    each = []
    for hold in held.each:
        spaced = chosen.get(hold.site.index)
        if spaced is None or hold.by != "fasteners" or hold.site.spec.fastener is None:
            each.append(hold)
            continue
        nK = hold.site.spec.rows * (document.fastener(hold.site.spec.fastener).slip_modulus or 0.0)
        each.append(replace(hold, zones=tuple(Zone(z.start, z.end, nK / z.spacing) for z in spaced)))
    return replace(held, each=tuple(each))


def spacing_zones(site: Site, length: float) -> list[SpacingZone]:
    """The spacing as given, in zones from left to right; empty where none was given."""
    spacing = site.spec.spacing
    if spacing is None:
        return []
    if isinstance(spacing, float | int):
        return [(0.0, length, float(spacing))]
    return sorted((zone.from_, min(zone.to, length), zone.spacing) for zone in spacing)
