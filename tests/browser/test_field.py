"""A ring of four joints in a browser: typed in, its outside area shaded, the section's stress shown, kept and printed.

No cut and no symmetry opens this ring, one web being softer than the other: only the field divides the flow.
"""

from __future__ import annotations

import os
from collections.abc import Callable
from pathlib import Path
from typing import Any

from tests.browser.conftest import violations
from tests.browser.test_journey import MATERIALS, Form, start_job

SOFT = {**MATERIALS[1], "name": "soft ply", "G": "300", "rolling_shear": "1.6"}
VIEWS = os.environ.get("BONDWRIGHT_VIEWS")
"""A folder to leave pictures of the screen in, for whoever wants to look."""


def type_ring(page: Any, form: Form) -> None:
    form.press("text=New check")
    page.wait_for_selector("#check")
    form.press("button.layout[value=empty]")
    page.wait_for_selector("button.layout[value=empty][aria-pressed=true]")
    form.fill("mark", "R1")
    form.add_row("adhesives", 0)
    form.fill("adhesives[0].name", "glue")
    form.fill("adhesives[0].shear_strength", "6")
    form.box_beam()
    form.add_row("materials", 2)
    for key, text in SOFT.items():
        form.reveal(f"materials[2].{key}")
        form.fill(f"materials[2].{key}", text)
    form.fill("pieces[3].material", "soft ply")
    form.fill("span", "6")
    form.fill("load", "2.4")


def look(page: Any, name: str) -> None:
    if VIEWS:
        page.screenshot(path=str(Path(VIEWS) / f"{name}.png"), full_page=True, caret="initial")


def test_a_ring_of_four_joints_is_typed_shaded_and_drawn_with_its_stress(
    open_page: Callable[..., Any], address: str
) -> None:
    page = open_page(address)
    form = Form(page)
    start_job(page, form, "ring")
    type_ring(page, form)
    page.wait_for_selector("#verdict-strip:has-text('Pass')", timeout=20000)
    page.wait_for_selector("#result th:has-text('by field')")
    assert page.locator("#result th:has-text('by field')").count() == 4

    page.select_option("#shade", "top flange/web L")
    page.wait_for_selector(".section-drawing figcaption:has-text('Shaded: top flange')")
    page.select_option("#stress", "shear")
    page.wait_for_selector(".stress-drawing svg")
    assert "run of stress along each bond" in page.inner_text(".stress-drawing figcaption")
    drawn = page.locator(".stress-drawing svg")
    assert "over" in drawn.text_content()
    for width in (800, 1280):
        page.set_viewport_size({"width": width, "height": 900})
        assert page.evaluate("document.documentElement.scrollWidth") <= width
        look(page, f"ring typed {width}")

    page.fill("#stress_at", "1.5 m")
    page.keyboard.press("Tab")
    page.wait_for_selector(".stress-drawing figcaption:has-text('1500 mm from the left end')")
    page.select_option("#stress", "bending")
    page.wait_for_selector(".stress-drawing svg:has-text('compression')")

    form.press("[name=save]")
    page.wait_for_url("**/revisions/1")
    page.select_option("#shade", "top flange/web R")
    page.wait_for_selector(".section-drawing figcaption:has-text('Shaded: top flange')")
    page.select_option("#stress", "bending")
    page.wait_for_selector(".stress-drawing svg:has-text('tension')")
    assert page.input_value("#shade") == "top flange/web R"  # one choice leaves the other
    assert violations(page) == []
    look(page, "ring saved")
    printed = page.request.get(f"{page.url.split('?')[0]}/sheet.pdf").body()
    assert printed.startswith(b"%PDF")
    if VIEWS:
        (Path(VIEWS) / "ring.pdf").write_bytes(printed)
