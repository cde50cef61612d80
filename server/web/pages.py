"""Pages from templates: the one environment, its filters, and links that follow the routes' names."""

from __future__ import annotations

import hashlib
from collections.abc import Callable, Container, Mapping
from functools import cache, partial
from pathlib import Path
from typing import Any

from fastapi import Request
from fastapi.responses import HTMLResponse, RedirectResponse
from jinja2 import Environment, FileSystemLoader, StrictUndefined

from server import ENGINE, units
from server.errors import DocumentError
from server.paths import data_folder
from server.web.access import may
from server.web.who import current

_NAVIGATION = (
    ("list_jobs", "Jobs", ("/jobs", "/checks")),
    ("list_records", "Library", "/library"),
    ("edit_shop", "Shop heading", "/shop"),
    ("list_people", "People", "/people"),
)


class Boxes(dict[str, str]):
    """What the boxes of a form hold, or the messages beside them: blank where there is nothing."""

    def __missing__(self, name: str) -> str:
        return ""


def beside(error: DocumentError, names: Container[str]) -> dict[str, str]:
    """Return an error's messages by box; one whose field is not among ``names`` stands under the empty name."""
    found: dict[str, str] = {}
    for fault in error.faults:
        found.setdefault(*((fault.path, fault.message) if fault.path in names else ("", str(fault))))
    return found


def page(
    request: Request, template: str, *, status: int = 200, headers: Mapping[str, str] | None = None, **context: object
) -> HTMLResponse:
    """Render ``template`` with a short, named ``context``."""
    person = current(request)
    linked = {
        "url_for": partial(path_for, request),
        "nav": partial(_navigation, request),
        "person": person,
        "may": partial(may, person),
        **context,
    }
    text = environment().get_template(template).render(linked)
    return HTMLResponse(text, status_code=status, headers=dict(headers) if headers else None)


def path_for(request: Request, name: str, /, **parameters: Any) -> str:
    """Return the path of the route called ``name``; links stay within the address the reader came by."""
    return str(request.app.url_path_for(name, **parameters))


def see(request: Request, name: str, /, **parameters: Any) -> RedirectResponse:
    """Send the reader on after a change (303), so that reloading the next page repeats nothing."""
    return RedirectResponse(path_for(request, name, **parameters), status_code=303)


@cache
def environment() -> Environment:
    """Return the templates' environment: every value escaped, a name that was not passed is an error."""
    made = Environment(
        loader=FileSystemLoader(data_folder("templates")),
        autoescape=True,
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        auto_reload=False,
        cache_size=400,
    )
    made.filters.update(quantity=units.show, number=number, percent=percent, day=day, moment=moment)
    made.globals.update(static=static_links(data_folder("static")), engine=ENGINE)
    return made


def static_links(folder: Path) -> Callable[[str], str]:
    """Return ``static(name)``: the file's address with a mark of its content, so that it may be kept for ever."""
    marks = {
        file.relative_to(folder).as_posix(): hashlib.sha256(file.read_bytes()).hexdigest()[:12]
        for file in sorted(folder.rglob("*"))
        if file.is_file()
    }

    def static(name: str) -> str:
        return f"/static/{name}?v={marks[name]}"

    return static


def number(value: float, decimals: int | None = None) -> str:
    """Return a number for people: four significant digits, or so many decimals; a true minus sign."""
    text = units.digits(value) if decimals is None else f"{value:.{decimals}f}"
    return text.replace("-", "−")


def percent(value: float, decimals: int = 0) -> str:
    """Return a share as a percentage: 0.42 is 42 %."""
    return f"{number(100 * value, decimals)} %"


def day(at: str) -> str:
    """Return the day of a stored time, as 2026-12-01: the one way of writing a date that both trades read alike."""
    return at[:10]


def moment(at: str) -> str:
    """Return a stored time to the minute.

    >>> moment("2026-12-01T09:30:00Z")
    '2026-12-01 09:30 UTC'
    """
    return f"{at[:10]} {at[11:16]} UTC"


def _navigation(request: Request) -> list[tuple[str, str, bool]]:
    return [
        (name, text, request.url.path.startswith(prefix))
        for name, text, prefix in _NAVIGATION
        if may(current(request), name)
    ]
