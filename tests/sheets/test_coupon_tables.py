"""Coupon checks in the terminal: value first, every coupon, both answers, 80 characters; no PDF yet, in words."""

from __future__ import annotations

import json

import pytest

from server import checks, documents
from server.__main__ import main
from server.errors import JointError
from server.sheets import SheetData, pdf, terminal
from server.sheets.coupon_tables import in_newtons, pairs
from tests.checks import coupon_sets as sets


def excluded():
    listed = sets.coupons(sets.ROLLING_SHEAR, batch="24-117", failure={"substrate": 90, "adhesive": 10})
    listed[7] |= {"excluded": "closed at 19 min, beyond the 12 min of the adhesive", "failure": {"adhesive": 100}}
    listed[3]["batch"] = "24-118"
    return listed


def flat(text):
    return " ".join(text.replace("\u00a0", " ").split())


@pytest.mark.parametrize("distribution", ["normal", "lognormal", "weibull", "nonparametric"])
@pytest.mark.parametrize("display", ["SI", "US"])
def test_every_line_fits_and_the_value_comes_first(distribution, display):
    text = terminal(sets.run(excluded(), distribution=distribution), display)
    lines = text.splitlines()
    assert lines[0] in ("PASS", "NOT PROVEN")
    assert "haracteristic value" in lines[1]
    assert max(len(line) for line in lines) <= 80


def test_both_answers_every_coupon_and_the_working_stand_on_it():
    text = flat(terminal(sets.run(excluded(), distribution="normal")))
    assert "Characteristic value 1.568 MPa from 11 coupons" in text
    for number in ("1.285 MPa", "1.823 MPa", "1.764 MPa", "2.073", "6.738 %", "1.12", "2.048"):
        assert number in text
    assert "excluded: closed at 19 min" in text
    assert "f_k = m − k ⋅ s = 1.8227 − 2.0731 ⋅ 0.12281 = 1.5681 MPa" in text
    assert "Adhesive 10 %" in text
    assert "what now stops it?" in text


def test_inch_pound_display_shows_psi():
    text = flat(terminal(sets.run([f"{psi} psi" for psi in sets.DECK_PSI], distribution="normal"), "US"))
    assert "Characteristic value 179.1 psi from 10 coupons" in text
    assert " 228 " in text
    assert "MPa" not in text


def test_there_is_no_pdf_of_coupons_yet_and_it_says_so():
    with pytest.raises(JointError, match="no PDF for checks of kind 'coupons' yet"):
        pdf(SheetData(document={}, result=sets.run(sets.PRIMED)))


def command(tmp_path, capsys, document, *options):
    file = tmp_path / "set.json"
    file.write_text(json.dumps(document), encoding="utf-8")
    status = main(["check", str(file), *options])
    return status, *capsys.readouterr()


def test_the_command_line_gives_the_contract_s_exit_statuses(tmp_path, capsys):
    status, out, _ = command(tmp_path, capsys, sets.document(sets.coupons(sets.PRIMED)), "--json")
    assert status == 0
    assert json.loads(out)["characteristic"] == sets.run(sets.PRIMED)["characteristic"]
    status, out, _ = command(tmp_path, capsys, sets.document(sets.coupons([5.0])))
    assert status == 1
    assert out.startswith("NOT PROVEN")
    status, out, error = command(tmp_path, capsys, sets.document([{"load": "5 MPa", "area": 3}]))
    assert (status, out) == (2, "")
    assert error.startswith("bondwright: coupons[0].load: '5 MPa' is a stress")
    target = tmp_path / "out.pdf"
    document = sets.document(sets.coupons(sets.PRIMED))
    status, out, error = command(tmp_path, capsys, document, "--pdf", str(target))
    assert (status, out) == (2, "")
    assert "no PDF" in error
    assert not target.exists()


def test_a_fasteners_result_reads_in_loads():
    raw = sets.document([{"load": f"{each} N", "area": 1.0} for each in (1830, 1726, 2024, 1632, 1913)])
    found = in_newtons(checks.run(documents.read(raw)))
    assert (found["unit"], found["quantity"]) == ("N", "Load at failure")
    shown = dict(pairs(found, "US", found["unit"]))
    assert shown["Mean"] == "410.3\u00a0lbf"  # 1825 N
    words = json.dumps(found, ensure_ascii=False)
    assert "MPa" not in words
    assert not any(step.get("group") == "Stresses" for step in found["steps"])
