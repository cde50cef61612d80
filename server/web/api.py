"""The same checks for programs: a document in, its result document out (contract.md)."""

from __future__ import annotations

import json
from collections.abc import Mapping
from functools import cache
from typing import Any

from fastapi import APIRouter, FastAPI
from fastapi.openapi.utils import get_openapi
from fastapi.responses import JSONResponse, Response

from server import checks, documents, library
from server.library.references import entry
from server.web.inputs import Body, DbSession, whole

router = APIRouter(prefix="/api", tags=["checks"])

_FAULTS = {
    "description": "The document or the address cannot be used; every fault with its field.",
    "content": {"application/json": {"schema": {"$ref": "#/components/schemas/Faults"}}},
}
_RESULT = {
    "description": "The result. Pass, fail and not proven are all answered with 200.",
    "content": {"application/json": {"schema": {"$ref": "#/components/schemas/Result"}}},
}
_BODY = {"required": True, "content": {"application/json": {"schema": {"$ref": "#/components/schemas/Document"}}}}


class PlainJson(JSONResponse):
    """JSON in ASCII, so that no text a document may hold can break the answer."""

    def render(self, content: object) -> bytes:
        """Return ``content`` as bytes; a number that is not finite is a fault of ours and must not get out."""
        return json.dumps(content, ensure_ascii=True, allow_nan=False, separators=(",", ":")).encode("ascii")


@router.post(
    "/checks/run",
    name="run_check",
    summary="Run one check document",
    responses={200: _RESULT, 413: _FAULTS, 422: _FAULTS},
    openapi_extra={"requestBody": _BODY},
)
def run_check(body: Body, session: DbSession) -> Response:
    """Check a document; references to the library are filled from this shop's records. Nothing is saved."""
    document = library.resolve(session, documents.read(body))
    return PlainJson(checks.run(document))


@router.get("/records", name="find_records", summary="Find library records", responses={422: _FAULTS})
def find_records(session: DbSession, q: str = "", group: str = "", status: str = "", limit: str = "50") -> Response:
    """Return the newest revision of every record that fits."""
    found = library.search(session, q, group=group or None, status=status or None, limit=min(whole(limit) or 50, 500))
    return PlainJson({"total": found.total, "records": [_record(record) for record in found.records]})


@router.get("/records/{key}", name="get_record", summary="One library record", responses={404: _FAULTS, 422: _FAULTS})
def get_record(session: DbSession, key: str, revision: str = "") -> Response:
    """Return one revision of a record, the newest without ``revision``."""
    return PlainJson(_record(library.get(session, key, whole(revision))))


def describe(app: FastAPI) -> None:
    """Let /openapi.json carry the schema of the documents themselves."""

    @cache
    def schema() -> dict[str, Any]:
        made = get_openapi(title=app.title, version=app.version, summary=app.summary, routes=app.routes)
        components = made.setdefault("components", {}).setdefault("schemas", {})
        components.update(_schemas())
        return made

    def openapi() -> Response:
        return PlainJson(schema())

    app.add_api_route("/openapi.json", openapi, name="openapi", include_in_schema=False)
    app.openapi = schema  # type: ignore[method-assign]  # FastAPI's own way of extending it


def _schemas() -> dict[str, Any]:
    """Return the schemas by name: one document for each kind of check, and their parts."""
    found: dict[str, Any] = {}
    kinds: dict[str, str] = {}
    for kind in documents.KINDS:
        name, parts = _hoisted(documents.schema(kind), found)
        found |= parts
        kinds[kind] = f"#/components/schemas/{name}"
    fault = {"type": "object", "properties": {"path": {"type": "string"}, "message": {"type": "string"}}}
    return {
        **found,
        "Document": {
            "oneOf": [{"$ref": at} for at in kinds.values()],
            "discriminator": {"propertyName": "kind", "mapping": kinds},
        },
        "Result": {
            "type": "object",
            "required": ["format", "kind", "verdict"],
            "properties": {
                "format": {"const": "bondwright/1"},
                "kind": {"enum": list(kinds)},
                "verdict": {"enum": ["pass", "fail", "not proven"]},
                "utilisation": {"type": ["number", "null"]},
                "governing": {"type": "string"},
            },
        },
        "Faults": {"type": "object", "properties": {"faults": {"type": "array", "items": fault}}},
    }


def _hoisted(document: dict[str, Any], known: Mapping[str, Any]) -> tuple[str, dict[str, Any]]:
    """A document's name, and its schema and parts by the names they get beside those already ``known``.

    A part keeps its own name unless another kind of check has a different part of that name.
    """
    title, parts = document["title"], document.pop("$defs", {})
    names = dict.fromkeys(parts, "")
    for part in names:
        taken = part in known and known[part] != _pointed(parts[part], {each: each for each in parts})
        names[part] = f"{title}.{part}" if taken else part
    return title, {names[part]: _pointed(schema, names) for part, schema in parts.items()} | {
        title: _pointed(document, names)
    }


def _pointed(schema: Any, names: Mapping[str, str]) -> Any:
    """The schema with its references led to where OpenAPI keeps schemas."""
    if isinstance(schema, list):
        return [_pointed(each, names) for each in schema]
    if isinstance(schema, dict):
        return {key: _pointed(value, names) for key, value in schema.items()}
    if isinstance(schema, str) and schema.startswith("#/$defs/"):
        return f"#/components/schemas/{names[schema.removeprefix('#/$defs/')]}"
    return schema


def _record(record: library.Record) -> dict[str, Any]:
    return {
        "key": record.key,
        "revision": record.revision,
        "group": record.group,
        "name": record.name,
        "status": record.status,
        "in_force": record.in_force,
        "entry": entry(record),
        "details": dict(record.details),
        "created_at": record.created_at,
    }
