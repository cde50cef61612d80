"""What all drawings share: the policy they live under, words for those who cannot see them, speed, paper."""

from __future__ import annotations

import json
import re
from collections.abc import Callable
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from server.sheets import diagram_svg, flow_svg, joint_svg, loads_svg, section_svg
from server.sheets.drafting import place_text, size_text
from server.sheets.svg import escape, shorten, spread, text_width
from tests.sheets import drawing_fixtures as fixtures
from tests.sheets.drawing_reading import root

DRAW: dict[str, Callable[..., str]] = {
    "section": section_svg,
    "loads": loads_svg,
    "shear": lambda result, **more: diagram_svg(result, "shear", **more),
    "moment": lambda result, **more: diagram_svg(result, "moment", **more),
    "deflection": lambda result, **more: diagram_svg(result, "deflection", **more),
    "flow": flow_svg,
    "joint": lambda result, **more: joint_svg(result, result["joints"][0]["id"], **more),
}


@pytest.fixture(params=[(name, demo) for demo in fixtures.DEMOS for name in DRAW], ids="-".join)
def svg(request: pytest.FixtureRequest) -> str:
    name, demo = request.param
    result = fixtures.DEMOS[demo]()
    return DRAW[name](result, display=result["display"])


ALLOWED = {"svg", "title", "desc", "defs", "pattern", "clipPath", "g", "path", "circle", "text"}


def test_only_plain_drawing_elements_and_presentation_attributes(svg: str) -> None:
    for element in root(svg).iter():
        assert element.tag.split("}")[1] in ALLOWED
        for name in element.attrib:
            assert name != "style"
            assert not name.startswith("on")
            assert "href" not in name


def test_every_drawing_has_a_text_alternative(svg: str) -> None:
    drawing = root(svg)
    assert drawing.get("role") == "img"
    assert len(str(drawing.get("aria-label"))) > 40
    assert drawing[0].tag.endswith("title")
    assert drawing[0].text


def test_no_number_is_lost_on_the_way(svg: str) -> None:
    assert not re.search(r"\b(nan|inf|None)\b", svg)


def test_the_summary_names_the_extremes() -> None:
    label = str(root(diagram_svg(fixtures.box_beam(), "shear")).get("aria-label"))
    assert "greatest 14.6 kN at 0, all together" in label
    assert "least −13.6 kN at 6 m" in label
    section = root(section_svg(fixtures.box_beam()))
    assert "115 mm wide, 400 mm deep; neutral axis 200 mm above the lowest edge" in str(section.get("aria-label"))
    assert "1 = top flange/web L, glued" in str(section[1].text)


@given(st.lists(st.tuples(st.floats(-200, 200), st.floats(1, 40)), min_size=1, max_size=20), st.floats(0, 5))
def test_labels_are_spread_in_order_and_never_overlap(items: list[tuple[float, float]], gap: float) -> None:
    wanted, sizes = sorted(w for w, _ in items), [s for _, s in items]
    placed = spread(wanted, sizes, -300, 300, gap)
    for i in range(1, len(placed)):
        assert placed[i] - placed[i - 1] >= (sizes[i] + sizes[i - 1]) / 2 + gap - 1e-9
    if sum(sizes) + gap * len(sizes) < 600:
        assert placed[0] - sizes[0] / 2 >= -300 - 1e-9
        assert placed[-1] + sizes[-1] / 2 <= 300 + 1e-9


def test_labels_with_room_stay_where_they_are_wanted() -> None:
    assert spread([10, 50, 90], [20, 20, 20], 0, 100, 2) == pytest.approx([10, 50, 90])
    assert spread([50, 50], [20, 20], 0, 100, 2) == pytest.approx([39, 61])


@given(st.text())
def test_any_text_survives_the_way_through_xml(text: str) -> None:
    read = root(f'<svg xmlns="x" a="{escape(text)}">{escape(text)}</svg>')
    kept = "".join(
        c if c not in "\t\n\r" else " " for c in text if c in "\t\n\r" or (c >= " " and c not in "\ufffe\uffff")
    )
    assert (read.text or "") == kept
    assert read.get("a") == kept


