"""The evidence page: what stands on it, in which order, the same bytes every time, every text as typed."""

from __future__ import annotations

import re
import shutil
import subprocess
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from server import checks, documents
from server.mechanics.control_chart import control_chart
from server.sheets import ChainLines, EvidenceData, FactorLine, Point, Reply, UnprintableError, evidence_pdf
from server.sheets.evidence import compose_evidence
from tests.checks import coupon_sets as sets
from tests.sheets.test_pdf import text_of

needs_pdftotext = pytest.mark.skipif(shutil.which("pdftotext") is None, reason="pdftotext is not on this machine")
MEANS = [1.80, 1.83, 1.79, 1.85]


def document(**more: Any) -> dict[str, Any]:
    listed = [
        {"load": f"{1.25 * value:.4g} kN", "width": "50 mm", "length": "25 mm", "lot": "24-117", "batch": "AB"[i // 6]}
        | {"failure": {"substrate": 90, "cohesive": 10}, "date_bonded": "2026-03-02", **more}
        for i, value in enumerate(sets.ROLLING_SHEAR)
    ]
    listed[7] |= {"excluded": "closed after 19 min", "prevented_by": "the clock is stopped at 10 min"}
    listed[7]["failure"] = {"adhesive": 80, "substrate": 20}
    return sets.document(listed, distribution="lognormal")


def evidence(**changes: Any) -> EvidenceData:
    raw = document()
    made = EvidenceData(
        key="V-014",
        revision=2,
        name="Ply web to softwood flange",
        state="approved",
        what="bond shear strength",
        value="1.58 MPa",
        says="Characteristic value from 11 coupons",
        belongs=(("Adhesive", "Brackwater R2 (A-001 rev 1)"), ("Cure", "")),
        limits=(("Exposure", "service class 1"),),
        coupon_set="T-001 rev 3",
        result=checks.run(documents.read(raw)),
        document=raw,
        history=[Point(f"T-{i}", "2026-03-02", value) for i, value in enumerate(MEANS)],
        chart=control_chart(MEANS),
        chains=[
            ChainLines(
                of="B-001 rev 1 Web to flange (approved)",
                line="1.58 MPa × 0.85 (moisture) = 1.34 MPa",
                factors=[FactorLine("moisture", "0.85", "pair of sets", "T-004 against T-001")],
            )
        ],
        replies=(
            Reply("outlier", "Coupon 8 lies apart.", "closed too late", "P. Ferry, 2026-03-17"),
            Reply("scatter", "?"),
        ),
        people=(("Entered by", "J. Marlow", "2026-03-16"), ("Approved by", "P. Ferry", "2026-03-18")),
        acts=(("approved", "2026-03-18", "P. Ferry", "looked through"),),
        shop="Marlow Ferry Joinery",
        date="2026-03-18",
        engine="bondwright 0.1.0",
        content_hash="9f2c" * 16,
        made_at=1_796_083_200,
    )
    return replace(made, **changes)


def headings(page: EvidenceData) -> list[str]:
    return [part["title"] for part in compose_evidence(page)["parts"] if part["kind"] == "heading"]


def tables(page: EvidenceData) -> list[dict[str, Any]]:
    return [part for part in compose_evidence(page)["parts"] if part["kind"] == "table"]


def test_the_order_is_that_of_a_reviewer() -> None:
    assert headings(evidence()) == [
        "What the value belongs to",
        "Where it may be used",
        "The value",
        "Coupons of T-001 rev 3",
        "Excluded coupons",
        "Where they broke, on average",
        "Tests of the set",
        "What one more coupon, or less scatter, would buy",
        "History of the sets",
        "Knock-down chain",
        "Cautions and questions, with their answers",
        "Working",
        "Not checked",
        "Entered, put forward, approved",
        "Limits of use",
    ]


def test_every_coupon_stands_on_it_with_what_differs_and_what_all_share_is_said_once() -> None:
    page = evidence()
    coupons = next(part for part in tables(page) if len(part["rows"]) == 12)
    titles = [each["title"] for each in coupons["columns"]]
    assert titles == ["No.", "Load", "Batch", "Stress, MPa", "AF %", "CF %", "SF %", "Remark"]
    assert coupons["rows"][7] == ["8", "1.4 kN", "B", "1.12", "80", "0", "20", "excluded"]
    lines = [row for part in compose_evidence(page)["parts"] if part["kind"] == "lines" for row in part["rows"]]
    assert ["Lot, all coupons", "24-117"] in lines
    assert ["Bonded area, all coupons", "50 mm × 25 mm"] in lines
    assert not any(label == "Cure" for label, _ in lines)  # nothing is known of it, so no empty line


def test_both_answers_stand_side_by_side() -> None:
    both = tables(evidence())[0]
    assert [each["title"] for each in both["columns"]] == ["", "Without no. 8", "With every coupon"]
    assert ["Characteristic value", "1.584\u00a0MPa", "1.275\u00a0MPa"] in both["rows"]
    assert ["Coupons", "11", "12"] in both["rows"]


def test_without_an_exclusion_there_is_one_answer() -> None:
    raw = sets.document(sets.coupons(sets.PULL_OFF))
    page = evidence(result=checks.run(documents.read(raw)), document=raw)
    assert "Excluded coupons" not in headings(page)
    assert all("With every coupon" not in str(part) for part in tables(page))


def test_a_value_without_coupons_says_what_it_is_worth() -> None:
    page = evidence(result=None, document=None, coupon_set="", state="indicative", history=(), chart=None)
    parts = compose_evidence(page)["parts"]
    assert any("it is no allowable stress" in part.get("text", "") for part in parts)
    assert "Working" not in headings(page)


def test_an_open_question_leaves_room_for_its_answer_and_an_answered_one_says_who() -> None:
    answered, still_open = [part for part in compose_evidence(evidence())["parts"] if part["kind"] == "caution"]
    assert answered["reply"] == "closed too late (P. Ferry, 2026-03-17)"
    assert (still_open["reply"], still_open["answer"]) == ("", True)


@needs_pdftotext
def test_the_printed_page_holds_it_all_with_page_numbers() -> None:
    text = text_of(evidence_pdf(evidence()))
    for words in (
        "APPROVED", "1.58 MPa", "V-014", "T-001 rev 3", "the clock is stopped at 10 min", "closed after 19 min",
        "EN 1990 Annex D", "With every coupon", "1.58 MPa × 0.85 (moisture) = 1.34 MPa", "P. Ferry", "1 of ",
        "licensed practice", "what these coupons carried",
    ):  # fmt: skip
        assert words in text, words


def test_equal_pages_give_equal_bytes() -> None:
    assert evidence_pdf(evidence()) == evidence_pdf(evidence())
    assert evidence_pdf(evidence()) != evidence_pdf(evidence(revision=3))


@needs_pdftotext
@pytest.mark.parametrize("display", ["SI", "US"])
@pytest.mark.parametrize("state", ["approved", "provisional", "on hold"])
def test_states_and_units(state: str, display: str) -> None:
    text = text_of(evidence_pdf(evidence(state=state, display=display, paper="Letter")))
    assert state.upper() in text
    assert ("229.8 psi" in text) is (display == "US")


@needs_pdftotext
def test_what_people_typed_is_set_as_it_stands() -> None:
    wild = '#panic("x") $a^2$ _b_ <c> \\ @d'
    assert wild in text_of(evidence_pdf(evidence(name=wild)))


def test_a_sign_without_a_glyph_is_named() -> None:
    with pytest.raises(UnprintableError, match="U\\+1F600"):
        evidence_pdf(evidence(name="good \U0001f600"))


@needs_pdftotext
@pytest.mark.parametrize("paper", ["A4", "Letter"])
@pytest.mark.parametrize("n", [11, 30, 200])
def test_nothing_runs_off_the_paper(n: int, paper: str, tmp_path: Path) -> None:
    shares = {"adhesive": 10, "special_cohesive": 20, "cohesive": 30, "substrate": 40}
    listed = [
        {"load": f"{2250 + 37 * (i * i % 23)} N", "width": "50 mm", "length": "25.4 mm", "failure": shares}
        | {"lot": f"24-{i % 7}", "thickness": f"0.1{i % 5} mm", "date_tested": f"2026-03-{16 + i % 5}"}
        for i in range(n)
    ]
    raw = sets.document(listed)
    made = tmp_path / "evidence.pdf"
    made.write_bytes(evidence_pdf(evidence(result=checks.run(documents.read(raw)), document=raw, paper=paper)))
    boxes = subprocess.run(["pdftotext", "-bbox", made, "-"], capture_output=True, text=True, check=True).stdout
    width = float(re.findall(r'<page width="([\d.]+)"', boxes)[0])
    ends = [float(each) for each in re.findall(r'xMax="([\d.]+)"', boxes)]
    assert len(ends) > 200
    assert max(ends) < width - 39  # the right margin is 14 mm: 39.7 points


def test_a_long_set_and_long_words_still_print() -> None:
    listed = sets.coupons([round(5 + 0.01 * i, 2) for i in range(120)], name="x" * 60)
    raw = sets.document(listed)
    page = evidence(result=checks.run(documents.read(raw)), document=raw, name="word " * 38)
    assert evidence_pdf(page).startswith(b"%PDF")
