"""Members for the oracle: twelve documents that differ in everything the contract lets differ. All invented."""

from __future__ import annotations

from typing import Any

Raw = dict[str, Any]

DEAL = {
    "E": 11000, "G": 690, "density": 420, "creep": 0.6,
    "strengths": {"bending": 24, "tension": 14.5, "compression": 21, "shear": 4.0},
    "duration_factors": {"permanent": 0.6, "long-term": 0.7, "medium-term": 0.8, "short-term": 0.9},
}  # fmt: skip
PLY = {
    "E": 8000, "G": 600, "G_rolling": 70, "density": 560, "creep": 0.8, "layered": True,
    "strengths": {"bending": 26, "tension": 17, "compression": 15, "shear": 7, "rolling_shear": 1.9},
    "duration_factors": {"permanent": 0.6, "long-term": 0.65, "medium-term": 0.8, "short-term": 0.9},
}  # fmt: skip
STEEL = {"E": 205000, "G": 79000, "density": 7850, "strengths": {"bending": 235, "tension": 235, "compression": 235,
                                                              "shear": 135}}  # fmt: skip
ALUMINIUM = {"E": "70 GPa", "G": 26300, "density": 2700, "strengths": {"bending": 120, "tension": 110, "shear": 69}}
RESIN = {
    "shear_strength": 5.2,
    "duration_factors": {"permanent": 0.5, "long-term": 0.6, "medium-term": 0.75, "short-term": 0.9},
}
EPOXY = {
    "shear_strength": 9.5, "thickness": 1.2, "factors": {"heat": 0.8, "wet": 0.7}, "status": "provisional",
    "duration_factors": {"short-term": 0.95},
}  # fmt: skip


def rect(width: Any, depth: Any, at: list[Any], material: str, **more: Any) -> Raw:
    return {"shape": "rectangle", "width": width, "depth": depth, "at": at, "material": material, **more}


def pin(at: Any) -> Raw:
    return {"at": at, "kind": "pin"}


def line(start: Any, end: Any, value: Any) -> Raw:
    return {"kind": "line", "from": start, "to": end, "value": value}


def point(at: Any, value: Any) -> Raw:
    return {"kind": "point", "at": at, "value": value}


def bonds(adhesive: str, *pairs: tuple[str, str], **more: Any) -> list[Raw]:
    return [{"between": list(pair), "adhesive": adhesive, **more} for pair in pairs]


def _whole(**parts: Any) -> Raw:
    return {"format": "bondwright/1", "kind": "member", **parts}


RING = [(flange, web) for flange in ("top", "bottom") for web in ("left", "right")]

TWO_SPAN_BOX = _whole(
    basis={"method": "limit-state", "partial_factor": {"adhesive": 1.7, "material": {"deal": 1.3, "ply": 1.2}}},
    materials={"deal": DEAL, "ply": PLY},
    adhesives={"resin": RESIN},
    section={
        "pieces": {
            "top": rect(95, 60, [15, 300], "deal"),
            "bottom": rect(95, 45, [15, 0], "deal"),
            "left": rect(15, 360, [0, 0], "ply"),
            "right": rect(15, 360, [110, 0], "ply"),
        },
        "joints": bonds("resin", *RING),
    },
    member={"length": 9000, "supports": [pin(0), pin("4.2 m"), pin(9000)], "deflection_limit": 250},
    loads={
        "own": [{"kind": "self-weight"}, line(0, 9000, 0.6)],
        "snow": [line(0, 9000, 1.9)],
        "plant": [point(6600, "3.1 kN"), line(600, 3000, [0.4, 1.6])],
    },
    combinations={
        "lasting": {"factors": {"own": 1.35}, "duration": "permanent", "for": "strength"},
        "snow": {"factors": {"own": 1.35, "snow": 1.5, "plant": 1.05}, "duration": "short-term", "for": "strength"},
        "plant": {"factors": {"own": 1.35, "plant": 1.5, "snow": 0.75}, "duration": "medium-term", "for": "strength"},
        "in use": {
            "factors": {"own": 1, "snow": 1, "plant": 0.7}, "for": "deflection",
            "sustained": {"own": 1, "snow": 0.2, "plant": 0.3},
        },
    },
)  # fmt: skip

