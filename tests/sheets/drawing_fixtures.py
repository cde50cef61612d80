"""Hand-made results of the demo members, in the form that drawings read (sizes and loads are invented).

The curves are plain statics of a member on two supports, summed here on purpose and not taken from the program.
"""

from __future__ import annotations

from itertools import pairwise
from typing import Any

import numpy as np

INCH, FOOT, POUND, PSI = 25.4, 304.8, 4.4482216152605, 4.4482216152605 / 25.4**2


def rectangle(width: float, depth: float, across: float, up: float) -> list[list[float]]:
    return [[across, up], [across + width, up], [across + width, up + depth], [across, up + depth]]


def piece(
    name: str, outline: list[list[float]], material: str, kind: str | None, span: tuple[float, float], holes: Any = ()
) -> dict[str, Any]:
    return {
        "id": name, "outline": outline, "holes": [list(hole) for hole in holes], "material": material, "kind": kind,
        "from": span[0], "to": span[1],
    }  # fmt: skip


def contact(joint: str | None, between: tuple[str, str], start: Any, end: Any) -> dict[str, Any]:
    return {"id": joint, "between": list(between), "start": list(start), "end": list(end), "joined": joint is not None}


def joint(
    name: str, glued: str | None, fastener: str | None, flow: float, cut_off: list[str], **more: Any
) -> dict[str, Any]:
    limits = []
    if glued:
        limits.append({"what": f"adhesive {glued}", "resistance": 0.4, "utilisation": 0.7})
    if fastener:
        limits.append({"what": f"fastener {fastener}", "resistance": 380.0, "utilisation": 0.7})
    held = {"adhesive": glued, "fastener": fastener}
    return {"id": name, **held, "shear_flow": flow, "limits": limits, "cut_off": cut_off, "utilisation": 0.7, **more}


def two_supports(
    length: float,
    supports: tuple[float, float],
    cases: dict[str, list[dict[str, Any]]],
    combinations: dict[str, dict[str, float]],
    ei: float,
) -> tuple[dict[str, Any], dict[str, Any]]:
    """Envelope curves and extremes of a member on two pins; loads are point and line loads."""
    a, b = supports
    places = {0.0, length, a, b}
    for loads in cases.values():
        for load in loads:
            places |= {load["at"]} if load["kind"] == "point" else {load["from"], load["to"]}
    corners = sorted(places)
    at: list[float] = []
    for left, right in pairwise(corners):
        at += list(np.linspace(left, right, max(3, round(60 * (right - left) / length))))
    x = np.array(at)
    last = np.append(np.diff(x) == 0, True)  # the left side of a jump
    shear, moment = {}, {}
    for case, loads in cases.items():
        pulls: list[tuple[float, float]] = []
        v, m = np.zeros_like(x), np.zeros_like(x)
        for load in loads:
            if load["kind"] == "point":
                pulls.append((load["at"], load["value"]))
            else:
                lo, hi = load["from"], load["to"]
                w0, w1 = load["value"] if isinstance(load["value"], list) else (load["value"],) * 2
                slope = (w1 - w0) / (hi - lo)
                s = np.clip(x - lo, 0, hi - lo)
                run = w0 * s + slope * s**2 / 2
                v -= run
                m -= w0 * s**2 / 2 + slope * s**3 / 6 + run * np.clip(x - hi, 0, None)
                total = (w0 + w1) / 2 * (hi - lo)
                middle = lo + (hi - lo) * (w0 + 2 * w1) / (3 * (w0 + w1))
                pulls.append((middle, 0.0))
                pulls[-1] = (middle, -total)  # counted in the reactions only
        weight = [(p, abs(f)) for p, f in pulls]
        right_reaction = sum(f * (p - a) for p, f in weight) / (b - a)
        left_reaction = sum(f for _, f in weight) - right_reaction
        forces = [(a, left_reaction), (b, right_reaction)] + [(p, -f) for p, f in pulls if f > 0]
        for place, force in forces:
            past = (x > place) | ((x == place) & ~last) if place > 0 else x >= 0
            if place == length:
                past = np.zeros_like(past)
            v += np.where(past, force, 0.0)
            m += np.where(x > place, force * (x - place), 0.0)
        shear[case], moment[case] = v, m
    stacks: dict[str, list[np.ndarray]] = {"shear": [], "moment": [], "deflection": []}
    for factors in combinations.values():
        v = sum(shear[c] * f for c, f in factors.items()) + np.zeros_like(x)
        m = sum(moment[c] * f for c, f in factors.items()) + np.zeros_like(x)
        turn = np.concatenate([[0], np.cumsum(np.diff(x) * (m[1:] + m[:-1]) / 2)])
        sag = np.concatenate([[0], np.cumsum(np.diff(x) * (turn[1:] + turn[:-1]) / 2)]) / ei
        at_a, at_b = np.interp(a, x, sag), np.interp(b, x, sag)
        stacks["shear"].append(v)
        stacks["moment"].append(m)
        stacks["deflection"].append(-(sag - at_a - (at_b - at_a) * (x - a) / (b - a)))
    names = list(combinations)
    diagrams: dict[str, Any] = {"at": [float(p) for p in x]}
    extremes: dict[str, Any] = {}
    for quantity, curves in stacks.items():
        table = np.array(curves)
        high, low = table.max(0), table.min(0)
        diagrams[quantity] = {"max": high.tolist(), "min": low.tolist()}
        i, j = int(high.argmax()), int(low.argmin())
        extremes[quantity] = {
            "max": float(high[i]), "at_max": float(x[i]), "combination_max": names[int(table[:, i].argmax())],
            "min": float(low[j]), "at_min": float(x[j]), "combination_min": names[int(table[:, j].argmin())],
        }  # fmt: skip
    diagrams["joints"] = {}
    return diagrams, extremes


