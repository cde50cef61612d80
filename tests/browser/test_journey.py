"""The main job in a browser: a new job, a box beam typed from nothing, saved, printed again, run again."""

from __future__ import annotations

import hashlib
from collections.abc import Callable
from typing import Any

import pytest

from tests.browser.conftest import violations

PIECES = (
    ("top flange", "90", "70", "12.5", "330", "softwood"),
    ("bottom flange", "90", "70", "12.5", "0", "softwood"),
    ("web L", "12.5", "400", "0", "0", "ply"),
    ("web R", "12.5", "400", "102.5", "0", "ply"),
)
MATERIALS = (
    {"name": "softwood", "E": "11000", "G": "690", "bending": "40", "shear": "6"},
    {"name": "ply", "E": "6500", "G": "600", "bending": "30", "shear": "9", "rolling_shear": "1.6", "layered": "yes"},
)


class Form:
    """The check form as somebody fills it: by pointer or by keyboard alone, with JavaScript or without."""

    def __init__(self, page: Any, *, keyboard: bool = False, javascript: bool = True) -> None:
        self.page, self.keyboard, self.javascript = page, keyboard, javascript

    def press(self, selector: str) -> None:
        """Follow a link or push a button."""
        if self.keyboard:
            self.page.focus(selector)
            self.page.keyboard.press("Enter")
        else:
            self.page.click(selector)

    def fill(self, name: str, text: str) -> None:
        selector = f"[name='{name}']"
        if self.page.locator(selector).evaluate("box => box.tagName") == "SELECT":
            self.page.select_option(selector, text)
        elif self.keyboard:
            self.page.focus(selector)
            self.page.keyboard.press("Control+A")
            self.page.keyboard.type(text)
        else:
            self.page.fill(selector, text)

    def unfold(self, part: str) -> None:
        if self.page.locator(f"#fold-{part}[open]").count() == 0:
            self.press(f"#fold-{part} > summary")

    def add_row(self, group: str, row: int) -> None:
        """Add a row where it is not there yet, and open what is folded away in it."""
        self.unfold(group)
        first = f"[name^='{group}[{row}].']"
        if self.page.locator(first).count() == 0:
            self.press(f"#add-{group}")
            self.page.wait_for_selector(first, state="attached")
        self.unfold(group)

    def reveal(self, name: str) -> None:
        box = self.page.locator(f"[name='{name}']")
        if not box.is_visible():
            box.evaluate("box => { for (let d = box.closest('details'); d; d = d.parentElement.closest('details')) "
                         "d.open = true; }")  # fmt: skip

    def box_beam(self) -> None:
        """Every piece, material and joint, from an empty form."""
        for row, (name, width, depth, across, up, material) in enumerate(PIECES):
            self.add_row("pieces", row)
            typed = {"name": name, "width": width, "depth": depth, "across": across, "up": up, "material": material}
            for key, text in typed.items():
                self.fill(f"pieces[{row}].{key}", text)
        for row, material in enumerate(MATERIALS):
            self.add_row("materials", row)
            for key, text in material.items():
                if self.javascript:
                    self.reveal(f"materials[{row}].{key}")
                elif not self.page.locator(box := f"[name='materials[{row}].{key}']").is_visible():
                    self.page.locator(f"details:has({box}):not([open]) > summary").last.click()
                self.fill(f"materials[{row}].{key}", text)
        for row, (first, second) in enumerate((f, w) for f in ("top", "bottom") for w in ("L", "R")):
            self.add_row("joints", row)
            self.fill(f"joints[{row}].first", f"{first} flange")
            self.fill(f"joints[{row}].second", f"web {second}")
            self.fill(f"joints[{row}].adhesive", "glue")


def start_job(page: Any, form: Form, number: str) -> None:
    page.goto("/jobs/new")
    form.fill("number", number)
    form.fill("title", "Boathouse")
    form.press("main form button[type=submit]")
    page.wait_for_selector("h1:has-text('Boathouse')")


def add_bond(page: Any, form: Form, key: str, strength: str) -> None:
    page.goto("/library/new/bonds")
    form.fill("key", key)
    form.fill("name", "Resin, flange to web")
    form.fill("source", "12 block shear coupons")
    form.fill("shear_strength", strength)
    form.press("main form button[type=submit]")
    page.wait_for_url(f"**/library/{key}*")


def type_check(page: Any, form: Form, bond: str) -> None:
    """From the job's page to a filled form."""
    form.press("text=New check")
    page.wait_for_selector("#check")
    form.press("button.layout[value=empty]")
    page.wait_for_selector("button.layout[value=empty][aria-pressed=true]")
    form.fill("mark", "B1")
    form.fill("title", "Box beam")
    form.add_row("adhesives", 0)
    form.fill("adhesives[0].name", "glue")
    page.select_option("[name='adhesives[0].record']", bond)
    form.box_beam()
    form.fill("span", "6")
    form.fill("load", "4.2")


@pytest.mark.parametrize(
    ("width", "javascript", "keyboard"),
    [(1280, True, False), (800, True, True), (800, False, False)],
    ids=["pointer", "keyboard at 800 px", "no JavaScript at 800 px"],
)
def test_the_main_job(
    open_page: Callable[..., Any],
    address: str,
    approve: Callable[[str], None],
    width: int,
    javascript: bool,
    keyboard: bool,
) -> None:
    page = open_page(address, width=width, javascript=javascript)
    form = Form(page, keyboard=keyboard, javascript=javascript)
    tag = f"{width}{'js' if javascript else 'no'}"
    bond = f"B-{tag}"
    add_bond(page, form, bond, "4.5")
    approve(bond)
    start_job(page, form, tag)
    type_check(page, form, bond)
    if javascript:  # the verdict came while typing, without a button
        page.wait_for_selector("#verdict-strip:has-text('Pass')", timeout=15000)
        assert page.evaluate("document.documentElement.scrollWidth") <= width
    else:
        page.click("noscript button, button:has-text('Calculate') >> visible=true >> nth=-1")
        assert "Pass" in page.inner_text("#verdict-strip")
    form.press("[name=save]")
    page.wait_for_url("**/revisions/1")
    saved = page.url
    assert "B1" in page.inner_text("h1")
    if javascript:
        assert violations(page) == []
    before = sheet(page, saved)

    page.goto(f"/library/{bond}/edit")
    form.fill("shear_strength", "0.5")
    form.press("main form button[type=submit]")
    page.wait_for_url(f"**/library/{bond}*")
    approve(bond)

    page.goto(saved)
    assert "now rev" in page.inner_text("main")  # the notice; the sheet itself stays
    assert sheet(page, saved) == before
    form.press("text=Run it again")
    page.wait_for_url("**/compare/1/2")
    moved = page.inner_text("main")
    assert "4.5" in moved
    assert "0.5" in moved
    assert "Fail" in moved
    assert sheet(page, saved) == before


def sheet(page: Any, saved: str) -> str:
    """The hash of the printed sheet's bytes."""
    answer = page.request.get(f"{saved}/sheet.pdf")
    assert answer.headers["content-type"] == "application/pdf"
    body = answer.body()
    assert body.startswith(b"%PDF")
    return hashlib.sha256(body).hexdigest()
