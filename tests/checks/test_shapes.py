"""Members of shaped pieces through the whole check: joints, contacts, holes, and what is refused by name."""

from __future__ import annotations

import math
import time

import pytest

from server import checks, documents
from server.errors import DocumentError
from tests.checks.made import Raw

ALUMINIUM = {"E": 70000, "G": 26000, "density": 2700, "strengths": {"bending": 200, "shear": 110}}


def member(pieces: Raw, joints: list[Raw], **more: object) -> Raw:
    return {
        "format": "bondwright/1",
        "kind": "member",
        "basis": {"method": "allowable", "safety_factor": 2},
        "materials": {"alu": ALUMINIUM, "steel": {**ALUMINIUM, "E": 210000, "G": 81000, "density": 7850}},
        "adhesives": {"paste": {"shear_strength": 18, "thickness": 0.3}},
        "section": {
            "pieces": {name: {"material": "alu", **piece} for name, piece in pieces.items()},
            "joints": [{"adhesive": "paste", **joint} for joint in joints],
        },
        "member": {"length": 2000, "supports": [{"at": 0, "kind": "pin"}, {"at": 2000, "kind": "pin"}]},
        "loads": {"live": [{"kind": "line", "from": 0, "to": 2000, "value": 4}]},
        **more,
    }


def run(raw: Raw) -> Raw:
    return checks.run(documents.read(raw))


def faults(raw: Raw) -> dict[str, str]:
    with pytest.raises(DocumentError) as error:
        run(raw)
    return {fault.path: fault.message for fault in error.value.faults}


def test_a_plate_on_a_tube_is_glued_on_the_flat_between_the_corners():
    raw = member(
        {
            "tube": {"shape": "tube", "width": 100, "depth": 60, "wall": 4, "corner_radius": 8, "at": [0, 0]},
            "plate": {"shape": "rectangle", "width": 120, "depth": 6, "at": [-10, 60.3]},
        },
        [{"between": ["tube", "plate"]}],
    )
    result = run(raw)
    joint = result["joints"][0]
    assert joint["contact_length"] == pytest.approx(84)
    corner = (1 - math.pi / 4) * (8**2 - 4**2)
    tube = 100 * 60 - 92 * 52 - 4 * corner
    plate, lift = 120 * 6, 63.3 - 30.0
    assert result["section"]["area"] == pytest.approx(tube + plate)
    first = plate * lift * tube / (tube + plate)
    assert joint["first_moment"] == pytest.approx(first)
    assert joint["shear_flow"] == pytest.approx(4000 * first / (result["section"]["EI"] / 70000))
    assert joint["split"] == "cut"
    assert len(result["drawing"]["pieces"][0]["holes"]) == 1


def test_round_tubes_one_in_the_other_are_one_joint_all_round():
    """Bonded concentric tubes bend about one centre: no first moment, so no flow; held sideways changes nothing."""
    raw = member(
        {
            "outer": {"shape": "round", "diameter": 80, "wall": 5, "at": [0, 0]},
            "inner": {"shape": "round", "diameter": 69.4, "wall": 4, "at": [5.3, 5.3]},
        },
        [{"between": ["outer", "inner"]}],
    )
    joint = run(raw)["joints"][0]
    assert joint["contact_length"] == pytest.approx(math.pi * (70 + 69.4) / 2)
    assert joint["shear_flow"] == pytest.approx(0, abs=1e-6)


def test_a_polygon_stands_where_its_points_are_unless_it_is_placed():
    points = [[40, 10], [90, 10], [90, 40]]
    free = run(member({"p": {"shape": "polygon", "points": points}}, []))
    assert free["section"]["neutral_axis"] == pytest.approx([40 + 100 / 3, 20])
    put = run(member({"p": {"shape": "polygon", "points": points, "at": [0, 0]}}, []))
    assert put["section"]["neutral_axis"] == pytest.approx([100 / 3, 10])
    turned = run(member({"p": {"shape": "polygon", "points": points, "turn": 90}}, []))
    assert turned["section"]["neutral_axis"] == pytest.approx([40 + 100 / 3, 20])
    assert turned["section"]["EI"] == pytest.approx(free["section"]["EI_lateral"])


