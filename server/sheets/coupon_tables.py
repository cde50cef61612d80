"""A set of coupons in tables, for the terminal and the evidence page: value, coupons, tests, what more would buy."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from server.sheets.tables import column, table
from server.sheets.values import DASH, quantity, unit
from server.working import readable

Part = dict[str, Any]
Result = Mapping[str, Any]
NAMES = {
    "normal": "normal",
    "lognormal": "log-normal",
    "weibull": "Weibull",
    "nonparametric": "distribution-free",
}
_SHARES = (
    ("adhesive", "Adhesive"),
    ("special_cohesive", "Cohesive, near a surface"),
    ("cohesive", "Cohesive"),
    ("substrate", "Substrate"),
)


def unit_of(result: Result) -> str:
    """The unit the results are stored in: MPa, or N where a fastener was broken at a load."""
    return str(result.get("unit") or "MPa")


def in_newtons(result: Result) -> dict[str, Any]:
    """A result that was reckoned on one square millimetre a coupon, read as loads: its MPa are N."""
    steps = [_as_load(step) for step in result.get("steps", ()) if step.get("group") != "Stresses"]
    return {**_as_load({**result, "steps": ()}), "steps": steps, "unit": "N", "quantity": "Load at failure"}


def _as_load(value: Any) -> Any:
    """Every text and unit in N; the numbers stay."""
    if isinstance(value, str):
        return re.sub(r"\bMPa\b", "N", value).replace("stresses", "loads").replace("Stresses", "Loads")
    if isinstance(value, Mapping):
        return {name: _as_load(each) for name, each in value.items()}
    if isinstance(value, list | tuple):
        return [_as_load(each) for each in value]
    return value


def headline(result: Result, display: str) -> str:
    """The line under the verdict."""
    value, statistic = result.get("characteristic"), result.get("statistic") or {}
    if value is None:
        line = str(result.get("governing", ""))
        return line[:1].upper() + line[1:]
    n = result.get("n")
    return (
        f"Characteristic value {quantity(value, unit_of(result), display)} from {n} coupon{'' if n == 1 else 's'}: "
        f"{percent(statistic.get('coverage'))} lie above it, stated with {percent(statistic.get('confidence'))} "
        f"confidence ({NAMES.get(str(statistic.get('distribution')), '')})"
    )


def blocks(result: Result, display: str) -> Iterator[tuple[str, Iterable[Part]]]:
    """Every block of the sheet between its head and what is missing: title and parts."""
    yield "Characteristic value", value(result, display)
    yield "Coupons", _coupons(result, display)
    yield "Where they broke", failures(result)
    yield "Tests of the set", tests(result)
    yield "What would raise it", ahead(result, display)


def percent(value: object) -> str:
    """A share as a percentage."""
    return f"{readable(float(value) * 100, 4)} %" if isinstance(value, int | float) else DASH


def number(value: object, digits: int = 4) -> str:
    """A number for people; a dash where there is none."""
    return readable(float(value), digits) if isinstance(value, int | float) else DASH


def value(result: Result, display: str) -> Iterator[Part]:
    """The value with what it is made of, the same with the excluded coupons, and EN 1990 Annex D."""
    yield {"kind": "pairs", "pairs": pairs(result, display, unit_of(result))}
    whole = result.get("without_exclusions")
    if whole:
        yield {"kind": "sub", "title": "With the excluded coupons", "about": ""}
        yield {"kind": "pairs", "pairs": pairs(whole, display, unit_of(result))}
    yield from directly_from_tests(result, display)


def directly_from_tests(result: Result, display: str) -> Iterator[Part]:
    """Characteristic and design value by EN 1990 Annex D, where it has a factor."""
    annex = result.get("design_from_tests")
    if annex:
        yield {"kind": "sub", "title": "EN 1990 Annex D, directly from tests, conversion factor 1", "about": ""}
        rows = [
            [
                f"{name} value",
                f"{quantity(annex[key], unit_of(result), display)}  (factor {number(annex[f'{key}_factor'])})",
            ]
            for name, key in (("Characteristic", "characteristic"), ("Design", "design"))
            if annex.get(key) is not None
        ]
        yield {"kind": "pairs", "pairs": rows}


def pairs(found: Result, display: str, of: str = "MPa") -> list[list[str]]:
    """Names and numbers of one answer; ``of`` is the unit of the result."""
    rows = [
        ["Coupons", number(found.get("n"))],
        ["Mean", quantity(found.get("mean_stress"), of, display)],
        ["Standard deviation", quantity(found.get("standard_deviation_stress"), of, display)],
        ["Coefficient of variation", percent(found.get("variation"))],
        ["Lowest", quantity(found.get("minimum"), of, display)],
    ]
    if found.get("of_logarithms"):
        rows += [
            [f"Mean of the logarithms ({of})", number(found.get("mean"))],
            ["Their standard deviation", number(found.get("standard_deviation"))],
        ]
    weibull = found.get("weibull")
    if weibull:
        rows += [["Weibull shape", number(weibull["shape"])], ["Scale", quantity(weibull["scale"], of, display)]]
    if found.get("rank"):
        rows.append(["Rank from below", number(found["rank"])])
    if found.get("factor") is not None:
        rows.append(["Tolerance factor", number(found["factor"])])
    rows.append(["Characteristic value", quantity(found.get("characteristic"), of, display)])
    if found.get("share_of_mean") is not None:
        rows.append(["Share of the mean", percent(found["share_of_mean"])])
    return rows


def _coupons(result: Result, display: str) -> Iterator[Part]:
    listed = result.get("coupons") or []
    stress = unit(unit_of(result), display)
    batches = any(each.get("batch") for each in listed)
    columns = [column("No.", side="right"), column(f"Stress, {stress.text}", side="right")]
    columns += [column("Batch")] if batches else []
    columns.append(column("Remark", share=1))
    rows = []
    for each in listed:
        remarks = [str(each.get("name") or "")]
        remarks += ["outlier"] if each.get("outlier") else []
        remarks += [f"excluded: {each['excluded']}"] if each.get("excluded") else []
        row = [str(each["index"] + 1), stress.number(each.get("stress"))]
        row += [str(each.get("batch") or "")] if batches else []
        rows.append([*row, "; ".join(remark for remark in remarks if remark)])
    if rows:
        yield table(columns, rows)


def failures(result: Result) -> Iterator[Part]:
    """Where the coupons broke, on average."""
    summary = result.get("failure")
    if summary:
        rows = [[name, f"{number(summary[key], 3)} %"] for key, name in _SHARES if summary.get(key)]
        yield {"kind": "pairs", "pairs": [*rows, ["Recorded for", f"{summary['coupons']} coupons (means)"]]}


def tests(result: Result) -> Iterator[Part]:
    """Fit, outliers and batches, each with its statistic and its critical value."""
    rows = []
    for key in ("fit", "fit_shapiro_wilk"):
        fit = result.get(key) or {}
        if fit.get("test"):
            told = "accepted" if fit["accepted"] else "not accepted"
            rows.append([fit["test"], f"{number(fit['statistic'])}, p = {number(fit['p_value'], 3)}: {told}"])
    for each in result.get("outliers") or []:
        told = f"{number(each['statistic'])} beyond {number(each['critical'])}"
        rows.append([f"Outlier: coupon {each['index'] + 1}", told])
    if not result.get("outliers"):
        rows.append(["Outliers", "none"])
    batches = result.get("batches") or {}
    if batches.get("statistic") is not None:
        told = "may be pooled" if batches["pooled"] else "not one population"
        rows.append(["Batches", f"{number(batches['statistic'])} against {number(batches['critical'])}: {told}"])
    else:
        rows.append(["Batches", str(batches.get("note") or DASH)])
    yield {"kind": "pairs", "pairs": rows}


def ahead(result: Result, display: str) -> Iterator[Part]:
    """What more coupons, and less scatter, would buy."""
    rows = [[f"{each['n']} coupons, same scatter", each] for each in result.get("more_coupons") or []]
    rows += [
        [f"{percent(each['scatter'])} of the scatter, {each['n']} coupons", each]
        for each in result.get("less_scatter") or []
    ]
    if not rows:
        return
    listed = [
        [name, f"{quantity(each['characteristic'], unit_of(result), display)}  ({each['gain'] * 100:+.1f} %)"]
        for name, each in rows
    ]
    needed = result.get("needed_for_1_percent_gain")
    listed.append(["Further coupons for 1 % more", DASH if needed is None else str(needed)])
    yield {"kind": "pairs", "pairs": listed}
