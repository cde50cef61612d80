"""The check of the shop's own fastener tests: what it asks, and how its result reads."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from server.sheets.asked import Ask, AskGroup, Column
from server.sheets.load_slip_plot import has_curves, load_slip_svg
from server.sheets.one_page import Blocks, OnePage, Part, Result, figure, pairs
from server.sheets.tables import column, table
from server.sheets.values import DASH, quantity, unit
from server.working import readable

GROUPS = (
    AskGroup(
        "specimens",
        "Specimens",
        (
            Ask(
                "specimens",
                "Specimen",
                rows=5,
                columns=(
                    Column("maximum", "greatest load", "force"),
                    Column("v01", "slip at a tenth", "size"),
                    Column("v04", "slip at four tenths", "size"),
                    Column("name", "name"),
                    Column("excluded", "excluded because"),
                ),
                hint="one line each: greatest load, slip at a tenth of it, slip at four tenths, name",
            ),
            Ask(
                "readings",
                "Specimen with its readings",
                rows=10,
                into="specimens",
                hint="pasted, one load and slip a line; a name before each specimen, a blank line after it. Units in "
                "a heading, such as load [N]; slip [mm]",
            ),
            Ask("fastener_count", "Fasteners in a specimen", whole=True, start=("1", "1")),
            Ask("shear_planes", "Shear planes of each", whole=True, start=("1", "1")),
            Ask("estimated", "Estimated load", "force", hint="blank: each test's own greatest load"),
        ),
    ),
    AskGroup(
        "statistic",
        "Characteristic value",
        (
            Ask(
                "statistic.distribution",
                "Distribution",
                choices=(
                    ("lognormal", "log-normal (EN 14358)"),
                    ("normal", "normal"),
                    ("weibull", "Weibull"),
                    ("nonparametric", "distribution-free"),
                ),
            ),
            Ask("statistic.coverage", "Share that lies above it", start=("0.95", "0.95")),
            Ask("statistic.confidence", "Confidence", start=("0.75", "0.75")),
        ),
        folded=True,
        about="log-normal, 5th percentile with 75 % confidence",
    ),
)


_CAPTION = "Load over slip of every specimen with its number, one fastener and shear plane."


def headline(result: Result, display: str) -> str:
    """The line under the verdict."""
    n = result.get("n")
    load = quantity(result.get("shear_resistance"), "N", display)
    slip = quantity(result.get("slip_modulus"), "N/mm", display)
    of = f"from {n} specimen{'' if n == 1 else 's'}"
    return f"Characteristic load {load}, slip modulus {slip}, one fastener and shear plane, {of}"


def blocks(result: Result, display: str) -> Blocks:
    """Strength and slip, load over slip, then every specimen."""
    yield "Strength and slip", _found(result, display)
    if has_curves(result):
        yield "Load over slip", [figure(load_slip_svg(result, display=display), _CAPTION)]
    yield "Specimens", _specimens(result, display)


def _found(result: Result, display: str) -> Iterator[Part]:
    variation = result.get("variation")
    rows = [
        ("Characteristic load, one fastener and plane", quantity(result.get("shear_resistance"), "N", display)),
        ("Mean load", quantity(result.get("mean"), "N", display)),
        ("Standard deviation", quantity(result.get("standard_deviation"), "N", display)),
        ("Coefficient of variation", "" if variation is None else f"{readable(100 * variation, 3)} %"),
        ("Tolerance factor", "" if result.get("factor") is None else readable(result["factor"], 4)),
        ("Slip modulus, mean", quantity(result.get("slip_modulus"), "N/mm", display)),
        ("Its standard deviation", quantity(result.get("slip_modulus_deviation"), "N/mm", display)),
    ]
    yield pairs([(name, value) for name, value in rows if value != DASH])


def _specimens(result: Result, display: str) -> Iterator[Part]:
    force, length, slip = unit("N", display), unit("mm", display), unit("N/mm", display)
    columns = [
        column("No."),
        column(f"Load, {force.text}", side="right"),
        column(f"Slip at 0.1, {length.text}", side="right"),
        column(f"Slip at 0.4, {length.text}", side="right"),
        column(f"Slip modulus, {slip.text}", side="right"),
        column("Remark", share=1),
    ]
    rows = [
        [
            str(each["index"] + 1),
            force.number(each.get("load")),
            length.number(each.get("v01")),
            length.number(each.get("v04")),
            slip.number(each.get("slip_modulus")),
            "; ".join(
                text
                for text in (each.get("name"), f"excluded: {each['excluded']}" if each.get("excluded") else "")
                if text
            ),
        ]
        for each in result.get("specimens") or ()
    ]
    if rows:
        yield table(columns, rows)


def _waits_for(raw: Mapping[str, Any]) -> Iterable[str]:
    if not raw.get("specimens"):
        yield "the specimens"


def finish(raw: dict[str, Any]) -> None:
    """Put the specimens with readings behind those given by their loads."""
    pasted = raw.pop("readings", None)
    if pasted:
        raw["specimens"] = [*(raw.get("specimens") or ()), *pasted]


def normal(raw: Mapping[str, Any]) -> Mapping[str, Any]:
    """The specimens with readings apart from those without, as the form has them."""
    listed = raw.get("specimens")
    if not isinstance(listed, list):
        return raw
    pasted = [each for each in listed if isinstance(each, Mapping) and each.get("readings")]
    plain = [each for each in listed if each not in pasted]
    return {**raw, "specimens": plain, **({"readings": pasted} if pasted else {})}


PAGE = OnePage(
    "load-slip", "Tests of fasteners", "set of fastener tests", GROUPS, headline, blocks, _waits_for,
    finish=finish, normal=normal,
)  # fmt: skip
