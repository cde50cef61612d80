"""The section drawing: to scale, numbered, dimensioned, hatched, nothing on top of anything else."""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import Any
from xml.etree import ElementTree

import pytest

from server.sheets import labels, section_svg
from server.sheets.hatching import sort_of
from server.sheets.labels import Label, crossing
from tests.sheets import drawing_fixtures as fixtures
from tests.sheets.drawing_reading import Letters, collisions, letters, outside, root, texts


@pytest.fixture(params=fixtures.SECTIONS, ids=str)
def case(request: pytest.FixtureRequest) -> dict[str, Any]:
    made: Callable[[], dict[str, Any]] = fixtures.SECTIONS[request.param]
    return made()


def outline_of(svg: str, index: int) -> list[tuple[float, float]]:
    """Corners of the n-th drawn outline."""
    path = next(p for p in root(svg).iter() if p.get("stroke-width") == "1.1" and p.get("d"))
    rings = [ring for ring in str(path.get("d")).split("z") if ring.count("L") >= 3]
    numbers = [float(number) for number in re.findall(r"-?[\d.]+", rings[index])]
    return list(zip(numbers[0::2], numbers[1::2], strict=True))


def span(points: list[tuple[float, float]], axis: int) -> float:
    values = [point[axis] for point in points]
    return max(values) - min(values)


def test_a_flange_of_90_by_70_is_drawn_90_by_70_to_the_stated_scale() -> None:
    svg = section_svg(fixtures.box_beam())
    scale = float(str(root(svg).get("data-scale")))
    flange = outline_of(svg, 0)
    assert span(flange, 0) == pytest.approx(90 * scale, abs=0.02)
    assert span(flange, 1) == pytest.approx(70 * scale, abs=0.02)
    assert span(outline_of(svg, 2), 0) == pytest.approx(12.5 * scale, abs=0.02)


def test_up_is_up_and_across_is_to_the_right() -> None:
    svg = section_svg(fixtures.box_beam())
    bottom, top, left, right = (outline_of(svg, i) for i in range(4))
    assert max(y for _, y in top) < min(y for _, y in bottom)
    assert max(x for x, _ in left) < min(x for x, _ in right)


def test_every_size_of_the_box_beam_is_dimensioned() -> None:
    found = texts(section_svg(fixtures.box_beam()))
    for size in ("400", "260", "115", "90"):
        assert found.count(size) == 1, size
    assert found.count("70") == 2
    assert found.count("12.5") == 2
    assert "Dimensions in mm" in found


def test_inches_are_fractions_of_a_rule_where_they_are_one_and_decimals_elsewhere() -> None:
    found = texts(section_svg(fixtures.deck(), display="US"))
    assert found.count("1-1/2") == 5
    assert found.count("10-1/8") == 4
    assert {"3-1/2", "0.703", "48", "4.203", "Dimensions in inches"} <= set(found)


def test_joints_are_numbered_in_circles_and_explained() -> None:
    svg = section_svg(fixtures.box_beam())
    found = texts(svg)
    for number in "1234":
        assert found.count(number) == 1
    assert "1 = top flange/web L, glued" in found
    assert "4 = bottom flange/web R, glued" in found
    balloons = next(p for p in root(svg).iter() if p.get("class") == "balloons")
    assert str(balloons.get("d")).count("M") == 4


def test_glue_fasteners_and_bare_contacts_are_told_apart() -> None:
    found = texts(section_svg(fixtures.flitch()))
    assert "1 = left plank/flitch plate, fastened" in found
    assert "touching, not joined" in found
    assert "bond line" not in found
    svg = section_svg(fixtures.flitch())
    axes = [p for p in root(svg).iter() if p.get("stroke-dasharray") == "9 2.5 1.5 2.5"]
    assert str(axes[0].get("d")).count("M") == 3 + 1, "three rows of bolts and their sample in the key"
    both = texts(section_svg(fixtures.deck(), display="US"))
    assert "1 = skin/rib 1, glued and fastened" in both


def test_bond_lines_lie_on_the_contacts() -> None:
    result = fixtures.strip()
    svg = section_svg(result)
    drawing = root(svg)
    scale, left, bottom = (float(str(drawing.get(f"data-{name}"))) for name in ("scale", "left", "bottom"))
    bond = next(p for p in drawing.iter() if p.get("stroke-width") == "2.8")
    numbers = [float(n) for n in re.findall(r"[\d.]+", str(bond.get("d")).split("M")[1])]
    assert numbers == pytest.approx(
        [left + 30 * scale, bottom - 8.5 * scale, left + 110 * scale, bottom - 8.5 * scale], abs=0.1
    )


