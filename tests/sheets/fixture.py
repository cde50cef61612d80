"""A box beam's document and result, put together by hand for the sheets: the shape of contract.md, invented numbers.

The numbers are those of a hand check of the beam; they need only be of the right size, as sheets draw and never reckon.
"""

from __future__ import annotations

from typing import Any

from server.working import Working

ADHESIVE = {"what": "adhesive R2", "strength": 5.2, "resistance": 1.7333, "utilisation": 0.1464, "demand": 0.2538}
ROLLING = {"strength": 1.28, "resistance": 0.3260, "utilisation": 0.7785, "demand": 0.2538}
SHEAR = {"what": "shear in top flange", "strength": 4.0, "resistance": 1.3333, "utilisation": 0.1904, "demand": 0.2538}


def document() -> dict[str, Any]:
    """The document as typed: a roof box beam of timber flanges and plywood webs."""
    flange = {"shape": "rectangle", "width": 90, "depth": 70, "material": "softwood"}
    web = {"shape": "rectangle", "width": "12.5 mm", "depth": "400 mm", "material": "ply"}
    return {
        "format": "bondwright/1",
        "kind": "member",
        "title": "Roof box beam B1",
        "note": "Webs outside; nails press only.",
        "basis": {"method": "allowable", "safety_factor": {"adhesive": 3.0, "material": 3.0, "fastener": 2.0}},
        "materials": {
            "softwood": {
                "kind": "timber",
                "E": 11000,
                "G": 690,
                "density": 420,
                "strengths": {"bending": 24, "shear": "4 MPa", "tension": 14.5, "compression": 21},
                "source": "strength class as graded",
            },
            "ply": {"record": "M-PLY-12", "revision": 2},
        },
        "adhesives": {"R2": {"record": "V-014", "revision": 2}},
        "fasteners": {"N27": {"shear_resistance": "380 N", "diameter": 2.7, "source": "invented catalogue"}},
        "section": {
            "pieces": {
                "bottom flange": {**flange, "at": [12.5, 0]},
                "top flange": {**flange, "at": [12.5, 330]},
                "web L": {**web, "at": [0, 0]},
                "web R": {**web, "at": [102.5, 0]},
            },
            "joints": [
                {
                    "between": [f"{end} flange", f"web {side}"],
                    "adhesive": "R2",
                    "fastener": "N27",
                    "spacing": 75,
                    "role": "press",
                }
                for end in ("top", "bottom")
                for side in "LR"
            ],
        },
        "member": {
            "length": "6.0 m",
            "supports": [{"at": 0, "kind": "pin"}, {"at": "6 m", "kind": "pin"}],
            "deflection_limit": 300,
        },
        "loads": {
            "roof": [{"kind": "line", "from": 0, "to": "6 m", "value": "4.2 kN/m"}],
            "hoist": [{"kind": "point", "at": "2.0 m", "value": "3.0 kN"}],
        },
        "combinations": {"all": {"factors": {"roof": 1.0, "hoist": 1.0}, "duration": "medium-term"}},
        "service": {"temperature": [-10, 35]},
    }