OVERHANG_TEE = _whole(
    basis={"method": "allowable", "safety_factor": {"adhesive": 3, "material": 2.25}},
    materials={"deal": {**DEAL, "duration_factors": {}}, "ply": {**PLY, "duration_factors": {}}},
    adhesives={"resin": {"shear_strength": 6}},
    section={
        "pieces": {
            "web": rect(45, 170, [77.5, 0], "deal"),
            "plate": rect(200, 24, [0, 170], "ply"),
        },
        "joints": bonds("resin", ("plate", "web"), coverage=0.85, width=40),
    },
    member={"length": 5200, "supports": [pin(700), pin(4100)], "deflection_limit": 150},
    loads={
        "floor": [line(0, 5200, 1.1), point(5200, 420), line(1500, 4600, [0, 0.9])],
        "crank": [{"kind": "couple", "at": 2400, "value": "0.35 kN*m"}, point(0, 300)],
    },
    combinations={"both": {"factors": {"floor": 1, "crank": 1}}, "other": {"factors": {"floor": 0.6, "crank": -1.2}}},
)

SPRING_STACK = _whole(
    basis={"method": "allowable", "safety_factor": {"adhesive": 2.5, "material": 2}},
    materials={"deal": {**DEAL, "status": "approved"}, "steel": STEEL},
    adhesives={"resin": {"shear_strength": 4.5}, "epoxy": EPOXY},
    section={
        "pieces": {
            "plate": rect(70, 6, [10, -7.2], "steel"),
            "lower": rect(90, 60, [0, 0], "deal"),
            "upper": rect(90, 80, [0, 60], "deal"),
        },
        "joints": [
            *bonds("epoxy", ("plate", "lower"), coverage=0.9),
            *bonds("resin", ("lower", "upper"), width=80),
        ],
    },
    member={
        "length": 4000,
        "supports": [pin(0), {"at": 2100, "kind": "spring", "stiffness": "1.8 kN/m"}, {"at": 4000, "kind": "spring",
                     "stiffness": 650}],
        "deflection_limit": 200,
    },
    loads={"crane": [point(900, 2600), point(3100, 1900)], "own": [{"kind": "self-weight"}]},
)  # fmt: skip

HINGED = _whole(
    basis={"method": "limit-state", "partial_factor": 1.4},
    materials={"deal": DEAL, "ply": PLY},
    adhesives={"resin": RESIN},
    section={
        "pieces": {
            "web": rect(18, 240, [51, 40], "ply"),
            "lower": rect(120, 40, [0, 0], "deal"),
            "upper": rect(120, 40, [0, 280], "deal"),
        },
        "joints": bonds("resin", ("lower", "web"), ("web", "upper")),
    },
    member={
        "length": 8000,
        "supports": [{"at": 0, "kind": "fixed"}, pin(3000), {"at": 8000, "kind": "fixed"}],
        "hinges": [1900, 5200],
        "deflection_limit": 200,
    },
    loads={
        "own": [line(0, 8000, 0.3)], "people": [line(0, 3000, 1.2), point(6400, 900)], "wind": [line(3000, 8000, -0.7)],
    },
    combinations={
        "down": {"factors": {"own": 1.35, "people": 1.5}, "duration": "medium-term", "for": "strength"},
        "up": {"factors": {"own": 0.9, "wind": 1.5}, "duration": "short-term", "for": "strength"},
        "use": {"factors": {"own": 1, "people": 1}, "for": "deflection", "sustained": {"own": 1.0, "people": 0.3}},
    },
)  # fmt: skip

