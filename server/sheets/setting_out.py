"""Fasteners set out along the member: an elevation to scale with dimensions, and the tables beside it.

Drawn from the stored result alone. Joints that are set out alike share one elevation; dimensions run as a bench hand
steps them off: end distance, so many spaces of so much, end distance.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from server.sheets import drafting
from server.sheets.section_view import joint_numbers
from server.sheets.svg import Drawing, shorten, text_width
from server.sheets.tables import column, table
from server.sheets.values import DASH, in_units, unit

Part = dict[str, Any]
Result = Mapping[str, Any]
MARGIN, LANE, TICK = 34.0, 84.0, 6.0
ROLE_WORDS = {
    "sole": "carry the joint alone",
    "fall-back": "fall-back if the glue is lost",
    "peel-stop": "stop end peel",
    "press": "press while the glue cures",
    "hybrid": "carry with the glue, as tested together",
}


@dataclass(frozen=True)
class Laid:
    """Joints that are set out alike."""

    numbers: tuple[int, ...]
    names: tuple[str, ...]
    fastener: str
    role: str
    out: Mapping[str, Any]

    @property
    def count(self) -> int:
        """Fasteners of all these joints together."""
        return len(self.names) * int(self.out["count"])

    def numbered(self) -> str:
        """'Joints 1 to 5', 'Joint 2', 'Joints 1, 3'."""
        n = list(self.numbers)
        if len(n) == 1:
            return f"Joint {n[0]}"
        if n == list(range(n[0], n[-1] + 1)):
            return f"Joints {n[0]} to {n[-1]}"
        return "Joints " + ", ".join(str(each) for each in n)

    def named(self) -> str:
        """'skin to rib 1, rib 2, rib 3': pieces that several joints share are written once where they all share one."""
        pairs = [tuple(name.split("/", 1)) for name in self.names]
        for side in (0, 1):
            if len(pairs) > 1 and all(len(pair) == 2 for pair in pairs) and len({pair[side] for pair in pairs}) == 1:
                return f"{pairs[0][side]} to {', '.join(pair[1 - side] for pair in pairs)}"
        return ", ".join(self.names)


def laid_out(result: Result) -> list[Laid]:
    """The joints with fasteners that are set out, alike ones together; empty for results that know nothing of it."""
    numbers = joint_numbers(result) if result.get("drawing") else {}
    found: dict[str, list[tuple[int, Mapping[str, Any]]]] = {}
    for order, joint in enumerate(result.get("joints") or (), 1):
        out = joint.get("setting_out")
        if out:
            key = repr((joint.get("fastener"), joint.get("role"), out))
            found.setdefault(key, []).append((numbers.get(joint["id"], order), joint))
    return [
        Laid(
            tuple(number for number, _ in alike),
            tuple(str(joint["id"]) for _, joint in alike),
            str(alike[0][1].get("fastener")),
            str(alike[0][1].get("role") or ""),
            alike[0][1]["setting_out"],
        )
        for alike in found.values()
    ]


def setting_out_svg(result: Result, *, display: str = "SI", width: float = 640.0, prefix: str = "") -> str:
    """Draw every fastened joint in elevation, to one scale along the member, with its dimensions."""
    drawing = Drawing(width)
    laid = laid_out(result)
    member = result["drawing"]["member"]
    length = float(member["length"])
    scale = (width - 2 * MARGIN) / length
    title = str(result.get("title") or "the member")
    y = 0.0
    words = []
    for each in laid:
        y = _lane(drawing, each, scale, length, y, display, width)
        words.append(f"{each.numbered()}: {_steps_in_words(each.out, display)}")
    if not laid:
        drawing.text(MARGIN, 14, "No fasteners are set out.")
        y = 22.0
    drawing.height = y
    summary = f"Fasteners of {title} set out, to scale. {'; '.join(words)}"
    return drawing.svg("setting-out", f"Setting out, {title}", summary, "", f' data-scale="{scale:.6g}"', prefix)


def _lane(drawing: Drawing, laid: Laid, scale: float, length: float, y: float, display: str, width: float) -> float:
    out = laid.out
    rows = f", {out['rows']} rows" if int(out["rows"]) > 1 else ""
    head = f"{laid.numbered()}: {laid.fastener}{rows}, {out['count']} in each" if len(laid.names) > 1 else (
        f"{laid.numbered()}: {laid.fastener}{rows}, {out['count']}"
    )  # fmt: skip
    head = shorten(head, 0.62 * width)
    drawing.text(MARGIN, y + 13, head, bold=True)
    room = width - 2 * MARGIN - 1.1 * text_width(head) - 12
    drawing.text(width - MARGIN, y + 13, shorten(laid.named(), room, 9.5), "end", size=9.5)
    line = y + 34
    left, right = MARGIN, MARGIN + length * scale
    start, end = MARGIN + float(out["from"]) * scale, MARGIN + float(out["to"]) * scale
    drawing.line("thin", left, line - 9, right, line - 9)
    drawing.line("thin", left, line + 9, right, line + 9)
    drawing.line("thin", left, line - 9, left, line + 9)
    drawing.line("thin", right, line - 9, right, line + 9)
    drawing.line("axis", start, line, end, line)
    ticks = drawing.pen("outline")
    for place in out["places"]:
        x = MARGIN + float(place) * scale
        ticks.append(f"M{x:.2f} {line - TICK:.1f}V{line + TICK:.1f}")
    levels, texts = _chain_of(out, display)
    pixels = [MARGIN + level * scale for level in levels]
    dimensions = drafting.chain(levels, pixels, texts, None)
    if dimensions is None:  # too many zones for the width: their ends alone, and the table has the rest
        whole = drafting.size_text(float(out["to"]) - float(out["from"]), display)
        dimensions = drafting.Chain((pixels[0], pixels[-1]), ((0.5 * (pixels[0] + pixels[-1]), whole),))
    drafting.dimension_across(drawing, line + 20, dimensions)
    return y + LANE + (drafting.ROW if dimensions.rows > 1 else 0.0)


def _chain_of(out: Mapping[str, Any], display: str) -> tuple[list[float], list[str]]:
    """Places where the spacing changes, and what is lettered between them."""
    at = float(out["from"])
    levels, texts = [at], []
    first = float(out["places"][0])
    levels.append(first)
    texts.append(drafting.size_text(first - at, display))
    at = first
    for each in out["spaces"]:
        count, spacing = int(each["count"]), float(each["spacing"])
        at += count * spacing
        levels.append(at)
        size = drafting.size_text(spacing, display)
        texts.append(size if count == 1 else f"{count} × {size}")
    levels.append(float(out["to"]))
    texts.append(drafting.size_text(float(out["to"]) - at, display))
    return levels, texts


def _steps_in_words(out: Mapping[str, Any], display: str) -> str:
    """'first 50 mm from the end, then 12 spaces of 50 mm, ...'."""
    length = unit("mm", display)

    def size(value: float) -> str:
        return f"{drafting.size_text(value, display)} {length.text}"

    first = float(out["places"][0]) - float(out["from"])
    words = [f"first {size(first)} from the end"]
    for each in out["spaces"]:
        count = int(each["count"])
        words.append(f"{count} space{'s' if count > 1 else ''} of {size(float(each['spacing']))}")
    return ", then ".join(words)


def figure(result: Result, display: str) -> Part:
    """The elevation as a part of a sheet or page."""
    size = "inches" if display == "US" else "mm"
    words = f"Fasteners in elevation, to scale; dimensions in {size}"
    svg = setting_out_svg(result, display=display)
    return {"kind": "drawing", "svg": svg, "caption": words, "alt": words, "share": 1.0}


def tables(result: Result, display: str) -> Iterator[Part]:
    """Step by step what is set out, and how many fasteners to have ready."""
    laid = laid_out(result)
    length = unit("mm", display)
    size = length.text
    rows = []
    for each in laid:
        at = float(each.out["places"][0])
        rows.append([each.numbered(), "first fastener", DASH, _running(at, display), _from_end(at, each, display)])
        for part in each.out["spaces"]:
            count, spacing = int(part["count"]), float(part["spacing"])
            at += count * spacing
            text = drafting.size_text(spacing, display)
            rows.append([
                each.numbered(), f"{count} space{'s' if count > 1 else ''}", text, _running(at, display),
                _from_end(at, each, display),
            ])  # fmt: skip
    if rows:
        columns = [
            column("Joint"), column("Step off", share=1), column(f"Spacing, {size}", side="right"),
            column("Reaches, from the member's left end", side="right"),
            column("From the joint's left end", side="right"),
        ]  # fmt: skip
        yield table(columns, rows)
    bought: dict[str, int] = {}
    for each in laid:
        bought[each.fastener] = bought.get(each.fastener, 0) + each.count
    if bought:
        yield {"kind": "sub", "title": "To have ready", "about": "as set out, without spares"}
        yield table(
            [column("Fastener", share=1), column("What for", share=1), column("Count", side="right")],
            [[name, _roles(laid, name), str(count)] for name, count in bought.items()],
        )


def _running(at: float, display: str) -> str:
    return drafting.place_text(at, display)


def _from_end(at: float, laid: Laid, display: str) -> str:
    return drafting.place_text(at - float(laid.out["from"]), display)


def _roles(laid: Sequence[Laid], fastener: str) -> str:
    roles = dict.fromkeys(ROLE_WORDS.get(each.role, each.role) for each in laid if each.fastener == fastener)
    return "; ".join(roles)


def remarks(result: Result, display: str) -> Iterator[Part]:
    """What a bench hand must know beside the figures."""
    lines = []
    for each in laid_out(result):
        out = each.out
        size = unit("mm", display)
        if len(each.names) > 1:
            lines.append(f"{each.numbered()}: {each.named()}, all set out alike.")
        if out["as"] == "needed":
            lines.append(f"{each.numbered()}: no spacing was given; these are the zones that the flow asks for.")
        if not out.get("end_distance_given"):
            lines.append(
                f"{each.numbered()}: the first and last fastener stand half a space from the end; no end distance was "
                "given with the fastener. Keep the one for your fastener and piece where it is larger."
            )
        across = []
        if out.get("row_spacing") and int(out["rows"]) > 1:
            across.append(f"rows {drafting.size_text(float(out['row_spacing']), display)} {size.text} apart")
        if out.get("edge_distance"):
            across.append(
                f"at least {drafting.size_text(float(out['edge_distance']), display)} {size.text} to the edge"
            )
        if across:
            lines.append(f"{each.numbered()}: {', '.join(across)}.")
    if lines:
        yield {"kind": "list", "items": lines}


def schedule(result: Result, display: str) -> Iterator[Part]:
    """The zones that the flow asks for, beside the spacing given; in words where there are none."""
    length = unit("mm", display)
    rows = []
    notes: dict[str, list[str]] = {}
    numbers = joint_numbers(result) if result.get("drawing") else {}
    alike: dict[str, list[int]] = {}
    zones: dict[str, Any] = {}
    for order, joint in enumerate(result.get("joints") or (), 1):
        number = numbers.get(joint["id"], order)
        listed = joint.get("spacing_schedule") or ()
        if listed:
            key = repr([(round(z["from"], 3), round(z["to"], 3), round(z["spacing"], 3), z["count"]) for z in listed])
            alike.setdefault(key, []).append(number)
            zones[key] = listed
        elif joint.get("schedule_note"):
            notes.setdefault(str(joint["schedule_note"]), []).append(str(number))
    for key, joints in alike.items():
        name = ", ".join(str(each) for each in joints)
        for zone in zones[key]:
            rows.append([
                name,
                f"{drafting.place_text(zone['from'], display)} to {drafting.place_text(zone['to'], display)}",
                drafting.size_text(float(zone["spacing"]), display), str(zone["count"]),
            ])  # fmt: skip
    if rows or notes:
        yield {
            "kind": "sub",
            "title": "Spacing that the flow asks for",
            "about": "in workshop steps, over all combinations; count of one joint",
        }
    if rows:
        columns = [
            column("Joint no."), column("Zone", share=1), column(f"Spacing, {length.text}", side="right"),
            column("Fasteners", side="right"),
        ]  # fmt: skip
        yield table(columns, rows)
    if notes:
        items = [f"Joint {', '.join(joints)}: no zones; {in_units(note, display)}" for note, joints in notes.items()]
        yield {"kind": "list", "items": items}
