"""The spacing schedule of fastened joints: zones in workshop steps that the flow asks for, and what is set out.

Two things are told apart: the zones that the flow needs, and the fasteners as they are set out, which are those of the
spacing given (that is what was checked), or of the zones needed where none was given.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks.actions import Actions
from server.checks.along import Along, SlidingAlong
from server.checks.crosssection import Body, Site
from server.checks.fastened import Fastening, fastener_of, resistances
from server.checks.holds import respaced, spacing_zones
from server.checks.joints import Flows, JointCheck
from server.checks.slide import slide
from server.errors import InputError
from server.mechanics.spacing import SpacedZone, positions, spaces, zones
from server.working import Working

STEP = {"SI": 25.0, "US": 25.4}
WIDEST = {"SI": 300.0, "US": 304.8}  # common practice where no greatest spacing is given
ROUNDS = 5  # flows follow the spacing where joints slip: so often zones are chosen and the member reckoned again
GROUND = 1e-9
Again = Callable[[Mapping[int, Sequence[SpacedZone]]], SlidingAlong]


@dataclass(frozen=True)
class Chosen:
    """Zones of spacing over a joint's whole run, and how far the first and the last fastener stand from its ends."""

    zones: tuple[SpacedZone, ...]
    distance: float

    @property
    def places(self) -> list[float]:
        """Where the fasteners of one row stand."""
        first, last = self.zones[0].start + self.distance, self.zones[-1].end - self.distance
        return positions(first, last, self.zones)


def step_of(document: documents.MemberDocument) -> float:
    """The workshop's step: as set, else 25 mm or 1 in."""
    return document.analysis.spacing_step or STEP[document.display]


def needed(
    document: documents.MemberDocument,
    fastenings: Sequence[Fastening],
    along: Along,
    again: Again | None,
    times: Mapping[int, float],
) -> dict[int, Chosen | str]:
    """Zones that the flow asks for, joint by joint; in words why there are none.

    ``again`` reckons the member with other zones where the joints slip: a tighter spacing draws more flow. ``times``
    the flow of a joint is to be taken, by its number: a rib alone may have more than it has in the whole section.
    """
    carrying = [f for f in fastenings if f.strength is not None and f.demand.flow.max() > 0]
    worst: dict[int, tuple[NDArray[np.float64], NDArray[np.float64]]] = {}
    found: dict[int, Chosen | str] = {}
    for _ in range(ROUNDS):
        for fastening in carrying:
            site = fastening.site
            grid = np.arange(*_ends(site), step_of(document) / 2)
            x, q = along.profile(site, grid)
            q = q * times.get(site.index, 1.0)
            if site.index in worst:
                before = worst[site.index]
                q = np.maximum(q, np.array([np.interp(x, before[0], row) for row in before[1]]))
            worst[site.index] = (x, q)
            found[site.index] = _choose(document, fastening, x, q)
        if again is None or any(isinstance(each, str) for each in found.values()):
            break
        along = again({index: each.zones for index, each in found.items() if not isinstance(each, str)})
        if all(_holds(each, found[each.site.index], along, times.get(each.site.index, 1.0)) for each in carrying):
            break
    return found


def _ends(site: Site) -> tuple[float, float]:
    return max(site.first.start, site.second.start), min(site.first.end, site.second.end)


def _limit(fastening: Fastening, q: NDArray[np.float64]) -> NDArray[np.float64]:
    """Spacing at which a row of fasteners is used to its resistance, over the combinations."""
    assert fastening.strength is not None
    resists = resistances(fastening.strength)
    known = ~np.isnan(resists)
    flows = q[known]
    if not flows.size:
        return np.full(q.shape[1], np.inf)
    floor = GROUND * max(float(flows.max()), 1e-300)
    return np.asarray((fastening.site.spec.rows * resists[known, None] / np.maximum(flows, floor)).min(axis=0))


def _choose(
    document: documents.MemberDocument, fastening: Fastening, x: NDArray[np.float64], q: NDArray[np.float64]
) -> Chosen | str:
    site = fastening.site
    _, fastener = fastener_of(site, document)
    step, (start, end) = step_of(document), _ends(site)
    most = fastener.spacing_max or WIDEST[document.display]
    low = max(fastener.spacing_min or step, step)
    limit = _limit(fastening, q)
    allowed = np.minimum(limit, most)
    near = (x <= start + step) | (x >= end - step)
    distance = fastener.end_distance
    if distance is None:
        distance = _half(max(float(allowed[near].min(initial=most)), step), step, end - start)
    else:  # the end fastener carries the end distance and half a space
        near = (x <= start + distance + step) | (x >= end - distance - step)
        allowed = np.where(near & (distance > allowed / 2), 2 * (limit - distance), allowed)
    if not end - start > 2 * distance:
        return f"the joint is {end - start:.4g} mm long, no more than its two end distances of {distance:g} mm."
    if allowed.min() < low * (1 - GROUND):
        worst = int(np.flatnonzero(allowed <= allowed.min() + GROUND * low)[0])
        return (
            f"at {x[worst]:.6g} mm the flow asks for {max(float(allowed[worst]), 0.0):.3g} mm, under the least of "
            f"{low:.4g} mm; add a row, or choose a stronger fastener."
        )
    try:
        cut = zones(start + distance, end - distance, x, allowed, step=step)
    except InputError as error:
        return str(error)
    whole = [
        replace(zone, start=start if i == 0 else zone.start, end=end if i == len(cut) - 1 else zone.end)
        for i, zone in enumerate(cut)
    ]
    return Chosen(tuple(whole), distance)


