"""Tested as / used as, for fasteners and materials: by what their records hold."""

from __future__ import annotations

from typing import Any

import pytest

from server import library
from server.library import Difference, Record
from server.storage import Session
from tests.library.evidence import ANN, BO, add_set, add_value, answer_all

SCREWED = {"product": "No. 8 screw", "surface_a_material": "softwood ply", "surface_b_material": "spruce"}


def document(**more: Any) -> dict[str, Any]:
    """A deck whose skin is screwed to its rib; nothing is glued."""
    pieces = {
        "skin": {"shape": "rectangle", "width": "300 mm", "depth": "18 mm", "at": [0, 195], "material": "ply"},
        "rib": {"shape": "rectangle", "width": 45, "depth": 195, "at": [0, 0], "material": "wood"},
    }
    joints = [{"between": ["skin", "rib"], "fastener": "screw", "spacing": 100}]
    return {"section": {"pieces": pieces, "joints": joints}, "service": {"temperature": [12, 28]}} | more


def fastener(session: Session, value: Record | None = None, **details: str) -> dict[str, Any]:
    links = {} if value is None else {"value:shear_resistance": value.itself}
    values = {} if value is not None else {"shear_resistance": 900}
    made = library.add(
        session, group="fasteners", name="No. 8 screw", values=values | {"diameter": 4.2}, source="s", links=links,
        details=details, made_by=ANN.name,
    )  # fmt: skip
    return {"record": made.key, "revision": made.revision}


def value_of(session: Session, property: str, details: dict[str, str], conditions: str = "", **values: Any) -> Record:
    one = {"load": "1000 N"} if property == "fastener shear" else {"stress": 30}
    coupons = [{name: f"{float(str(x).split()[0]) + i} {'N' if name == 'load' else 'MPa'}" for name, x in one.items()}
               for i in range(12)]  # fmt: skip
    behind = add_set(session, details=details, values={"property": property, "coupons": coupons})
    value = add_value(session, behind, values=values, details={"conditions": conditions} if conditions else {})
    library.put_forward(session, value.key, by=ANN)
    answer_all(session, value)
    return library.approve(session, value.key, by=BO)


def differing(session: Session, screw: dict[str, Any], **materials: Any) -> dict[str, Difference]:
    used = {
        "fasteners": {"screw": screw},
        "materials": {"ply": {"kind": "plywood"}, "wood": {"kind": "timber"}} | materials,
    }
    found = library.differences(session, document(), used)
    return {each.about: each for each in found if each.about != "typed values"}


def test_a_fastener_tested_as_it_is_used_differs_in_nothing(session: Session) -> None:
    value = value_of(session, "fastener shear", SCREWED)
    assert differing(session, fastener(session, value)).keys() == {"part joined"}  # "wood" is not called spruce
    spruce = library.add(session, group="materials", name="Spruce", values={"E": 11000}, source="x")
    wood = {"record": spruce.key, "revision": 1}
    ply = {"kind": "softwood ply"}
    assert differing(session, fastener(session, value), wood=wood, ply=ply) == {}


@pytest.mark.parametrize(
    ("details", "about"),
    [
        ({}, {"parts joined"}),
        ({"side_member": "plywood"}, {"parts joined"}),
        ({"side_member": "plywood", "main_member": "timber"}, set()),
        ({"side_member": "plywood", "main_member": "timber", "side_thickness": "18 mm"}, set()),
        ({"side_member": "plywood", "main_member": "timber", "side_thickness": "12.5 mm"}, {"side member's thickness"}),
        ({"side_member": "steel", "main_member": "timber"}, {"part joined"}),
        ({"side_member": "plywood", "main_member": "timber", "exposure": "indoors"}, {"exposure"}),
    ],
)
def test_a_fastener_with_typed_values_holds_for_the_parts_its_record_names(
    session: Session, details: dict[str, str], about: set[str]
) -> None:
    assert differing(session, fastener(session, **details)).keys() == about


def test_another_product_and_a_hotter_place_are_asked_about(session: Session) -> None:
    value = value_of(
        session, "fastener shear", {**SCREWED, "product": "Nail 2.7"}, service_temperature=[10, 20], conditions="dry"
    )
    found = differing(session, fastener(session, value), ply={"kind": "softwood ply"}, wood={"kind": "spruce"})
    assert found.keys() == {"product", "temperature", "conditions"}
    assert (found["temperature"].tested, found["temperature"].used) == ("stated for 10 to 20 °C", "12 to 28 °C")


@pytest.mark.parametrize(("of", "asked"), [("spruce C24", False), ("larch", True)])
def test_a_materials_value_is_of_that_material(session: Session, of: str, asked: bool) -> None:
    value = value_of(session, "bending strength", {"surface_a_material": of})
    made = library.add(
        session, group="materials", name="Spruce C24", values={"E": 11000}, source="x",
        links={"value:strengths.bending": value.itself},
    )  # fmt: skip
    screw = fastener(session, side_member="plywood", main_member="spruce")
    found = differing(session, screw, wood={"record": made.key, "revision": 1})
    assert ("material" in found) is asked


def test_what_only_presses_is_compared_with_nothing(session: Session) -> None:
    pressed = document()
    pressed["section"]["joints"][0] |= {"adhesive": "glue"}
    used = {"fasteners": {"screw": fastener(session)}, "materials": {}}
    assert [each.about for each in library.differences(session, pressed, used)] == ["parts joined"]
