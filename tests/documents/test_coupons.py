"""Reading coupon documents: each fault names its coupon and field, says what was given and what is wanted."""

from __future__ import annotations

import copy
import json
import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server import documents
from server.errors import DocumentError

GOOD = {
    "format": "bondwright/1",
    "kind": "coupons",
    "title": "Lap shear, primed",
    "basis": {"anything": "is ignored"},
    "coupons": [
        {
            "load": "3.2 kN",
            "width": 25,
            "length": "12.5 mm",
            "failure": {"adhesive": "10 %", "cohesive": 80, "substrate": 10},
            "batch": "24-117",
            "thickness": "0.3 mm",
            "date_bonded": "2025-03-28",
            "date_tested": "2025-04-03",
            "temperature": "21 degC",
            "lot": "H-88",
            "made_by": "lead hand",
            "tested_by": "bench 2",
            "preparation": "primed",
            "name": "A-17",
            "note": "",
        },
        {"gauge": "180 bar", "ram_area": "2 cm2", "area": 312.5},
        {"stress": "900 psi", "excluded": "blasted the evening before", "prevented_by": "four-hour window"},
    ],
    "statistic": {"distribution": "normal", "coverage": "95 %", "confidence": 0.75, "scatter": "unknown"},
}


def changed(path, value):
    document = copy.deepcopy(GOOD)
    *parents, last = path
    place = document
    for each in parents:
        place = place[each]
    if value is ...:
        del place[last]
    else:
        place[last] = value
    return document


def faults(document):
    with pytest.raises(DocumentError) as caught:
        documents.read(document)
    return [(fault.path, fault.message) for fault in caught.value.faults]


def test_a_good_document_is_read_in_newtons_and_millimetres():
    document = documents.read(json.dumps(GOOD))
    assert isinstance(document, documents.CouponsDocument)
    first, second, third = document.coupons
    assert (first.load, first.width, first.length, first.thickness) == (3200.0, 25.0, 12.5, 0.3)
    assert first.failure == documents.Failure(adhesive=10, cohesive=80, substrate=10)
    assert str(first.date_tested) == "2025-04-03"
    assert (second.gauge, second.ram_area) == (18.0, 200.0)
    assert third.excluded == "blasted the evening before"
    assert not third.counts
    assert third.stress == pytest.approx(6.2052816, rel=1e-6)
    assert document.statistic.known_scatter is None
    assert document.statistic.coverage == 0.95
    assert document.raw == GOOD


def test_what_is_left_out_has_its_default():
    document = documents.read({"format": "bondwright/1", "kind": "coupons", "coupons": [{"stress": 5}]})
    statistic = document.statistic
    assert (statistic.distribution, statistic.coverage, statistic.confidence) == ("lognormal", 0.95, 0.75)
    assert (statistic.floor, statistic.level) == (0.05, 0.05)


@pytest.mark.parametrize(
    ("path", "value", "field", "said"),
    [
        (("coupons", 0, "load"), "5 MPa", "coupons[0].load", "is a stress, and a load is asked for"),
        (("coupons", 0, "load"), "5 kg", "coupons[0].load", "write 5 kgf"),
        (("coupons", 0, "load"), -3, "coupons[0].load", "at least 0"),
        (("coupons", 0, "load"), 1e10, "coupons[0].load", "which no coupon has"),
        (("coupons", 0, "load"), ..., "coupons[0].load", "a load with area"),
        (("coupons", 0, "width"), ..., "coupons[0].width", "enter the width of the bonded area"),
        (("coupons", 0, "width"), "4 kg", "coupons[0].width", "a length"),
        (("coupons", 0, "width"), 0, "coupons[0].width", "greater than 0"),
        (("coupons", 0, "area"), 31.25, "coupons[0].area", "width times length makes 312.5 mm2"),
        (("coupons", 0, "stress"), 7, "coupons[0].load", "'stress' is given too"),
        (("coupons", 0, "failure", "cohesive"), 70, "coupons[0].failure", "coupon 1 (A-17) total 90"),
        (("coupons", 0, "failure", "cohesive"), 101, "coupons[0].failure.cohesive", "from 0 to 100"),
        (("coupons", 0, "failure", "wood"), 3, "coupons[0].failure.wood", "not a name of the contract"),
        (("coupons", 0, "date_tested"), "2025-03-01", "coupons[0].date_tested", "before the day of bonding"),
        (("coupons", 0, "date_bonded"), "03/04/25", "coupons[0].date_bonded", "year-month-day"),
        (("coupons", 0, "date_bonded"), "2025-02-30", "coupons[0].date_bonded", "no day of the calendar"),
        (("coupons", 0, "prevented_by"), "a timer", "coupons[0].prevented_by", "is not excluded"),
        (("coupons", 1, "ram_area"), ..., "coupons[1].ram_area", "needs the area of the ram"),
        (("coupons", 1, "gauge"), ..., "coupons[1].load", "gauge pressure"),
        (("coupons", 1, "area"), ..., "coupons[1].area", "needs the bonded area"),
        (("coupons", 2, "excluded"), " ", "coupons[2].excluded", "for a cause"),
        (("coupons", 2, "excluded"), True, "coupons[2].excluded", "a text"),
        (("coupons", 2, "stress"), 1e-12, "coupons[2].stress", "which no coupon has"),
        (("coupons", 2), 6.2, "coupons[2]", "an object with load"),
        (("coupons",), [], "coupons", "at least 1 entry"),
        (("coupons",), [{"stress": 5}] * 2001, "coupons", "at most 2000"),
        (("coupons",), [{"stress": 5, "excluded": "cause"}], "coupons", "every coupon is excluded"),
        (("coupons",), ..., "coupons", "missing"),
        (("statistic", "distribution"), "gauss", "statistic.distribution", "'lognormal'"),
        (("statistic", "coverage"), 95, "statistic.coverage", "0.95 or 95 %"),
        (("statistic", "confidence"), 1.0, "statistic.confidence", "from 0.5 to 0.9999"),
        (("statistic", "scatter"), 12, "statistic.scatter", "0.12 or 12 %"),
        (("statistic", "scatter"), "known", "statistic.scatter", "0.12"),
        (("statistic", "level"), 0.07, "statistic.level", "one of 0.25, 0.1, 0.05, 0.025, 0.01"),
        (("statistic", "k"), 2.1, "statistic.k", "not a name of the contract"),
    ],
)
def test_one_fault_names_its_coupon_and_field(path, value, field, said):
    ((found, message),) = faults(changed(path, value))
    assert found == field
    assert said.lower() in message.lower()


