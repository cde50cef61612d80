"""The elevation with its loads: to scale, the right way up, every value lettered."""

from __future__ import annotations

import re
from typing import Any

import pytest

from server.sheets import loads_svg
from tests.sheets import drawing_fixtures as fixtures
from tests.sheets.drawing_reading import collisions, letters, outside, root, texts


def with_loads(*loads: dict[str, Any], **member: Any) -> dict[str, Any]:
    result = fixtures.box_beam()
    result["drawing"]["loads"] = [{"case": "case", **load} for load in loads]
    result["drawing"]["member"] |= member
    return result


def line(start: float, end: float, value: float | list[float]) -> dict[str, Any]:
    return {"kind": "line", "from": start, "to": end, "value": value}


def point(at: float, value: float) -> dict[str, Any]:
    return {"kind": "point", "at": at, "value": value}


def couple(at: float, value: float) -> dict[str, Any]:
    return {"kind": "couple", "at": at, "value": value}


MIXED = with_loads(
    line(0, 3000, [0, 3.0]),
    line(2500, 6000, [-2, 2.5]),
    couple(1000, 2e6),
    couple(3500, -1.5e6),
    point(6000, -4000),
    *(point(1000 + 600 * i, 1000 * (i + 1)) for i in range(6)),
    supports=[
        {"at": at, "kind": kind} for at, kind in ((0, "fixed"), (2500, "spring"), (4000, "fixed"), (6000, "fixed"))
    ],
    hinges=[1250, 3000],
)


def bands(svg: str) -> list[list[float]]:
    """Numbers of the line loads' outlines: left, base, top at the start, right, top at the end, base."""
    paths = [str(p.get("d")) for p in root(svg).iter() if p.get("fill-opacity") == ".06"]
    return [[float(n) for n in re.findall(r"-?[\d.]+", path)] for path in paths]


def heads(svg: str) -> list[tuple[float, float, float]]:
    """Tips of the arrowheads, and how far their base lies above (negative) or below."""
    blots = "".join(str(p.get("d")) for p in root(svg).iter() if p.get("fill") == "#111" and p.get("d"))
    found = re.findall(r"M(-?[\d.]+) (-?[\d.]+)L(-?[\d.]+) (-?[\d.]+)L", blots)
    return [(float(x), float(y), float(base) - float(y)) for x, y, _, base in found]


@pytest.mark.parametrize("name", fixtures.DEMOS)
def test_nothing_lettered_overlaps_or_leaves_the_sheet(name: str) -> None:
    result = fixtures.DEMOS[name]()
    svg = loads_svg(result, display=result["display"])
    assert collisions(letters(svg)) == []
    assert outside(svg) == []


def test_a_crowd_of_loads_of_every_kind_stays_legible() -> None:
    svg = loads_svg(MIXED)
    assert collisions(letters(svg)) == []
    assert outside(svg) == []


def test_values_places_and_spans_are_lettered() -> None:
    found = texts(loads_svg(fixtures.box_beam()))
    assert {"permanent", "snow", "hoist", "1.6 kN/m", "2.6 kN/m", "3 kN at 2 m", "6 m"} <= set(found)
    assert {"550 mm", "1.3 m", "2.4 m", "10 kN at 200 mm"} <= set(texts(loads_svg(fixtures.cross_bearer())))


def test_us_units_are_pounds_and_feet() -> None:
    found = texts(loads_svg(fixtures.deck(), display="US"))
    assert {"500 lbf/ft", "32 lbf/ft", "8 ft"} <= set(found)


def test_a_load_twice_as_great_is_twice_as_high() -> None:
    low, high = bands(loads_svg(with_loads(line(0, 3000, 1.5), line(3000, 6000, 3.0))))
    assert high[1] - high[2] == pytest.approx(2 * (low[1] - low[2]), abs=0.11)
    slope = bands(loads_svg(with_loads(line(0, 6000, [4.0, 2.0]))))[0]
    assert slope[1] - slope[2] == pytest.approx(2 * (slope[1] - slope[4]), abs=0.11)


def test_loads_stand_where_they_act() -> None:
    svg = loads_svg(with_loads(line(1500, 4500, 2.0), point(3000, 5000)))
    width = 640 - 2 * 34
    left, *_, right, _, _ = bands(svg)[0]
    assert left == pytest.approx(34 + 0.25 * width, abs=0.06)
    assert right == pytest.approx(34 + 0.75 * width, abs=0.06)
    assert any(x == pytest.approx(34 + 0.5 * width, abs=0.06) for x, _, _ in heads(svg))


def test_arrows_point_down_for_positive_loads_and_up_for_negative_ones() -> None:
    assert all(base < 0 for _, _, base in heads(loads_svg(with_loads(point(2000, 3000), line(0, 6000, 2.0)))))
    assert all(base > 0 for _, _, base in heads(loads_svg(with_loads(point(2000, -3000), line(0, 6000, -2.0)))))


def test_couples_turn_the_way_they_act() -> None:
    def sweep(svg: str) -> str:
        return re.findall(r"A10.0 10.0 0 1 (\d)", svg)[0]

    anticlockwise, clockwise = (loads_svg(with_loads(couple(3000, value))) for value in (2e6, -2e6))
    assert (sweep(anticlockwise), sweep(clockwise)) == ("0", "1")
    assert "2 kN·m at 3 m" in texts(anticlockwise)
    assert "−2 kN·m at 3 m" in texts(clockwise)


def test_partial_and_varying_loads_say_from_where_to_where() -> None:
    found = texts(loads_svg(MIXED))
    assert "0 to 3 kN/m, 0 to 3 m" in found
    assert "−2 to 2.5 kN/m, 2.5 m to 6 m" in found


def test_pieces_that_stop_short_are_shown_as_bars() -> None:
    assert "steel strip, 250 mm to 4.55 m" in texts(loads_svg(fixtures.strip()))
    assert not any("timber" in text for text in texts(loads_svg(fixtures.strip())))


def test_supports_and_hinges_are_drawn() -> None:
    svg = loads_svg(MIXED)
    assert svg.count('<circle cx="') == 2
    assert "fixed at 0, spring at 2.5 m" in str(root(svg).get("aria-label"))
    pinned = loads_svg(with_loads())
    assert pinned.count("l-6.5 11h13z") == 2


def test_no_loads_is_said() -> None:
    svg = loads_svg(with_loads())
    assert "no loads" in texts(svg)
    assert "no loads" in str(root(svg).get("aria-label"))


def test_loads_of_nothing_are_drawn_without_dividing_by_it() -> None:
    svg = loads_svg(with_loads(line(0, 6000, 0.0), point(2000, 0.0), couple(3000, 0.0)))
    assert "0 N at 2 m" in texts(svg)
    assert "nan" not in svg


def test_hundreds_of_loads_are_counted_in_words() -> None:
    svg = loads_svg(with_loads(*(line(10 * i, 6000 - 10 * i, 1.0 + i) for i in range(200))))
    assert "and 194 more loads of this case, not drawn" in texts(svg)


def test_names_of_cases_are_text_and_never_markup() -> None:
    result = with_loads(point(2000, 3000))
    result["drawing"]["loads"][0]["case"] = "<script>&"
    assert "<script>&" in texts(loads_svg(result))
