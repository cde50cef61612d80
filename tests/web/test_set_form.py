"""The form of a coupon set: typed into values, values back into boxes, nothing typed lost."""

from __future__ import annotations

from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server.errors import Fault
from server.web import set_form
from server.web.set_columns import COLUMNS, SHARES, WAYS

STRESSES = ["1.92", "1.78", "2.05", "1.12"]


def boxes(**more: str) -> dict[str, str]:
    return set_form.empty("SI") | {"way": "stress MPa"} | more


def typed(*stresses: str, **more: str) -> dict[str, str]:
    return boxes(**{f"coupons[{i}].reading": text for i, text in enumerate(stresses)}, **more)


class TestReading:
    def test_bare_numbers_take_the_unit_of_the_grid_and_typed_units_stand(self) -> None:
        values = set_form.read(typed("2.4", "2400 N", way="load kN")).values
        assert [each["load"] for each in values["coupons"]] == ["2.4 kN", "2400 N"]

    def test_what_all_share_reaches_every_coupon_and_a_column_overrides_it(self) -> None:
        values = set_form.read(
            typed("1.9", "2.0", **{"all.lot": "24-117", "column.lot": "yes", "coupons[1].lot": "24-118"})
        ).values
        assert [each["lot"] for each in values["coupons"]] == ["24-117", "24-118"]

    def test_a_hidden_column_is_not_read(self) -> None:
        values = set_form.read(typed("1.9", **{"all.lot": "24-117", "coupons[0].lot": "left over"})).values
        assert values["coupons"][0]["lot"] == "24-117"

    def test_blank_rows_are_left_out_and_faults_find_their_row(self) -> None:
        reading = set_form.read(typed("1.9", "", "2.0", **{"coupons[2].adhesive": "30"}))
        assert len(reading.values["coupons"]) == 2
        beside = set_form.place(
            [Fault("values.coupons[1].failure", "total 30"), Fault("values.coupons[1].stress", "no")], reading.paths
        )
        assert beside == {"coupons[2].adhesive": "total 30", "coupons[2].reading": "no"}

    def test_a_fault_of_what_all_share_stands_at_its_box(self) -> None:
        reading = set_form.read(typed("1.9", **{"all.width": "wide"}))
        assert set_form.place([Fault("values.coupons[0].width", "m")], reading.paths) == {"all.width": "m"}

    def test_an_exclusion_needs_a_number_of_the_grid_and_a_cause(self) -> None:
        out = {"excluded[0].number": "2", "excluded[0].cause": "shiny", "excluded[0].stop": "clock"}
        coupon = set_form.read(typed(*STRESSES, **out)).values["coupons"][1]
        assert (coupon["excluded"], coupon["prevented_by"]) == ("shiny", "clock")
        for more, box in (
            ({"excluded[0].cause": "shiny"}, "excluded[0].number"),
            ({"excluded[0].number": "9", "excluded[0].cause": "x"}, "excluded[0].number"),
            ({"excluded[0].number": "two", "excluded[0].cause": "x"}, "excluded[0].number"),
            ({"excluded[0].number": "2"}, "excluded[0].cause"),
            (out | {"excluded[1].number": "2", "excluded[1].cause": "again"}, "excluded[1].number"),
        ):
            assert box in set_form.read(typed(*STRESSES, **more)).faults

    def test_an_empty_grid_says_so(self) -> None:
        assert "No coupon" in set_form.read(boxes()).faults["coupons[0].reading"]

    def test_the_default_statistic_is_not_repeated(self) -> None:
        assert "statistic" not in set_form.read(typed("1.9")).values
        chosen = set_form.read(typed("1.9", **{"statistic.distribution": "normal", "statistic.scatter": "0.12"}))
        assert chosen.values["statistic"] == {"distribution": "normal", "scatter": "0.12"}

    def test_far_too_long_a_text_is_refused_and_not_read(self) -> None:
        reading = set_form.read(typed("9" * 3000))
        assert "shorten" in reading.faults["coupons[0].reading"]


