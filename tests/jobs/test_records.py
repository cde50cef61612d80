"""Records saved by every version so far: they load, they fit their hashes, they print, and pages can draw them."""

from __future__ import annotations

import copy
import json
from pathlib import Path
from typing import Any

import pytest

from server import jobs, sheets
from server.jobs import RecordError
from server.jobs.saving import sheet_data
from server.storage import Session
from tests.jobs.samples import quick_sheet, save, start_job

FILES = sorted((Path(__file__).parents[1] / "records").glob("*.json"))
QUANTITIES = ("shear", "moment", "deflection", "deflection_long_term")


def load(file: Path) -> dict[str, Any]:
    record = json.loads(file.read_text(encoding="utf-8"))
    assert isinstance(record, dict)
    return record


def test_there_are_records() -> None:
    assert FILES


@pytest.mark.parametrize("file", FILES, ids=lambda file: file.stem)
def test_an_old_record_prints_its_kept_sheet(file: Path) -> None:
    assert jobs.print_record(load(file)).startswith(b"%PDF-")


@pytest.mark.parametrize("file", FILES, ids=lambda file: file.stem)
def test_an_old_result_can_still_be_drawn(file: Path) -> None:
    record = load(file)
    result, display = record["result"], record["heading"]["display"]
    drawings = [sheets.section_svg(result, display=display), sheets.loads_svg(result, display=display)]
    drawings += [sheets.diagram_svg(result, quantity, display=display) for quantity in QUANTITIES]
    drawings += [sheets.joint_svg(result, joint["id"], display=display) for joint in result["joints"]]
    assert all("<svg" in drawing for drawing in drawings)
    assert result["verdict"] in sheets.terminal(result).lower()
    assert sheets.given(record["document"], record["values_used"], display)
    assert sheets.pdf(sheet_data(record, record["sha256"])).startswith(b"%PDF-")


@pytest.mark.parametrize("file", FILES, ids=lambda file: file.stem)
@pytest.mark.parametrize(
    "part", ["heading", "document", "values_used", "result", "engine", "sha256", "pdf", "pdf_sha256"]
)
def test_an_altered_record_is_refused(file: Path, part: str) -> None:
    record = load(file)
    altered, lacking = copy.deepcopy(record), copy.deepcopy(record)
    altered[part] = {"altered": 1} if isinstance(record[part], dict) else "QUJD"
    with pytest.raises(RecordError, match="altered"):
        jobs.print_record(altered)
    del lacking[part]
    with pytest.raises(RecordError, match=f"lacks {part}"):
        jobs.print_record(lacking)


def test_a_single_digit_is_noticed() -> None:
    record = load(FILES[0])
    record["result"]["joints"][0]["shear_flow"] *= 1 + 1e-15
    with pytest.raises(RecordError, match="altered"):
        jobs.print_record(record)


def test_what_is_no_record_is_refused() -> None:
    with pytest.raises(RecordError, match="bondwright-record/1"):
        jobs.print_record({"format": "bondwright-record/9"})
    with pytest.raises(RecordError, match="base64"):
        jobs.print_record({**load(FILES[0]), "pdf": "not base64!"})


def test_an_export_survives_a_file_and_prints_the_same_bytes(session: Session) -> None:
    saved = save(session, start_job(session), draw=quick_sheet)
    written = json.dumps(jobs.export_revision(session, saved.id), indent=2)
    assert jobs.print_record(json.loads(written)) == jobs.pdf_bytes(session, saved.id)