@pytest.mark.parametrize("distribution", ["lognormal", "weibull"])
def test_a_strength_of_nothing_has_no_logarithm(distribution):
    document = {"format": "bondwright/1", "kind": "coupons", "coupons": [{"load": 0, "area": 5}, {"stress": 4}]}
    document["statistic"] = {"distribution": distribution}
    ((path, message),) = faults(document)
    assert path == "coupons[0].load"
    assert "no logarithm" in message
    document["statistic"] = {"distribution": "normal"}
    assert documents.read(document).coupons[0].load == 0


@pytest.mark.parametrize(
    ("statistic", "field"),
    [
        ({"distribution": "weibull", "scatter": 0.1}, "statistic.scatter"),
        ({"distribution": "nonparametric", "scatter": 0.1}, "statistic.scatter"),
        ({"distribution": "weibull", "least_scatter": 0.05}, "statistic.least_scatter"),
        ({"distribution": "lognormal", "least_scatter": 0.01}, "statistic.least_scatter"),
    ],
)
def test_what_a_distribution_does_not_use_is_refused(statistic, field):
    ((path, _),) = faults(changed(("statistic",), statistic))
    assert path == field


def test_every_fault_is_said_at_once():
    document = changed(("coupons", 0, "load"), "5 MPa")
    document["coupons"][1]["area"] = ...
    document["coupons"][1] = {"gauge": "180 bar"}
    document["coupons"][2]["failure"] = {"adhesive": 20}
    document["statistic"] = {"distribution": "weibull", "scatter": 0.1, "coverage": 2}
    assert [path for path, _ in faults(document)] == [
        "coupons[0].load",
        "statistic.coverage",
        "coupons[1].ram_area",
        "coupons[1].area",
        "coupons[2].failure",
    ]


def test_three_thirds_total_100_as_people_write_them():
    document = changed(("coupons", 0, "failure"), {"adhesive": 33.3, "cohesive": 33.3, "substrate": 33.3})
    assert documents.read(document).coupons[0].failure.total == pytest.approx(99.9)


def test_the_schema_is_plain_json_and_fields_have_their_kinds():
    json.dumps(documents.schema("coupons"), allow_nan=False)
    assert documents.kind_of("coupons[*].load", kind="coupons") == "force"
    assert documents.kind_of("coupons[0].gauge", kind="coupons") == "stress"
    assert documents.kind_of("statistic.coverage", kind="coupons") == "factor"


VALUES = st.one_of(
    st.none(),
    st.booleans(),
    st.integers(),
    st.floats(),
    st.text(max_size=8),
    st.sampled_from(["5 mm", "2 kN", "80 %"]),
    st.lists(st.integers(), max_size=2),
    st.dictionaries(st.text(max_size=3), st.integers(), max_size=2),
)
PLACES = [
    *((("coupons", 0, name)) for name in documents.Coupon.model_fields),
    *((("coupons", 0, "failure", name)) for name in documents.Failure.model_fields),
    *((("statistic", name)) for name in documents.Statistic.model_fields),
    ("coupons",), ("coupons", 0), ("statistic",), ("display",), ("title",),
]  # fmt: skip


@settings(max_examples=300, deadline=None)
@given(st.sampled_from(PLACES), VALUES)
def test_any_value_in_any_place_is_read_or_refused(path, value):
    try:
        document = documents.read(changed(path, value))
    except DocumentError:
        return
    assert all(math.isfinite(coupon.load or 0.0) for coupon in document.coupons)