def test_a_core_inside_the_hole_of_a_piece_is_legal_and_a_mitred_frame_closes():
    frame = [[0, 0], [100, 0], [100, 80], [0, 80]]
    hole = [[10, 10], [90, 10], [90, 70], [10, 70]]
    core = {"shape": "rectangle", "width": 80, "depth": 60, "at": [10, 10], "material": "steel"}
    joints = [{"between": ["frame", "core"], "segment": n} for n in (1, 2, 3, 4)]
    result = run(member({"frame": {"shape": "polygon", "points": frame, "holes": [hole]}, "core": core}, joints))
    assert [j["contact_length"] for j in result["joints"]] == [80, 60, 60, 80]
    mitred = {
        "bottom": {"shape": "polygon", "points": [[0, 0], [100, 0], [90, 10], [10, 10]]},
        "right": {"shape": "polygon", "points": [[100, 0], [100, 80], [90, 70], [90, 10]]},
        "top": {"shape": "polygon", "points": [[100, 80], [0, 80], [10, 70], [90, 70]]},
        "left": {"shape": "polygon", "points": [[0, 80], [0, 0], [10, 10], [10, 70]]},
    }
    ring = list(mitred)
    result = run(member(mitred, [{"between": [a, b]} for a, b in zip(ring, ring[1:] + ring[:1], strict=True)]))
    assert [j["contact_length"] for j in result["joints"]] == pytest.approx([math.hypot(10, 10)] * 4)
    assert [j["split"] for j in result["joints"]] == ["symmetry"] * 4


SQUARE = {"shape": "rectangle", "width": 50, "depth": 50, "at": [0, 0]}
I_PROFILE = {"shape": "i", "width": 5, "depth": 40, "web": 1, "flange": 2, "root_radius": 9, "at": [0, 60]}
HOLE_OUTSIDE = {"shape": "polygon", "points": [[0, 60], [9, 60], [9, 69]], "holes": [[[20, 60], [30, 60], [30, 70]]]}


@pytest.mark.parametrize(
    ("piece", "path", "says"),
    [
        ({"shape": "polygon", "points": [[0, 0], [9, 9], [9, 0], [0, 9]]}, "points", "crosses or touches itself"),
        ({"shape": "polygon", "points": [[0, 0], [9, 0], [18, 0]]}, "points", "sliver"),
        ({"shape": "polygon", "points": [[0, 0], [9, 0], [9, 1e-6]]}, "points", "sliver"),
        ({"shape": "rectangle", "width": 50, "depth": 1e-6, "at": [0, 60]}, "depth", "sliver"),
        ({"shape": "rectangle", "width": 1e6, "depth": 10, "at": [0, 60]}, "", "1000 m wide across"),
        ({"shape": "rectangle", "width": 10, "depth": 10, "at": [0, "900 m"]}, "", "wide up"),
        ({"shape": "tube", "width": 50, "depth": 40, "wall": 20, "at": [0, 60]}, "wall", "leaves no hollow"),
        ({"shape": "tube", "width": 50, "depth": 40, "wall": 1e-3, "at": [0, 60]}, "wall", "sliver"),
        (I_PROFILE, "root_radius", "need"),
        (HOLE_OUTSIDE, "holes[0]", "outside"),
    ],
)
def test_nonsense_is_refused_by_the_name_of_its_field(piece, path, says):
    found = faults(member({"square": SQUARE, "odd": piece}, [{"between": ["square", "odd"]}]))
    assert list(found) == [f"section.pieces.odd.{path}".rstrip(".")]
    assert says in next(iter(found.values()))


def test_pieces_that_touch_only_at_a_point_are_told_so():
    for at, says in (([50, 50], "only at a point"), ([0, 60], "10 mm apart")):
        found = faults(member({"a": SQUARE, "b": {**SQUARE, "at": at}}, [{"between": ["a", "b"]}]))
        assert says in found["section.joints[0].between"]
    diamond = {**SQUARE, "turn": 45, "at": [-10, 50]}
    assert "only at a point" in str(faults(member({"a": SQUARE, "b": diamond}, [{"between": ["a", "b"]}])))


@pytest.mark.parametrize("gap", [1e-6, -1e-6, 0.04, -0.04])
def test_a_hair_between_pieces_is_touching(gap):
    result = run(member({"a": SQUARE, "b": {**SQUARE, "at": [0, 50 + gap]}}, [{"between": ["a", "b"]}]))
    assert result["joints"][0]["contact_length"] == pytest.approx(50)
    assert result["joints"][0]["first_moment"] == pytest.approx(2500 * 25, rel=2e-3)


def test_large_outlines_are_quick_or_refused():
    comb = [[float(i // 2), 10.0 * (((i + 1) // 2) % 2) + 0.0] for i in range(490)]
    ring = [*comb, [comb[-1][0] + 2, -5.0], [-1.0, -5.0]]
    other = [[y, x] for x, y in ring]
    start = time.perf_counter()
    found = faults(member({"a": {"shape": "polygon", "points": ring}, "b": {"shape": "polygon", "points": other}}, []))
    assert "overlap" in str(found)
    assert time.perf_counter() - start < 10
    many = {f"p{n}": {"shape": "polygon", "points": ring} for n in range(12)}
    assert "at most 5000" in faults(member(many, []))["section.pieces"]
