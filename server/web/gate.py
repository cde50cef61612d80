"""The gate: who sent a request (by cookie or token), and whether the table lets them in."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from urllib.parse import urlencode, urlsplit

from anyio import to_thread
from fastapi import FastAPI, Request
from fastapi.responses import RedirectResponse, Response
from starlette.datastructures import Headers
from starlette.types import ASGIApp, Receive, Scope, Send

from server import people, storage
from server.errors import JointError
from server.people import Person, Visit
from server.settings import Settings
from server.web import access
from server.web.errors import refusal
from server.web.pages import page, path_for
from server.web.records import Records
from server.web.who import current

_BEARER = "bearer "
_READING = ("GET", "HEAD")
_LONGEST_WAY_BACK = 2000


class SignInNeeded(Exception):  # noqa: N818 -- not a failure: an answer
    """Nobody is signed in, and the route is not open to everybody."""


class RoleNeeded(JointError):  # noqa: N818
    """The person has none of the roles that the route asks for."""


class Identify:
    """Note in every request who sent it; whether they may is asked when the route is known."""

    def __init__(self, app: ASGIApp, settings: Settings, records: Records) -> None:
        self.app, self.settings, self.records = app, settings, records

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        if scope["type"] == "http":
            state = scope.setdefault("state", {})
            try:
                visit = await self._visit(scope)
            except JointError as error:  # the record book cannot be read: nobody is let in on suspicion
                await refusal(Request(scope), 503, str(error))(scope, receive, send)
                return
            state["person"] = None if visit is None else visit.person
            state["session_id"] = 0 if visit is None else visit.session_id
        await self.app(scope, receive, send)

    async def _visit(self, scope: Scope) -> Visit | None:
        if not self.settings.sign_in:
            return Visit(people.THIS_MACHINE)
        if scope["path"].startswith("/static/"):
            return None
        request = Request(scope)
        token = bearer(request.headers)
        if token is not None:  # a program: a cookie that came along does not count
            return await self._known(people.by_token, token) if for_programs(scope["path"]) else None
        session = request.cookies.get(cookie_name(scope))
        return await self._known(people.by_session, session) if session else None

    async def _known(self, look: Callable[[storage.Session, str], Visit | None], secret: str) -> Visit | None:
        def ask() -> Visit | None:
            with storage.reading(self.records.engine) as session:
                return look(session, secret)

        return await to_thread.run_sync(ask)


async def admit(request: Request) -> None:
    """Let the request pass if the table says so: the one place where roles are asked for."""
    name, person = request.scope["route"].name, current(request)
    if access.may(person, name):
        return
    if person is None:
        raise SignInNeeded
    raise RoleNeeded(_words(person, access.RULES.get(name, "")))


def install(app: FastAPI) -> None:
    """Give ``app`` the answers to those who may not pass."""
    app.add_exception_handler(SignInNeeded, _signed_out)
    app.add_exception_handler(RoleNeeded, _not_allowed)


def bearer(headers: Headers) -> str | None:
    """Return the token of a program; None where the request brings none."""
    given = headers.get("authorization", "")
    return given[len(_BEARER) :].strip() if given[: len(_BEARER)].lower() == _BEARER else None


def for_programs(path: str) -> bool:
    """Return whether an address belongs to the API; tokens open nothing else."""
    return path.startswith("/api/") or path == "/openapi.json"


def cookie_name(scope: Mapping[str, object]) -> str:
    """Return the session cookie's name; cookies do not tell ports apart, so the name does."""
    server = scope.get("server")
    port = server[1] if isinstance(server, tuple | list) else 0
    return ("__Host-" if scope.get("scheme") == "https" else "") + f"bondwright-{port}"


def way_back(text: str) -> str:
    """Return an address of this program to go on to, '' for anything that could lead elsewhere.

    >>> way_back("/jobs/3?q=a"), way_back("//evil.example"), way_back("/\\\\evil.example"), way_back("https://evil.example")
    ('/jobs/3?q=a', '', '', '')
    """
    plain = text.isascii() and text.isprintable() and not any(sign in text for sign in "\\ #")
    if not plain or len(text) > _LONGEST_WAY_BACK or not text.startswith("/") or text.startswith("//"):
        return ""
    return "" if text.startswith(("/sign-in", "/sign-out", "/first-person")) else text


async def _signed_out(request: Request, error: Exception) -> Response:
    if for_programs(request.url.path):
        answer = refusal(request, 401)
        answer.headers["WWW-Authenticate"] = "Bearer"
        return answer
    lost = request.method not in _READING
    back = _page_before(request) if lost else request.url.path + (f"?{request.url.query}" if request.url.query else "")
    asked = {"back": way_back(back)} if way_back(back) else {}
    if "HX-Request" in request.headers:
        # Part of a page was asked for: say so at its head and leave what was typed where it is.
        headers = {"HX-Retarget": "#signed-out", "HX-Reswap": "innerHTML", "HX-Reselect": "#signed-out-note"}
        return page(request, "people/_signed_out.html", status=401, headers=headers)
    asked |= {"lost": "yes"} if lost else {}
    return RedirectResponse(path_for(request, "sign_in") + (f"?{urlencode(asked)}" if asked else ""), status_code=303)


async def _not_allowed(request: Request, error: Exception) -> Response:
    return refusal(request, 403, str(error))


def _page_before(request: Request) -> str:
    """Return the page a form was sent from, where it is one of ours."""
    try:
        before = urlsplit(request.headers.get("referer", ""))
    except ValueError:
        return ""
    if before.netloc.lower() != request.headers.get("host", "").lower():
        return ""
    return before.path + (f"?{before.query}" if before.query else "")


def _words(person: Person, rule: str) -> str:
    roles = [role for role in people.ROLES if person.may(role)]
    needed = f"This is for somebody who {rule}" if rule else "Nobody was given the right to do this yet"
    return f"{needed}; {person.name} {', '.join(roles)}. Whoever keeps the book can give that role, under People."
