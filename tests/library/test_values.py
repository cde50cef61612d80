"""Values from coupons: found, never raised, approved by another person, frozen, and stopped where they must be."""

from __future__ import annotations

import sqlite3
from collections.abc import Callable
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from sqlalchemy import Engine

from server import checks, documents, library, people
from server.errors import DocumentError
from server.library import NotFoundError, Record
from server.people import APPROVES, KEEPS_THE_BOOK, PREPARES, READS, THIS_MACHINE, Person
from server.storage import Session
from tests.library.evidence import (
    ANN,
    BO,
    NOW,
    ROLLING,
    add_bond_on,
    add_set,
    add_value,
    answer_all,
    approved_value,
    coupons,
)
from tests.library.samples import document


def faults(call: Callable[..., Any], *arguments: Any, **named: Any) -> dict[str, str]:
    with pytest.raises(DocumentError) as caught:
        call(*arguments, **named)
    return {fault.path: fault.message for fault in caught.value.faults}


def abouts(session: Session, record: Record, by: Person | None = None) -> set[str]:
    return {each.about for each in library.obstacles(session, record, by)}


def test_a_value_is_what_the_check_of_its_coupons_gives(session: Session) -> None:
    behind = add_set(session)
    value = add_value(session, behind)
    result = checks.run(documents.read({"format": "bondwright/1", "kind": "coupons", "coupons": coupons()}))
    assert value.values["value"] == result["characteristic"]
    assert value.values["found"]["n"] == 12
    assert value.status == "draft"
    assert value.details["product"] == "Brackwater R2"  # what was tested


def test_a_value_may_be_typed_lower_than_the_coupons_show_but_never_higher(session: Session) -> None:
    behind = add_set(session)
    assert add_value(session, behind, values={"value": "1.2 MPa"}).values["value"] == "1.2 MPa"
    assert (
        "more than the coupons show" in faults(add_value, session, behind, values={"value": "1.4 MPa"})["values.value"]
    )


def test_stiffnesses_take_the_mean(session: Session) -> None:
    behind = add_set(session, values={"property": "bond shear modulus"})
    assert add_value(session, behind).values["value"] == pytest.approx(sum(ROLLING) / 12)


@pytest.mark.parametrize(
    ("n", "status"), [(2, "indicative"), (4, "indicative"), (5, "provisional"), (12, "provisional")]
)
def test_the_number_of_coupons_decides_what_a_value_counts_as(session: Session, n: int, status: str) -> None:
    value = add_value(session, add_set(session, ROLLING[:n]))
    found = library.put_forward(session, value.key, by=ANN)
    assert (found.status, found.put_forward) == (status, True)
    assert ("number of coupons" in abouts(session, found)) == (n < 10)
    assert [each.key for each in library.waiting(session)] == ([value.key] if n >= 5 else [])


def test_the_rules_are_the_shops(session: Session) -> None:
    library.set_rules(session, provisional_from=3, approved_from=6, adhesive_share=5, made_by="Ann")
    value = add_value(session, add_set(session, ROLLING[:6]))
    assert "number of coupons" not in abouts(session, value)
    assert "failure pattern" in abouts(session, value)  # 10 % on average
    wrong = faults(library.set_rules, session, provisional_from=9, approved_from=6, adhesive_share=500)
    assert set(wrong) == {"approved_from", "adhesive_share"}


def test_approval_wants_every_question_answered_by_somebody_else(session: Session) -> None:
    value = add_value(session, add_set(session))
    asked = {each.about for each in library.questions(session, value)}
    assert {"outlier", "fit"} <= asked
    assert {"outlier", "fit"} <= set(faults(library.approve, session, value.key, by=BO))
    answer_all(session, value)
    assert "another person" in faults(library.approve, session, value.key, by=ANN)["person"]
    found = library.approve(session, value.key, by=BO, now=NOW)
    assert (found.status, found.revision, found.in_force) == ("approved", 1, 1)
    assert found.approval is not None
    assert (found.approval.by, found.approval.at) == (BO.name, "2026-12-01T12:00:00Z")
    assert library.waiting(session) == []