def result() -> dict[str, Any]:
    """The result that belongs to it."""
    joints = [f"{end} flange/web {side}" for end in ("top", "bottom") for side in "LR"]
    return {
        "format": "bondwright/1",
        "kind": "member",
        "title": "Roof box beam B1",
        "display": "SI",
        "verdict": "fail",
        "utilisation": 1.0945,
        "governing": "deflection of the span 0 to 6000 mm, 1.09 of its limit used 2897 mm from the left end, "
        "combination all",
        "section": {
            "area": 22600.0,
            "mass_per_length": 11.29,
            "EA": 2.036e8,
            "EI": 4.6966e12,
            "EI_lateral": 4.6e11,
            "EI_product": 0.0,
            "neutral_axis": [57.5, 200.0],
            "shear_centre": None,
            "GA": 5.2e6,
            "GJ": None,
            "effective_EI": 4.6966e12,
        },
        "sections": [],
        "member": {
            "reactions": {
                "all": [{"at": 0, "force": 14600.0, "couple": 0.0}, {"at": 6000, "force": 13600.0, "couple": 0.0}]
            },
            "shear": _extremes(14600.0, 0, -13600.0, 6000),
            "moment": _extremes(22.02e6, 2762.0, 0.0, 0),
            "deflection": _extremes(21.89, 2897.0, 0.0, 0),
        },
        "joints": [_joint(name) for name in joints],
        "pieces": [_piece(name) for name in ("bottom flange", "top flange", "web L", "web R")],
        "deflection_limits": [
            {
                "from": 0,
                "to": 6000,
                "kind": "span",
                "limit": 20.0,
                "deflection": 21.89,
                "utilisation": 1.0945,
                "long_term": False,
                "combination": "all",
                "at": 2897.0,
            }
        ],
        "cautions": [
            {
                "about": "wide bond",
                "text": "top flange/web L: h_f = 70 mm > 4 b_ef = 50 mm. EN 1995-1-1:2004 (9.10) would multiply the "
                "rolling shear strength of web L by 0.764 (utilisation 1.02 instead of 0.778); it is not applied here.",
                "answer": True,
            },
            {
                "about": "fasteners with adhesive",
                "text": "top flange/web L: stiff glue carries nearly all of the flow until it breaks, so the fasteners "
                "(press) are held to carry none of it. Their strengths are never added.",
                "answer": False,
            },
        ],
        "missing": [
            "shear strength of adhesive 'R2' (joint top flange/web R): bond shear coupons, or an approved bond record."
        ],
        "not_checked": ["lateral buckling of the member and local buckling of its pieces", "vibration", "fire"],
        "drawing": _drawing(),
        "diagrams": _diagrams(joints),
        "steps": steps(),
        "values_used": {
            "materials": {
                "softwood": document()["materials"]["softwood"],
                "ply": {
                    "kind": "plywood",
                    "E": 6500.0,
                    "G": 600.0,
                    "layered": True,
                    "density": 560.0,
                    "strengths": {
                        "rolling_shear": 1.28,
                        "shear": 4.5,
                        "tension": 11.0,
                        "compression": 12.0,
                        "bending": 18.0,
                    },
                    "record": "M-PLY-12",
                    "revision": 2,
                    "status": "approved",
                    "source": "shop tests 2026-03, n = 12 (invented)",
                },
            },
            "adhesives": {
                "R2": {
                    "shear_strength": 5.2,
                    "kind": "resorcinol",
                    "record": "V-014",
                    "revision": 2,
                    "status": "approved",
                    "source": "block shear, n = 10 (invented)",
                }
            },
            "fasteners": {"N27": {"shear_resistance": 380.0, "diameter": 2.7, "source": "invented catalogue"}},
        },
        "engine": "bondwright 0.1.0",
    }


def _extremes(most: float, at_most: float, least: float, at_least: float) -> dict[str, Any]:
    return {
        "max": most,
        "min": least,
        "at_max": at_most,
        "at_min": at_least,
        "combination_max": "all",
        "combination_min": "all",
    }


def _joint(name: str) -> dict[str, Any]:
    place = {
        "demand_unit": "MPa",
        "combination": "all",
        "at": 0.0,
        "duration_factor": 1.0,
        "factors": {},
        "safety_factor": 3.0,
        "reductions": [],
    }
    web = name.split("/")[1]
    return {
        "id": name,
        "contact_length": 70.0,
        "bonded_width": 70.0,
        "first_moment": 1.0395e6,
        "shear_flow": 17.77,
        "stress": 0.2538,
        "at": 0.0,
        "combination": "all",
        "split": "symmetry",
        "adhesive": "R2",
        "fastener": "N27",
        "role": "press",
        "limits": [
            {**ADHESIVE, **place},
            {**ROLLING, "what": f"rolling shear in {web}", **place},
            {**SHEAR, **place},
        ],
        "strength_needed": 0.7614,
        "utilisation": 0.7785,
        "width_needed": 54.5,
        "spacing_needed": None,
    }


def _piece(name: str) -> dict[str, Any]:
    web = name.startswith("web")
    edge = 6.1 if web else 10.3
    sign = -1 if name.startswith("top") or web else 1
    return {
        "id": name,
        "stress_top": sign * edge,
        "stress_bottom": 6.1 if web else sign * 6.7,
        "shear_stress": 1.83 if web else 0.33,
        "limits": [
            {
                "what": "bending",
                "strength": 24.0,
                "resistance": 8.0 if not web else 6.0,
                "demand": 7.6,
                "demand_unit": "MPa",
                "utilisation": 0.95,
                "combination": "all",
                "at": 2762.0,
            }
        ],
        "utilisation": 0.95,
    }


def _drawing() -> dict[str, Any]:
    pieces = {
        "bottom flange": (12.5, 0, 90, 70, "softwood", "timber"),
        "top flange": (12.5, 330, 90, 70, "softwood", "timber"),
        "web L": (0, 0, 12.5, 400, "ply", "plywood"),
        "web R": (102.5, 0, 12.5, 400, "ply", "plywood"),
    }
    return {
        "pieces": [
            {
                "id": name,
                "outline": [[a, u], [a + w, u], [a + w, u + d], [a, u + d]],
                "holes": [],
                "material": material,
                "kind": kind,
                "from": 0,
                "to": 6000,
            }
            for name, (a, u, w, d, material, kind) in pieces.items()
        ],
        "contacts": [
            {
                "id": f"{end} flange/web {side}",
                "between": [f"{end} flange", f"web {side}"],
                "start": [12.5 if side == "L" else 102.5, low],
                "end": [12.5 if side == "L" else 102.5, low + 70],
                "length": 70.0,
                "joined": True,
                "bonded": True,
            }
            for end, low in (("top", 330), ("bottom", 0))
            for side in "LR"
        ],
        "member": {"length": 6000, "supports": [{"at": 0, "kind": "pin"}, {"at": 6000, "kind": "pin"}], "hinges": []},
        "loads": [
            {"case": "roof", "kind": "line", "from": 0, "to": 6000, "value": [4.2, 4.2]},
            {"case": "hoist", "kind": "point", "at": 2000, "value": 3000.0},
        ],
    }


