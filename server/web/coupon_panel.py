"""The result of a coupon set as a page shows it: the value, both answers, drawings, questions, what more would buy.

Nothing is reckoned here; numbers are written by the functions that write the printed page.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from markupsafe import Markup

from server import sheets
from server.sheets import coupon_tables
from server.sheets.values import unit

Rows = Sequence[Sequence[str]]


@dataclass(frozen=True)
class CouponPanel:
    """Everything a page shows of a set's result: texts and drawings."""

    value: str
    says: str
    verdict: str
    dots: Markup
    probability: Markup
    without: str
    """The head of the first column of both answers: 'Without no. 8'."""
    both: Rows
    """Rows of both answers: name, without what was excluded, with every coupon."""
    answer: Rows
    """The one answer, where nothing is excluded."""
    annex: Rows
    ahead: Rows
    tests: Rows
    broke: Rows
    cautions: Sequence[Mapping[str, Any]]
    missing: Sequence[str]
    coupons: Sequence[Mapping[str, Any]]
    unit: str
    numbers: Sequence[str]


def panel(result: Mapping[str, Any], display: str) -> CouponPanel:
    """Return the panel of a result of kind "coupons"."""
    of = coupon_tables.unit_of(result)
    whole = result.get("without_exclusions")
    kept = coupon_tables.pairs(result, display, of)
    every = dict(coupon_tables.pairs(whole, display, of)) if whole else {}
    out = [f"no. {each['index'] + 1}" for each in result["coupons"] if each["excluded"] is not None]
    shown = unit(of, display)
    return CouponPanel(
        value=sheets.quantity(result.get("characteristic"), of, display),
        says=coupon_tables.headline(result, display),
        verdict=str(result["verdict"]),
        dots=Markup(sheets.dot_plot_svg(result, display=display)),  # noqa: S704 -- our own drawing, texts escaped in it
        probability=Markup(sheets.probability_plot_svg(result, display=display)),  # noqa: S704 -- as above
        without=f"Without {', '.join(out[:4])}{' and more' if len(out) > 4 else ''}",
        both=[[name, text, every.get(name, "–")] for name, text in kept] if whole else (),
        answer=() if whole else kept,
        annex=_pairs(coupon_tables.directly_from_tests(result, display)),
        ahead=_pairs(coupon_tables.ahead(result, display)),
        tests=_pairs(coupon_tables.tests(result)),
        broke=_pairs(coupon_tables.failures(result)),
        cautions=result["cautions"],
        missing=result["missing"],
        coupons=result["coupons"],
        unit=shown.text,
        numbers=sheets.texts_of([each["stress"] * shown.factor for each in result["coupons"]]),
    )


def _pairs(parts: Iterable[Mapping[str, Any]]) -> list[list[str]]:
    return [row for part in parts if part["kind"] == "pairs" for row in part["pairs"]]