def test_who_entered_the_coupons_does_not_approve_their_value(session: Session) -> None:
    value = add_value(session, add_set(session, made_by=BO.name))
    answer_all(session, value)
    assert "coupons behind it" in faults(library.approve, session, value.key, by=BO)["person"]


def test_only_a_person_with_the_role_approves(session: Session) -> None:
    value = add_value(session, add_set(session))
    answer_all(session, value)
    for roles in ({READS}, {PREPARES}):
        someone = Person(3, "Cy", frozenset(roles))
        assert "may not approve" in faults(library.approve, session, value.key, by=someone)["person"]


def test_a_one_person_shop_names_its_outside_checker_with_the_day(session: Session) -> None:
    value = add_value(session, add_set(session))
    answer_all(session, value)
    approve = lambda **named: library.approve(session, value.key, now=NOW, **named)  # noqa: E731
    assert "person" in faults(approve, by=THIS_MACHINE)
    assert "checked_on" in faults(approve, by=THIS_MACHINE, outside_checker="D. Outside", checked_on="03/04/25")
    assert (
        "still to come" in faults(approve, by=ANN, outside_checker="D. Outside", checked_on="2030-01-01")["checked_on"]
    )
    assert (
        "somebody else"
        in faults(approve, by=ANN, outside_checker="ann example", checked_on="2026-11-30")["outside_checker"]
    )
    found = approve(by=ANN, outside_checker="D. Outside", checked_on="2026-11-30")
    assert found.approval is not None
    assert (found.approval.outside_checker, found.approval.checked_on) == ("D. Outside", "2026-11-30")


def test_where_another_may_approve_there_is_no_outside_checker(session: Session) -> None:
    people.add(session, name="Eve Else", sign_in_name="eve", roles=(APPROVES, KEEPS_THE_BOOK))
    value = add_value(session, add_set(session))
    answer_all(session, value)
    told = faults(
        library.approve,
        session,
        value.key,
        by=Person(9, ANN.name, ANN.roles),
        outside_checker="D. Out",
        checked_on="2026-11-30",
        now=NOW,
    )
    assert "Eve Else may do this here" in told["outside_checker"]
    assert "before people sign in" in faults(library.approve_invented, session, value.key, who="X")["status"]


@pytest.mark.parametrize("group", ["bonds", "materials", "values"])
def test_nobody_enters_approved(session: Session, group: str) -> None:
    told = faults(library.add, session, group=group, name="x", values={}, status="approved", source="y")
    assert "another person approve" in told["status"]


def test_an_edit_of_an_approved_value_begins_as_a_draft_and_the_old_stays_in_force(session: Session) -> None:
    value = approved_value(session)
    found = library.edit(session, value.key, note="new", made_by=ANN.name)
    assert (found.revision, found.status, found.in_force) == (2, "draft", 1)
    assert library.get(session, value.key, 1).status == "approved"
    answer_all(session, found)
    library.approve(session, value.key, by=BO)
    assert library.standing(library.get(session, value.key, 1)) == "superseded"


def test_a_new_revision_of_the_set_asks_for_a_new_value(session: Session) -> None:
    behind = add_set(session)
    value = add_value(session, behind)
    library.exclude(session, behind.key, 7, cause="closed at 19 min", prevented_by="timer on the press", by=ANN)
    assert "coupon set" in abouts(session, value)
    again = library.edit(session, value.key, links={"set": (behind.key, 2)}, made_by=ANN.name)
    assert again.values["found"]["n"] == 11
    assert again.values["value"] > value.values["value"]
    assert again.values["found"]["characteristic_of_all"] == pytest.approx(value.values["found"]["characteristic"])