SHORT_STRIP = _whole(
    basis={"method": "allowable", "safety_factor": {"adhesive": 3, "material": 1.6}},
    materials={"deal": {**DEAL, "creep": 0.8}, "steel": STEEL},
    adhesives={"epoxy": {**EPOXY, "thickness": 0.5}},
    section={
        "pieces": {
            "beam": rect(140, 220, [0, 10], "deal"),
            "strip": rect(100, 10, [20, 0], "steel", **{"from": 400, "to": "4.3 m"}),
        },
        "joints": bonds("epoxy", ("beam", "strip")),
    },
    member={"length": 5000, "supports": [pin(0), pin(5000)], "deflection_limit": 250},
    loads={"wall": [line(0, 5000, 3.6)], "own": [{"kind": "self-weight"}], "beam": [point(1700, 4200)]},
    combinations={"all": {"factors": {"wall": 1, "own": 1, "beam": 1}, "sustained": {"wall": 0.9, "own": 1}}},
)

FASTENED = _whole(
    basis={"method": "limit-state", "partial_factor": {"fastener": 1.3, "material": 1.3}},
    materials={"deal": DEAL},
    fasteners={
        "screw": {"shear_resistance": 1900, "spacing_min": 30, "spacing_max": 200, "slip_modulus": 1500,
                  "duration_factors": {"short-term": 0.9, "long-term": 0.7}, "factors": {"end grain": 0.67}},
    },
    section={
        "pieces": {
            "foot": rect(140, 45, [0, 0], "deal"),
            "web": rect(45, 190, [47.5, 45], "deal"),
            "head": rect(140, 45, [0, 235], "deal"),
        },
        "joints": [
            {
                "between": ["foot", "web"], "fastener": "screw", "rows": 2,
                "spacing": [{"from": 0, "to": 900, "spacing": 60}, {"from": 900, "to": 3100, "spacing": 150},
                            {"from": 3100, "to": 4000, "spacing": 45}],
            },
            {"between": ["head", "web"], "fastener": "screw", "spacing": 55, "role": "sole"},
        ],
    },
    member={"length": 4000, "supports": [pin(0), pin(4000)], "deflection_limit": 300},
    loads={"own": [line(0, 4000, 0.5)], "goods": [line(1000, 4000, 1.1), point(3300, 800)]},
    combinations={
        "long": {"factors": {"own": 1.35}, "duration": "long-term"},
        "short": {"factors": {"own": 1.2, "goods": 1.5}, "duration": "short-term"},
    },
)  # fmt: skip

US_DECK = _whole(
    display="US",
    basis={"method": "allowable", "safety_factor": {"adhesive": 3, "fastener": 3, "material": 2.5}},
    materials={
        "rib": {"E": "1.4e6 psi", "G": "87500 psi", "density": "28 lb/ft3",
                "strengths": {"bending": "4100 psi", "tension": "2300 psi", "compression": "3300 psi",
                              "shear": "540 psi"}},
        "skin": {"E": "1.25e6 psi", "G": "90000 psi", "G_rolling": "12000 psi", "density": "36 lb/ft3",
                 "layered": True, "strengths": {"bending": "4200 psi", "tension": "2400 psi", "compression": "2700 psi",
                                                "shear": "600 psi", "rolling_shear": "220 psi"}},
    },
    adhesives={"P3": {"shear_strength": "240 psi", "status": "approved"}},
    fasteners={"screw": {"shear_resistance": "351 lbf"}},
    section={
        "pieces": {
            "skin": rect("36 in", "3/4 in", ["0 in", "5-1/2 in"], "skin"),
            "rib 1": rect("5-1/2 in", "1-1/2 in", ["2 in", "0 in"], "rib", turn=90),
            "rib 2": rect("5-1/2 in", "1-1/2 in", ["17-1/4 in", "0 in"], "rib", turn=-90),
            "rib 3": rect("1-1/2 in", "5-1/2 in", ["32-1/2 in", "0 in"], "rib"),
        },
        "joints": [
            {"between": ["skin", rib], "adhesive": "P3", "fastener": "screw", "spacing": "6 in", "role": "press"}
            for rib in ("rib 1", "rib 2", "rib 3")
        ],
    },
    member={"length": "12 ft 3-1/2 in", "supports": [pin("6 in"), pin("11 ft 9-1/2 in")], "deflection_limit": 240},
    loads={
        "people": [{"kind": "area", "from": 0, "to": "12 ft 3-1/2 in", "value": "60 psf", "width": "3 ft"}],
        "own": [{"kind": "self-weight"}, line("2 ft", "9 ft", "8 lbf/ft")],
        "rail": [point("12 ft 3-1/2 in", "110 lbf")],
    },
)  # fmt: skip