class TestRound:
    COUPONS: tuple[dict[str, Any], ...] = (
        {"load": "2.4 kN", "width": "50 mm", "length": "25 mm", "lot": "24-117", "name": "A1"},
        {"load": "2.1 kN", "width": "50 mm", "length": "26 mm", "lot": "24-117"}
        | {"failure": {"adhesive": "80", "substrate": "20"}, "excluded": "late", "prevented_by": "clock"},
    )

    def values(self, **more: Any) -> dict[str, Any]:
        return {"property": "bond shear", "coupons": [dict(each) for each in self.COUPONS], "display": "SI"} | more

    def test_a_set_filled_in_and_read_again_is_the_same(self) -> None:
        values = self.values(thickness="0.1 mm", cured_days="7", statistic={"distribution": "normal"})
        filled = set_form.fill(values)
        assert filled["all.width"] == "50 mm"
        assert "all.length" not in filled
        assert filled["column.length"] == "yes"
        assert filled["coupons[0].reading"] == "2.4"
        assert set_form.read(filled).values == values

    def test_plain_numbers_of_another_program_keep_their_meaning(self) -> None:
        values = self.values(coupons=[{"load": 2400, "width": 50, "length": 25.0}, {"load": "2.1 kN", "area": 1250}])
        again = set_form.read(set_form.fill(values)).values["coupons"]
        assert again == [
            {"load": "2400 N", "width": "50 mm", "length": "25 mm"},
            {"load": "2.1 kN", "area": "1250 mm2"},
        ]

    cell = st.sampled_from(["", "x", "3", "24-117"])
    coupon = st.fixed_dictionaries(
        {"load": st.sampled_from(["2.4 kN", "2400 N", "240 kgf", "5 lbf"])},
        optional={name: st.sampled_from(["3 mm", "4 mm"]) for name in ("width", "length", "thickness")}
        | {name: st.sampled_from(["a", "b"]) for name in ("lot", "batch", "made_by", "note", "name", "excluded")},
    )

    @given(st.lists(coupon, min_size=1, max_size=8))
    @settings(max_examples=40)
    def test_any_set_survives_the_form(self, coupons: list[dict[str, Any]]) -> None:
        values = {"property": "bond shear", "coupons": coupons, "display": "SI"}
        reading = set_form.read(set_form.fill(values))
        assert reading.values == values
        assert reading.faults == {}


class TestShaping:
    def test_rows_close_up_and_exclusions_follow_their_coupon(self) -> None:
        closed = set_form.compacted(
            typed("1.9", "", "2.0", "1.1", **{"excluded[3].number": "4", "excluded[3].cause": "late"}), rows=6
        )
        assert [closed.get(f"coupons[{i}].reading") for i in range(4)] == ["1.9", "2.0", "1.1", None]
        assert (closed["excluded[0].number"], closed["rows"]) == ("3", "6")
        assert set_form.row_count(closed) == 6

    def test_pasted_coupons_come_after_those_that_are_there(self) -> None:
        taken = set_form.take(typed("1.9", **{"all.lot": "24-117"}), [{"stress": "2.0 MPa", "lot": "24-118"}])
        read = set_form.read(taken).values["coupons"]
        assert read == [{"stress": "1.9 MPa", "lot": "24-117"}, {"stress": "2.0 MPa", "lot": "24-118"}]

    def test_pasted_loads_into_an_empty_grid_choose_their_unit(self) -> None:
        taken = set_form.take(boxes(), [{"load": "412 lbf"}, {"load": "388 lbf"}])
        assert (taken["way"], taken["coupons[0].reading"]) == ("load lbf", "412")

    @pytest.mark.parametrize("asked", ["", "x", "-1", "99999", "9" * 30])
    def test_no_number_of_rows_breaks_it(self, asked: str) -> None:
        assert 1 <= set_form.row_count(typed("1.9", rows=asked)) <= 200

    def test_questions_find_the_rows_they_are_about(self) -> None:
        rows = [0, 2, 3, 7]
        assert set_form.rows_named("Coupon 2 (A-17) lies farther", rows) == [2]
        assert set_form.rows_named("in coupons 1, 2 and 4: was", rows) == [0, 2, 7]
        assert set_form.rows_named("12 coupons are fewer", rows) == []
        assert set_form.rows_named("coupon 99", rows) == []


def test_every_column_and_share_is_a_field_of_a_coupon() -> None:
    from server.documents.coupons import Coupon, Failure

    assert {*COLUMNS, *(way.field for way in WAYS.values())} <= set(Coupon.model_fields)
    assert set(SHARES) == set(Failure.model_fields)


def test_a_set_of_a_hybrid_joint_says_its_fasteners_and_gives_them_back() -> None:
    boxes = {
        "property": "hybrid joint shear", "units": "US", "way": "stress psi", "coupons[0].reading": "430",
        "set.hybrid_fastener": "No. 8 screw", "set.hybrid_spacing": "6", "set.hybrid_rows": "1",
    }  # fmt: skip
    values = set_form.read(boxes).values
    assert values["hybrid_spacing"] == "6 in"
    filled = set_form.fill(values)
    assert filled["set.hybrid_fastener"] == "No. 8 screw"
    assert filled["set.hybrid_rows"] == "1"
    assert filled["set.hybrid_spacing"].startswith("6")
