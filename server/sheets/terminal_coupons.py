"""What the terminal's sheet shows of a set of coupons: the value, the coupons, the tests, what more would buy."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from server.sheets.tables import column, table
from server.sheets.values import DASH, quantity, unit
from server.working import readable

Part = Mapping[str, Any]
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


def headline(result: Result, display: str) -> str:
    """The line under the verdict."""
    value, statistic = result.get("characteristic"), result.get("statistic") or {}
    if value is None:
        line = str(result.get("governing", ""))
        return line[:1].upper() + line[1:]
    n = result.get("n")
    return (
        f"Characteristic value {quantity(value, 'MPa', display)} from {n} coupon{'' if n == 1 else 's'}: "
        f"{_percent(statistic.get('coverage'))} lie above it, stated with {_percent(statistic.get('confidence'))} "
        f"confidence ({NAMES.get(str(statistic.get('distribution')), '')})"
    )


def blocks(result: Result, display: str) -> Iterator[tuple[str, Iterable[Part]]]:
    """Every block of the sheet between its head and what is missing: title and parts."""
    yield "Characteristic value", _value(result, display)
    yield "Coupons", _coupons(result, display)
    yield "Where they broke", _failures(result)
    yield "Tests of the set", _tests(result)
    yield "What would raise it", _ahead(result, display)


def _percent(value: object) -> str:
    return f"{readable(float(value) * 100, 4)} %" if isinstance(value, int | float) else DASH


def _number(value: object, digits: int = 4) -> str:
    return readable(float(value), digits) if isinstance(value, int | float) else DASH


def _value(result: Result, display: str) -> Iterator[Part]:
    yield {"kind": "pairs", "pairs": _pairs(result, display)}
    whole = result.get("without_exclusions")
    if whole:
        yield {"kind": "sub", "title": "With the excluded coupons", "about": ""}
        yield {"kind": "pairs", "pairs": _pairs(whole, display)}
    annex = result.get("design_from_tests")
    if annex:
        yield {"kind": "sub", "title": "EN 1990 Annex D, directly from tests, conversion factor 1", "about": ""}
        rows = [
            [f"{name} value", f"{quantity(annex[key], 'MPa', display)}  (factor {_number(annex[f'{key}_factor'])})"]
            for name, key in (("Characteristic", "characteristic"), ("Design", "design"))
            if annex.get(key) is not None
        ]
        yield {"kind": "pairs", "pairs": rows}


def _pairs(found: Result, display: str) -> list[list[str]]:
    rows = [
        ["Coupons", _number(found.get("n"))],
        ["Mean", quantity(found.get("mean_stress"), "MPa", display)],
        ["Standard deviation", quantity(found.get("standard_deviation_stress"), "MPa", display)],
        ["Coefficient of variation", _percent(found.get("variation"))],
        ["Lowest", quantity(found.get("minimum"), "MPa", display)],
    ]
    if found.get("of_logarithms"):
        rows += [
            ["Mean of the logarithms (MPa)", _number(found.get("mean"))],
            ["Their standard deviation", _number(found.get("standard_deviation"))],
        ]
    weibull = found.get("weibull")
    if weibull:
        rows += [["Weibull shape", _number(weibull["shape"])], ["Scale", quantity(weibull["scale"], "MPa", display)]]
    if found.get("rank"):
        rows.append(["Rank from below", _number(found["rank"])])
    if found.get("factor") is not None:
        rows.append(["Tolerance factor", _number(found["factor"])])
    rows.append(["Characteristic value", quantity(found.get("characteristic"), "MPa", display)])
    if found.get("share_of_mean") is not None:
        rows.append(["Share of the mean", _percent(found["share_of_mean"])])
    return rows


def _coupons(result: Result, display: str) -> Iterator[Part]:
    listed = result.get("coupons") or []
    stress = unit("MPa", display)
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


def _failures(result: Result) -> Iterator[Part]:
    summary = result.get("failure")
    if summary:
        rows = [[name, f"{_number(summary[key], 3)} %"] for key, name in _SHARES if summary.get(key)]
        yield {"kind": "pairs", "pairs": [*rows, ["Recorded for", f"{summary['coupons']} coupons (means)"]]}


def _tests(result: Result) -> Iterator[Part]:
    rows = []
    for key in ("fit", "fit_shapiro_wilk"):
        fit = result.get(key) or {}
        if fit.get("test"):
            told = "accepted" if fit["accepted"] else "not accepted"
            rows.append([fit["test"], f"{_number(fit['statistic'])}, p = {_number(fit['p_value'], 3)}: {told}"])
    for each in result.get("outliers") or []:
        told = f"{_number(each['statistic'])} beyond {_number(each['critical'])}"
        rows.append([f"Outlier: coupon {each['index'] + 1}", told])
    if not result.get("outliers"):
        rows.append(["Outliers", "none"])
    batches = result.get("batches") or {}
    if batches.get("statistic") is not None:
        told = "may be pooled" if batches["pooled"] else "not one population"
        rows.append(["Batches", f"{_number(batches['statistic'])} against {_number(batches['critical'])}: {told}"])
    else:
        rows.append(["Batches", str(batches.get("note") or DASH)])
    yield {"kind": "pairs", "pairs": rows}


def _ahead(result: Result, display: str) -> Iterator[Part]:
    rows = [[f"{each['n']} coupons, same scatter", each] for each in result.get("more_coupons") or []]
    rows += [
        [f"{_percent(each['scatter'])} of the scatter, {each['n']} coupons", each]
        for each in result.get("less_scatter") or []
    ]
    if not rows:
        return
    pairs = [
        [name, f"{quantity(each['characteristic'], 'MPa', display)}  ({each['gain'] * 100:+.1f} %)"]
        for name, each in rows
    ]
    needed = result.get("needed_for_1_percent_gain")
    pairs.append(["Further coupons for 1 % more", DASH if needed is None else str(needed)])
    yield {"kind": "pairs", "pairs": pairs}