def test_a_joint_shades_what_it_holds_and_says_so() -> None:
    plain = section_svg(fixtures.box_beam())
    shaded = section_svg(fixtures.box_beam(), shade_joint="bottom flange/web R")
    assert 'class="outside"' not in plain
    marked = [p for p in root(shaded).iter() if p.get("class") == "outside"]
    assert len(marked) == 1
    assert str(marked[0].get("d")) in shaded.replace(str(marked[0]), "")
    assert "outside area of joint 4" in texts(shaded)
    corner = re.findall(r"[\d.]+", str(marked[0].get("d")))[:2]
    assert tuple(float(n) for n in corner) == outline_of(shaded, 0)[0], "the bottom flange is the first piece"
    by_place = fixtures.box_beam()
    by_place["joints"][3]["cut_off"] = [0]
    assert section_svg(by_place, shade_joint="bottom flange/web R") == shaded


def test_an_unknown_joint_shades_nothing() -> None:
    assert section_svg(fixtures.box_beam(), shade_joint="no such") == section_svg(fixtures.box_beam())


def test_pieces_are_named_once(case: dict[str, Any]) -> None:
    found = " ".join(texts(section_svg(case)))
    if len(case["drawing"]["pieces"]) > 20:
        return  # named through the joints in the key
    for piece in case["drawing"]["pieces"]:
        assert piece["id"] in found


def test_nothing_lettered_overlaps_or_leaves_the_sheet(case: dict[str, Any]) -> None:
    svg = section_svg(case, display=case["display"])
    assert collisions(letters(svg)) == []
    assert outside(svg) == []


def test_leaders_do_not_cross(case: dict[str, Any], monkeypatch: pytest.MonkeyPatch) -> None:
    drawn: list[Label] = []
    monkeypatch.setattr(labels, "draw", lambda drawing, found: drawn.extend(found))
    section_svg(case)
    leaders = [(label.anchor, labels.leader_end(label)) for label in drawn if label.anchor]
    crossed = [(a, b) for i, a in enumerate(leaders) for b in leaders[:i] if crossing(*a, *b)]
    assert crossed == []


def test_numbers_and_names_on_the_rails_stand_clear_of_each_other(
    case: dict[str, Any], monkeypatch: pytest.MonkeyPatch
) -> None:
    drawn: list[Label] = []
    monkeypatch.setattr(labels, "draw", lambda drawing, found: drawn.extend(found))
    section_svg(case)
    assert collisions([Letters(label.text, *label.box) for label in drawn]) == []


def test_numbers_stand_clear_of_the_outline(case: dict[str, Any], monkeypatch: pytest.MonkeyPatch) -> None:
    drawn: list[Label] = []
    monkeypatch.setattr(labels, "draw", lambda drawing, found: drawn.extend(found))
    svg = section_svg(case)
    rings = [outline_of(svg, i) for i in range(len(case["drawing"]["pieces"]))]
    left, right = min(x for ring in rings for x, _ in ring), max(x for ring in rings for x, _ in ring)
    top, bottom = min(y for ring in rings for _, y in ring), max(y for ring in rings for _, y in ring)
    for label in drawn:
        if label.balloon:
            x0, y0, x1, y1 = label.box
            assert x1 < left or x0 > right or y1 < top or y0 > bottom


def test_the_neutral_axis_is_drawn_where_the_result_says() -> None:
    svg = section_svg(fixtures.strip())
    drawing = root(svg)
    scale, bottom = float(str(drawing.get("data-scale"))), float(str(drawing.get("data-bottom")))
    chain = next(p for p in drawing.iter() if p.get("stroke-dasharray") == "14 3 2 3")
    y = float(str(chain.get("d")).split("L")[1].split()[1])
    assert y == pytest.approx(bottom - 98 * scale, abs=0.06)
    assert "N.A." in texts(svg)