SANDWICH = _whole(
    basis={"method": "allowable", "safety_factor": 2.0},
    materials={
        "face": {**PLY, "G_rolling": 60},
        "core": {"E": 380, "G": 45, "density": 150, "creep": 2.2,
                 "strengths": {"bending": 3, "shear": 1.1, "rolling_shear": 0.9},
                 "duration_factors": {"long-term": 0.5, "short-term": 0.8}},
    },
    adhesives={"PU": {"shear_strength": 1.6, "duration_factors": {"long-term": 0.45, "short-term": 0.85}}},
    section={
        "pieces": {
            "under": rect(600, 9, [0, 0], "face"),
            "core": rect(600, 60, [0, 9], "core", grain="across"),
            "over": rect(600, 9, [0, 69], "face", grain="across"),
        },
        "joints": bonds("PU", ("under", "core"), ("core", "over")),
    },
    member={"length": 2200, "supports": [{"at": 0, "kind": "fixed"}], "deflection_limit": 60},
    loads={"own": [{"kind": "self-weight"}], "snow": [line(0, 2200, 0.35)], "man": [point(2200, 300)]},
    combinations={
        "man": {"factors": {"own": 1, "man": 1}, "duration": "short-term"},
        "snow": {"factors": {"own": 1, "snow": 1}, "duration": "long-term", "sustained": {"own": 1, "snow": 0.5}},
    },
)  # fmt: skip

UNKNOWN_GLUE = _whole(
    basis={"method": "allowable", "safety_factor": {"adhesive": 3, "material": 2}},
    materials={
        "deal": {"E": 11000, "strengths": {"tension": 14, "compression": 20, "shear": 4}},
        "panel": {"E": 4000, "strengths": {}},
    },
    adhesives={"new": {"factors": {"cold": 0.9}}},
    section={
        "pieces": {
            "block": rect(60, 60, [0, 0], "deal"),
            "side": rect(12, 180, [60, -30], "panel"),
        },
        "joints": bonds("new", ("block", "side")),
    },
    member={"length": 1800, "supports": [pin(0), pin(1800)]},
    loads={"shelf": [line(0, 1800, [0.8, 0.2])]},
)

PROPPED = _whole(
    basis={"method": "limit-state", "partial_factor": {"adhesive": 2, "material": {"alloy": 1.1, "deal": 1.3}}},
    materials={"alloy": ALUMINIUM, "deal": {**DEAL, "creep": 0.0}},
    adhesives={"epoxy": {**EPOXY, "thickness": 0.3, "status": "superseded"}},
    section={
        "pieces": {
            "core": rect(70, 120, [0, 0], "deal"),
            "cap": rect(50, 5, [10, 120.2], "alloy"),
            "shoe": rect(50, 5, [10, -5.2], "alloy"),
        },
        "joints": bonds("epoxy", ("cap", "core"), ("shoe", "core")),
    },
    member={
        "length": 4500, "supports": [{"at": 0, "kind": "fixed"}, pin(3600)], "deflection_limit": 180,
    },
    loads={
        "roof": [line(0, 4500, [1.4, 0.6])],
        "lift": [point(4500, -900), {"kind": "couple", "at": 3600, "value": 4.0e5}],
        "sign": [{"kind": "couple", "at": 4500, "value": "-0.3 kN*m"}],
    },
    combinations={
        "down": {"factors": {"roof": 1.5, "sign": 1.5}, "duration": "short-term", "for": "strength"},
        "up": {"factors": {"roof": 0.5, "lift": 1.5}, "for": "strength"},
        "check": {"factors": {"roof": 1, "sign": -1}, "for": "both", "sustained": {"roof": 0.4}},
    },
    analysis={"shear_deformation": False},
)  # fmt: skip

