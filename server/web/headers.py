"""What every answer carries."""

from __future__ import annotations

from starlette.datastructures import MutableHeaders
from starlette.types import Scope

HEADERS = {
    "Content-Security-Policy": (
        "default-src 'self'; base-uri 'none'; form-action 'self'; frame-ancestors 'none'; object-src 'none'"
    ),
    "X-Content-Type-Options": "nosniff",
    # Not "no-referrer": that makes browsers send "Origin: null" with our own forms.
    "Referrer-Policy": "same-origin",
    "Cross-Origin-Opener-Policy": "same-origin",
    "Cross-Origin-Resource-Policy": "same-origin",
    "Permissions-Policy": "camera=(), microphone=(), geolocation=(), payment=()",
}
_FOR_EVER = "public, max-age=31536000, immutable"
_A_WEEK = "public, max-age=604800"


def protect(headers: MutableHeaders, scope: Scope) -> None:
    """Add the protective headers, and say how long the answer may be kept."""
    for name, value in HEADERS.items():
        headers.setdefault(name, value)
    if scope["path"].startswith("/static/"):
        # The query carries a mark of the content, so a changed file has another address; fonts are named in the
        # stylesheet without one.
        headers["Cache-Control"] = _FOR_EVER if scope["query_string"].startswith(b"v=") else _A_WEEK
    else:
        headers.setdefault("Cache-Control", "no-cache")
