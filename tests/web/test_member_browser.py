"""The check page in a real browser: live while typing, by keyboard, at 800 px, and with JavaScript off."""

from __future__ import annotations

import re
import threading
import time
from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest
import uvicorn

from server.app import create_app
from server.settings import Settings
from tests.web.test_member import JOB


@pytest.fixture(scope="module")
def address(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """The address of a running program with an empty record book."""
    folder: Path = tmp_path_factory.mktemp("book")
    config = uvicorn.Config(create_app(Settings(data=folder, port=8300)), host="127.0.0.1", port=0, log_level="error")
    server = uvicorn.Server(config)
    thread = threading.Thread(target=server.run, daemon=True)
    thread.start()
    while not server.started:
        time.sleep(0.02)
    yield f"http://127.0.0.1:{server.servers[0].sockets[0].getsockname()[1]}"
    server.should_exit = True
    thread.join(timeout=10)


@pytest.fixture
def page(browser: Any, address: str, request: pytest.FixtureRequest) -> Iterator[Any]:
    """A page on a new check; errors on its console fail the test. Parameter: is JavaScript on?"""
    context = browser.new_context(
        viewport={"width": 800, "height": 900}, java_script_enabled=getattr(request, "param", True), base_url=address
    )
    made = context.new_page()
    errors: list[str] = []
    made.on("console", lambda line: errors.append(line.text) if line.type == "error" else None)
    made.on("pageerror", lambda error: errors.append(str(error)))
    made.goto("/jobs/new")
    for name in ("number", "title"):
        made.fill(f"[name={name}]", f"{JOB[name]} {time.monotonic_ns()}")
    made.click("main button[type=submit]")
    made.click("text=New check")
    made.wait_for_selector("#check")
    yield made
    assert [each for each in errors if "422" not in each] == []
    context.close()


def strip(page: Any, text: str) -> None:
    """Wait until the verdict strip says ``text``."""
    page.wait_for_selector(f"#verdict-strip:has-text('{text}')", timeout=15000)


def fill_first_view(page: Any) -> None:
    page.fill("[name=span]", "6.0")
    page.fill("[name=load]", "4.2")
    page.fill("[name='adhesives[0].shear_strength']", "6")


def test_the_verdict_follows_the_typing(page: Any) -> None:
    strip(page, "Still to enter: the span, a load.")
    fill_first_view(page)
    strip(page, "Not proven")
    page.click("#fold-materials > summary")
    for name, value in (("bending", "30"), ("shear", "8"), ("rolling_shear", "1.6")):
        page.fill(f"[name='materials[1].{name}']", value)
    strip(page, "Pass")
    page.fill("[name=load]", "9")
    strip(page, "Fail")


def test_a_message_comes_and_goes_beside_its_box_while_typing_goes_on(page: Any) -> None:
    fill_first_view(page)
    strip(page, "Not proven")
    page.fill("[name=span]", "six")
    page.wait_for_selector("[id='m-span']:has-text('is not a length')")
    assert page.get_attribute("[name=span]", "aria-invalid") == "true"
    assert page.input_value("[name=span]") == "six"
    assert page.evaluate("document.activeElement.name") == "span"
    page.fill("[name=span]", "6")
    strip(page, "Not proven")
    assert page.inner_text("[id='m-span']") == ""
    assert page.get_attribute("[name=span]", "aria-invalid") is None


def test_rows_come_and_go_with_the_cursor_following(page: Any) -> None:
    fill_first_view(page)
    page.click("#fold-loads > summary")
    page.click("#add-loads")
    page.wait_for_selector("[name='loads[0].case']:focus")
    page.select_option("[name='loads[0].kind']", "point")
    page.fill("[name='loads[0].at']", "2")
    page.fill("[name='loads[0].value']", "3")
    page.wait_for_selector("#now-loads:has-text('2 loads')")
    page.click("[id='remove-loads[0]']")
    page.wait_for_selector("#now-loads:has-text('1 load in')")
    page.wait_for_selector("#add-loads:focus")
    assert page.input_value("[name=span]") == "6.0"


def test_the_working_comes_when_it_is_opened_and_follows_the_typing(page: Any) -> None:
    fill_first_view(page)
    strip(page, "Not proven")
    assert page.locator("#working math").count() == 0
    page.click("#fold-working > summary")
    page.wait_for_selector("#working math")
    page.locator("#working").filter(has_text=re.compile(r"25\s?200")).wait_for()
    page.fill("[name=load]", "5")
    strip(page, "Fail")
    page.locator("#working").scroll_into_view_if_needed()
    page.locator("#working").filter(has_text=re.compile(r"30\s?000")).wait_for()


def test_a_check_is_typed_and_saved_by_keyboard_alone(page: Any) -> None:
    page.focus("[name=mark]")
    for text in ("K1", "Keyboard beam", "6", "4.2"):
        page.keyboard.type(text)
        page.keyboard.press("Tab")
    page.keyboard.press("Tab")
    page.keyboard.type("6")
    page.keyboard.press("Enter")
    strip(page, "Not proven")
    page.focus("[name=save]")
    page.keyboard.press("Enter")
    page.wait_for_url("**/revisions/1")
    assert "K1: Keyboard beam" in page.inner_text("h1")


def test_nothing_is_cut_off_at_800_px_with_every_part_open(page: Any) -> None:
    fill_first_view(page)
    strip(page, "Not proven")
    page.evaluate("document.querySelectorAll('details').forEach(each => { each.open = true; })")
    page.locator("#working").scroll_into_view_if_needed()
    page.wait_for_selector("#working math")
    assert page.evaluate("document.documentElement.scrollWidth") <= 800


def test_another_layout_keeps_the_span_and_redraws(page: Any) -> None:
    fill_first_view(page)
    strip(page, "Not proven")
    page.click("button.layout:has-text('Stack')")
    page.wait_for_selector("button.layout:has-text('Stack')[aria-pressed=true]")
    page.wait_for_selector("#result:has-text('lower/')")
    assert page.input_value("[name=span]") == "6.0"


@pytest.mark.parametrize("page", [False], indirect=True)
def test_everything_works_without_javascript(page: Any) -> None:
    fill_first_view(page)
    page.click("noscript button, button:has-text('Calculate') >> visible=true >> nth=-1")
    assert "Not proven" in page.inner_text("#verdict-strip")
    page.click("#fold-loads > summary")
    page.click("#add-loads")
    page.select_option("[name='loads[0].kind']", "point")
    page.fill("[name='loads[0].at']", "2")
    page.fill("[name='loads[0].value']", "three")
    page.click("[name=save]")
    assert "Nothing was saved" in page.inner_text("#refused")
    assert page.input_value("[name='loads[0].value']") == "three"
    assert "is not a force" in page.inner_text("[id='m-loads[0].value']")
    page.fill("[name='loads[0].value']", "3")
    page.press("[name='loads[0].value']", "Enter")
    page.click("#fold-working > summary")
    assert "Shear flow" in page.inner_text("#fold-working")
    page.click("[name=save]")
    page.wait_for_url("**/revisions/1")
    page.click("text=Run it again")
    page.wait_for_url("**/compare/1/2")
    assert "Nothing moved" in page.inner_text("main")


def test_a_shape_brings_its_own_boxes_and_a_profile_its_sizes(page: Any) -> None:
    """Choosing a shape shows its boxes without leaving the row; a profile fills the section with its sizes."""
    fill_first_view(page)
    page.click("#fold-pieces > summary")
    page.select_option("[name='pieces[3].shape']", "tube")
    page.wait_for_selector("[name='pieces[3].wall']")
    assert page.evaluate("document.activeElement.name") == "pieces[3].shape"
    assert page.input_value("[name='pieces[3].depth']") == "400"
    page.fill("[name='pieces[3].profile']", "shs 100 x 4")
    page.keyboard.press("Tab")
    page.wait_for_selector("[name='pieces[3].depth']", state="detached")  # the profile says it
    page.wait_for_selector("#now-pieces:has-text('SHS 100 x 4')")
    assert page.evaluate("document.documentElement.scrollWidth <= 800")


@pytest.mark.parametrize("page", [False], indirect=True)
def test_without_javascript_a_button_shows_the_boxes_of_a_shape(page: Any) -> None:
    page.click("#fold-pieces > summary")
    page.select_option("[name='pieces[0].shape']", "round")
    page.click("#row-pieces\\[0\\] noscript button, #row-pieces\\[0\\] button:has-text('Show the boxes')")
    page.fill("[name='pieces[0].diameter']", "60")
    assert page.locator("[name='pieces[0].width']").get_attribute("type") == "hidden"


def test_a_ring_of_four_unlike_pieces_shows_its_stresses(page: Any) -> None:
    """No cut, no symmetry: the field settles the joints; its outside area and its stresses are drawn when asked for."""
    fill_first_view(page)
    strip(page, "Not proven")
    page.click("#fold-pieces > summary")
    page.fill("[name='pieces[3].width']", "20")
    page.wait_for_selector("#result :text('by field')", timeout=15000)
    page.select_option("#shade", index=1)
    page.wait_for_selector("#result .drawing.section .outside", timeout=15000)
    page.select_option("#stress", "shear")
    page.wait_for_selector("#result svg.stress.shear", timeout=15000)
    assert page.locator("#result svg.stress path[fill^='#']").count() > 4
    assert "MPa" in page.locator("#result svg.stress").text_content()
    assert page.locator("#result .outside").count()  # the shading stays
    page.fill("#stress_at", "1.5 m")
    page.press("#stress_at", "Tab")
    page.wait_for_selector("#result figcaption >> text=/1500.mm from the left end/", timeout=15000)
    page.select_option("#stress", "bending")
    page.wait_for_selector("#result svg.stress.bending", timeout=15000)
    assert "compression" in page.locator("#result svg.stress").text_content()
