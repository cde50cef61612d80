"""What the drawings need from a check: outlines, contacts, loads, and polylines of the diagrams."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks.actions import Actions
from server.checks.combined_flow import CombinedAlong
from server.checks.crosssection import Body, Site
from server.checks.scan import Scan
from server.checks.slide import Slide
from server.checks.twist import Twist
from server.mechanics.beam import Couple, Load, PointLoad
from server.mechanics.moving_envelope import Envelope

MOST_POINTS = 120
LEAST_STEPS, MOST_STEPS = 4, 16
ENVELOPE_STEPS = 8
TERMS = 6  # of the longest polynomials, those of deflection
WIDEST_SEEN = 2000  # parts of the member's length: what is narrower than one is not seen
Shown = slice | NDArray[np.intp]


def drawing(document: documents.MemberDocument, body: Body, actions: Actions) -> dict[str, object]:
    """Pieces, contacts, supports and loads as plain numbers, for sheets to draw without calculating."""
    return {
        "pieces": [
            {
                "id": p.name,
                "outline": p.outline.tolist(),
                "holes": [hole.tolist() for hole in p.shape.holes],
                "material": p.spec.material,
                "kind": p.material.kind,
                "from": p.start,
                "to": p.end,
            }
            for p in body.parts
        ],
        "contacts": _contacts(body),
        "member": {
            "length": body.length,
            "supports": [{"at": s.at, "kind": s.kind} for s in document.member.supports],
            "hinges": list(document.member.hinges),
        },
        "loads": [*_loads(actions), *_moving(document)],
    }


def _loads(actions: Actions) -> list[dict[str, object]]:
    """Loads of every case; those to the right are seen from above, as a case of their own."""
    found = [
        _load(case, load) for case, loads in zip(actions.cases, actions.case_loads, strict=False) for load in loads
    ]
    if actions.across is None:
        return found
    aside = [
        _load(f"{case}, seen from above: to the right drawn down", load)
        for case, loads in zip(actions.cases, actions.across.case_loads, strict=False)
        for load in loads
    ]
    return [load for load in found if load["value"]] + aside


def _moving(document: documents.MemberDocument) -> list[dict[str, object]]:
    return [
        {
            "case": case,
            "kind": "moving",
            "axles": [[offset, force] for offset, force in load.axles],
            "from": 0.0 if load.from_ is None else load.from_,
            "to": document.member.length if load.to is None else load.to,
        }
        for case, loads in document.loads.items()
        for load in loads
        if isinstance(load, documents.MovingLoad)
    ]


def _contacts(body: Body) -> list[dict[str, object]]:
    joined: dict[int, Site] = {id(site.contact): site for site in body.sites}
    found: list[dict[str, object]] = []
    for contact in body.contacts:
        site = joined.get(id(contact))
        found.append(
            {
                **({} if contact.line is None else {"line": contact.line.tolist()}),
                "id": None if site is None else site.id,
                "between": [body.parts[contact.first].name, body.parts[contact.second].name],
                "start": [float(x) for x in contact.start],
                "end": [float(x) for x in contact.end],
                "length": float(contact.length),
                "joined": site is not None,
                "bonded": site is not None and site.bonded,
            }
        )
    return found


def _load(case: str, load: Load) -> dict[str, object]:
    if isinstance(load, PointLoad):
        return {"case": case, "kind": "point", "at": load.at, "value": load.value}
    if isinstance(load, Couple):
        return {"case": case, "kind": "couple", "at": load.at, "value": load.value}
    return {
        "case": case,
        "kind": "line",
        "from": load.start,
        "to": load.end,
        "value": [load.value_start, load.value_end],
    }


def diagrams(
    body: Body, actions: Actions, sliding: Slide | None = None, twisted: Twist | None = None
) -> dict[str, object]:
    """Envelopes over the combinations as polylines; every interval keeps both its ends, so jumps stay upright."""
    breaks = actions.breaks
    shown: Shown = slice(None) if sliding is None else _shown(breaks, body.length)
    widths = (breaks[1:] - breaks[:-1])[shown]
    least = 2 if sliding is not None else LEAST_STEPS if actions.moving is None else ENVELOPE_STEPS
    steps = min(max(MOST_POINTS // len(widths), least), MOST_STEPS)
    local = widths[:, None] * (np.arange(steps) / (steps - 1))
    at = breaks[:-1][shown, None] + local
    powers = _powers(local)
    curves = {
        "shear": actions.shear,
        "moment": actions.moment,
        "deflection": actions.sag,
        "deflection_long_term": actions.long_term,
    }
    if actions.across is not None:
        across = actions.across
        curves |= {
            "shear_lateral": across.shear,
            "moment_lateral": across.moment,
            "deflection_lateral": across.sag,
            "deflection_lateral_long_term": across.long_term,
        }
    if twisted is not None and sliding is None:
        curves["torque"] = twisted.torque
    found: dict[str, Any] = {"at": at.ravel().tolist()}
    for name, curve in curves.items():
        if curve is not None:
            found[name] = _band(_sample(curve.coefficients[:, shown], powers))
    if actions.moving is not None and sliding is None:
        _widen(found, actions.moving.written.envelopes, at)
    if sliding is not None:
        flows, slips = {}, {}
        for site in body.sites:
            q, slip = (
                _sample(each[site.index].coefficients[:, shown], powers) for each in (sliding.flows, sliding.slips)
            )
            sign = _sense(actions, slip, shown, powers)
            flows[site.id], slips[site.id] = _band(sign * q), _band(sign * slip)
        found["joints"], found["slips"] = flows, slips
    elif actions.shear is not None:
        if twisted is not None or actions.across is not None:
            along = CombinedAlong(body, Scan(actions.shear, (), ()), actions.across, twisted)
            causes = [_sample(cause.coefficients, powers) for cause in along.causes()]
            found["joints"] = {s.id: _combined(s, along, breaks, causes) for s in body.sites}
        else:
            shear = np.reshape([found["shear"]["max"], found["shear"]["min"]], (2, *at.shape))
            found["joints"] = _flows(body, breaks, shear)
    return found


def _widen(found: dict[str, Any], envelopes: Mapping[str, Sequence[Envelope]], at: NDArray[np.float64]) -> None:
    """Let the bands reach to the true envelopes of moving axles; the rows alone touch them where they govern."""
    right = np.ones(at.shape, dtype=bool)
    right[:, -1] = False
    for name, each in envelopes.items():
        for envelope in each:
            high, low = envelope.at(at.ravel(), right.ravel())[0]
            band = found[name]
            band["max"] = np.maximum(band["max"], high).tolist()
            band["min"] = np.minimum(band["min"], low).tolist()


def _sense(actions: Actions, slip: NDArray[np.float64], shown: Shown, powers: NDArray[np.float64]) -> float:
    """The sign that draws a slip the way of the shear force, whichever piece a joint names first."""
    if actions.shear is None:
        return 1.0
    V = _sample(actions.shear.coefficients[:, shown], powers)
    return -1.0 if V.shape == slip.shape and float((V * slip).sum()) < 0 else 1.0


def _shown(breaks: NDArray[np.float64], length: float) -> NDArray[np.intp]:
    """Intervals wide enough to be seen; the curves between them run on without a jump."""
    return np.flatnonzero(np.diff(breaks) > length / WIDEST_SEEN)


def _powers(local: NDArray[np.float64]) -> NDArray[np.float64]:
    """The powers of local coordinates (intervals, steps) that polynomials are made of, (intervals, terms, steps)."""
    powers = np.empty((len(local), TERMS, local.shape[1]))
    powers[:, 0], powers[:, 1:] = 1.0, local[:, None]
    return np.multiply.accumulate(powers, axis=1, out=powers)


def _sample(coefficients: NDArray[np.float64], powers: NDArray[np.float64]) -> NDArray[np.float64]:
    """Values (intervals, combinations, steps) of piecewise polynomials at local coordinates."""
    values: NDArray[np.float64] = coefficients.transpose(1, 0, 2) @ powers[:, : coefficients.shape[2]]
    return values


def _band(values: NDArray[np.float64]) -> dict[str, list[float]]:
    """The greatest and the least of all combinations, interval by interval."""
    return {"max": values.max(axis=1).ravel().tolist(), "min": values.min(axis=1).ravel().tolist()}


def _flows(body: Body, breaks: NDArray[np.float64], shear: NDArray[np.float64]) -> dict[str, dict[str, list[float]]]:
    """Flow of every joint: the greatest and the least shear (2, intervals, steps) times the joint's share there."""
    sites, count = body.sites, shear[0].size
    flows = (shear[:, None] * _rates(body, breaks)[..., None]).reshape(2, len(sites), count).tolist()
    return {site.id: {"max": high, "min": low} for site, high, low in zip(sites, *flows, strict=True)}


