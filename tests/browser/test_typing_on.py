"""Typing on while new boxes are on their way: nothing typed is lost, and no late answer touches the new boxes."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from tests.browser.test_journey import Form, start_job


def hold(page: Any, pattern: str, most: int = 9) -> list[Any]:
    """Keep what is asked of an address back until the test lets it go; what comes after ``most`` passes."""
    held: list[Any] = []
    page.route(pattern, lambda route: held.append(route) if len(held) < most else route.continue_())
    return held


def wait_for(page: Any, held: list[Any], count: int) -> None:
    for _ in range(100):
        if len(held) >= count:
            return
        page.wait_for_timeout(20)
    raise AssertionError(f"{len(held)} of {count} were asked for")


def test_typing_on_while_boxes_come_anew_loses_nothing(open_page: Callable[..., Any], address: str) -> None:
    page = open_page(address)
    start_job(page, Form(page), "typing on")
    page.click("text=New check")
    page.fill("[name=mark]", "T1")

    held = hold(page, "**/checks/form*")
    page.click("button.layout[value=tee]")
    wait_for(page, held, 1)
    page.click("[name=span]")
    page.keyboard.type("4.25")
    page.keyboard.press("ArrowLeft")
    held[0].continue_()
    page.wait_for_selector("button.layout[value=tee][aria-pressed=true]")
    page.keyboard.type("6")  # the cursor stands where it stood
    assert page.input_value("[name=span]") == "4.265"
    assert page.input_value("[name=mark]") == "T1"

    page.click("#fold-loads > summary")
    page.click("#add-loads")
    wait_for(page, held, 2)
    page.click("#add-loads")  # waits for the first, instead of crossing it
    held[1].continue_()
    wait_for(page, held, 3)
    held[2].continue_()
    page.wait_for_selector("[name^='loads[1].']", state="attached")
    assert page.locator("#rows-loads fieldset.row").count() == 2

    # An answer about the old boxes that comes late is called off.
    page.unroute("**/checks/form*")
    failed: list[str] = []
    page.on("requestfailed", lambda request: failed.append(request.url))
    held = hold(page, "**/checks/preview", most=1)
    page.fill("[name=load]", "2 apples")
    wait_for(page, held, 1)
    page.click("button.layout[value=i]")
    page.wait_for_selector("button.layout[value=i][aria-pressed=true]")
    page.wait_for_selector("#m-load:has-text('apples')")
    assert len(failed) == 1
    page.fill("[name=load]", "2")
    page.wait_for_selector("#result svg")
    assert page.inner_text("#m-load") == ""
