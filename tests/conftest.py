"""Settings of the whole suite, and the one browser that every test in a browser shares."""

from __future__ import annotations

import os
import shutil
from collections.abc import Iterator
from typing import Any

import pytest
from hypothesis import settings

CHROMIUM = shutil.which("chromium") or shutil.which("chromium-browser")
ARGUMENTS = ["--no-sandbox", "--disable-gpu", "--disable-background-networking", "--no-first-run"]

settings.register_profile("ci", derandomize=True)  # where a change is judged, the examples are the same on every run
if os.environ.get("CI"):
    settings.load_profile("ci")


def pytest_collection_modifyitems(items: list[pytest.Item]) -> None:
    """Mark what needs a browser, and run it last: the browser's event loop stays open until the end."""
    driven = [item for item in items if "browser" in getattr(item, "fixturenames", ())]
    for item in driven:
        item.add_marker(pytest.mark.browser)
    items[:] = [item for item in items if item not in set(driven)] + driven


@pytest.fixture(scope="session")
def browser() -> Iterator[Any]:
    """Debian's Chromium without a window. One for the whole suite: two in one thread cannot be started."""
    if CHROMIUM is None:
        if os.environ.get("CI"):
            pytest.fail("there is no chromium on this machine, and in CI the browser tests must run")
        pytest.skip("there is no chromium on this machine")
    api = pytest.importorskip("playwright.sync_api", reason="playwright is not installed")
    with api.sync_playwright() as started:
        made = started.chromium.launch(executable_path=CHROMIUM, args=ARGUMENTS)
        yield made
        made.close()
