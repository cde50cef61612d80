"""Makes the files in tests/records that this version contributes: ``python -m tests.jobs.make_records``.

Run once for a version, before its release; a file that is there is never written again.
"""

from __future__ import annotations

import json
import tempfile
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from server import ENGINE, jobs, library, storage
from server.storage import Session
from tests.library.samples import put

FOLDER = Path(__file__).parents[1] / "records"
NOW = datetime(2026, 12, 1, 12, tzinfo=UTC)
INVENTED = "invented for a test; nobody measured this"

BOX_BEAM: dict[str, Any] = {
    "format": "bondwright/1",
    "kind": "member",
    "title": "Roof box beam",
    "note": "Invented. Flanges 80 × 60, webs 12 mm.",
    "basis": {"method": "limit-state", "partial_factor": {"adhesive": 1.5, "fastener": 1.3, "material": 1.3}},
    "materials": {
        "softwood": {"record": "M-001"},
        "ply": {
            "E": "7.5 GPa",
            "G": "620 MPa",
            "density": 600,
            "kind": "plywood",
            "layered": True,
            "strengths": {"bending": 28, "shear": 8, "rolling_shear": 1.6},
            "source": INVENTED,
        },
    },
    "adhesives": {"glue": {"record": "B-001"}},
    "section": {
        "pieces": {
            "bottom": {"shape": "rectangle", "width": 80, "depth": 60, "at": [0, 0], "material": "softwood"},
            "top": {"shape": "rectangle", "width": 80, "depth": 60, "at": [0, 340], "material": "softwood"},
            "web L": {"shape": "rectangle", "width": 12, "depth": 400, "at": [-12, 0], "material": "ply"},
            "web R": {"shape": "rectangle", "width": 12, "depth": 400, "at": [80, 0], "material": "ply"},
        },
        "joints": [
            {"between": [flange, web], "adhesive": "glue", "coverage": 0.9}
            for flange in ("bottom", "top")
            for web in ("web L", "web R")
        ],
    },
    "member": {
        "length": "6 m",
        "supports": [{"at": 0, "kind": "pin"}, {"at": "6 m", "kind": "pin"}],
        "deflection_limit": 300,
    },
    "loads": {
        "own weight": [{"kind": "self-weight"}],
        "snow": [{"kind": "line", "from": 0, "to": "6 m", "value": "2.2 kN/m"}],
        "hoist": [{"kind": "point", "at": "4 m", "value": "1.5 kN"}],
    },
    "combinations": {
        "strength": {
            "factors": {"own weight": 1.35, "snow": 1.5, "hoist": 1.05},
            "duration": "short-term",
            "for": "strength",
        },
        "sag": {"factors": {"own weight": 1, "snow": 1, "hoist": 1}, "for": "deflection"},
    },
}

DECK: dict[str, Any] = {
    "format": "bondwright/1",
    "kind": "member",
    "title": "Stage deck rib",
    "note": "Invented. Glued and screwed; the glue has no value yet.",
    "display": "US",
    "basis": {"method": "allowable", "safety_factor": 2.5},
    "materials": {
        "fir": {"E": "1.4e6 psi", "G": "88000 psi", "strengths": {"bending": "2200 psi", "shear": "380 psi"}},
    },
    "adhesives": {"glue": {"note": INVENTED}},
    "fasteners": {"screw": {"record": "F-001", "revision": 1}},
    "section": {
        "pieces": {
            "rib": {"shape": "rectangle", "width": "1-1/2 in", "depth": "5-1/2 in", "at": [0, 0], "material": "fir"},
            "cap": {
                "shape": "rectangle",
                "width": "3-1/2 in",
                "depth": "1-1/2 in",
                "at": ["-1 in", "5-1/2 in"],
                "material": "fir",
            },
        },
        "joints": [
            {"between": ["rib", "cap"], "adhesive": "glue", "fastener": "screw", "spacing": "6 in", "role": "press"}
        ],
    },
    "member": {
        "length": "10 ft",
        "supports": [{"at": 0, "kind": "pin"}, {"at": "8 ft", "kind": "pin"}],
        "deflection_limit": "L/240",
    },
    "loads": {"crowd": [{"kind": "area", "from": 0, "to": "10 ft", "value": "100 psf", "width": "16 in"}]},
}


def main() -> None:
    """Save each check in a book of its own and write its export."""
    version = ENGINE.split()[-1]
    for name, make in (("box_beam_a4", _box_beam), ("stage_deck_letter", _deck)):
        target = FOLDER / f"{version}_{name}.json"
        if target.exists():
            continue
        with tempfile.TemporaryDirectory() as folder:
            engine = storage.engine(Path(folder) / "book.db")
            storage.migrate(engine)
            with storage.reading(engine) as session:
                record = jobs.export_revision(session, make(session))
            engine.dispose()
        target.write_text(json.dumps(record, ensure_ascii=False, indent=1) + "\n", encoding="utf-8")


def _box_beam(session: Session) -> int:
    told = {"source": INVENTED, "status": "approved", "now": NOW}
    put(
        session,
        group="materials",
        name="Softwood, class as marked",
        values={
            "E": "11 GPa",
            "G": 690,
            "density": 420,
            "kind": "timber",
            "creep": 0.6,
            "strengths": {"bending": 24, "tension": 14, "compression": 21, "shear": 4},
            "duration_factors": {"short-term": 0.9},
        },
        **told,  # type: ignore[arg-type]
    )
    put(
        session,
        group="bonds",
        name="Melamine on softwood and ply",
        values={"shear_strength": "3.1 MPa", "thickness": "0.3 mm", "duration_factors": {"short-term": 0.9}},
        details={"product": "Invented melamine", "surface_a_material": "softwood", "surface_b_material": "plywood"},
        **told,  # type: ignore[arg-type]
    )
    jobs.set_shop(session, name="Invented Joinery", address="1 Mill Lane\nNowhere", now=NOW)
    job = jobs.create(
        session, number="2026-014", title="Barn roof", customer="Invented Barns", drawing="D-4 B", now=NOW
    )
    return jobs.save(session, job_id=job.id, raw=BOX_BEAM, mark="RB1", made_by="Shop office", now=NOW).id


def _deck(session: Session) -> int:
    library.add(
        session,
        group="fasteners",
        name="Deck screw",
        values={"shear_resistance": "160 lbf", "diameter": "0.19 in"},
        source=INVENTED,
        status="provisional",
        now=NOW,
    )
    jobs.set_shop(session, name="Invented Staging", paper="Letter", display="US", now=NOW)
    job = jobs.create(session, title="Touring stage", drawing="S-2", now=NOW)
    return jobs.save(session, job_id=job.id, raw=DECK, mark="R3", made_by="Shop office", now=NOW).id


if __name__ == "__main__":
    main()