TWIN_WEBS = _whole(
    basis={
        "method": "allowable", "safety_factor": {"adhesive": 2.8, "fastener": 2, "material": {"deal": 2.1, "ply": 2}},
    },
    materials={"deal": {**DEAL, "status": "provisional"}, "ply": PLY},
    adhesives={"resin": {**RESIN, "status": "indicative"}},
    fasteners={"nail": {"shear_resistance": 700}},
    section={
        "pieces": {
            "upper": rect(200, 40, [0, 260], "deal"),
            "lower": rect(200, 40, [0, 0], "deal"),
            "near": rect(12, 220, [50, 40], "ply"),
            "far": rect(12, 220, [138, 40], "ply"),
            "rail": rect(60, 30, [70, 300], "deal"),
        },
        "joints": [
            *bonds("resin", ("upper", "near"), ("upper", "far"), ("lower", "near"), ("lower", "far")),
            *bonds("resin", ("rail", "upper"), fastener="nail", spacing=90, role="peel-stop", coverage=0.7),
        ],
    },
    member={"length": 6000, "supports": [pin(0), pin(2600), pin(6000)]},
    loads={"own": [{"kind": "self-weight"}], "track": [point(1300, 5200), point(4400, 6100)]},
    combinations={
        "all": {"factors": {"own": 1, "track": 1}, "duration": "medium-term"},
        "light": {"factors": {"own": 1, "track": 0.2}, "duration": "permanent"},
    },
)  # fmt: skip

SHORT_LAYERS = _whole(
    basis={"method": "allowable", "safety_factor": {"adhesive": 2, "fastener": 2.2, "material": 1.8}},
    materials={
        "deal": {
            "E": 11000, "G": 690, "strengths": {"tension": 14.5, "compression": 21, "shear": 4, "rolling_shear": 1},
        },
    },
    adhesives={"resin": {"shear_strength": 5}},
    fasteners={
        "bolt": {"shear_resistance": 5200, "spacing_max": 80, "status": "on hold", "duration_factors": {"brief": 1.1}},
    },
    section={
        "pieces": {
            "low": rect(80, 50, [0, 0], "deal"),
            "mid": rect(80, 50, [0, 50], "deal", grain="across", to=2400),
            "high": rect(80, 50, [0, 100], "deal", to=1500),
        },
        "joints": [
            {"between": ["low", "mid"], "fastener": "bolt", "spacing": 100},
            *bonds("resin", ("mid", "high")),
        ],
    },
    member={"length": 3000, "supports": [{"at": 0, "kind": "fixed"}], "deflection_limit": 150},
    loads={"arm": [point(3000, 140), line(0, 3000, 0.06)]},
    combinations={"gust": {"factors": {"arm": 1.1}, "duration": "brief"}},
)  # fmt: skip

DOCUMENTS: dict[str, Raw] = {
    "two-span box, limit state, creep": TWO_SPAN_BOX,
    "overhangs, tee, couple": OVERHANG_TEE,
    "spring supports, stack of three materials": SPRING_STACK,
    "hinges, fixed ends, uplift": HINGED,
    "a strip that stops short": SHORT_STRIP,
    "fasteners with zones": FASTENED,
    "US deck": US_DECK,
    "sandwich cantilever, rolling shear": SANDWICH,
    "no strength for the glue": UNKNOWN_GLUE,
    "propped, couples, no shear deformation": PROPPED,
    "twin webs by symmetry": TWIN_WEBS,
    "layers that stop, bolted and bonded": SHORT_LAYERS,
}
