"""The stage deck typed into the form in inch-pound units: legs at the ends only, then middle legs too.

What the page says is set beside numbers reckoned here a second time: strengths from the coupons by the noncentral t of
scipy, the glued deck by VQ/I of one rib with its own strip of the skin, the deck without glue by Newmark's closed form.
"""

from __future__ import annotations

import math
import re
from collections.abc import Callable
from typing import Any

import pytest
from scipy import stats

from tests.browser.test_journey import Form
from tests.sheets.test_pdf import text_of

ROLLING_SHEAR = (228, 241, 196, 252, 219, 233, 187, 246, 224, 210)  # psi, skin to rib
SCREWS = (412, 388, 455, 367, 430, 402, 441, 379, 418, 395)  # lbf, single shear
E_SKIN, E_RIB, SKIN, RIB = 1.2e6, 1.3e6, (48.0, 0.703), (1.5, 3.5)  # psi; width and depth, in
RIBS, SPACING, SLIP = 5, 6.0, 5500.0  # in, lbf/in
LOAD = 133 * 4 / 12  # lbf/in
FACTOR = 3.0


def characteristic(sample: tuple[int, ...]) -> float:
    """5th percentile at 75 % confidence, normal, scatter unknown (ISO 16269-6, one-sided)."""
    n = len(sample)
    k = stats.nct.ppf(0.75, n - 1, -stats.norm.ppf(0.05) * math.sqrt(n)) / math.sqrt(n)
    mean = sum(sample) / n
    return mean - k * math.sqrt(sum((x - mean) ** 2 for x in sample) / (n - 1))


def section(width: float, ribs: int) -> tuple[float, float, float, float, float]:
    """EI rigid and loose, reduced EA, lever arm, first moment of the skin: a strip of skin over ribs [psi, in]."""
    EA = (E_SKIN * width * SKIN[1], E_RIB * ribs * RIB[0] * RIB[1])
    loose = E_SKIN * width * SKIN[1] ** 3 / 12 + E_RIB * ribs * RIB[0] * RIB[1] ** 3 / 12
    r = (SKIN[1] + RIB[1]) / 2
    both = EA[0] * EA[1] / sum(EA)
    return loose + both * r**2, loose, both, r, both * r


def glued(span: float) -> float:
    """Stress in the bond of an inner rib: a quarter of the load on 11.625 of 48 in of skin, VQ/I [psi]."""
    strip = 11.625
    EI, _, _, _, first = section(strip, 1)
    return LOAD * strip / SKIN[0] * span / 2 * first / EI / RIB[0]


def glue_gone(span: float, width: float = SKIN[0], ribs: int = RIBS) -> tuple[float, float]:
    """Share of the stiffness left, and force on the end screws: Newmark, Siess and Viest 1951, uniform load."""
    load = LOAD * width / SKIN[0]
    EI, loose, EA, r, first = section(width, ribs)
    alpha = math.sqrt(ribs * SLIP / SPACING * (1 / EA + r**2 / loose))
    a = alpha * span / 2
    rigid = 5 * load * span**4 / (384 * EI)
    more = load / alpha**4 * (1 / loose - 1 / EI) * (alpha**2 * span**2 / 8 + 1 / math.cosh(a) - 1)
    flow = first / EI * (load * span / 2) * (1 - math.tanh(a) / a)
    return rigid / (rigid + more), flow / ribs * SPACING


def type_deck(page: Any, form: Form) -> None:
    """Fill an empty form; bare numbers are inches, feet, psi and pounds, as the boxes say."""
    page.click("button.layout[value=empty]")
    page.wait_for_selector("button.layout[value=empty][aria-pressed=true]")
    form.fill("mark", "D4")
    form.fill("title", "Stage deck, 4 ft x 8 ft")
    form.fill("span", "8")
    row(form, "pieces", 0, name="skin", width="48", depth="0.703", across="0", up="3.5", material="ply")
    for i in range(RIBS):
        at = f"{11.625 * i:g}"
        row(form, "pieces", i + 1, name=f"rib {i + 1}", width="1.5", depth="3.5", across=at, up="0", material="pine")
    form.unfold("adhesives")
    form.fill("adhesives[0].name", "P3")
    form.fill("adhesives[0].shear_strength", f"{characteristic(ROLLING_SHEAR):.4g}")
    strength = f"{characteristic(ROLLING_SHEAR):.4g}"
    form.unfold("materials")
    for name in ("G", "density", "source"):  # of the timber that an empty form starts with
        form.reveal(f"materials[0].{name}")
        form.fill(f"materials[0].{name}", "")
    row(form, "materials", 0, name="ply", kind="plywood", E="1.2e6", rolling_shear=strength, bending="6000",
        layered="yes")  # fmt: skip
    row(form, "materials", 1, name="pine", kind="timber", E="1.3e6", bending="7500", shear="600")
    row(form, "fasteners", 0, name="screw", shear_resistance=f"{characteristic(SCREWS):.4g}", slip_modulus="5500")
    form.reveal("fasteners[0].spacing_min")
    form.fill("fasteners[0].spacing_min", "2")
    for i in range(RIBS):
        row(form, "joints", i, first="skin", second=f"rib {i + 1}", adhesive="P3", fastener="screw", spacing="6",
            rows="1", role="fall-back")  # fmt: skip
    form.unfold("basis")
    for kind in ("adhesive", "fastener", "material"):
        form.fill(f"basis.{kind}", "3")
    form.unfold("member")
    form.fill("deflection_limit", "")
    form.unfold("loads")
    row(form, "loads", 0, kind="area", value="133", width="4", **{"from": "0", "to": "8"})


