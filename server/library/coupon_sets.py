"""Coupon sets: the check document that a set makes, and its result. Every number of a set comes from ``checks.run``."""

from __future__ import annotations

from collections.abc import Mapping
from functools import lru_cache
from typing import Any

from server import checks, documents
from server.library.properties import PROPERTIES
from server.library.record import Record
from server.sheets import coupon_tables
from server.storage.tables import compact

# A fastener breaks at a load, not at a stress: reckoned as if on one square millimetre, so that MPa reads as N.
ONE_MM2 = 1.0


def document_of(
    values: Mapping[str, Any], title: str = "", statistic: Mapping[str, Any] | None = None, note: str = ""
) -> dict[str, Any]:
    """Return the document of kind "coupons" that the values of a set make; ``statistic`` in the place of the set's."""
    coupons = values.get("coupons")
    known = PROPERTIES.get(str(values.get("property")))
    if known is not None and known.kind == "force" and isinstance(coupons, list):
        coupons = [_on_one_mm2(each) for each in coupons]
    made: dict[str, Any] = {"format": "bondwright/1", "kind": "coupons"}
    if title:
        made["title"] = title[:200]
    if note:
        made["note"] = note
    if values.get("display"):
        made["display"] = values["display"]
    made["coupons"] = coupons
    chosen = values.get("statistic") if statistic is None else statistic
    if chosen:
        made["statistic"] = dict(chosen)
    return made


def _on_one_mm2(coupon: object) -> object:
    if not isinstance(coupon, Mapping) or "stress" in coupon or {"area", "width", "length"} & set(coupon):
        return coupon
    return {**coupon, "area": ONE_MM2}


def coupon_document(record: Record, statistic: Mapping[str, Any] | None = None) -> dict[str, Any]:
    """Return the document of kind "coupons" of a set's revision."""
    return document_of(record.values, f"{record.itself}: {record.name}", statistic)


def coupon_result(record: Record, statistic: Mapping[str, Any] | None = None) -> Mapping[str, Any]:
    """Return the result of a set's check, with and without the excluded coupons; kept, as revisions never change."""
    return _run(compact(coupon_document(record, statistic)))


def measured_result(record: Record, statistic: Mapping[str, Any] | None = None) -> Mapping[str, Any]:
    """Return the result of a set in the unit of its property: a fastener's coupons break at loads."""
    return as_measured(coupon_result(record, statistic), record.values["property"])


def as_measured(result: Mapping[str, Any], property: object) -> Mapping[str, Any]:
    """Return a result in the unit of its property."""
    known = PROPERTIES.get(str(property))
    return coupon_tables.in_newtons(result) if known is not None and known.kind == "force" else result


@lru_cache(maxsize=256)
def _run(text: str) -> Mapping[str, Any]:
    return checks.run(documents.read(text))


def result_value(result: Mapping[str, Any], property: str) -> float | None:
    """What of a result becomes a value of ``property`` [MPa, or N for a fastener]; None where there is none."""
    found = result["mean_stress"] if PROPERTIES[property].takes == "mean" else result["characteristic"]
    return float(found) if isinstance(found, int | float) and found > 0 else None


def in_words(statistic: Mapping[str, Any]) -> str:
    """Return the statistic of a result in one line: 'log-normal, 95 % with 75 % confidence, scatter unknown'."""
    scatter = statistic["scatter"]
    known = "scatter from the coupons" if scatter == "unknown" else f"scatter known, {scatter:g}"
    name = {"lognormal": "log-normal", "weibull": "Weibull", "nonparametric": "distribution-free"}
    return (
        f"{name.get(statistic['distribution'], statistic['distribution'])}, {statistic['coverage'] * 100:g} % above "
        f"with {statistic['confidence'] * 100:g} % confidence, {known}"
    )
