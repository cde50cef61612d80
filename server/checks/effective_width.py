"""Effective width of skins: EN 1995-1-1 9.1.2 and Table 9.1, shear lag and plate buckling of wood-based panels.

Units: N, mm, MPa. A skin's strip at either side of a rib counts up to half the table's width, up to half the way to the
next rib, and up to the skin's edge. Bending up and down only feels how much of a level skin counts, not where it lies,
so the skin keeps its outline and its modulus is taken times the share that counts.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from itertools import pairwise

from server import documents
from server.checks.actions import Actions
from server.checks.crosssection import Body, CrossSection, Part, Site, Stretch, with_shares
from server.checks.rules import EDITION
from server.checks.wide_bonds import extent
from server.mechanics.contacts import TOUCH
from server.working import Working

# Table 9.1: share of the span (shear lag), times the skin's thickness (plate buckling)
_TABLE = {
    "plywood, outer plies along the ribs": (0.1, 20.0),
    "plywood, outer plies across the ribs": (0.1, 25.0),
    "OSB": (0.15, 25.0),
    "particleboard or fibreboard": (0.2, 30.0),
}
_WORDS = (
    ("OSB", ("osb", "oriented strand")),
    ("particleboard or fibreboard", ("particle", "chipboard", "fibreboard", "fiberboard", "mdf", "hardboard")),
)
GROUP = "Effective width"
_LEVEL = 0.02  # rise over run up to which a bond lies level
_NOTHING = 1e-9


@dataclass(frozen=True)
class Skin:
    """One skin over one stretch: its row of Table 9.1, the bonds to its ribs as [from, to] across, and the limits.

    ``lag`` and ``buckling`` are the largest b_ef [mm] of the table; ``compressed`` whether the second one counts.
    """

    part: Part
    row: str
    ribs: tuple[tuple[float, float], ...]
    span: float
    compressed: bool

    @property
    def thickness(self) -> float:
        return extent(self.part, 1)

    @property
    def lag(self) -> float:
        return _TABLE[self.row][0] * self.span

    @property
    def buckling(self) -> float:
        return _TABLE[self.row][1] * self.thickness

    @property
    def limit(self) -> float:
        return min(self.lag, self.buckling) if self.compressed else self.lag

    @property
    def clear(self) -> list[float]:
        """Clear distances between neighbouring ribs."""
        return [right[0] - left[1] for left, right in pairwise(self.ribs)]

    @property
    def strips(self) -> list[tuple[float, float, float]]:
        """Of each rib: the bond's width, and what counts at its left and at its right."""
        left, right = float(self.part.box[0][0]), float(self.part.box[1][0])
        room = [self.ribs[0][0] - left, *(clear / 2 for clear in self.clear), right - self.ribs[-1][1]]
        return [
            (end - start, min(self.limit / 2, before), min(self.limit / 2, after))
            for (start, end), before, after in zip(self.ribs, room[:-1], room[1:], strict=True)
        ]

    @property
    def width(self) -> float:
        """The effective width of the whole skin."""
        return sum(sum(strip) for strip in self.strips)

    @property
    def share(self) -> float:
        return min(self.width / extent(self.part, 0), 1.0)


def skins(document: documents.MemberDocument, actions: Actions, stretch: Stretch) -> list[Skin]:
    """The wood-based skins of a stretch that reach beyond their ribs."""
    found = []
    for part in stretch.section.parts:
        row = _row(part) if part.lies_flat else ""
        ribs = _ribs(part, stretch.section.sites) if row else ()
        if ribs and sum(end - start for start, end in ribs) < extent(part, 0) * (1 - _NOTHING):
            found.append(Skin(part, row, ribs, _span(document), _compressed(part, actions, stretch)))
    return found


def narrowed(document: documents.MemberDocument, body: Body, actions: Actions) -> Body:
    """The body with every skin counted at its effective width; the body itself where all of every skin counts."""
    sections: dict[int, CrossSection] = {}
    stretches = []
    for stretch in body.stretches:
        shares = {skin.part.index: skin.share for skin in skins(document, actions, stretch)}
        key = hash((id(stretch.section), tuple(sorted(shares.items()))))
        if key not in sections:
            sections[key] = with_shares(stretch.section, shares)
        stretches.append(replace(stretch, section=sections[key]))
    return replace(body, stretches=tuple(stretches))


def write(document: documents.MemberDocument, body: Body, actions: Actions, working: Working) -> None:
    """The steps to every distinct effective width."""
    written: set[tuple[int, float]] = set()
    for stretch in body.stretches:
        for skin in skins(document, actions, stretch):
            if (skin.part.index, round(skin.width, 9)) not in written:
                written.add((skin.part.index, round(skin.width, 9)))
                _write(skin, working)


