"""axe finds nothing on any screen, at 1280 and at 800 px, with every fold open."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest

from tests.browser.conftest import violations

SCREENS = (
    "/jobs", "/jobs?q=nothing+at+all", "/jobs/new", "/jobs/1", "/jobs/1/heading",
    "/jobs/1/checks/new?layout=box", "/jobs/1/checks/new?layout=stack", "/jobs/1/checks/new?layout=tee",
    "/jobs/1/checks/new?layout=i", "/jobs/1/checks/new?layout=empty", "/checks/1/edit", "/checks/2/edit",
    "/checks/4/edit", "/jobs/1/checks/glue-up/new?check=1", "/checks/8",
    "/checks/1", "/checks/2/revisions/1", "/checks/4", "/checks/2/compare/1/2",
    "/library", "/library?group=bonds", "/library?group=fasteners", "/library?group=materials&q=ply",
    "/library/new/bonds", "/library/new/fasteners", "/library/new/materials",
    "/library/new/sets", "/library/new/values", "/library/new/products", "/library/new/preparations",
    "/library/new/cures", "/library/new/lots", "/library/T-001", "/library/T-001/edit?exclude=2", "/library/V-014",
    "/library/V-014/edit", "/library/V-016", "/library/V-017", "/library/form/exchange", "/library/form/rules",
    "/library/B-001", "/library/B-001/edit", "/library/F-001", "/library/M-002", "/shop", "/jobs/999", "/nowhere",
)  # fmt: skip


@pytest.mark.parametrize("width", [1280, 800])
def test_axe_finds_nothing(open_page: Callable[..., Any], demo_address: str, width: int) -> None:
    page = open_page(demo_address, width=width)
    found = {}
    for path in SCREENS:
        page.goto(path)
        if "checks" in path:
            page.wait_for_timeout(150)
        page.evaluate("document.querySelectorAll('details').forEach(each => { each.open = true; })")
        page.wait_for_timeout(50)
        faults = violations(page)
        if faults:
            found[path] = faults
        assert page.evaluate("document.documentElement.scrollWidth") <= width, path
    assert found == {}


def test_axe_finds_nothing_on_refused_forms(open_page: Callable[..., Any], demo_address: str) -> None:
    page = open_page(demo_address, width=800)
    page.goto("/jobs/new")
    page.click("main form button[type=submit]")
    assert violations(page) == []
    page.goto("/library/new/bonds")
    page.fill("[name='shear_strength']", "strong")
    page.click("main form button[type=submit]")
    assert violations(page) == []
    page.goto("/jobs/1/checks/new?layout=box")
    page.fill("[name=span]", "six")
    page.fill("[name=load]", "4.2")
    page.click("[name=save]")
    page.wait_for_selector("#refused")
    assert violations(page) == []