def result(
    title: str,
    display: str,
    pieces: list[dict[str, Any]],
    contacts: list[dict[str, Any]],
    joints: list[dict[str, Any]],
    length: float,
    supports: list[dict[str, Any]],
    cases: dict[str, list[dict[str, Any]]],
    neutral: list[float],
    ei: float,
    combinations: dict[str, dict[str, float]] | None = None,
    creep: float | None = None,
    hinges: Any = (),
) -> dict[str, Any]:
    ends = (supports[0]["at"], supports[-1]["at"])
    combinations = combinations or {"all": dict.fromkeys(cases, 1.0)}
    diagrams, extremes = two_supports(length, ends, cases, combinations, ei)
    greatest = max(abs(extremes["shear"]["max"]), abs(extremes["shear"]["min"])) or 1.0
    for entry in joints:
        ratio = entry["shear_flow"] / greatest
        diagrams["joints"][entry["id"]] = {
            side: [v * ratio for v in diagrams["shear"][side]] for side in ("max", "min")
        }
        entry.setdefault("at", extremes["shear"]["at_max"])
        entry.setdefault("combination", extremes["shear"]["combination_max"])
    if creep is not None:
        for source in (diagrams, extremes):
            source["deflection_long_term"] = {
                key: value
                if key.startswith(("at", "comb"))
                else [v * (1 + creep) for v in value]
                if isinstance(value, list)
                else value * (1 + creep)
                for key, value in source["deflection"].items()
            }
    loads = [{**load, "case": case} for case, entries in cases.items() for load in entries]
    member = {"length": length, "supports": supports, "hinges": list(hinges)}
    return {
        "format": "bondwright/1",
        "kind": "member",
        "title": title,
        "display": display,
        "verdict": "pass",
        "utilisation": 0.78,
        "section": {"neutral_axis": neutral, "EI": ei},
        "member": {"reactions": {}, **extremes},
        "joints": joints,
        "drawing": {"pieces": pieces, "contacts": contacts, "member": member, "loads": loads},
        "diagrams": diagrams,
    }


def pins(*places: float) -> list[dict[str, Any]]:
    return [{"at": place, "kind": "pin"} for place in places]


def box_beam() -> dict[str, Any]:
    """Demo 1: roof box beam of softwood and plywood, SI."""
    length = 6000.0
    full = (0.0, length)
    pieces = [
        piece("bottom flange", rectangle(90, 70, 12.5, 0), "dressed softwood", "timber", full),
        piece("top flange", rectangle(90, 70, 12.5, 330), "dressed softwood", "timber", full),
        piece("web L", rectangle(12.5, 400, 0, 0), "softwood ply", "plywood", full),
        piece("web R", rectangle(12.5, 400, 102.5, 0), "softwood ply", "plywood", full),
    ]
    contacts, joints = [], []
    for flange, low in (("top flange", 330.0), ("bottom flange", 0.0)):
        for web, across in (("web L", 12.5), ("web R", 102.5)):
            name = f"{flange}/{web}"
            contacts.append(contact(name, (flange, web), (across, low), (across, low + 70)))
            joints.append(joint(name, "Brackwater R2", None, 17.8, [flange], at=0.0))
    cases = {
        "permanent": [{"kind": "line", "from": 0.0, "to": length, "value": 1.6}],
        "snow": [{"kind": "line", "from": 0.0, "to": length, "value": 2.6}],
        "hoist": [{"kind": "point", "at": 2000.0, "value": 3000.0}],
    }
    combinations = {
        "all together": {"permanent": 1.0, "snow": 1.0, "hoist": 1.0},
        "permanent only": {"permanent": 1.0},
        "with snow": {"permanent": 1.0, "snow": 1.0},
    }
    return result(
        "B1 roof box beam",
        "SI",
        pieces,
        contacts,
        joints,
        length,
        pins(0.0, length),
        cases,
        [57.5, 200.0],
        4.697e12,
        combinations,
        0.6,
    )


