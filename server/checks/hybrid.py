"""Joints of glue and fasteners together: by the shop's own tests of that very joint, and by nothing else.

Strengths of glue and fasteners are never added: the stiffer one carries the flow until it breaks. What both bear
together is a number only where a shop has broken such joints; it is kept as a value of its own in the library, and
holds for the fastener, spacing and rows that stood in the coupons. A joint that is built otherwise is not proven.
"""

from __future__ import annotations

import re
from collections.abc import Iterator

from server import documents
from server.checks.crosssection import Site
from server.checks.resistance import Judge, Strength

FIELD = "hybrid_shear_strength"
WITHIN = 0.02  # of the tested spacing: what lies between a spacing in mm and the same in inches


def hybrid_strength(site: Site, name: str, adhesive: documents.Adhesive, judge: Judge) -> Strength | None:
    """The strength of glue and fasteners together over the bonded width; what keeps it from holding is named."""
    for text in _doubts(site, name, adhesive, judge.document):
        judge.findings.miss(f"joint {site.id}, glue and fasteners together: {text}")
    return judge.strength(
        adhesive.hybrid_shear_strength,
        what=f"adhesive {name} with {site.spec.fastener}, as tested together",
        unit="MPa",
        kind="adhesive",
        owner=name,
        holder=adhesive,
    )


def _doubts(site: Site, name: str, adhesive: documents.Adhesive, document: documents.MemberDocument) -> Iterator[str]:
    if adhesive.hybrid_shear_strength is None:
        yield (
            f"adhesive {name!r} has no strength tested with fasteners. Strengths of glue and fasteners are never "
            "added; break coupons of this very joint (library, property 'hybrid joint shear'), or give the fasteners "
            "another role."
        )
        return
    behind = (adhesive.lineage or {}).get(FIELD)
    if behind is None or behind.coupon_set is None:
        yield (
            f"the strength of {name!r} with fasteners was typed. It counts from a bond record that pins a value found "
            "from the shop's own coupon set of that joint."
        )
    yield from _built_otherwise(site, adhesive, document)


def _built_otherwise(site: Site, adhesive: documents.Adhesive, document: documents.MemberDocument) -> Iterator[str]:
    """How the joint differs from the coupons in its fasteners."""
    spec = site.spec
    assert spec.fastener is not None
    fastener = document.fastener(spec.fastener)
    called = {_plain(each) for each in (spec.fastener, fastener.kind, fastener.record or "") if each}
    if not adhesive.hybrid_fastener or _plain(adhesive.hybrid_fastener) not in called:
        tested = repr(adhesive.hybrid_fastener) if adhesive.hybrid_fastener else "a fastener that is not named"
        yield (
            f"tested with {tested}, used with {spec.fastener!r}; the fastener's name, kind or record must be the one "
            "that was tested."
        )
    rows = adhesive.hybrid_rows or 1
    if spec.rows != rows:
        yield f"tested with {_rows(rows)}, used with {_rows(spec.rows)}."
    tested_at = adhesive.hybrid_spacing
    if tested_at is None:
        yield "the spacing of the fasteners in the coupons is not stated."
    elif spec.spacing is None:
        yield f"tested at a spacing of {tested_at:.4g} mm; enter the spacing of the joint."
    else:
        zones = [spec.spacing] if isinstance(spec.spacing, float | int) else [z.spacing for z in spec.spacing]
        for other in dict.fromkeys(each for each in zones if abs(each - tested_at) > WITHIN * tested_at):
            yield f"tested at a spacing of {tested_at:.4g} mm, used at {other:.4g} mm."


def _rows(count: int) -> str:
    return f"{count} row{'s' if count > 1 else ''}"


def _plain(text: str) -> str:
    return " ".join(re.findall(r"\w+", text.casefold()))
