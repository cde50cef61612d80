"""Readings of fastener tests pasted into the form: tabs, decimal commas, headings with units, and faults by line."""

from __future__ import annotations

import re
from html import unescape

import pytest
from fastapi.testclient import TestClient
from hypothesis import given, settings
from hypothesis import strategies as st

from server import checks, documents
from server.sheets import ONE_PAGES
from server.web import one_page_form as forms
from server.web.form_text import Reading
from server.web.pasted_readings import readings, write

PAGE = ONE_PAGES["load-slip"]
PASTED = "S1\nLoad [N]\tSlip [mm]\n0\t0\n400\t0,11\n1600\t0,52\n4000\t3,8\n\nS2: \n0 0\n410 0.10\n1640 0.49\n4100 4.1\n"


def read(text: str, system: str = "SI") -> tuple[list[dict[str, object]], str]:
    reading = Reading()
    found = readings(text, system, "readings", reading)
    return found, reading.faults.get("readings", "")


def test_blocks_names_headings_and_decimal_commas() -> None:
    found, fault = read(PASTED)
    assert not fault
    assert [each["name"] for each in found] == ["S1", "S2"]
    assert found[0]["readings"][1] == ["400 N", "0.11 mm"]  # type: ignore[index]
    assert found[1]["readings"][3] == ["4100 N", "4.1 mm"]  # type: ignore[index]


@pytest.mark.parametrize(
    ("line", "pair"),
    [
        ("1.25; 0.40", ["1.25 kN", "0.40 mm"]),
        ("1.25,0.40", ["1.25 kN", "0.40 mm"]),
        ("1,25\t0,4", ["1.25 kN", "0.4 mm"]),
        ("1,25 0,4", ["1.25 kN", "0.4 mm"]),
        ("1250 N 0.4 mm", ["1250 N", "0.4 mm"]),
        ("1.25, -0.01", ["1.25 kN", "-0.01 mm"]),
    ],
)
def test_a_line_is_a_load_and_a_slip(line: str, pair: list[str]) -> None:
    found, fault = read(f"{line}\n{line}")
    assert not fault
    assert found == [{"readings": [pair, pair]}]


def test_inch_pound_boxes_mean_pounds_and_inches() -> None:
    assert read("250\t0.02\n300\t0.03", "US")[0][0]["readings"] == [["250 lbf", "0.02 in"], ["300 lbf", "0.03 in"]]


def test_every_line_that_cannot_be_read_is_named() -> None:
    _, fault = read("A\n1.2\n3.4; x\n-5 0.1\n1,2,3\n1,200 mm 4\n\nB\n1 1\n")
    for words in ("Line 2: “1.2”", "Line 3:", "Line 4: the load -5 kN is below 0", "Line 5:", "Line 6:"):
        assert words in fault
    assert "Line 8: specimen 2 (B) has 1 reading; it needs two at least." in fault
    assert "Line 2: “stone” is no unit of load" in read("A\nload [stone]; slip [mm]\n1; 2\n2; 3")[0:2][1]


def test_a_specimen_may_be_left_out_for_a_cause_and_all_is_written_back() -> None:
    text = "S1\n0 N; 0 mm\n400 N; 0.11 mm\n\nS2 excluded: knot under the head\n0 N; 0 mm\n390 N; 0.2 mm"
    found, fault = read(text)
    assert not fault
    assert found[1]["excluded"] == "knot under the head"
    assert read(write(found))[0] == found


def test_the_form_reads_both_ways_of_giving_specimens_and_gives_them_back() -> None:
    values = forms.start(PAGE, "SI") | {
        "specimens": "4.2, 0.1, 0.5, A\n4.4, 0.1, 0.6, B, grain ran out",
        "readings": PASTED,
    }
    reading = forms.read(PAGE, values)
    assert not reading.faults
    result = checks.run(documents.read(reading.raw))
    assert [each["load"] for each in result["specimens"]] == [4200, None, 4000, 4100]  # one left out
    assert result["n"] == 3
    again = forms.read(PAGE, forms.write(PAGE, reading.raw)).raw
    assert again["specimens"] == reading.raw["specimens"]
    assert forms.read(PAGE, forms.in_units(PAGE, values, "US")).raw["specimens"][2] == reading.raw["specimens"][2]


@settings(max_examples=60, deadline=None)
@given(st.text(alphabet="0123456789.,;\t\n -+eEkNmabx:[]%", max_size=80))
def test_any_text_gives_specimens_or_a_fault(text: str) -> None:
    found, fault = read(text)
    assert fault or all(len(each["readings"]) >= 2 for each in found)  # type: ignore[arg-type]


def test_whole_tests_go_through_the_page_and_the_sheet(client: TestClient) -> None:
    job = client.post("/jobs", data={"title": "Tests", "number": "J-9", "paper": "A4", "display": "SI"})
    lines = [f"{4000 * (k / 300) ** 0.5:.1f}\t{3 * k / 300:.3f}" for k in range(300)]
    text = "\n\n".join(f"S{n}\nload N\tslip mm\n" + "\n".join(lines) + f"\n{4000 + 40 * n}\t3.0" for n in range(10))
    values = forms.start(PAGE, "SI") | {"readings": text, "made_by": "M. Hand", "mark": "F1"}
    preview = client.post(f"{job.headers['location']}/checks/load-slip/preview", data=values)
    shown = " ".join(unescape(re.sub(r"<[^>]+>", " ", preview.text)).split())
    assert "from 10 specimens" in shown
    wrong = client.post(f"{job.headers['location']}/checks/load-slip", data=values | {"readings": text + "\nwhat; 3"})
    assert wrong.status_code == 422
    saved = client.post(f"{job.headers['location']}/checks/load-slip", data=values)
    assert saved.status_code == 303
    page = unescape(client.get(saved.headers["location"]).text)
    assert "S3: 301 readings" in page
    assert client.get(saved.headers["location"] + "/sheet.pdf").content.startswith(b"%PDF")
    edit = client.get("/checks/1/edit")
    assert edit.text.count("S9") >= 1