def deck() -> dict[str, Any]:
    """Demo 2: stage deck, glued and screwed, US customary."""
    length = 8 * FOOT
    full = (0.0, length)
    pieces = [piece("skin", rectangle(48 * INCH, 0.703 * INCH, 0, 3.5 * INCH), "3/4 plywood", "plywood", full)]
    contacts, joints = [], []
    for i in range(5):
        across = i * 11.625 * INCH
        name = f"rib {i + 1}"
        pieces.append(piece(name, rectangle(1.5 * INCH, 3.5 * INCH, across, 0), "2x4 lumber", "timber", full))
        contacts.append(
            contact(f"skin/{name}", ("skin", name), (across, 3.5 * INCH), (across + 1.5 * INCH, 3.5 * INCH))
        )
        joints.append(joint(f"skin/{name}", "Candleford P3", "no. 8 x 2", 30.6, ["skin"]))
    cases = {"own weight": [{"kind": "line", "from": 0.0, "to": length, "value": 32 * POUND / FOOT}],
             "crowd": [{"kind": "line", "from": 0.0, "to": length, "value": 500 * POUND / FOOT}]}  # fmt: skip
    return result(
        "D4 stage deck", "US", pieces, contacts, joints, length, pins(0.0, length), cases, [24 * INCH, 2.89 * INCH],
        118.3e6 * POUND * INCH**2,
    )  # fmt: skip


def strip() -> dict[str, Any]:
    """Demo 3: steel strip, stopping short of the supports, bonded under a timber lintel, SI."""
    length = 4800.0
    pieces = [
        piece("timber", rectangle(140, 240, 0, 9), "reclaimed timber", "timber", (0.0, length)),
        piece("steel strip", rectangle(80, 8, 30, 0), "S235 steel", "steel", (250.0, length - 250.0)),
    ]
    contacts = [contact("steel strip/timber", ("steel strip", "timber"), (30, 8.5), (110, 8.5))]
    joints = [joint("steel strip/timber", "Stonegarth E7", None, 51.0, ["steel strip"], at=250.0)]
    cases = {
        "all": [
            {"kind": "line", "from": 0.0, "to": length, "value": 4.5},
            {"kind": "point", "at": 2400.0, "value": 7000.0},
        ]
    }
    return result(
        "L7 mill lintel",
        "SI",
        pieces,
        contacts,
        joints,
        length,
        pins(0.0, length),
        cases,
        [70.0, 98.0],
        2.963e12,
        creep=0.8,
    )


def cross_bearer() -> dict[str, Any]:
    """Demo 4: aluminium tube and plate with overhangs, SI; rivets as peel stops at the plate."""
    length = 2400.0
    full = (0.0, length)
    pieces = [
        piece("tube", rectangle(60, 80, 15, 0), "6082-T6", "aluminium", full, [rectangle(54, 74, 18, 3)]),
        piece("plate", rectangle(90, 5, 0, 80.3), "6082-T6", "aluminium", full),
    ]
    contacts = [contact("tube/plate", ("tube", "plate"), (15, 80.15), (75, 80.15))]
    joints = [joint("tube/plate", "Holmgate T4", "4.8 rivet", 97.5, ["plate"], at=200.0)]
    cases = {
        "wheels": [{"kind": "point", "at": 200.0, "value": 10000.0}, {"kind": "point", "at": 2200.0, "value": 10000.0}]
    }
    return result(
        "X2 trailer cross-bearer",
        "SI",
        pieces,
        contacts,
        joints,
        length,
        pins(550.0, 1850.0),
        cases,
        [45.0, 52.0],
        8.86e10,
    )