def _diagrams(joints: list[str]) -> dict[str, Any]:
    at = [100.0 * i for i in range(21)] + [2000.0 + 100.0 * i for i in range(41)]
    shear = [14600 - 4.2 * x for x in at[:21]] + [11600 - 4.2 * x for x in at[21:]]
    moment = [14600 * x - 2.1 * x * x - (3000 * (x - 2000) if x > 2000 else 0) for x in at]
    sag = [21.89 * 16 / 5 * (x / 6000) * (1 - 2 * (x / 6000) ** 2 + (x / 6000) ** 3) for x in at]
    return {
        "at": at,
        "shear": {"max": shear, "min": shear},
        "moment": {"max": moment, "min": moment},
        "deflection": {"max": sag, "min": sag},
        "joints": {
            name: {"max": [s * 1.217e-3 for s in shear], "min": [s * 1.217e-3 for s in shear]} for name in joints
        },
    }


def steps() -> list[dict[str, Any]]:
    """Working of the right kinds: a sum over pieces, fractions, a power, a note, negative numbers."""
    w = Working()
    w.begin("Section")
    pieces = {
        "E": ([11000.0, 11000.0, 6500.0, 6500.0], "MPa"),
        "A": ([6300.0, 6300.0, 5000.0, 5000.0], "mm2"),
        "u": ([35.0, 365.0, 200.0, 200.0], "mm"),
    }
    u_0 = w.step("Neutral axis", "u_0", "sum(E*A*u) / sum(E*A)", pieces, "mm", "E-weighted centroid")
    inertia = ([2572500.0, 2572500.0, 66666666.7, 66666666.7], "mm4")
    given = {**pieces, "I": inertia, "u_0": (u_0, "mm")}
    stiffness = w.step("Bending stiffness", "EI", "sum(E*(I + A*(u - u_0)**2))", given, "N*mm2", "parallel axes")
    w.begin("Member")
    V = w.step(
        "Reaction at the left support",
        "R_A",
        "w*L/2 + P*(L - a)/L",
        {"w": (4.2, "N/mm"), "L": (6000.0, "mm"), "P": (3000.0, "N"), "a": (2000.0, "mm")},
        "N",
        "moment equilibrium about the right support",
    )
    w.begin("Joint top flange/web L")
    S = w.step(
        "First moment of the cut-off part",
        "S",
        "sum(E*A*(u - u_0))",
        {"E": ([11000.0], "MPa"), "A": ([6300.0], "mm2"), "u": ([365.0], "mm"), "u_0": (u_0, "mm")},
        "N*mm",
        "cut-off part: top flange",
    )
    q = w.step(
        "Shear flow",
        "q",
        "c_s*V*S/EI",
        {"c_s": (0.5, ""), "V": (V, "N"), "S": (S, "N*mm"), "EI": (stiffness, "N*mm2")},
        "N/mm",
        "Jourawski's formula; halves by mirror symmetry",
    )
    tau = w.step(
        "Shear stress in the bond", "tau", "q/(b*c)", {"q": (q, "N/mm"), "b": (70.0, "mm"), "c": (1.0, "")}, "MPa"
    )
    k = w.step(
        "Deep flange",
        "k_h",
        "(4*b_ef/h_f)**0.8",
        {"b_ef": (12.5, "mm"), "h_f": (70.0, "mm")},
        "",
        "EN 1995-1-1:2004 (9.10)",
    )
    f_d = w.step(
        "Resistance: rolling shear in web L",
        "f_d",
        "k_h*f_k/gamma",
        {"k_h": (k, ""), "f_k": (1.28, "MPa"), "gamma": (3.0, "")},
        "MPa",
        "record M-PLY-12 revision 2",
    )
    w.step("Utilisation", "eta", "tau/f_d", {"tau": (tau, "MPa"), "f_d": (f_d, "MPa")})
    w.begin("Deflection")
    w.note(
        "Greatest deflection",
        "Direct stiffness, exact piecewise polynomials over 3 intervals; extremes by roots. Equilibrium: reactions "
        "less loads leave 0 N of 28 200 N.",
        21.89,
        "mm",
        symbol="u_max",
    )
    return w.steps
