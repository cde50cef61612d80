"""What every request passes: size, host, origin; and what every answer carries. Plain ASGI, no buffering."""

from __future__ import annotations

from urllib.parse import urlsplit

from fastapi import Request
from starlette.datastructures import Headers, MutableHeaders
from starlette.exceptions import HTTPException
from starlette.types import ASGIApp, Message, Receive, Scope, Send

from server.settings import Settings
from server.web.errors import refusal
from server.web.headers import protect

_READING = frozenset({"GET", "HEAD", "OPTIONS"})
_DEFAULT_PORTS = {"http": 80, "https": 443}


class Guard:
    """Refuse what does not come from our own pages, and give every answer its protective headers."""

    def __init__(self, app: ASGIApp, settings: Settings) -> None:
        self.app, self.settings = app, settings

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        if scope["type"] != "http":
            await self.app(scope, receive, send)
            return

        async def protected(message: Message) -> None:
            if message["type"] == "http.response.start":
                protect(MutableHeaders(raw=message["headers"]), scope)
            await send(message)

        headers = Headers(scope=scope)
        reason = self._reason(scope, headers)
        if reason is not None:
            await refusal(Request(scope), *reason)(scope, receive, protected)
            return
        await self.app(scope, _Measured(receive, self.settings.max_body), protected)

    def _reason(self, scope: Scope, headers: Headers) -> tuple[int, str] | None:
        if host_name(headers.get("host", "")) not in self.settings.hosts:
            return 421, ""
        if scope["method"] in _READING:
            return None
        # No page of somebody else's can send a token: a browser asks first, and is not answered.
        by_token = self.settings.sign_in and headers.get("authorization", "").lower().startswith("bearer ")
        if not by_token and not from_our_pages(headers, scope["scheme"]):
            return 403, ""
        length = headers.get("content-length", "0")
        if length.isascii() and length.isdigit() and int(length[:20]) > self.settings.max_body:
            return 413, too_much(self.settings.max_body)
        return None


class _Measured:
    """A request body that stops at the limit, also when its length was not announced."""

    def __init__(self, receive: Receive, limit: int) -> None:
        self.receive, self.limit, self.seen = receive, limit, 0

    async def __call__(self) -> Message:
        message = await self.receive()
        if message["type"] == "http.request":
            self.seen += len(message.get("body", b""))
            if self.seen > self.limit:
                raise HTTPException(413)
        return message


def host_name(host: str) -> str:
    """Return the name in a Host header without its port: ``[::1]:8300`` is ``::1``; an unusable one is empty."""
    try:
        return (urlsplit(f"//{host}").hostname or "").rstrip(".")
    except ValueError:
        return ""


def from_our_pages(headers: Headers, scheme: str) -> bool:
    """Return whether a changing request may come from one of our own pages.

    Browsers say so in Sec-Fetch-Site; over plain HTTP on a network name they leave it out and send Origin. A client
    that sends neither is not a browser, so nobody else's page can have sent it.
    """
    site = headers.get("sec-fetch-site")
    if site is not None:
        return site in ("same-origin", "none")
    origin = headers.get("origin")
    return origin is None or _address(origin) == _address(f"{scheme}://{headers.get('host', '')}")


def too_much(limit: int) -> str:
    """Say how large a request may be."""
    return (
        f"That was more than {limit / 1024 / 1024:g} megabytes, the most this program takes at once. "
        "Leave out what is not needed, or split it into smaller parts, and send it again."
    )


def _address(origin: str) -> tuple[str, str, int] | None:
    try:
        parts = urlsplit(origin)
        return parts.scheme, parts.hostname or "", parts.port or _DEFAULT_PORTS[parts.scheme]
    except (ValueError, KeyError):
        return None
