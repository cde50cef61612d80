"""The sheet as PDF: the same bytes everywhere, every text as typed, every part in a reviewer's order."""

import os
import re
import shutil
import subprocess
import sys
from dataclasses import replace
from hashlib import sha256
from pathlib import Path

import pytest

from server.sheets import STANDING_CAUTION, SheetData, UnprintableError, pdf, unprintable
from server.sheets.composition import compose
from server.sheets.pdf import DRAWINGS
from tests.sheets import fixture

ROOT = Path(__file__).resolve().parents[2]
needs_pdftotext = pytest.mark.skipif(shutil.which("pdftotext") is None, reason="pdftotext is not on this machine")


def sheet(**changes) -> SheetData:
    made = SheetData(
        document=fixture.document(),
        result=fixture.result(),
        shop="Marlow Ferry Joinery",
        address=("Slipway Yard, Unit 4",),
        job="J-0117",
        customer="Example Customer",
        drawing="MF-220 rev C",
        mark="B1",
        revision=2,
        date="1 December 2026",
        content_hash="9f2c" * 16,
        engine="bondwright 0.1.0",
        saved_at=1_796_083_200,
    )
    return replace(made, **changes)


def text_of(made: bytes) -> str:
    done = subprocess.run(["pdftotext", "-layout", "-", "-"], input=made, capture_output=True, check=True)
    return " ".join(done.stdout.decode().split())


def headings(made: SheetData) -> list[str]:
    return [part["title"] for part in compose(made, DRAWINGS)["parts"] if part["kind"] == "heading"]


def test_the_same_sheet_gives_the_same_bytes_in_another_process_folder_and_time_zone(tmp_path):
    code = (
        "import hashlib, time\n"
        "from tests.sheets.test_pdf import sheet, pdf\n"
        "assert time.tzname[0] != 'UTC'\n"
        "print(hashlib.sha256(pdf(sheet())).hexdigest())"
    )
    environment = {
        **os.environ,
        "TZ": "Pacific/Auckland",
        "PYTHONPATH": str(ROOT),
        "HOME": str(tmp_path),
        "PYTHONHASHSEED": "7",
        "LC_ALL": "C",
    }
    done = subprocess.run(
        [sys.executable, "-c", code], cwd=tmp_path, env=environment, capture_output=True, text=True, check=True
    )
    pdf(sheet(title="something else first"))
    assert done.stdout.strip() == sha256(pdf(sheet())).hexdigest()


def test_another_sheet_gives_other_bytes():
    assert len({pdf(sheet()), pdf(sheet(revision=3)), pdf(sheet(saved_at=1)), pdf(sheet(paper="Letter"))}) == 4


@pytest.mark.parametrize(("paper", "size"), [("A4", (595, 842)), ("Letter", (612, 792))])
def test_paper_is_as_the_job_says(paper, size):
    boxes = re.findall(rb"/MediaBox\s*\[\s*0 0 ([\d.]+) ([\d.]+)\]", pdf(sheet(paper=paper)))
    assert boxes
    assert {(round(float(w)), round(float(h))) for w, h in boxes} == {size}


def test_it_is_an_archive_file_of_its_own_date():
    made = pdf(sheet())
    assert b"<pdfaid:part>2</pdfaid:part><pdfaid:conformance>B</pdfaid:conformance>" in made
    assert b"<xmp:CreateDate>2026-12-01T00:00:00" in made


def test_parts_stand_in_the_order_in_which_a_reviewer_reads():
    assert headings(sheet()) == [
        "Basis",
        "Given values",
        "Section, loads and actions",
        "Section properties",
        "Reactions, shear, moment",
        "Joints",
        "Pieces",
        "Deflection",
        "What is missing",
        "Cautions and replies",
        "Working",
        "Values used",
        "Not checked",
        "Prepared, checked, approved",
        "Limits of use",
    ]


def test_a_part_with_nothing_in_it_is_left_out_and_the_numbers_close_up():
    result = {**fixture.result(), "missing": [], "cautions": []}
    parts = compose(sheet(result=result), DRAWINGS)["parts"]
    numbers = [part["number"] for part in parts if part["kind"] == "heading"]
    assert numbers == [str(n) for n in range(1, 14)]
    assert "What is missing" not in headings(sheet(result=result))


