"""The application: settings in, FastAPI out."""

from __future__ import annotations

from collections.abc import AsyncIterator
from contextlib import asynccontextmanager

from anyio import to_thread
from fastapi import Depends, FastAPI
from fastapi.responses import RedirectResponse
from fastapi.staticfiles import StaticFiles
from fastapi.telemetry import TelemetryConfig

from server import ENGINE
from server.paths import data_folder
from server.settings import Settings
from server.web import (
    acts,
    api,
    errors,
    evidence_page,
    exchange,
    gate,
    issue,
    jobs,
    library,
    member,
    one_page,
    people,
    rules,
    saved,
    security,
    sets,
    shop,
)
from server.web.records import Records

_NO_TELEMETRY: TelemetryConfig = {
    "tracing": False,
    "metrics": False,
    "logs": False,
    "operation_spans": False,
    "auto_configure": False,
}


def create_app(settings: Settings) -> FastAPI:
    """Build the application that ``settings`` describes.

    The record book is opened when the server starts, or by the first request where nothing starts it (in tests).
    """
    records = Records(settings.records)

    @asynccontextmanager
    async def lifespan(_: FastAPI) -> AsyncIterator[None]:
        await to_thread.run_sync(lambda: records.engine)
        yield
        records.close()

    app = FastAPI(
        title="Bondwright",
        summary="Checks the joints of built-up members from the shop's own tested values.",
        version=ENGINE.split()[-1],
        telemetry=_NO_TELEMETRY,
        docs_url=None,
        redoc_url=None,
        openapi_url=None,
        lifespan=lifespan,
        dependencies=[Depends(gate.admit)],
    )
    app.state.settings, app.state.records = settings, records
    errors.install(app)
    gate.install(app)
    app.add_middleware(gate.Identify, settings=settings, records=records)
    app.add_middleware(security.Guard, settings=settings)
    app.mount("/static", StaticFiles(directory=data_folder("static")), name="static")
    app.add_api_route("/", _start, name="start", include_in_schema=False)
    for room in (
        jobs,
        sets,
        rules,
        acts,
        evidence_page,
        exchange,
        issue,
        library,
        shop,
        member,
        one_page,
        saved,
        people,
        api,
    ):
        app.include_router(room.router)
    api.describe(app)
    return app


def _start() -> RedirectResponse:
    """The first page is the list of jobs."""
    return RedirectResponse("/jobs", status_code=303)
