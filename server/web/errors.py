"""What goes wrong, said in words: on our own page, or as JSON under /api. Never a traceback."""

from __future__ import annotations

import logging
import secrets
from collections.abc import Sequence
from http import HTTPStatus

from fastapi import FastAPI, Request
from fastapi.exceptions import RequestValidationError
from fastapi.responses import JSONResponse, Response
from starlette.exceptions import HTTPException

from server.errors import DocumentError, Fault, InputError, JointError
from server.library import NotFoundError
from server.people import BusyError, NoPersonError
from server.storage import StorageError
from server.web.headers import HEADERS
from server.web.pages import page

log = logging.getLogger("bondwright")

_WORDS: dict[int, tuple[str, str]] = {
    400: ("That form could not be read", "It may have too many boxes or arrived in part. Go back and send it again."),
    401: (
        "Sign in first",
        "Sign in, or send a personal token as “Authorization: Bearer ...”; you make one on your page.",
    ),
    403: (
        "This request was refused",
        "It did not come from one of this program's own pages. Open the page again and send it from there.",
    ),
    404: (
        "There is nothing at this address",
        "The link may be old, or part of it may be missing. Start again from the jobs.",
    ),
    405: ("This address does not take that kind of request", "Open the page with its form and use its buttons."),
    413: (
        "That was too much at once",
        "Leave out what is not needed, or split it into smaller parts, and send it again.",
    ),
    421: ("This program does not answer to that name", "Use the address that was printed when it was started."),
    503: ("The record book cannot be used now", "Nothing was saved. Try again in a minute."),
    422: ("Part of this address or form cannot be used", "Go back, look at what was typed, and send it again."),
}


def install(app: FastAPI) -> None:
    """Give ``app`` its handlers."""
    app.add_exception_handler(JointError, _explained)
    app.add_exception_handler(HTTPException, _refused)
    app.add_exception_handler(RequestValidationError, _bad_address)
    app.add_exception_handler(Exception, _unexpected)


def refusal(request: Request, status: int, reason: str = "", faults: Sequence[Fault] = ()) -> Response:
    """Answer with ``status`` and say why; ``reason`` replaces the usual sentence."""
    heading, usual = _WORDS.get(status, (HTTPStatus(status).phrase, "Go back and try again."))
    if request.url.path.startswith("/api/") or request.url.path == "/openapi.json":
        told = [{"path": fault.path, "message": fault.message} for fault in faults]
        told = told or [{"path": "", "message": reason or f"{heading}. {usual}"}]
        return JSONResponse({"faults": told}, status_code=status)
    return page(request, "error.html", status=status, heading=heading, lines=[reason or usual], faults=faults)


def faults_of(error: JointError) -> tuple[Fault, ...]:
    """Return every fault an expected failure carries, each with its field where it has one."""
    if isinstance(error, DocumentError):
        return error.faults
    return (Fault(error.field if isinstance(error, InputError) else "", str(error)),)


async def _explained(request: Request, error: Exception) -> Response:
    assert isinstance(error, JointError)
    reason = "Some entries cannot be used:" if isinstance(error, DocumentError) else str(error)
    return refusal(request, _status(error), reason, faults_of(error))


def _status(error: JointError) -> int:
    if isinstance(error, NotFoundError | NoPersonError):
        return 404
    return 503 if isinstance(error, StorageError | BusyError) else 422


async def _refused(request: Request, error: Exception) -> Response:
    assert isinstance(error, HTTPException)
    response = refusal(request, error.status_code)
    for name, value in (error.headers or {}).items():
        response.headers[name] = value
    return response


async def _bad_address(request: Request, error: Exception) -> Response:
    """Answer an address whose parts are of the wrong kind (letters where a number belongs): nothing is there."""
    return refusal(request, 404)


async def _unexpected(request: Request, error: Exception) -> Response:
    """Log a fault of ours under a mark that the reader can pass on.

    This answer is made outside the layer that adds the protective headers, so it brings its own.
    """
    mark = secrets.token_hex(4)
    log.error("unexpected failure %s at %s %s", mark, request.method, request.url.path, exc_info=error)
    heading = "Something went wrong in the program"
    line = f"This is a fault of the program, not of what was typed. Nothing was saved. Its mark in the log is {mark}."
    if request.url.path.startswith("/api/"):
        return JSONResponse(
            {"faults": [{"path": "", "message": f"{heading}. {line}"}]}, status_code=500, headers=HEADERS
        )
    return page(request, "error.html", status=500, headers=HEADERS, heading=heading, lines=[line], faults=())