@pytest.mark.parametrize("way", [(0.6, 0.8), (0.8, -0.6), (0.0, 1.0), (1.0, 0.0)])
def test_a_neutral_axis_that_slopes_runs_through_the_centre_of_stiffness_from_edge_to_edge(
    way: tuple[float, float],
) -> None:
    result = fixtures.box_beam()
    result["section"] = {**result["section"], "bent_axis": {"direction": way, "at": 2000.0, "combination": "all"}}
    drawing = root(svg := section_svg(result))
    chain = next(p for p in drawing.iter() if p.get("stroke-dasharray") == "14 3 2 3")
    x1, y1, x2, y2 = (float(number) for number in re.findall(r"-?[\d.]+", str(chain.get("d")).split("M")[1]))
    scale, left, bottom = (float(str(drawing.get(f"data-{name}"))) for name in ("scale", "left", "bottom"))
    across, up = result["section"]["neutral_axis"]
    x, y = left + across * scale, bottom - up * scale
    assert abs((x2 - x1) * (y - y1) - (y2 - y1) * (x - x1)) < 0.2 * max(abs(x2 - x1), abs(y2 - y1))
    assert abs((x2 - x1) * way[1] + (y2 - y1) * way[0]) < 0.2
    assert min(x1, x2) - 0.1 <= x <= max(x1, x2) + 0.1
    assert "N.A. at 2 m, all" in texts(svg)
    assert not collisions(letters(svg))


def test_thin_layers_stay_visible() -> None:
    svg = section_svg(fixtures.sandwich())
    scale = float(str(root(svg).get("data-scale")))
    assert 2 * scale < 2.5, "the skins are thinner than a hatching line is wide"
    assert 'stroke-width="2.8"' in svg
    assert 'stroke-width="1.1"' in svg


@pytest.mark.parametrize(
    ("kind", "sort"),
    [
        ("timber", "rings"), ("Glulam", "rings"), ("plywood", "layers"), ("steel", "pairs"), ("carbon steel", "pairs"),
        ("aluminium", "broken"), ("aluminum", "broken"), ("GFRP", "net"), ("foam", "cells"), ("balsa core", "cells"),
        ("concrete", "stones"), ("unobtainium", "plain"), (None, "plain"),
    ],
)  # fmt: skip
def test_the_material_kind_chooses_the_hatching(kind: str | None, sort: str) -> None:
    assert sort_of(kind) == sort


def test_touching_metals_are_hatched_in_opposite_directions() -> None:
    svg = section_svg(fixtures.cross_bearer())
    turns = {p.get("patternTransform") for p in root(svg).iter() if p.tag.endswith("pattern")}
    assert turns == {"rotate(45)", "rotate(-45)"}


def test_hatching_rings_keep_their_step() -> None:
    """A half circle whose chord is shorter than twice its radius would have its centre elsewhere."""
    svg = section_svg(fixtures.single())
    arcs = re.findall(r"a([\d.]+) [\d.]+ 0 0 \d ([\d.]+) 0", svg)
    assert len(arcs) > 10
    assert all(float(chord) >= 2 * float(radius) for radius, chord in arcs)


def test_one_piece_without_joints_is_drawn() -> None:
    svg = section_svg(fixtures.single())
    assert {"200", "50", "plank"} <= set(texts(svg))
    assert "bond line" not in texts(svg)
    assert "1 piece, no joints" in str(root(svg).get("aria-label"))


def test_many_equal_layers_are_dimensioned_together() -> None:
    assert "60 × 20" in texts(section_svg(fixtures.stack(60)))


def test_piece_names_are_text_and_never_markup() -> None:
    result = fixtures.box_beam()
    hostile = '<script>alert("1")</script>&\x07'
    result["drawing"]["pieces"][1]["id"] = hostile
    for contact in result["drawing"]["contacts"]:
        contact["between"] = [hostile if name == "top flange" else name for name in contact["between"]]
    result["title"] = hostile
    result["drawing"]["pieces"][0]["material"] = hostile
    svg = section_svg(result)
    tags = {element.tag.split("}")[1] for element in ElementTree.fromstring(svg).iter()}
    assert "script" not in tags
    assert '<script>alert("1")</script>&' in texts(svg)


def test_two_sections_on_a_page_share_no_ids() -> None:
    one, two = section_svg(fixtures.box_beam()), section_svg(fixtures.strip())
    ids = [set(re.findall(r' id="([^"]+)"', svg)) for svg in (one, two)]
    assert all(ids)
    assert not ids[0] & ids[1]
    for svg in (one, two):
        assert set(re.findall(r"url\(#([^)]+)\)", svg)) <= set(re.findall(r' id="([^"]+)"', svg))
    assert not ids[0] & set(re.findall(r' id="([^"]+)"', section_svg(fixtures.box_beam(), prefix="old-")))


def test_the_same_result_gives_the_same_bytes() -> None:
    assert section_svg(fixtures.deck(), display="US") == section_svg(fixtures.deck(), display="US")