def too_slender(skin: Skin) -> float | None:
    """The widest clear distance over twice the plate buckling width (9.1.2(5)); None where it is not, or in tension."""
    widest = max(skin.clear, default=0.0)
    return widest if skin.compressed and widest > 2 * skin.buckling * (1 + _NOTHING) else None


def _write(skin: Skin, working: Working) -> None:
    lag, buckling = _TABLE[skin.row]
    name, source = skin.part.name, f"{EDITION}, Table 9.1: {skin.row}"
    limit = working.step(
        f"Most that counts of {name}, shear lag", "b_lag", f"{lag:g}*l", {"l": (skin.span, "mm")},
        unit="mm", source=f"{source}; l: shortest span", group=GROUP,
    )  # fmt: skip
    if skin.compressed:
        plate = working.step(
            f"Most that counts of {name}, plate buckling", "b_buc", f"{buckling:g}*h_f",
            {"h_f": (skin.thickness, "mm")}, unit="mm", source=source, group=GROUP,
        )  # fmt: skip
        limit = working.step(
            f"Most that counts of {name}", "b_max", "min(b_lag, b_buc)",
            {"b_lag": (limit, "mm"), "b_buc": (plate, "mm")}, unit="mm", source="in compression", group=GROUP,
        )  # fmt: skip
    widths, lefts, rights = (list(column) for column in zip(*skin.strips, strict=True))
    whole = working.step(
        f"Effective width of {name}", "b_ef", "sum(b_w + b_left + b_right)",
        {"b_w": (widths, "mm"), "b_left": (lefts, "mm"), "b_right": (rights, "mm")},
        unit="mm",
        source=f"{EDITION}, expressions (9.12) and (9.13): at either side of a rib at most half of {limit:.6g} mm, "
        "half the way to the next rib, and the overhang",
        group=GROUP,
    )  # fmt: skip
    working.step(
        f"Share of {name} that counts; its E is taken times this", "k_b", "b_ef/b",
        {"b_ef": (whole, "mm"), "b": (extent(skin.part, 0), "mm")}, source=EDITION, group=GROUP,
    )  # fmt: skip


def _row(part: Part) -> str:
    """The row of Table 9.1 of a piece, by its material's kind and its grain; '' for what is no wood-based panel."""
    kind = f"{part.material.kind} {part.spec.material}".lower()
    for row, words in _WORDS:
        if any(word in kind for word in words):
            return row
    if part.material.layered or "plywood" in kind:
        return f"plywood, outer plies {part.spec.grain} the ribs"
    return ""


def _ribs(part: Part, sites: Sequence[Site]) -> tuple[tuple[float, float], ...]:
    """The level bonds of a piece, from left to right; those one over the other count as one."""
    found = []
    for site in sites:
        if site.bonded and part in (site.first, site.second):
            (a, low), (b, high) = site.contact.start.tolist(), site.contact.end.tolist()
            if abs(high - low) <= _LEVEL * abs(b - a):
                found.append((min(a, b), max(a, b)))
    merged: list[tuple[float, float]] = []
    for start, end in sorted(found):
        if merged and start <= merged[-1][1] + TOUCH:
            merged[-1] = (merged[-1][0], max(end, merged[-1][1]))
        else:
            merged.append((start, end))
    return tuple(merged)


def _span(document: documents.MemberDocument) -> float:
    """The shortest distance between neighbouring supports; the length where there is only one."""
    places = sorted(support.at for support in document.member.supports)
    return min((b - a for a, b in pairwise(places)), default=document.member.length)


def _compressed(part: Part, actions: Actions, stretch: Stretch) -> bool:
    """Whether any strength combination puts the piece's middle in compression; yes where none is for strength."""
    if actions.moment is None:
        return True
    moment = actions.moment.over(stretch.start, stretch.end)
    above = stretch.section.centroids[part.index] > float(stretch.section.properties.neutral_axis[1])
    size = max(float(abs(moment.max).max()), float(abs(moment.min).max()))
    return bool((moment.max.max() if above else -moment.min.min()) > _NOTHING * size)


def stiffness_ratio(document: documents.MemberDocument, body: Body, actions: Actions) -> list[tuple[Skin, float]]:
    """Every skin that the rule would narrow, with EI then over EI now, where that is least."""
    found: dict[int, tuple[Skin, float]] = {}
    for stretch in body.stretches:
        narrow = [skin for skin in skins(document, actions, stretch) if skin.share < 1 - 1e-6]
        if not narrow:
            continue
        then = with_shares(stretch.section, {skin.part.index: skin.share for skin in narrow})
        ratio = then.properties.EI / stretch.section.properties.EI
        for skin in narrow:
            if skin.part.index not in found or ratio < found[skin.part.index][1]:
                found[skin.part.index] = (skin, ratio)
    return list(found.values())