def row(form: Form, group: str, number: int, **typed: str) -> None:
    form.add_row(group, number)
    for name, text in typed.items():
        form.fill(f"{group}[{number}].{name}", text)


def new_check(page: Any, form: Form) -> None:
    page.goto("/jobs/new")
    page.select_option("[name=display]", "US")
    page.select_option("[name=paper]", "Letter")
    form.fill("number", "26-014")
    form.fill("title", "Stage decks")
    form.press("main form button[type=submit]")
    page.wait_for_selector("h1:has-text('Stage decks')")
    form.press("text=New check")
    page.wait_for_selector("#check")


def told(page: Any) -> str:
    """The result as it reads, on one line."""
    return " ".join(str(page.inner_text("#result")).replace("\u200b", "").split())


def compare(text: str, span: float) -> None:
    """Set what the page says beside the numbers of this file; bare digits as printed."""
    strengths = characteristic(ROLLING_SHEAR), characteristic(SCREWS)
    joint = re.search(r"3skin/rib 3 .*? ([\d.]+) width ([\d.]+) in, spacing ([\d.]+) in", text)
    assert joint, text
    assert float(joint[1]) == pytest.approx(FACTOR * glued(span), rel=5e-4)
    assert float(joint[2]) == pytest.approx(RIB[0] * FACTOR * glued(span) / strengths[0], rel=5e-4)
    share, force = glue_gone(span)
    assert f"with the glue gone the member keeps {100 * share:.0f} % of its stiffness" in text
    assert f"Share of the stiffness left {100 * share:.1f} %" in text
    edge = re.search(r"1 skin/rib 1 [\d.]+ [\d.]+ ([\d.]+) lbf ([\d.]+) lbf ([\d.]+)", text)
    inner = re.search(r"3 skin/rib 3 [\d.]+ [\d.]+ ([\d.]+) lbf ([\d.]+) lbf ([\d.]+)", text)
    assert edge
    assert inner
    assert float(edge[1]) == pytest.approx(force, rel=5e-4)
    assert float(edge[2]) == pytest.approx(strengths[1] / FACTOR, rel=5e-4)
    alone = glue_gone(span, 11.625, 1)[1]  # the page takes as many times the whole as with rigid joints: a little more
    assert alone < float(inner[1]) < 1.03 * alone
    assert float(inner[3]) == pytest.approx(float(inner[1]) / float(inner[2]), abs=0.006)


def fetched(page: Any, name: str) -> str:
    answer = page.request.get(f"{page.url}/{name}")
    assert answer.headers["content-type"] == "application/pdf"
    return text_of(answer.body())


def test_both_options_of_the_stage_deck(open_page: Callable[..., Any], address: str) -> None:
    page = open_page(address, width=1280)
    form = Form(page)
    new_check(page, form)
    type_deck(page, form)
    page.wait_for_selector("#result >> text=There is none", timeout=20000)
    assert "Fail" in page.inner_text("#verdict-strip")
    compare(told(page), 96)
    form.press("[name=save]")
    page.wait_for_url("**/revisions/1")
    page.set_viewport_size({"width": 800, "height": 900})
    assert page.evaluate("document.documentElement.scrollWidth") <= 800
    assert "There is none: with the glue gone" in fetched(page, "sheet.pdf")
    bench = fetched(page, "setting-out.pdf")
    assert "Do not build from this page where it does not pass" in bench
    assert "skin to rib 1, rib 2, rib 3, rib 4, rib 5" in bench

    page.goto(page.url.replace("/revisions/1", "/edit"))
    form.unfold("loads")
    form.fill("loads[0].to", "4")
    form.fill("span", "4")
    page.wait_for_selector("#result >> text=There is a fall-back", timeout=20000)
    assert "Pass" in page.inner_text("#verdict-strip")
    compare(told(page), 48)
    form.unfold("joints")
    form.press("#needed_zones-yes")
    page.wait_for_selector("#rows-joints >> text=The zones are put in for 5 joints")
    assert [page.input_value(f"[name='joints[{i}].spacing']") for i in (0, 2)] == ["12", "10"]
    for i in range(RIBS):  # what the shop means to build
        form.fill(f"joints[{i}].spacing", "6")
    form.fill("reason", "middle legs")
    form.press("[name=save]")
    page.wait_for_url("**/revisions/2")
    assert "There is a fall-back" in fetched(page, "sheet.pdf")
    bench = fetched(page, "setting-out.pdf")
    assert "7 spaces 6 3 ft 9 in" in bench
    assert "screw fall-back if the glue is lost 40" in bench