DEMOS = {"box beam": box_beam, "deck": deck, "strip": strip, "cross-bearer": cross_bearer}


def stack(count: int, width: float = 100.0, depth: float = 20.0, kind: str = "timber") -> dict[str, Any]:
    """A glued stack of equal laminations, for crowded drawings."""
    full = (0.0, 3000.0)
    pieces = [
        piece(f"lamination {i + 1}", rectangle(width, depth, 0, i * depth), "spruce", kind, full) for i in range(count)
    ]
    contacts, joints = [], []
    for i in range(count - 1):
        name = f"lamination {i + 1}/lamination {i + 2}"
        contacts.append(
            contact(
                name, (f"lamination {i + 1}", f"lamination {i + 2}"), (0, (i + 1) * depth), (width, (i + 1) * depth)
            )
        )
        joints.append(joint(name, "glue", None, 1.0 + i, [f"lamination {j + 1}" for j in range(i + 1)]))
    cases = {"all": [{"kind": "line", "from": 0.0, "to": 3000.0, "value": 1.0}]}
    return result(
        "stack", "SI", pieces, contacts, joints, 3000.0, pins(0.0, 3000.0), cases, [width / 2, count * depth / 2], 1e12
    )


SPAN = (0.0, 3000.0)


def section_only(
    title: str,
    pieces: list[dict[str, Any]],
    contacts: list[dict[str, Any]],
    joints: list[dict[str, Any]],
    neutral: list[float],
) -> dict[str, Any]:
    """A member of 3 m under an even load, of which only the section matters."""
    cases = {"all": [{"kind": "line", "from": 0.0, "to": 3000.0, "value": 1.0}]}
    return result(title, "SI", pieces, contacts, joints, 3000.0, pins(0.0, 3000.0), cases, neutral, 1e12)


def single() -> dict[str, Any]:
    return section_only("plank", [piece("plank", rectangle(50, 200, 0, 0), "C24", "timber", SPAN)], [], [], [25, 100])


def sandwich() -> dict[str, Any]:
    """A panel 1.2 m wide with skins of 2 mm on a core of 80 mm."""
    pieces = [
        piece("bottom skin", rectangle(1200, 2, 0, 0), "glass laminate", "GFRP", SPAN),
        piece("core", rectangle(1200, 80, 0, 2.3), "foam 80", "foam", SPAN),
        piece("top skin", rectangle(1200, 2, 0, 82.6), "glass laminate", "GFRP", SPAN),
    ]
    contacts = [
        contact("bottom skin/core", ("bottom skin", "core"), (0, 2.15), (1200, 2.15)),
        contact("core/top skin", ("core", "top skin"), (0, 82.45), (1200, 82.45)),
    ]
    joints = [
        joint("bottom skin/core", "epoxy", None, 5, ["bottom skin"]),
        joint("core/top skin", "epoxy", None, 5, ["top skin"]),
    ]
    return section_only("sandwich", pieces, contacts, joints, [600, 42])


def strapped_core() -> dict[str, Any]:
    """Straps of 4 mm on a core of 180 mm."""
    pieces = [
        piece("bottom strap", rectangle(45, 4, 0, 0), "6060-T66", "aluminium", SPAN),
        piece("spruce core", rectangle(45, 180, 0, 5), "spruce", "timber", SPAN),
        piece("top strap", rectangle(45, 4, 0, 186), "6060-T66", "aluminium", SPAN),
    ]
    contacts = [
        contact("bottom strap/spruce core", ("bottom strap", "spruce core"), (0, 4.5), (45, 4.5)),
        contact("spruce core/top strap", ("spruce core", "top strap"), (0, 185.5), (45, 185.5)),
    ]
    joints = [
        joint(c["id"], "Fjellvik M5", None, 10, [strap])
        for c, strap in zip(contacts, ("bottom strap", "top strap"), strict=True)
    ]
    return section_only("strapped core", pieces, contacts, joints, [22.5, 95])


def tiny() -> dict[str, Any]:
    """Five millimetres high."""
    pieces = [
        piece("a", rectangle(5, 2, 0, 0), "steel", "steel", SPAN),
        piece("b", rectangle(3, 3, 1, 2.05), "brass", "brass", SPAN),
    ]
    return section_only(
        "tiny",
        pieces,
        [contact("a/b", ("a", "b"), (1, 2.02), (4, 2.02))],
        [joint("a/b", "glue", None, 3, ["b"])],
        [2.5, 2],
    )


