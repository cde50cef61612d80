"""Pasted blocks and CSV of coupons: every unit of the trade, every slip named by line and column."""

from __future__ import annotations

from contextlib import suppress
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server import documents
from server.documents.coupons import stress_of
from server.errors import DocumentError
from server.library import read_coupons
from server.library.coupon_sets import document_of


def stresses(text: str, **more: Any) -> list[float]:
    found = read_coupons(text, **more)
    assert found.faults == []
    document = documents.read(document_of({"property": "bond shear", "coupons": found.coupons}))
    assert isinstance(document, documents.CouponsDocument)
    return [stress_of(coupon) for coupon in document.coupons]


@pytest.mark.parametrize(
    ("header", "cell", "stress"),
    [
        ("load kN", "5.2", 5200 / 312.5),
        ("load [N]", "5200", 5200 / 312.5),
        ("load (kgf)", "500", 500 * 9.80665 / 312.5),  # exact: standard gravity
        ("load / lbf", "1200", 1200 * 4.4482216152605 / 312.5),  # exact: 0.45359237 kg, standard gravity
        ("peak load kN", "5,2", 5200 / 312.5),
        ("stress N/mm2", "16,64", 16.64),
        ("stress psi", "2413", 2413 * 4.4482216152605 / 645.16),
        ("Strength MPa", "16.64", 16.64),
    ],
)
def test_units_stand_in_the_heading(header: str, cell: str, stress: float) -> None:
    assert stresses(f"{header}\twidth mm\toverlap mm\n{cell}\t25\t12,5") == pytest.approx([stress])


def test_a_gauge_and_the_area_of_its_ram_make_a_load() -> None:
    text = "no;ram bar;area mm2\n1;85;312,5\n2;90 bar;312,5"
    assert stresses(text, defaults={"ram_area": "12 cm2"}) == pytest.approx([8.5 * 1200 / 312.5, 9 * 1200 / 312.5])


@pytest.mark.parametrize(
    "text",
    [
        "load kN\twidth mm\tlength mm\n5.2\t25\t12.5",
        "load kN;width mm;length mm\n5,2;25;12,5",
        "load kN,width mm,length mm\n5.2,25,12.5",
        '"load kN","width mm","length mm"\r\n"5.2","25","12.5"\r\n',
        "\ufeffload kN\twidth mm\tlength mm\r5.2\t25\t12.5\r\r",
        "load kN;width mm;length mm\n5,2 kN;2.5 cm;12.5 mm\n;;\n",
    ],
)
def test_blocks_and_files_come_in_many_ways(text: str) -> None:
    assert stresses(text) == pytest.approx([16.64])


def test_numbers_alone_are_read_under_the_heading_supposed_for_them() -> None:
    row = "1.92 1.78 2.05 1.66"
    for text in (row, row.replace(" ", "\n"), row.replace(" ", "\t"), row.replace(".", ",")):
        assert stresses(text, header="stress N/mm2") == [1.92, 1.78, 2.05, 1.66]
    assert "must name the columns" in read_coupons(row).faults[0].message


def test_everything_that_is_recorded_comes_along() -> None:
    text = (
        "coupon\tstress MPa\tAF %\tCF%\twood failure\tSCF\tbonded\ttested\tlot\tmade by\ttested by\t"
        "bond line mm\ttemp\tnote\n"
        "A1\t6.9\t10\t0\t85 %\t5\t2026-03-02\t9 March 2026\t24-117\tAnn\tBo\t0.12\t20\tdry\n"
    )
    found = read_coupons(text)
    assert found.faults == []
    assert found.coupons == [
        {
            "name": "A1",
            "stress": "6.9 MPa",
            "failure": {"adhesive": "10", "cohesive": "0", "substrate": "85 %", "special_cohesive": "5"},
            "date_bonded": "2026-03-02",
            "date_tested": "2026-03-09",
            "lot": "24-117",
            "made_by": "Ann",
            "tested_by": "Bo",
            "thickness": "0.12 mm",
            "temperature": "20",
            "note": "dry",
        }
    ]
    documents.read(document_of({"property": "bond shear", "coupons": found.coupons}))


def test_ten_faulty_rows_are_each_named() -> None:
    lines = [
        "load kN;width mm;length mm;bonded;tested",
        "5.2;25;12.5;2026-03-02;2026-03-09",
        "5.2 MPa;25;12.5;;",
        "5.2 kg;25;12.5;;",
        "abc;25;12.5;;",
        "5.2;25 N;12.5;;",
        "5.2;25;12.5;03/04/25;",
        "5.2;25;12.5;;2026-02-30",
        "5.2;25;12.5;;soon",
        "5.2;25;1,200;;",
        "5.2;25;12.5;;;7",
        "5.2;25;12 1/0;;",
    ]
    faults = {fault.line: fault for fault in read_coupons("\n".join(lines)).faults}
    assert sorted(faults) == list(range(3, 13))
    wanted = {
        3: ("load kN", "a load is asked for"),
        4: ("load kN", "a mass"),
        5: ("load kN", "not a force"),
        6: ("width mm", "not a length"),
        7: ("bonded", "more than one day"),
        8: ("tested", "no day of the calendar"),
        9: ("tested", "year-month-day"),
        10: ("length mm", "two ways"),
        11: ("", "6 cells under 5 headings"),
        12: ("length mm", "fraction"),
    }
    for line, (column, words) in wanted.items():
        assert (faults[line].column, words in faults[line].message) == (column, True), faults[line]
        assert str(faults[line]).startswith(f"line {line}")


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "Nothing was pasted"),
        ("\n\t\n", "Nothing was pasted"),
        ("load kN;colour\n1;red", "no heading known here"),
        ("load MPa;area mm2\n1;2", "a unit of stress"),
        ("load kN;width kg\n1;2", "a mass"),
        ("load kN;force N\n1;2", "the same as 'load kN'"),
        ("load kN,width mm\n5,2,25", "A decimal comma needs tabs or semicolons"),
        ("load kN\n" + "1\n" * 2002, "at most 2000"),
    ],
)
def test_what_cannot_be_read_as_a_whole_says_why(text: str, words: str) -> None:
    assert words in " ".join(map(str, read_coupons(text).faults))


@settings(max_examples=60, deadline=None)
@given(st.text(max_size=200))
def test_whatever_is_pasted_is_read_or_named(text: str) -> None:
    found = read_coupons(text, header="load kN")
    assert all(fault.line >= 0 and fault.message for fault in found.faults)
    if found.coupons and not found.faults:
        with suppress(DocumentError):
            documents.read(document_of({"property": "bond shear", "coupons": found.coupons}))
