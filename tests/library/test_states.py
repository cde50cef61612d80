"""Coupon sets and lots have states of their own: who brings them there is named, and what they bar stays barred."""

from __future__ import annotations

from datetime import UTC, datetime, timedelta
from typing import Any

import pytest

from server import library
from server.errors import DocumentError
from server.library import Record
from server.people import Person
from server.storage import Session
from tests.library.evidence import ANN, BO, add_set, add_value, answer_all, approved_value, coupons

TODAY = datetime.now(UTC).date()
LOT = {"number": "24-117", "maker_expiry": (TODAY + timedelta(days=100)).isoformat()}


def add_lot(session: Session, **values: Any) -> Record:
    return library.add(session, group="lots", name="R2", values=LOT | values, made_by=ANN.name)


def step(session: Session, key: str, status: str, by: Person = BO, **told: str) -> Record:
    return library.set_status(session, key, status, by=by, reason="for the test", told=told)


def refused(session: Session, key: str, status: str, **told: str) -> set[str]:
    with pytest.raises(DocumentError) as raised:
        step(session, key, status, **told)
    return {fault.path for fault in raised.value.faults}


def day(days: int) -> str:
    return (TODAY + timedelta(days=days)).isoformat()


class TestSets:
    def test_it_is_tested_then_reviewed_then_accepted_by_another_person(self, session: Session) -> None:
        coupon_set = add_set(session)
        assert coupon_set.status == "tested"
        assert step(session, "T-001", "reviewed").status == "reviewed"
        answer_all(session, coupon_set)
        with pytest.raises(DocumentError, match="another person"):
            library.approve(session, "T-001", by=ANN)
        accepted = library.approve(session, "T-001", by=BO, note="faces seen")
        assert (accepted.status, accepted.approval and accepted.approval.by) == ("accepted", BO.name)
        assert [act.status for act in library.acts(session, "T-001")] == ["reviewed", "accepted"]

    def test_approving_a_value_accepts_the_set_behind_it(self, session: Session) -> None:
        approved_value(session)
        coupon_set = library.get(session, "T-001")
        assert coupon_set.status == "accepted"
        assert "V-001" in library.acts(session, "T-001")[-1].reason
        assert library.edit(session, "T-001", note="later", made_by=ANN.name).status == "tested"

    def test_a_rejected_set_bars_its_value_until_it_is_taken_back(self, session: Session) -> None:
        value = add_value(session, add_set(session))
        library.put_forward(session, value.key, by=ANN)
        answer_all(session, value)
        step(session, "T-001", "rejected")
        with pytest.raises(DocumentError, match="T-001 rev 1 is rejected"):
            library.approve(session, value.key, by=BO)
        step(session, "T-001", "tested")
        assert library.approve(session, value.key, by=BO).status == "approved"

    @pytest.mark.parametrize("status", ["accepted", "released", "draft", "nonsense", "tested", ""])
    def test_no_other_step_is_taken(self, session: Session, status: str) -> None:
        add_set(session)
        assert refused(session, "T-001", status) == {"status"}

    def test_nobody_enters_a_state(self, session: Session) -> None:
        for status in ("accepted", "reviewed", "approved", "x"):
            with pytest.raises(DocumentError, match="status"):
                add_set(session, status=status)

    def test_its_life_is_told_from_the_coupons(self, session: Session) -> None:
        more = {"date_bonded": "2026-03-02", "date_tested": "2026-03-16", "made_by": "J. M.", "tested_by": "P. F."}
        told = library.life(add_set(session, values={"coupons": coupons(**more)}))
        assert told == [
            ("Bonded", "2026-03-02", "J. M."),
            ("Conditioned", "indoors", ""),
            ("Tested", "2026-03-16", "P. F."),
        ]


class TestLots:
    def test_it_is_quarantined_until_it_is_released(self, session: Session) -> None:
        lot = add_lot(session)
        assert library.standing(lot) == "quarantined"
        value = add_value(session, add_set(session, values={"coupons": coupons(lot="24-117")}))
        library.put_forward(session, value.key, by=ANN)
        answer_all(session, value)
        with pytest.raises(DocumentError, match=r"Lot 24-117 .* is quarantined"):
            library.approve(session, value.key, by=BO)
        released = library.approve(session, "L-001", by=BO)
        assert (library.standing(released), released.approval and released.approval.by) == ("released", BO.name)
        assert library.approve(session, value.key, by=BO).status == "approved"

    def test_the_earlier_of_the_makers_day_and_that_after_opening_counts(self, session: Session) -> None:
        add_lot(session, days_after_opening=30)
        library.approve(session, "L-001", by=BO)
        opened = step(session, "L-001", "opened", on=day(-10))
        assert library.expiry(opened) == TODAY + timedelta(days=20)
        assert library.standing(opened) == "opened"
        assert library.lot_state(opened, TODAY + timedelta(days=21)) == "expired"
        long_ago = step(session, library.add(session, group="lots", name="old", values=LOT | {
            "number": "7", "days_after_opening": 5, "opened": day(-6)}).key, "rejected")  # fmt: skip
        assert library.standing(long_ago) == "rejected"  # a rejected lot is no less so for being old

    def test_a_retest_extends_it_and_is_looked_up(self, session: Session) -> None:
        add_lot(session, maker_expiry=day(-1))
        assert library.standing(library.get(session, "L-001")) == "quarantined"
        with pytest.raises(DocumentError, match="expired on"):
            library.approve(session, "L-001", by=BO)
        answer_all(session, add_set(session, values={"coupons": coupons(lot="24-117")}))
        answer_all(session, add_set(session, values={"coupons": coupons(lot="other")}))
        assert refused(session, "L-001", "extended", until=day(60)) == {"retest"}
        assert refused(session, "L-001", "extended", until="soon", retest="T-999") == {"until", "retest"}
        assert refused(session, "L-001", "extended", until=day(60), retest="T-001") == {"retest"}  # not accepted yet
        assert refused(session, "L-001", "extended", until=day(-2), retest="T-002") == {"until", "retest"}
        library.approve(session, "T-001", by=BO)
        extended = step(session, "L-001", "extended", until=day(60), retest="T-001")
        assert (library.standing(extended), library.expiry(extended)) == ("extended", TODAY + timedelta(days=60))
        assert ("Extended by retest", "T-001 rev 1", "") in library.life(extended)
        assert refused(session, "L-001", "extended", until=day(60), retest="T-001") == {"until"}  # no later day

    def test_a_day_to_come_and_steps_out_of_order_are_refused(self, session: Session) -> None:
        add_lot(session)
        assert "status" in refused(session, "L-001", "opened")
        library.approve(session, "L-001", by=BO)
        assert refused(session, "L-001", "opened", on=day(3)) == {"on"}
        assert refused(session, "L-001", "opened", on="12/03/26") == {"on"}

    def test_another_label_is_another_lot(self, session: Session) -> None:
        add_lot(session)
        library.approve(session, "L-001", by=BO)
        assert library.edit(session, "L-001", note="smudged label", made_by=ANN.name).status == "quarantined"