def _own(body: Body, breaks: NDArray[np.float64]) -> NDArray[np.intp]:
    """The number of the stretch that each interval lies on."""
    ends = [stretch.end for stretch in body.stretches[:-1]]
    return np.searchsorted(ends, 0.5 * (breaks[:-1] + breaks[1:]))


def _rates(body: Body, breaks: NDArray[np.float64]) -> NDArray[np.float64]:
    """Flow per shear of every joint on every interval, (joints, intervals); none where the joint is not."""
    rates = np.zeros((len(body.stretches), len(body.sites)))
    for each, stretch in zip(rates, body.stretches, strict=True):
        for place, site in enumerate(body.sites):
            flow = stretch.section.flows.get(site.index)
            if flow is not None and flow.share is not None:
                each[place] = abs(flow.share) / stretch.section.properties.EI
    return rates[_own(body, breaks)].T


def _combined(
    site: Site, along: CombinedAlong, breaks: NDArray[np.float64], causes: Sequence[NDArray[np.float64]]
) -> dict[str, list[float]]:
    """Flow per interval from all causes, with signs."""
    rates = np.array([along.rates(site, stretch) or (0.0,) * len(causes) for stretch in along.body.stretches])
    own = rates[_own(along.body, breaks)].T
    flow = np.asarray(sum(cause * rate[:, None, None] for cause, rate in zip(causes, own, strict=True)))
    return _band(-flow if float((flow * causes[0]).sum()) < 0 else flow)  # drawn the way of the shear force