def test_peeled_coupons_and_unread_ones_cannot_be_approved(session: Session) -> None:
    peeled = add_value(session, add_set(session, values={"coupons": coupons(adhesive=40)}))
    assert "40 % of the bonded area" in "".join(each.text for each in library.obstacles(session, peeled))
    unread = add_value(session, add_set(session, values={"coupons": [{"stress": x} for x in ROLLING]}))
    assert "failure pattern" in abouts(session, unread)


def test_a_data_sheet_is_indicative_for_ever(session: Session) -> None:
    values = {"property": "bond shear", "origin": "data sheet", "value": "18 MPa"}
    assert "data sheet" in faults(library.add, session, group="values", name="x", values=values)["source"]
    value = library.add(session, group="values", name="x", values=values, source="Data sheet 4", made_by=ANN.name)
    assert library.put_forward(session, value.key, by=ANN).status == "indicative"
    assert "origin" in faults(library.approve, session, value.key, by=BO)
    bond = add_bond_on(session, value, approve=False)
    read = documents.read(document(record=bond.key, revision=1))
    assert checks.run(library.resolve(session, read))["verdict"] == "not proven"


def test_a_published_value_is_approved_without_coupons(session: Session) -> None:
    values = {"property": "bending strength", "origin": "published", "value": "24 MPa"}
    value = library.add(session, group="values", name="C24", values=values, source="EN 338, Table 1", made_by=ANN.name)
    assert library.put_forward(session, value.key, by=ANN).status == "provisional"
    assert library.approve(session, value.key, by=BO).status == "approved"
    wood = library.add(
        session,
        group="materials",
        name="C24",
        values={"E": 11000},
        links={"value:strengths.bending": value.itself},
        made_by=ANN.name,
    )
    assert library.assembled(session, wood)["strengths"] == {"bending": "24 MPa"}


@pytest.mark.parametrize(
    ("values", "path"),
    [
        ({"property": "glue strength"}, "values.property"),
        ({"origin": "hearsay"}, "values.origin"),
        ({"value": "4 kN"}, "values.value"),
        ({"value": 0}, "values.value"),
        ({"value": None}, "values.value"),
        ({"thickness": ["0.1 mm"]}, "values.thickness[1]"),
        ({"flavour": 1}, "values.flavour"),
    ],
)
def test_a_bad_value_is_named_by_its_field(session: Session, values: dict[str, Any], path: str) -> None:
    good = {"property": "bond shear", "origin": "published", "value": "4 MPa"}
    assert path in faults(library.add, session, group="values", name="x", values=good | values, source="y")


def test_a_service_temperature_near_softening_is_asked_about(session: Session) -> None:
    extra = {"service_temperature": [-10, 50], "glass_transition": "65 °C"}
    value = add_value(session, add_set(session), values=extra)
    assert "glass transition" in {each.about for each in library.questions(session, value)}
    cool = add_value(session, add_set(session), values=extra | {"service_temperature": [-10, 45]})
    assert "glass transition" not in {each.about for each in library.questions(session, cool)}


def test_a_value_with_its_own_statistic_is_asked_what_that_raises(session: Session) -> None:
    behind = add_set(session)
    value = add_value(session, behind, values={"statistic": {"distribution": "nonparametric", "coverage": 0.85}})
    assert "fit" not in {each.about for each in library.questions(session, value)}
    assert "fit" in {each.about for each in library.questions(session, behind)}


def test_an_answer_is_kept_by_name_and_offered_again_on_the_next_revision(session: Session) -> None:
    behind = add_set(session)
    question = library.questions(session, behind)[0]
    assert "Nothing was written" in faults(library.answer, session, behind.key, 1, question.key, " ", by=ANN)["answer"]
    library.answer(session, behind.key, 1, question.key, "first", by=ANN)
    library.answer(session, behind.key, 1, question.key, "second", by=BO, now=NOW)
    found = library.questions(session, behind)[0]
    assert (found.answer, found.answered_by, found.open) == ("second", BO.name, False)
    later = library.questions(session, library.edit(session, behind.key, note="n", made_by=ANN.name))[0]
    assert (later.open, later.earlier) == (True, "second")
    with pytest.raises(NotFoundError, match="no such question"):
        library.answer(session, behind.key, 1, "nonsense", "x", by=ANN)


