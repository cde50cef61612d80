"""The demo shop: its chain is whole, from the number on a saved check to invented coupons."""

from __future__ import annotations

from collections.abc import Iterator

import pytest

from server import jobs, library, storage
from server.jobs import demo
from server.storage import Session


@pytest.fixture(scope="module")
def shop(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Session]:
    engine = storage.engine(tmp_path_factory.mktemp("demo") / "book.db")
    storage.migrate(engine)
    assert demo.fill(engine)
    assert not demo.fill(engine)  # never twice
    with storage.reading(engine) as session:
        yield session
    engine.dispose()


def saved(shop: Session, mark: str) -> jobs.SavedRevision:
    (check,) = [c for job in jobs.search(shop).jobs for c in jobs.checks_of(shop, job.id) if c.mark == mark]
    return jobs.revision(shop, check.revision_id)


def test_a_number_on_the_sheet_leads_back_to_its_coupons(shop: Session) -> None:
    used = saved(shop, "B1").values_used["adhesives"]["resorcinol"]
    behind = used["lineage"]["shear_strength"]
    value = library.get(shop, behind["record"], behind["revision"])
    coupons = library.get(shop, behind["coupon_set"], behind["coupon_set_revision"])
    assert used["shear_strength"] == value.values["value"] == library.coupon_result(coupons)["characteristic"]
    assert len(coupons.values["coupons"]) == behind["coupons"] == 12


def test_every_approval_is_marked_as_invented(shop: Session) -> None:
    approved = [record for record in library.search(shop, limit=500).records if record.status == "approved"]
    assert len(approved) > 10
    assert all(record.approval is not None and record.approval.invented for record in approved)
    assert all("(demo)" in record.approval.by for record in approved if record.approval is not None)


def test_values_stand_in_every_state_that_needs_a_person(shop: Session) -> None:
    states = {record.key: record.status for record in library.search(shop, group="values").records}
    assert set(states.values()) == {"approved", "provisional", "indicative"}
    assert "V-015" in {record.key for record in library.waiting(shop)}
    assert library.obstacles(shop, library.get(shop, "V-015")) == []  # ready for somebody to approve it
    assert "failure pattern" in {each.about for each in library.obstacles(shop, library.get(shop, "V-016"))}


def test_a_lot_is_found_with_the_checks_on_it(shop: Session) -> None:
    assert [use.mark for use in library.lot_uses(shop, "26-041").uses] == ["B1-G", "B1"]
    assert {record.key for record in library.lot_uses(shop, "24-117").sets} == {"T-002", "T-003"}


def test_the_retention_of_the_pair_is_counted_once(shop: Session) -> None:
    (factor,) = library.get(shop, "B-006").chain
    assert factor.value == pytest.approx(0.69, abs=0.005)


def test_the_hindrances_of_the_box_beam_are_few_and_can_be_answered(shop: Session) -> None:
    held = jobs.hindrances(shop, saved(shop, "B1").id)
    assert all(each.answerable for each in held)
    assert [each.about for each in held if each.kind == "difference"] == ["temperature"]


def test_the_lintel_fails_at_its_strips_end_against_the_shops_own_pull_off_tests(shop: Session) -> None:
    lintel = saved(shop, "L7")
    (joint,) = lintel.result["joints"]
    assert joint["utilisation"] == pytest.approx(0.55, abs=0.005)
    assert lintel.result["verdict"] == "fail"
    assert "start of strip" in lintel.result["governing"].lower()
    used = lintel.values_used["adhesives"]["E7"]
    assert used["peel_strength"] == pytest.approx(1.565, abs=0.001)  # 8 coupons, log-normal, EN 14358
    assert used["shear_strength"] == pytest.approx(3.47, abs=0.005)  # 10 coupons, the one with rust bloom kept
    assert used["lineage"]["peel_strength"]["coupon_set"] == "T-007"


def test_the_gangways_cold_night_is_lived_through_by_the_rubbery_adhesive_alone(shop: Session) -> None:
    verdicts = {mark: saved(shop, mark).result["verdict"] for mark in ("G1-E", "G1-M", "G1-P")}
    assert verdicts == {"G1-E": "fail", "G1-M": "fail", "G1-P": "pass"}