def stressed_skin() -> dict[str, Any]:
    """Two skins on four ribs."""
    pieces = [
        piece("top skin", rectangle(1200, 12, 0, 152), "birch plywood", "plywood", SPAN),
        piece("bottom skin", rectangle(1200, 9, 0, 0), "birch plywood", "plywood", SPAN),
    ]
    contacts, joints = [], []
    for i in range(4):
        across = i * 385.0
        rib = f"rib {i + 1}"
        pieces.append(piece(rib, rectangle(45, 143, across, 9), "C24", "timber", SPAN))
        for skin, up in (("top skin", 152), ("bottom skin", 9)):
            contacts.append(contact(f"{skin}/{rib}", (skin, rib), (across, up), (across + 45, up)))
            joints.append(joint(f"{skin}/{rib}", "PU", None, 4, [skin]))
    return section_only("stressed skin", pieces, contacts, joints, [600, 85])


def flitch() -> dict[str, Any]:
    """Bolts in three rows at one side of a plate, nothing at the other."""
    pieces = [
        piece("left plank", rectangle(45, 220, 0, 0), "C24", "timber", SPAN),
        piece("flitch plate", rectangle(10, 200, 45, 10), "S275", "steel", SPAN),
        piece("right plank", rectangle(45, 220, 55, 0), "C24", "timber", SPAN),
    ]
    contacts = [
        contact("left plank/flitch plate", ("left plank", "flitch plate"), (45, 10), (45, 210)),
        contact(None, ("flitch plate", "right plank"), (55, 10), (55, 210)),
    ]
    return section_only(
        "flitch",
        pieces,
        contacts,
        [joint("left plank/flitch plate", None, "M12 bolt", 20, ["left plank"], rows=3)],
        [50, 110],
    )


def turned(width: float, depth: float, across: float, up: float, degrees: float) -> list[list[float]]:
    """A rectangle about (across, up), turned anticlockwise."""
    c, s = np.cos(np.radians(degrees)), np.sin(np.radians(degrees))
    corners = ((-width / 2, -depth / 2), (width / 2, -depth / 2), (width / 2, depth / 2), (-width / 2, depth / 2))
    return [[float(across + x * c - y * s), float(up + x * s + y * c)] for x, y in corners]


def turned_pieces() -> dict[str, Any]:
    pieces = [
        piece("fillet", turned(100, 30, 0, 0, 45), "ply", "plywood", SPAN),
        piece("rail", turned(60, 120, 53, -53, 45), "oak", "timber", SPAN),
    ]
    return section_only("turned", pieces, [], [], [10, -20])


def pipe() -> dict[str, Any]:
    """Round pieces, one inside the other."""
    turns = np.linspace(0, 2 * np.pi, 64, endpoint=False)
    circle = np.column_stack([np.cos(turns), np.sin(turns)])
    pieces = [
        piece("pipe", (60 * circle).tolist(), "S355", "steel", SPAN, [(54 * circle[::-1]).tolist()]),
        piece("dowel", (20 * circle).tolist(), "beech", "timber", SPAN),
    ]
    return section_only("pipe", pieces, [], [], [0, 0])


def profile() -> dict[str, Any]:
    """An I profile with a cap."""
    corners = [
        (0, 0),
        (120, 0),
        (120, 10),
        (63, 10),
        (63, 190),
        (120, 190),
        (120, 200),
        (0, 200),
        (0, 190),
        (57, 190),
        (57, 10),
        (0, 10),
    ]
    pieces = [
        piece("I profile", [list(c) for c in corners], "pultruded GFRP", "GFRP", SPAN),
        piece("cap", rectangle(120, 6, 0, 200.3), "CFRP plate", "CFRP", SPAN),
    ]
    contacts = [contact("I profile/cap", ("I profile", "cap"), (0, 200.15), (120, 200.15))]
    return section_only("profile", pieces, contacts, [joint("I profile/cap", "epoxy", None, 3, ["cap"])], [60, 110])


SECTIONS = {
    **DEMOS,
    "single": single,
    "sandwich": sandwich,
    "strapped core": strapped_core,
    "tiny": tiny,
    "stressed skin": stressed_skin,
    "flitch": flitch,
    "turned": turned_pieces,
    "pipe": pipe,
    "profile": profile,
    "12 laminations": lambda: stack(12),
    "60 laminations": lambda: stack(60),
    "3 m by 9 mm": lambda: stack(3, 3000, 3, "steel"),
}
