"""Thin webs between bonded flanges: slenderness and panel shear, EN 1995-1-1 expressions (9.8) and (9.9).

Units: N, mm, MPa. A web is a piece that stands upright with bonds above and below its middle; its clear depth lies
between them. The shear force is shared between the pieces that a level cut at half the clear depth passes, by G times
thickness.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from server.checks.crosssection import Body, CrossSection, Part
from server.checks.pieces import PieceCheck
from server.checks.resistance import Claim, Judge, Strength
from server.checks.rules import EDITION, WEBS, Origin, Printed
from server.checks.scan import Scan
from server.checks.wide_bonds import extent
from server.working.record import Given

LEAST = 5.0  # clear depth over thickness from which an upright piece is called a web here
SLENDER, BUCKLES = 70.0, 35.0
STOCKY_TEXT = "b_w*h_w*(1 + (h_ft + h_fc)/(2*h_w))*f_v"
BUCKLING_TEXT = "35*b_w**2*(1 + (h_ft + h_fc)/(2*h_w))*f_v"


@dataclass(frozen=True)
class Web:
    """One web of a section: clear depth, thickness, depths of the bonds below and above, and the level halfway up."""

    part: Part
    clear: float
    thickness: float
    below: float
    above: float
    level: float

    @property
    def slenderness(self) -> float:
        return self.clear / self.thickness

    @property
    def formula(self) -> str:
        return STOCKY_TEXT if self.slenderness <= BUCKLES else BUCKLING_TEXT


def webs(section: CrossSection) -> list[Web]:
    """Every thin web of a section."""
    bonds: dict[int, list[tuple[float, float]]] = {}
    for site in section.sites:
        if site.bonded:
            low, high = sorted((site.contact.start.item(1), site.contact.end.item(1)))
            for part in (site.first, site.second):
                bonds.setdefault(part.index, []).append((low, high))
    upright = [part for part in section.parts if part.index in bonds and not part.lies_flat]
    found = [_web(part, section.centroids[part.index], bonds[part.index]) for part in upright]
    return [web for web in found if web is not None and web.slenderness >= LEAST]


def _web(part: Part, middle: float, bonds: Sequence[tuple[float, float]]) -> Web | None:
    """The web that an upright piece is, with bonds above and below its middle; None where it has not both."""
    above = [(low, high) for low, high in bonds if low + high > 2 * middle]
    below = [(low, high) for low, high in bonds if low + high <= 2 * middle]
    if not (above and below):
        return None
    bottom, top = max(high for _, high in below), min(low for low, _ in above)
    if top <= bottom:
        return None
    depths = [max(high - low for low, high in each) for each in (below, above)]
    return Web(part, top - bottom, extent(part, 0), depths[0], depths[1], (top + bottom) / 2)


def add_web_claims(pieces: Sequence[PieceCheck], body: Body, scan: Scan, judge: Judge) -> None:
    """Set every web that is judged at all against the panel shear it carries, where the rule is chosen."""
    for piece in pieces:
        if piece.claims:
            piece.claims = [*piece.claims, *_claims(piece.part, body, scan, judge)]


def _claims(part: Part, body: Body, scan: Scan, judge: Judge) -> Iterator[Claim]:
    """The panel shear of a web by expression (9.9), where the rule is chosen; what has no method is named."""
    if WEBS not in judge.rules or not scan.shear:
        return
    worst: Claim | None = None
    for t, stretch in enumerate(body.stretches):
        web = next((each for each in webs(stretch.section) if each.part is part), None)
        if web is None:
            continue
        if web.slenderness > SLENDER * (1 + 1e-9):
            judge.findings.miss(
                f"panel shear of {part.name}: its clear depth is {web.slenderness:.4g} times its thickness; expression "
                f"(9.8) of {EDITION} stops at 70. Stiffen it, or have its buckling reckoned."
            )
            continue
        strength = _strength(web, stretch.section, judge)
        if strength is None:
            return
        shear, at = scan.shear[t]
        share = _share(web, stretch.section)
        origin = Origin(
            "Shear force on the web",
            "k_w*V",
            {"V": (shear, "N")},
            {"k_w": (share.value, "")},
            "V: largest of the combination",
            {t: (share,)},
        )
        demand = origin.demand()
        here = Claim(strength, "V_w", demand, at, np.full(len(at), t, dtype=np.intp), origin)
        if worst is None or (demand / strength.value).max() > (worst.demand / worst.strength.value).max():
            worst = here
    if worst is not None:
        yield worst


def _strength(web: Web, section: CrossSection, judge: Judge) -> Strength | None:
    part, value = web.part, web.part.material.strengths.shear
    if value is None:
        judge.findings.miss(
            f"panel shear strength of {part.spec.material!r} (web {part.name}): panel shear tests, or the panel's "
            "record."
        )
        return None
    given: dict[str, Given] = {
        "b_w": (web.thickness, "mm"),
        "h_w": (web.clear, "mm"),
        "h_ft": (web.below, "mm"),
        "h_fc": (web.above, "mm"),
        "f_v": (value, "MPa"),
    }
    if web.formula == BUCKLING_TEXT:
        source = f"{EDITION}, expression (9.9), h_w = {web.slenderness:.4g} b_w > 35 b_w"
    else:
        source = f"{EDITION}, expression (9.9), h_w = {web.slenderness:.4g} b_w <= 35 b_w"
    step = Printed("Panel shear that the web carries, characteristic", "R_k", web.formula, given, "N", source)
    strength = judge.strength(
        step.value,
        what=f"panel shear in {part.name}",
        unit="N",
        kind="material",
        owner=part.spec.material,
        holder=part.material,
    )
    assert strength is not None
    return strength._replace(before=(step,))


def _share(web: Web, section: CrossSection) -> Printed:
    """The web's part of the shear force, by G times thickness at its level; by thickness where a G is not known."""
    widths = _widths(section, web.level)
    moduli = [part.shear_modulus for part in section.parts]
    known = all(each is not None for each in moduli)
    G = [each if known and each is not None else 1.0 for each in moduli]
    own = section.parts.index(web.part)
    cut = [k for k, width in enumerate(widths) if width > 0]
    return Printed(
        "The web's part of the shear force",
        "k_w",
        "G_w*b_w/sum(G*b)",
        {
            "G_w": (G[own], "MPa"),
            "b_w": (widths[own], "mm"),
            "G": ([G[k] for k in cut], "MPa"),
            "b": ([widths[k] for k in cut], "mm"),
        },
        "",
        f"level cut {web.level:.6g} mm up: {', '.join(section.parts[k].name for k in cut)}"
        + ("" if known else "; by thickness alone, as a shear modulus is not given"),
    )


def _widths(section: CrossSection, level: float) -> list[float]:
    """Width of each part on a level cut."""
    cut = section.properties.bands
    band = min(int(np.searchsorted(cut.high, level)), len(cut.high) - 1)
    share = (level - cut.low[band]) / (cut.high[band] - cut.low[band])
    widths = cut.width_low[:, band] * (1 - share) + cut.width_high[:, band] * share
    found: list[float] = widths.tolist()
    return found
