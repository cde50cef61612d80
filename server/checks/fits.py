"""Whether the fasteners of a joint fit its pieces: their length in the parts, their rows across the contact."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from server import documents, units
from server.checks.crosssection import Body, Part, Site
from server.errors import DocumentError, Fault

THROUGH = ("bolt", "rivet", "rod")  # kinds that are meant to come out on the far side
SLACK = 1e-6


def refuse_misfits(document: documents.MemberDocument, body: Body) -> None:
    """Raise DocumentError for fasteners longer than the parts and rows that do not fit across a joint, by name."""
    faults = [fault for site in body.sites for fault in _misfits(document, site)]
    if faults:
        raise DocumentError(faults)


def _misfits(document: documents.MemberDocument, site: Site) -> Iterator[Fault]:
    if site.spec.fastener is None:
        return
    name = site.spec.fastener
    fastener = document.fastener(name)
    path = f"section.joints[{site.index}]"
    pair = f"{site.first.name!r} and {site.second.name!r}"
    display = document.display
    through = any(word in f"{fastener.kind} {name}".lower() for word in THROUGH)
    thick = sum(_thickness(part, site) for part in (site.first, site.second)) + site.contact.gap
    if fastener.length is not None and not through and fastener.length > thick * (1 + SLACK):
        yield Fault(
            f"{path}.fastener",
            f"{name!r} is {_said(fastener.length, display)} long, and {pair} are {_said(thick, display)} thick "
            "together where it goes in: its point would stand out. Choose a shorter one, or give the length that lies "
            "in the pieces.",
        )
    yield from _rows(site, fastener, path, pair, display)


def _said(size: float, display: str) -> str:
    return units.show(size, "length", display)


def _rows(site: Site, fastener: documents.Fastener, path: str, pair: str, display: str) -> Iterator[Fault]:
    diameter = fastener.diameter or 0.0
    between = fastener.row_spacing if fastener.row_spacing is not None else diameter
    edge = fastener.edge_distance if fastener.edge_distance is not None else diameter / 2
    rows = site.spec.rows
    width = (rows - 1) * between + 2 * edge
    if width > site.contact.length * (1 + SLACK):
        parts = [f"{_said(between, display)} between rows"] if rows > 1 else []
        parts.append(f"{_said(edge, display)} to each edge")
        yield Fault(
            f"{path}.rows",
            f"{rows} row{'s need' if rows > 1 else ' needs'} {_said(width, display)} across ({', '.join(parts)}), and "
            f"{pair} touch over {_said(site.contact.length, display)}; take fewer rows, a thinner fastener or a wider "
            "contact.",
        )


def _thickness(part: Part, site: Site) -> float:
    """Extent of a piece square to the contact."""
    along = np.asarray(site.contact.end, dtype=float) - np.asarray(site.contact.start, dtype=float)
    length = float(np.hypot(*along))
    if length == 0:
        return float(part.top - part.bottom)
    normal = np.array([-along[1], along[0]]) / length
    return float(np.ptp(part.outline @ normal))