def _half(spacing: float, step: float, length: float) -> float:
    """Half an end spacing, in whole steps where there is one, for fasteners whose end distance is not given."""
    half = min(np.floor(spacing / step + 1e-6) * step, length) / 2
    whole = np.floor(half / step + 1e-6) * step
    return float(min(whole if whole > 0 else half, length / 4))


def _holds(fastening: Fastening, chosen: Chosen | str, along: Along, times: float) -> bool:
    """Whether the zones still hold with the flow that they themselves bring about."""
    if isinstance(chosen, str):
        return False
    x, q = along.profile(fastening.site, np.zeros(0))
    limit = _limit(fastening, q * times)
    spacing = np.max([np.where((x >= z.start) & (x <= z.end), z.spacing, 0.0) for z in chosen.zones], axis=0)
    return bool((spacing <= limit * (1 + 1e-6)).all())


def set_out(
    document: documents.MemberDocument, body: Body, site: Site, chosen: Chosen | None
) -> dict[str, object] | None:
    """The fasteners of a joint as a bench hand sets them out; None where no spacing is known."""
    _, fastener = fastener_of(site, document)
    start, end = _ends(site)
    given = tuple(
        SpacedZone(max(a, start), min(b, end), spacing)
        for a, b, spacing in spacing_zones(site, body.length)
        if min(b, end) > max(a, start)
    )
    if given:
        distance = fastener.end_distance
        if distance is None:
            distance = _half(min(given[0].spacing, given[-1].spacing), step_of(document), end - start)
        chosen = Chosen(given, min(distance, (end - start) / 2.5))
    if chosen is None:
        return None
    places, rows = chosen.places, site.spec.rows
    return {
        "as": "given" if given else "needed",
        "from": start,
        "to": end,
        "end_distance": chosen.distance,
        "end_distance_given": fastener.end_distance is not None,
        "rows": rows,
        "row_spacing": fastener.row_spacing,
        "edge_distance": fastener.edge_distance,
        "places": places,
        "spaces": [{"count": count, "spacing": width} for count, width in spaces(places)],
        "zones": counted(chosen, rows),
        "count": len(places) * rows,
    }


def counted(chosen: Chosen, rows: int) -> list[dict[str, float | int]]:
    """Zones as the result lists them, each fastener in one of them: at an edge it counts to the zone on its left."""
    x = np.array(chosen.places)
    found: list[dict[str, float | int]] = []
    for number, zone in enumerate(chosen.zones):
        slack = 1e-6 * zone.spacing
        low = -np.inf if number == 0 else zone.start + slack
        high = np.inf if number == len(chosen.zones) - 1 else zone.end + slack
        count = int(((x > low) & (x <= high)).sum()) * rows
        found.append({"from": zone.start, "to": zone.end, "spacing": zone.spacing, "count": count})
    return found


def add_schedules(
    document: documents.MemberDocument,
    body: Body,
    rigid: Actions,
    joints: Sequence[JointCheck],
    flows: Flows,
    book: Working,
) -> None:
    """Put the zones that are needed and the fasteners as set out into every joint's block of the result."""
    chosen: dict[int, Chosen | str] = {}
    times = {check.site.index: float(check.times.max()) for check in joints if check.times is not None}
    alone = [check.fastening for check in joints if check.fastening is not None and check.gone is None]
    beside = [check.fastening for check in joints if check.fastening is not None and check.gone is not None]
    for fastenings, along in ((alone, flows.along), (beside, flows.gone)):
        if fastenings and along is not None:
            chosen |= needed(document, fastenings, along, _again(document, body, rigid, along), times)
    for check in joints:
        if check.site.spec.fastener is None:
            continue
        found = chosen.get(check.site.index)
        zoned = found if isinstance(found, Chosen) else None
        check.result["setting_out"] = set_out(document, body, check.site, zoned)
        if zoned is not None:
            check.result["spacing_schedule"] = counted(zoned, check.site.spec.rows)
        check.result["schedule_note"] = found if isinstance(found, str) else ""
        _write(document, check, found, flows, book)


def _again(document: documents.MemberDocument, body: Body, rigid: Actions, along: Along) -> Again | None:
    if not isinstance(along, SlidingAlong):
        return None
    held = along.slide.holds

    def again(spaced: Mapping[int, Sequence[SpacedZone]]) -> SlidingAlong:
        return SlidingAlong(slide(document, body, rigid, respaced(document, held, spaced), flows_only=True))

    return again


def _write(
    document: documents.MemberDocument,
    check: JointCheck,
    found: Chosen | str | None,
    flows: Flows,
    book: Working,
) -> None:
    if found is None or not book.record:
        return
    _, fastener = fastener_of(check.site, document)
    group = f"Joint {check.site.id}"
    if isinstance(found, str):
        book.note("Spacing schedule", f"None: {found}", group=group)
        return
    words = ", ".join(f"{z.start:.6g} to {z.end:.6g} mm at {z.spacing:.4g} mm" for z in found.zones)
    sliding = check.gone is not None or isinstance(flows.along, SlidingAlong)
    bounds = [
        f"{word} {value:g} mm"
        for word, value in (("least", fastener.spacing_min), ("greatest", fastener.spacing_max))
        if value is not None
    ]
    if fastener.spacing_max is None:
        bounds.append(f"greatest {WIDEST[document.display]:g} mm (common practice, none was given)")
    book.note(
        "Spacing schedule",
        f"n R_d/q along the joint over all combinations, rounded down to steps of {step_of(document):g} mm; "
        f"{', '.join(bounds)}. Zones: {words}."
        + (" The flow was reckoned again with this spacing, for a tighter one draws more." if sliding else ""),
        source="spacing needed, place by place",
        group=f"{group}, glue gone" if check.gone is not None else group,
    )