@pytest.mark.parametrize("status", ["on hold", "withdrawn"])
def test_a_value_that_is_stopped_stops_the_bond_that_pins_it(session: Session, status: str) -> None:
    value = approved_value(session)
    add_bond_on(session, value)
    resolved = library.resolve(session, documents.read(document())).adhesive("glue")
    assert (resolved.status, resolved.shear_strength) == ("approved", value.values["value"])
    assert "reason" in faults(library.set_status, session, value.key, status, by=BO, reason=" ")
    library.set_status(session, value.key, status, by=BO, reason="lot in doubt")
    assert library.resolve(session, documents.read(document())).adhesive("glue").status == status


def test_a_check_carries_the_way_back_to_the_coupons(session: Session) -> None:
    value = approved_value(session)
    add_bond_on(session, value)
    used = checks.run(library.resolve(session, documents.read(document())))["values_used"]["adhesives"]["glue"]  # type: ignore[index]
    lineage = used["lineage"]["shear_strength"]
    assert (lineage["record"], lineage["revision"], lineage["status"]) == (value.key, 1, "approved")
    assert (lineage["coupon_set"], lineage["coupon_set_revision"], lineage["coupons"]) == ("T-001", 1, 12)
    assert lineage["approved_by"] == BO.name
    assert "log-normal" in lineage["statistic"]


def test_nobody_types_a_lineage(session: Session) -> None:
    lineage = {"shear_strength": {"record": "V-1", "revision": 1, "status": "approved"}}
    with pytest.raises(DocumentError, match="lineage"):
        documents.read(document(shear_strength=4, lineage=lineage))


def test_a_pin_is_of_its_own_property_and_never_beside_a_typed_number(session: Session) -> None:
    value = approved_value(session)
    told = faults(add_bond_on, session, value, links={"value:peel_strength": value.itself})
    assert "pull-off is wanted" in told["links.value:peel_strength"]
    told = faults(add_bond_on, session, value, values={"shear_strength": 9})
    assert "keep one of them" in told["values.shear_strength"]
    told = faults(add_bond_on, session, value, links={"value:shear_strength": ("V-404", 1), "colour": value.itself})
    assert set(told) == {"links.value:shear_strength", "links.colour"}


def test_acts_answers_and_links_are_never_changed(session: Session) -> None:
    add_bond_on(session, approved_value(session))
    session.rollback()
    book = session.get_bind()
    assert isinstance(book, Engine)
    with sqlite3.connect(str(book.url.database)) as raw:
        for table in ("record_acts", "record_links", "answers"):
            assert raw.execute(f"SELECT count(*) FROM {table}").fetchone()[0]
            for act in (f"UPDATE {table} SET rowid = rowid + 1000", f"DELETE FROM {table}"):
                with pytest.raises(sqlite3.IntegrityError, match="a saved row of"):
                    raw.execute(act)


@settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(stresses=st.lists(st.floats(0.5, 50).map(lambda x: round(x, 3)), min_size=3, max_size=14), data=st.data())
def test_a_value_follows_its_coupons(session: Session, stresses: list[float], data: st.DataObject) -> None:
    """Order does not matter, twice the stress is twice the value, and it never lies above the mean."""
    mixed = data.draw(st.permutations(stresses))
    found = [library.value_draft(add_set(session, each)).shown for each in (stresses, mixed, [2 * x for x in stresses])]
    if found[0] is None:
        return
    assert found[1] == pytest.approx(found[0], rel=1e-9)
    assert found[2] == pytest.approx(2 * found[0], rel=1e-9)
    assert found[0] <= sum(stresses) / len(stresses)