@needs_pdftotext
def test_what_must_be_on_a_sheet_is_on_it():
    text = text_of(pdf(sheet(prepared="A. Maker", status="issued")))
    for wanted in (
        "Marlow Ferry Joinery",
        "J-0117",
        "MF-220 rev C",
        "1 December 2026",
        "FAIL",
        "1.09",
        "V-014",
        "M-PLY-12",
        "typed for this check",
        "12.5 mm × 400 mm at 0 across, 0 up; ply",
        "Jourawski",
        "17.773",
        "A. Maker",
        "ISSUED",
        "page 1 of",
        "9f2c" * 16,
        "bondwright 0.1.0",
        "Reply",
    ):
        assert wanted in text, wanted
    assert STANDING_CAUTION in text
    pages = int(re.search(r"page 1 of (\d+)", text)[1])
    assert f"page {pages} of {pages}" in text


HOSTILE = [
    "#panic(1)",
    "$x^2$ *bold* _it_ `raw`",
    "= heading",
    "@label <ref> [content]",
    '"); #read("/etc/passwd")',
    "\\u{41} \\n // no comment /* here */",
    "<svg><script>1</script></svg>",
    "#{ sys.inputs }",
    "'; DROP TABLE jobs; --",
]


@needs_pdftotext
@pytest.mark.parametrize("text", HOSTILE)
def test_typed_text_comes_out_as_it_was_typed(text):
    result = fixture.result()
    result["cautions"] = [{"about": text, "text": text, "answer": True}]
    result["missing"] = [text]
    made = pdf(sheet(result=result, shop=text, customer=text, title=text, replies={text: text}))
    wanted = text.replace(" ", "").replace("#", "#")
    assert text_of(made).replace(" ", "").count(wanted) >= 5


def test_a_character_without_a_glyph_is_named_with_its_text():
    with pytest.raises(UnprintableError, match=r"“Kunde 日本”.*“日” \(U\+65E5\), “本” \(U\+672C\)") as caught:
        pdf(sheet(customer="Kunde 日本"))
    assert caught.value.characters == ("日", "本")


def test_unprintable_characters_are_found_at_entry():
    assert unprintable("Träger für Łódź, ξ ≤ ½ – 3 °C, Ж \n\t") == []
    assert unprintable("a日b😀日\x07\ud800") == ["日", "😀", "\x07", "\ud800"]
    assert unprintable("") == []


def test_what_entry_lets_through_prints():
    text = "".join(chr(code) for code in range(0xA1, 0x250) if not unprintable(chr(code)))
    assert len(text) > 300
    assert pdf(sheet(customer=text)).startswith(b"%PDF-")


@pytest.mark.parametrize("verdict", ["pass", "fail", "not proven"])
@pytest.mark.parametrize("display", ["SI", "US"])
def test_every_verdict_prints_in_either_display(verdict, display):
    made = pdf(sheet(result={**fixture.result(), "verdict": verdict}, display=display))
    assert made.startswith(b"%PDF-1.7")


@needs_pdftotext
def test_inch_pound_sheets_have_inch_pound_results():
    text = text_of(pdf(sheet(display="US", paper="Letter")))
    joints = text[text.index("Reactions, shear, moment") : text.index("Cautions and replies")]
    assert "lbf/in" in joints
    assert "psi" in joints
    assert "MPa" not in joints.split("What is missing")[0]
    assert "101.4" in text, "17.773 N/mm in lbf/in"


def test_a_bare_result_prints():
    bare = {"kind": "member", "verdict": "not proven", "utilisation": None, "governing": "nothing could be judged"}
    assert pdf(SheetData(document={}, result=bare)).startswith(b"%PDF-")


def test_a_reply_takes_the_place_of_the_line_for_it():
    caution = fixture.result()["cautions"][0]["text"]
    parts = compose(sheet(replies={caution: "Webs are 15 mm in fact."}), DRAWINGS)["parts"]
    replied = [part["reply"] for part in parts if part["kind"] == "caution"]
    assert replied == ["Webs are 15 mm in fact.", ""]


def test_every_step_is_in_the_working_with_its_number():
    parts = [part for part in compose(sheet(), DRAWINGS)["parts"] if part["kind"] == "step"]
    steps = fixture.result()["steps"]
    assert [part["title"] for part in parts] == [step["title"] for step in steps]
    assert [part["number"] for part in parts] == [str(n) for n in range(1, len(steps) + 1)]
    assert parts[4]["line"]["numbers"][0] == "fraction"
