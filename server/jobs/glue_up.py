"""From the saved check of a member to the start of its glue-up: the areas come over, the adhesive's record too."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from server import checks, documents, library
from server.checks.glue_up_areas import pressed_by_fasteners
from server.errors import DocumentError, Fault
from server.jobs.revisions import SavedRevision
from server.storage import Session

ADHESIVE = "glue"


def may_be_glued(saved: SavedRevision) -> bool:
    """Whether a saved check is of a member with a bonded joint."""
    section = saved.document.get("section")
    joints = section.get("joints") if isinstance(section, Mapping) else None
    listed = joints if saved.result["kind"] == "member" and isinstance(joints, list) else []
    return any(isinstance(joint, Mapping) and joint.get("adhesive") for joint in listed)


def glue_up_of(session: Session, saved: SavedRevision) -> dict[str, Any]:
    """Return the document of a glue-up with the areas of a saved check, the rest of it to be filled in.

    Raises
    ------
    DocumentError
        If the check is not of a member with bonded joints, or its records are not in the library any more.
    """
    if not may_be_glued(saved):
        raise DocumentError([Fault("", "Only a member with a bonded joint is glued up; this check has none.")])
    start = {"format": "bondwright/1", "kind": "glue-up", "adhesive": {}}
    document = documents.read({**start, "check": saved.document})
    assert isinstance(document, documents.GlueUpDocument)
    found: Mapping[str, Any] = checks.run(library.resolve(session, document), working=False)
    used = (saved.result.get("values_used") or {}).get("adhesives") or {}
    glued = {str(joint.get("adhesive")) for joint in saved.document["section"]["joints"] if joint.get("adhesive")}
    return {
        **start,
        "title": f"Glue-up of {saved.mark}",
        "display": saved.heading["display"],
        "areas": [
            {"name": _named(each, len(glued) > 1), "width": each["width"], "length": each["length"]}
            for each in found["bonds"]
        ],
        "areas_from": f"{saved.mark} revision {saved.revision}",
        "pressed_by": "fasteners" if pressed_by_fasteners(document) else "clamps",
        **_record([used[name] for name in glued if name in used]),
    }


def _named(bond: Mapping[str, Any], several: bool) -> str:
    return f"{bond['id']} ({bond['adhesive']})" if several else str(bond["id"])


def _record(entries: list[Mapping[str, Any]]) -> dict[str, Any]:
    """The one record that is spread; none where values were typed, or joints have several."""
    keys = {str(entry.get("record") or "") for entry in entries}
    key = keys.pop() if len(keys) == 1 else ""
    return {"adhesives": {ADHESIVE: {"record": key}}} if key else {}
