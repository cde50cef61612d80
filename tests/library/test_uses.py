"""Recall: from a lot, a set or a value to every check that stands on it."""

from __future__ import annotations

from typing import Any

import pytest

from server import library
from server.errors import DocumentError
from server.storage import Session
from tests.jobs.samples import save, start_job
from tests.library.evidence import ANN, BO, MADE_OF, ROLLING, add_bond_on, add_set, approved_value, coupons
from tests.library.samples import document


def add_lot(session: Session, number: str, **values: Any) -> library.Record:
    return library.add(
        session, group="lots", name=f"R2 lot {number}", values={"number": number, **values}, made_by=ANN.name
    )


def test_a_lot_leads_to_the_checks_that_stand_on_it(session: Session) -> None:
    lot = add_lot(session, "24-117", hardener_lot="H-9")
    library.approve(session, lot.key, by=BO)
    value = approved_value(session, values={"coupons": coupons(lot="24-117")})
    add_set(session, values={"coupons": coupons(lot="24-118")}, name="other lot")
    bond = add_bond_on(session, value)
    job = start_job(session)
    saved = save(session, job, document(), mark="X2")
    save(session, job)  # typed values
    for number in ("24-117", " 24-117 ", "h-9"):
        found = library.lot_uses(session, number)
        assert [each.key for each in found.lots] == [lot.key]
        assert [each.key for each in found.sets] == ["T-001"]
        assert [each.key for each in found.values] == [value.key]
        assert [(use.mark, use.check_revision_id) for use in found.uses] == [("X2", saved.id)]
        assert found.uses[0].via == ("T-001 rev 1", "V-001 rev 1", f"{bond.key} rev 1")
    assert library.lot_uses(session, "24-1").uses == []
    assert library.lot_uses(session, "").sets == []


def test_a_value_revision_leads_to_its_own_checks_only(session: Session) -> None:
    value = approved_value(session)
    add_bond_on(session, value)
    job = start_job(session)
    saved = save(session, job, document())
    assert [use.check_revision_id for use in library.standing_on(session, value.key)] == [saved.id]
    assert [use.check_revision_id for use in library.standing_on(session, value.key.lower(), revision=1)] == [saved.id]
    assert library.standing_on(session, value.key, revision=2) == []
    assert [use.record for use in library.standing_on(session, "B-001")] == ["B-001"]
    assert library.where_used(session, value.key) == []  # not itself
    assert library.standing_on(session, "\ud800") == []


def test_a_long_chain_of_revisions_is_walked_once(session: Session) -> None:
    value = approved_value(session)
    bond = add_bond_on(session, value)
    for n in range(5):
        library.edit(session, bond.key, note=f"n{n}", made_by=ANN.name)
    library.approve(session, bond.key, by=BO)
    job = start_job(session)
    first = save(session, job, document(record="B-001", revision=1))
    second = save(session, job, document())
    found = library.standing_on(session, value.key)
    assert [use.check_revision_id for use in found] == [second.id, first.id]
    assert [use.record_revision for use in found] == [6, 1]


@pytest.mark.parametrize(("bonded", "asked"), [("2026-02-01", False), ("2026-04-01", True)])
def test_coupons_bonded_with_an_expired_lot_are_asked_about(session: Session, bonded: str, asked: bool) -> None:
    add_lot(session, "24-117", maker_expiry="2026-03-01")
    record = add_set(session, values={"coupons": coupons(lot="24-117", date_bonded=bonded)})
    assert ("lot" in {each.about for each in library.questions(session, record)}) == asked


@pytest.mark.parametrize(("tested", "asked"), [("2026-03-08", True), ("2026-03-09", False)])
def test_coupons_tested_before_the_cure_was_over_are_asked_about(session: Session, tested: str, asked: bool) -> None:
    cure = library.add(session, group="cures", name="20 °C", values={"days_before_load": 7}, made_by=ANN.name)
    days = {"date_bonded": "2026-03-02", "date_tested": tested}
    record = add_set(session, values={"coupons": coupons(**days)}, links={"cure": cure.itself})
    assert ("cure" in {each.about for each in library.questions(session, record)}) == asked


def test_stresses_typed_as_loads_are_asked_about(session: Session) -> None:
    typed = [{"load": x, "area": "312.5 mm2", "failure": {"substrate": 100}} for x in ROLLING]
    asked = {each.about for each in library.questions(session, add_set(session, values={"coupons": typed}))}
    assert "stress for load" in asked


def test_the_same_five_digits_twice_are_asked_about(session: Session) -> None:
    typed = [{"load": x, "area": 1000, "failure": {"substrate": 100}} for x in ("5.2143 kN", "5.2143 kN", "5.4 kN")]
    asked = {each.about for each in library.questions(session, add_set(session, values={"coupons": typed}))}
    assert "identical readings" in asked


def test_a_coupon_is_left_out_for_a_cause_and_both_answers_stay(session: Session) -> None:
    record = add_set(session)
    told = library.exclude(session, record.key, 7, cause="closed at 19 min", prevented_by="timer", by=ANN)
    result = library.coupon_result(told)
    assert (told.revision, result["n"], result["without_exclusions"]["n"]) == (2, 11, 12)
    assert result["characteristic"] > result["without_exclusions"]["characteristic"]
    again = library.include(session, record.key, 7, reason="the timer was right", by=ANN)
    assert library.coupon_result(again)["n"] == 12
    assert library.coupon_result(library.get(session, record.key, 2))["n"] == 11


@pytest.mark.parametrize(
    ("index", "cause", "path"), [(7, " ", "cause"), (12, "x", "index"), (-1, "x", "index"), (10**9, "x", "index")]
)
def test_an_exclusion_without_a_cause_or_coupon_is_refused(session: Session, index: int, cause: str, path: str) -> None:
    record = add_set(session)
    with pytest.raises(DocumentError) as caught:
        library.exclude(session, record.key, index, cause=cause, by=ANN)
    assert path in {fault.path for fault in caught.value.faults}
    assert library.get(session, record.key).revision == 1


def test_history_tells_of_sets_that_are_made_alike_oldest_first(session: Session) -> None:
    new = add_set(session, values={"coupons": coupons(date_tested="2026-05-01")})
    old = add_set(session, values={"coupons": coupons(ROLLING[:8], date_tested="2025-05-01")})
    add_set(session, details=MADE_OF | {"surface_a_preparation": "sawn"})
    add_set(session, values={"property": "pull-off"})
    gone = add_set(session)
    library.set_status(session, gone.key, "rejected", by=BO, reason="wrong labels")
    points = library.history(session, new)
    assert [(point.key, point.date, point.n) for point in points] == [
        (old.key, "2025-05-01", 8),
        (new.key, "2026-05-01", 12),
    ]
    assert points[1].mean == pytest.approx(sum(ROLLING) / 12)
    assert library.history(session, library.add(session, group="lots", name="x", values={"number": "1"})) == []