def test_long_names_are_cut_to_their_room() -> None:
    assert shorten("flange", 100) == "flange"
    cut = shorten("a name that is far too long to be lettered here", 100)
    assert cut.endswith("…")
    assert text_width(cut) <= 100


@pytest.mark.parametrize(
    ("mm", "display", "text"),
    [
        (12.5, "SI", "12.5"), (400, "SI", "400"), (0.3, "SI", "0.3"), (88.9, "US", "3-1/2"), (19.05, "US", "3/4"),
        (17.8562, "US", "0.703"), (25.4, "US", "1"), (3.175, "US", "1/8"), (0.762, "US", "0.03"),
    ],
)  # fmt: skip
def test_sizes_are_lettered_as_on_a_drawing(mm: float, display: str, text: str) -> None:
    assert size_text(mm, display) == text


@pytest.mark.parametrize(
    ("mm", "display", "text"),
    [
        (2760, "SI", "2.76 m"), (250, "SI", "250 mm"), (0, "SI", "0"), (2438.4, "US", "8 ft"),
        (4203.7, "US", "13 ft 9-1/2 in"), (152.4, "US", "6 in"), (1000, "US", "3.281 ft"),
    ],
)  # fmt: skip
def test_places_are_lettered_as_on_a_tape(mm: float, display: str, text: str) -> None:
    assert place_text(mm, display) == text


def test_the_pdf_draws_every_kind_of_drawing_without_a_warning() -> None:
    typst = pytest.importorskip("typst")
    drawings = [draw(fixtures.deck(), display="US") for draw in DRAW.values()]
    drawings += [section_svg(make()) for make in fixtures.SECTIONS.values()]
    source = b'#for s in json(bytes(sys.inputs.drawings)) { image(bytes(s), format: "svg", width: 100%) }'
    pdf, warnings = typst.compile_with_warnings(
        source, sys_inputs={"drawings": json.dumps(drawings)}, ignore_system_fonts=True
    )
    assert pdf.startswith(b"%PDF")
    assert warnings == []


def test_everything_a_preview_draws(benchmark: Any) -> None:
    """Section, loads, three diagrams and the joints' flow: the drawing part of the live preview."""
    result = fixtures.box_beam()
    names = [name for name in DRAW if name != "joint"]
    drawn = benchmark(lambda: [DRAW[name](result, display="SI") for name in names])
    assert sum(len(svg) for svg in drawn) < 30_000


def test_a_browser_draws_them_under_the_strict_policy_with_no_lettering_on_lettering(browser: Any) -> None:
    """Measured by the browser's own text boxes, in whatever face it has."""
    sheets: list[str] = []
    for make in fixtures.SECTIONS.values():
        result: dict[str, Any] = make()
        sheets.append(section_svg(result, display=result["display"]))
    for make in fixtures.DEMOS.values():
        result = make()
        sheets += [draw(result, display=result["display"]) for name, draw in DRAW.items() if name != "section"]
    policy = "default-src 'none'; style-src 'self'; script-src 'none'"
    page_text = f'<meta http-equiv="Content-Security-Policy" content="{policy}">' + "".join(sheets)
    measure = """svgs => svgs.map(svg => {
        const frame = svg.getBoundingClientRect()
        const boxes = [...svg.querySelectorAll('text')].map(t => [t.textContent, t.getBoundingClientRect()])
        const bad = []
        boxes.forEach(([text, a], i) => {
            if (a.left < frame.left - 1 || a.right > frame.right + 1) bad.push(text + ' leaves the sheet')
            boxes.slice(0, i).forEach(([other, b]) => {
                const x = Math.min(a.right, b.right) - Math.max(a.left, b.left)
                const y = Math.min(a.bottom, b.bottom) - Math.max(a.top, b.top)
                if (x > 1 && y > 4.5) bad.push(text + ' on ' + other)
            })
        })
        return bad
    })"""
    page = browser.new_page()
    said: list[str] = []
    page.on("console", lambda message: said.append(message.text))
    page.set_content(page_text)
    found = page.eval_on_selector_all("svg", measure)
    page.close()
    assert said == []
    assert [bad for bad in found if bad] == []
