"""Spacing schedules: zones that hold, counts, what is set out, and fasteners that do not fit."""

from __future__ import annotations

from itertools import pairwise

import numpy as np
import pytest

from server.errors import DocumentError
from tests.checks.made import Raw, changed, run
from tests.checks.test_slip import deck, planks


def rigid(**changes: object) -> Raw:
    """Screws alone, no slip: flow 27 N/mm at the ends, falling straight to nothing at midspan."""
    raw = planks(analysis={"slip": False}, fasteners__screw__shear_resistance=2000, section__joints__0__spacing=...)
    return changed(raw, **changes)


def joint(raw: Raw) -> Raw:
    found: Raw = run(raw)["joints"][0]
    return found


def flow(x: np.ndarray | float) -> np.ndarray | float:
    return 27 * np.abs(1 - 2 * np.asarray(x) / 3000)


class TestZones:
    def test_each_zone_holds_with_the_flow_in_it(self) -> None:
        found = joint(rigid())
        zones = found["spacing_schedule"]
        assert found["spacing_needed"] == pytest.approx(1000 / 27)
        assert (zones[0]["from"], zones[-1]["to"]) == (0, 3000)
        for zone in zones:
            x = np.linspace(zone["from"], zone["to"], 50)
            assert zone["spacing"] * flow(x).max() <= 1000 * (1 + 1e-9)
            assert zone["spacing"] % 25 == pytest.approx(0)
        for left, right in pairwise(zones):
            assert left["to"] == right["from"]
        assert [zone["spacing"] for zone in zones] == [zone["spacing"] for zone in reversed(zones)]
        assert sum(zone["count"] for zone in zones) == found["setting_out"]["count"]

    def test_typed_back_as_the_spacing_it_holds(self) -> None:
        """A bench hand's zones pass the check that asked for them."""
        zones = [{key: zone[key] for key in ("from", "to", "spacing")} for zone in joint(rigid())["spacing_schedule"]]
        found = joint(rigid(section__joints__0__spacing=zones))
        assert 0.6 < found["utilisation"] <= 1
        assert found["setting_out"]["as"] == "given"
        assert [zone["count"] for zone in found["setting_out"]["zones"]] == [
            zone["count"] for zone in joint(rigid())["spacing_schedule"]
        ]

    def test_zones_of_a_sliding_joint_hold_with_the_flow_that_they_draw(self) -> None:
        raw = planks(fasteners__screw__shear_resistance=3500)
        zones = [{key: zone[key] for key in ("from", "to", "spacing")} for zone in joint(raw)["spacing_schedule"]]
        assert zones
        found = joint(changed(raw, section__joints__0__spacing=zones))
        assert found["utilisation"] <= 1

    def test_a_fall_back_is_spaced_by_its_own_flow(self) -> None:
        raw = deck(4, fasteners__screw__shear_resistance="250 lbf")
        zones = joint(raw)["spacing_schedule"]
        spaced = [{key: zone[key] for key in ("from", "to", "spacing")} for zone in zones]
        again = changed(raw, **{f"section__joints__{i}__spacing": spaced for i in range(5)})
        assert joint(again)["limits"][-1]["utilisation"] <= 1
        assert all(zone["spacing"] / 25.4 == pytest.approx(round(zone["spacing"] / 25.4)) for zone in zones)

    def test_steps_least_and_greatest_are_kept(self) -> None:
        found = joint(rigid(analysis__spacing_step=10, fasteners__screw__spacing_max=90))
        spacings = {zone["spacing"] for zone in found["spacing_schedule"]}
        assert max(spacings) == 90
        assert 30 in spacings
        none = joint(rigid(fasteners__screw__spacing_min=40))
        assert none["spacing_schedule"] == []
        assert "under the least of 40 mm" in none["schedule_note"]
        assert "add a row" in none["schedule_note"]

    def test_rows_widen_the_spacing_and_count_each(self) -> None:
        one, two = joint(rigid()), joint(rigid(section__joints__0__rows=2))
        assert two["spacing_schedule"][0]["spacing"] == 50 == 2 * one["spacing_schedule"][0]["spacing"]
        assert two["setting_out"]["count"] == 2 * len(two["setting_out"]["places"])

    def test_the_end_distance_is_kept_and_the_end_fastener_carries_it(self) -> None:
        found = joint(rigid(fasteners__screw__end_distance=30, analysis__spacing_step=5))
        places = found["setting_out"]["places"]
        assert (places[0], places[-1]) == (30, pytest.approx(2970))
        half = (places[1] - places[0]) / 2
        assert (30 + half) * 27 <= 1000 * (1 + 1e-9)

    def test_a_joint_that_stops_short_is_set_out_over_its_own_run(self) -> None:
        raw = rigid(section__pieces__upper__from=500, section__pieces__upper__to=2500)
        found = joint(raw)["setting_out"]
        assert (found["from"], found["to"]) == (500, 2500)
        assert 500 < found["places"][0] < found["places"][-1] < 2500


class TestSettingOut:
    def test_the_spacing_given_is_what_is_set_out(self) -> None:
        found = joint(rigid(section__joints__0__spacing=100))["setting_out"]
        assert found["as"] == "given"
        assert found["spaces"] == [{"count": 29, "spacing": pytest.approx(100)}]
        assert found["end_distance"] == 50
        assert found["count"] == 30

    def test_pressing_screws_are_set_out_too(self) -> None:
        found = joint(deck(4, section__joints__0__role="press"))
        assert found["setting_out"]["count"] == 8
        assert found["spacing_schedule"] == []

    def test_a_bond_alone_has_nothing_to_set_out(self) -> None:
        from tests.checks.made import STACK

        assert joint(STACK)["setting_out"] is None


class TestFasteners:
    def faults(self, raw: Raw) -> dict[str, str]:
        with pytest.raises(DocumentError) as caught:
            run(raw)
        return {fault.path: fault.message for fault in caught.value.faults}

    def test_longer_than_the_parts_is_refused_by_name(self) -> None:
        (path, message), *_ = self.faults(rigid(fasteners__screw__length=101)).items()
        assert path == "section.joints[0].fastener"
        assert "'screw' is 101 mm long" in message
        assert "100 mm thick together" in message
        run(rigid(fasteners__screw__length=100))
        run(rigid(fasteners__screw__length=140, fasteners__screw__kind="bolt"))

    def test_rows_that_do_not_fit_across_are_refused(self) -> None:
        wide = rigid(section__joints__0__rows=3, fasteners__screw__row_spacing=40, fasteners__screw__edge_distance=15)
        faults = self.faults(wide)
        assert "3 rows need 110 mm across" in faults["section.joints[0].rows"]
        run(changed(wide, section__joints__0__rows=2))

    def test_a_slip_modulus_of_zero_is_refused(self) -> None:
        assert "fasteners.screw.slip_modulus" in self.faults(planks(fasteners__screw__slip_modulus=0))

    def test_a_gap_between_zones_is_refused(self) -> None:
        zones = [{"from": 0, "to": 1000, "spacing": 50}, {"from": 1200, "to": 3000, "spacing": 50}]
        faults = self.faults(planks(section__joints__0__spacing=zones))
        assert any("A gap between the zone" in message for message in faults.values())

    def test_a_spacing_below_the_least_is_not_proven(self) -> None:
        result = run(planks(fasteners__screw__spacing_min=120, fasteners__screw__shear_resistance=9000))
        assert result["verdict"] == "not proven"
        assert any("under the least, 120 mm" in text for text in result["missing"])
