"""The knock-down chain: every factor once, each with its source; a retention from a pair of sets counted once."""

from __future__ import annotations

from typing import Any

import pytest

from server import checks, documents, library
from server.errors import DocumentError
from server.library import Factor, Link, Record
from server.storage import Session
from tests.library.evidence import add_bond_on, add_set, add_value, answer_all, approved_value
from tests.library.samples import document

# methacrylate on aluminium and spruce, dry and after seven wet and warm cycles [MPa] (invented demo numbers)
DRY = (7.8, 8.4, 7.1, 8.0, 6.6, 7.5, 8.2, 7.3, 4.2)
CYCLED = (5.1, 6.0, 4.4, 5.5, 3.9, 4.8, 5.7, 4.6)
MOISTURE = {"name": "moisture", "value": 0.8, "source": "shop rule 4", "evidence": "report T-9"}


@pytest.fixture
def pair(session: Session) -> tuple[Record, Record]:
    return add_set(session, DRY, name="dry"), add_set(session, CYCLED, name="cycled")


def faults(session: Session, value: Record, chain: list[Any]) -> dict[str, str]:
    with pytest.raises(DocumentError) as caught:
        add_bond_on(session, value, approve=False, chain=chain)
    return {fault.path: fault.message for fault in caught.value.faults}


def retention(dry: Record, conditioned: Record, **more: Any) -> dict[str, Any]:
    pair = {"dry": list(vars(dry.itself).values()), "conditioned": list(vars(conditioned.itself).values())}
    return {"name": "wet and warm", "source": "own tests", **pair, **more}


def test_the_factors_reach_the_check_and_stand_in_one_line(session: Session) -> None:
    value = approved_value(session)
    fatigue = {"name": "fatigue", "value": 0.4, "source": "guide 7", "evidence": "table 3"}
    bond = add_bond_on(session, value, chain=[MOISTURE, fatigue])
    assert (
        library.multiplication(bond.chain, "1.28 MPa") == "1.28 MPa × 0.8 (moisture) × 0.4 (fatigue) = 1.28 MPa × 0.32"
    )
    result = checks.run(library.resolve(session, documents.read(document())))
    limit = next(each for each in result["joints"][0]["limits"] if each["what"] == "adhesive glue")  # type: ignore[index]
    assert limit["factors"] == {"moisture": 0.8, "fatigue": 0.4}
    by_hand = value.values["value"] * 0.6 * 0.8 * 0.4 / 2.5
    assert limit["resistance"] == pytest.approx(by_hand, rel=1e-9)


@pytest.mark.parametrize(
    ("chain", "path", "words"),
    [
        ([MOISTURE, MOISTURE | {"name": "Moisture"}], "chain[1].name", "stands once"),
        ([MOISTURE | {"source": ""}], "chain[0].source", "where the factor comes from"),
        ([MOISTURE | {"evidence": ""}], "chain[0].evidence", "What shows it"),
        ([{"name": "wet", "source": "x", "evidence": "y"}], "chain[0].value", "enter the factor"),
        ([MOISTURE | {"value": 0}], "chain[0].value", "not accepted"),
        ([MOISTURE | {"colour": 1}], "chain[0].colour", "not a name"),
        ([{"name": "wet", "source": "x", "dry": ["T-1", 1]}], "chain[0].conditioned", "a dry and a conditioned set"),
        ([{"name": f"f{n}", "value": 0.9, "source": "x", "evidence": "y"} for n in range(21)], "chain", "at most 20"),
    ],
)
def test_a_bad_chain_is_named(session: Session, chain: list[Any], path: str, words: str) -> None:
    assert words in faults(session, add_value(session, add_set(session)), chain)[path]


def test_a_factor_typed_among_the_values_is_not_multiplied_again(session: Session) -> None:
    value = add_value(session, add_set(session))
    with pytest.raises(DocumentError, match="stands once"):
        add_bond_on(session, value, approve=False, values={"factors": {"Moisture": 0.8}}, chain=[MOISTURE])


def test_a_retention_is_the_lower_ratio_of_the_pair(session: Session, pair: tuple[Record, Record]) -> None:
    dry, cycled = pair
    found = library.retention_of(session, dry.itself, cycled.itself)
    assert found.of_means == pytest.approx((sum(CYCLED) / 8) / (sum(DRY) / 9))
    assert found.of_means == pytest.approx(0.69, abs=0.005)  # the mean retention the demo states
    assert found.factor == min(1.0, found.of_means, found.of_characteristics or 1.0)
    bond = add_bond_on(session, add_value(session, dry), approve=False, chain=[retention(dry, cycled)])
    assert bond.chain == (Factor("wet and warm", found.factor, "own tests", "", dry.itself, cycled.itself),)


def test_a_pair_is_multiplied_once_and_never_raises(session: Session, pair: tuple[Record, Record]) -> None:
    dry, cycled = pair
    value = add_value(session, dry)
    twice = [retention(dry, cycled), retention(dry, cycled, name="again")]
    assert "multiplied already" in faults(session, value, twice)["chain[1]"]
    assert "more than the pair shows" in faults(session, value, [retention(dry, cycled, value=0.9)])["chain[0].value"]
    assert library.retention_of(session, cycled.itself, dry.itself).factor <= 1
    assert "both the dry and" in faults(session, value, [retention(dry, dry)])["chain[0]"]


def test_a_value_of_conditioned_coupons_does_not_lose_it_twice(session: Session, pair: tuple[Record, Record]) -> None:
    dry, cycled = pair
    told = faults(session, add_value(session, cycled), [retention(dry, cycled)])
    assert "count the loss twice" in told["chain[0]"]


def test_a_set_of_another_property_is_no_partner(session: Session, pair: tuple[Record, Record]) -> None:
    other = add_set(session, CYCLED, values={"property": "pull-off"})
    with pytest.raises(DocumentError, match="A pair measures the same"):
        library.retention_of(session, pair[0].itself, other.itself)
    with pytest.raises(DocumentError, match="no coupon set"):
        library.retention_of(session, pair[0].itself, add_value(session, other).itself)


def test_an_edit_keeps_the_chain_and_the_pins(session: Session, pair: tuple[Record, Record]) -> None:
    dry, cycled = pair
    value = add_value(session, dry)
    answer_all(session, value)
    bond = add_bond_on(session, value, approve=False, chain=[retention(dry, cycled), MOISTURE])
    again = library.edit(session, bond.key, note="n")
    assert (again.chain, again.links) == (bond.chain, bond.links)
    assert library.edit(session, bond.key, chain=[]).chain == ()
    assert Link(bond.key, 1) in {link for _, link in library.links_to(session, cycled.key)}
