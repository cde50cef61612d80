"""Tables of results: the right number under the right heading."""

import pytest

from server.sheets import tables
from tests.sheets import fixture


def limit(kind: str, start: float, end: float, sag: float):
    return {"from": start, "to": end, "kind": kind, "deflection": sag, "limit": 20.0, "utilisation": sag / 20.0}


@pytest.mark.parametrize(
    ("each", "ratio"),
    [
        (limit("span", 0, 6000, 21.89), "274"),  # 6000 / 21.89 = 274.1
        (limit("overhang", 5000, 6000, -9.5), "210"),  # twice the length: 2000 / 9.5 = 210.5
        (limit("span", 0, 6000, 0.0), "–"),
    ],
)
def test_span_over_deflection_is_rounded_down(each, ratio):
    part = next(tables.deflection({"deflection_limits": [each]}, "SI"))
    titles = [column["title"] for column in part["columns"]]
    assert part["rows"][0][titles.index("Span / deflection")] == ratio


def test_an_excess_is_strong_and_nothing_else_is():
    rows = [row for part in tables.deflection(fixture.result(), "SI") for row in part["rows"]]
    assert rows[-1][-1] == {"strong": "1.09"}
    joints = next(tables.joints(fixture.result(), "SI"))
    assert all(isinstance(cell, str) for row in joints["rows"] for cell in row)


def test_a_repeated_first_cell_is_left_blank():
    assert [row[0] for row in tables.table([], [["1", "a"], ["1", "b"], ["2", "c"], ["1", "d"]])["rows"]] == [
        "1",
        "",
        "2",
        "1",
    ]


def test_stretches_of_a_member_have_their_own_properties():
    result = fixture.result()
    result["sections"] = [{"from": 0, "to": 2000, **result["section"]}, {"from": 2000, "to": 6000, **result["section"]}]
    parts = list(tables.section(result, "SI"))
    assert [part["title"] for part in parts if part["kind"] == "sub"] == [
        "From 0\u00a0mm to 2000\u00a0mm",
        "From 2000\u00a0mm to 6000\u00a0mm",
    ]


def test_columns_and_cells_are_as_many():
    result = fixture.result()
    for make in (tables.actions, tables.joints, tables.pieces, tables.deflection):
        for display in ("SI", "US"):
            for part in make(result, display):
                if part["kind"] == "table":
                    assert {len(row) for row in part["rows"]} == {len(part["columns"])}
