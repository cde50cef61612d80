"""Sets a result beside the oracle and names every number that differs, in the result and in its printed working."""

from __future__ import annotations

import re
from collections.abc import Iterator, Mapping
from functools import cache
from typing import Any

import numpy as np

from server import checks, documents
from tests.checks.oracle import number
from tests.checks.oracle_documents import DOCUMENTS
from tests.checks.oracle_verdict import Found, Verdict

CLOSE = 2e-7  # relative: what 400 samples and a parabola leave of a smooth extreme
QUANTITIES = {"V": "shear", "M": "moment", "u": "deflection", "u_fin": "deflection_long_term"}
NOTHING = 1e-6  # N, mm, MPa: what rounding leaves where the loads cancel
Result = Mapping[str, Any]


@cache
def expected(name: str) -> Verdict:
    """The oracle of one document; it is the same for every run of the program."""
    return Verdict(DOCUMENTS[name])


def result_of(name: str) -> Result:
    """What the program answers for one document."""
    return checks.run(documents.read(DOCUMENTS[name]))


def differences(result: Result, oracle: Verdict) -> list[str]:
    """Every key that is not the oracle's, in one line each; empty where all agree."""
    return [
        *_sections(result, oracle),
        *_member(result, oracle),
        *(line for n, joint in enumerate(oracle.joints) for line in _joint(result["joints"][n], joint)),
        *(line for each in result["pieces"] for line in _piece(each, oracle.judged_pieces[each["id"]])),
        *_sags(result, oracle),
        *_verdict(result, oracle),
        *_steps(result, oracle),
    ]


def _differs(what: str, got: Any, wanted: Any, scale: float = 0.0, close: float = CLOSE) -> Iterator[str]:
    """Numbers alike to CLOSE of their own size (or of ``scale``); anything else the same."""
    if isinstance(wanted, float | int) and isinstance(got, float | int) and not isinstance(got, bool):
        if abs(got - wanted) <= close * max(abs(wanted), scale) + NOTHING:
            return
    elif got == wanted:
        return
    elif isinstance(wanted, list) and isinstance(got, list) and len(got) == len(wanted):
        for one, other in zip(got, wanted, strict=True):
            yield from _differs(what, one, other, scale, close)
        return
    yield f"{what}: {got!r}, the oracle has {wanted!r}"


def _sections(result: Result, oracle: Verdict) -> Iterator[str]:
    for got, (start, end, section) in zip(result["sections"], oracle.sections, strict=True):
        where = f"section from {start:g} to {end:g}"
        yield from _differs(f"{where} from", [got["from"], got["to"]], [start, end])
        for key, value in (
            ("area", section.area), ("mass_per_length", section.mass), ("EA", section.EA), ("EI", section.EI),
            ("EI_lateral", section.EI_lateral), ("GA", section.GA),
        ):  # fmt: skip
            yield from _differs(f"{where} {key}", got[key], value)
        yield from _differs(f"{where} EI_product", got["EI_product"], section.EI_product, section.EI)
        for axis, value in enumerate(section.axis):
            yield from _differs(f"{where} neutral_axis", got["neutral_axis"][axis], value, 1.0)
    governing = {key: value for key, value in result["section"].items() if key in ("EI", "area")}
    if not any(governing.items() <= section.items() for section in result["sections"]):
        yield "section: not one of the sections"


def _member(result: Result, oracle: Verdict) -> Iterator[str]:
    got = result["member"]
    for name in oracle.combinations:
        run = oracle.response(name)
        force, couple = np.abs(run.force).max(), max(np.abs(run.couple).max(), np.abs(run.moment).max())
        for i, support in enumerate(oracle.raw["member"]["supports"]):
            reaction = got["reactions"][name][i]
            yield from _differs(f"reaction {i} of {name}", reaction["force"], float(run.force[i]), force)
            yield from _differs(f"couple {i} of {name}", reaction["couple"], float(run.couple[i]), couple)
            yield from _differs(f"place of support {i}", reaction["at"], number(support["at"]))
    quantities = ["shear", "moment", "deflection", *(["deflection_long_term"] if oracle.creeps else [])]
    if "deflection_long_term" in got and not oracle.creeps:
        yield "deflection_long_term is given, but nothing creeps"
    for quantity in quantities:
        wanted = oracle.envelope(quantity)
        if wanted is None or got[quantity] is None:
            yield from _differs(quantity, got[quantity], wanted)
            continue
        size = max(abs(e.value) for e in wanted.values())
        for end in ("max", "min"):
            value = got[quantity][end]
            yield from _differs(f"{quantity} {end}", value, wanted[end].value, size)
            place, combination = got[quantity][f"at_{end}"], got[quantity][f"combination_{end}"]
            yield from _there(f"{quantity} at_{end}", oracle, quantity, combination, place, value, size)


def _there(
    what: str, oracle: Verdict, quantity: str, combination: str, at: float, value: float, size: float
) -> Iterator[str]:
    """The oracle's curve, straight between its samples, has this value at this place, on one side of it at least."""
    sides = values_at(oracle, quantity, combination, at)
    if not any(abs(side - value) <= 5e-5 * size + NOTHING for side in sides):
        yield f"{what}: {value:g} is said to stand at {at:g} in {combination}, where the oracle has {sides}"


def values_at(oracle: Verdict, quantity: str, combination: str, at: float) -> list[float]:
    """The oracle's values at a place, from the segments that hold it."""
    x, y = oracle.curve(quantity, combination)
    return [
        float(np.interp(at, places, row)) for places, row in zip(x, y, strict=True) if places[0] <= at <= places[-1]
    ]


def _joint(got: Result, wanted: Found) -> Iterator[str]:
    where = f"joint {got['id']}"
    idle = wanted.numbers["shear_flow"] <= 1e-9  # N/mm: where nothing flows, no place and no moment is the one
    for key, value in wanted.numbers.items():
        if key in ("at", "combination") or (idle and key in ("first_moment", "split", "spacing_needed")):
            continue
        yield from _differs(f"{where} {key}", got[key], value)
    for key in ("stress", "strength_needed", "width_needed", "spacing_needed"):
        if key not in wanted.numbers:
            yield from _differs(f"{where} {key}", got[key], None)
    if not idle:
        yield from _differs(f"{where} at", got["at"], wanted.numbers["at"], 1e4, 1e-6)
        yield from _differs(f"{where} combination", got["combination"], wanted.numbers["combination"])
    yield from _limits(where, got, wanted)


def _limits(where: str, got: Result, wanted: Found) -> Iterator[str]:
    found = {limit["what"]: limit for limit in got["limits"] if limit["utilisation"] > 1e-9}
    used = {what for what, limit in wanted.limits.items() if limit.utilisation > 1e-9}
    yield from _differs(f"{where} limits", sorted(found), sorted(used))
    for what in found.keys() & wanted.limits.keys():
        limit, row = wanted.limits[what], wanted.limits[what].row
        yield from _differs(f"{where} {what} utilisation", found[what]["utilisation"], limit.utilisation)
        yield from _differs(f"{where} {what} resistance", found[what]["resistance"], float(limit.resistance[row]))
    yield from _differs(f"{where} utilisation", got["utilisation"], wanted.utilisation)


def _piece(got: Result, wanted: Found) -> Iterator[str]:
    where = f"piece {got['id']}"
    size = max(abs(wanted.numbers.get(key, 0.0)) for key in ("stress_top", "stress_bottom"))
    for key, value in wanted.numbers.items():
        yield from _differs(f"{where} {key}", got[key], value, size if key != "shear_stress" else 0.0, 1e-5)
    yield from _limits(where, got, wanted)


def _sags(result: Result, oracle: Verdict) -> Iterator[str]:
    got = result["deflection_limits"]
    yield from _differs("number of deflection limits", len(got), len(oracle.sags))
    for each, (start, end, lasting, limit, deflection) in zip(got, oracle.sags, strict=False):
        where = f"deflection limit {start:g} to {end:g}"
        yield from _differs(where, [each["from"], each["to"], each["long_term"]], [start, end, lasting])
        yield from _differs(f"{where} limit", each["limit"], limit)
        yield from _differs(f"{where} deflection", each["deflection"], deflection)
        yield from _differs(f"{where} utilisation", each["utilisation"], deflection / limit)


def _verdict(result: Result, oracle: Verdict) -> Iterator[str]:
    yield from _differs("utilisation", result["utilisation"], oracle.utilisation)
    yield from _differs("verdict", result["verdict"], oracle.verdict)
    if oracle.verdict == "not proven" and not result["missing"]:
        yield "missing: nothing is named, though the check is not proven"
    if oracle.verdict == "pass" and result["missing"]:
        yield f"missing: {result['missing']}"


def _steps(result: Result, oracle: Verdict) -> Iterator[str]:
    """The printed working of section and member reaches the oracle's numbers too."""
    for step in result["steps"]:
        title, value = step["title"], step["value"]
        at, combination = _place(title)
        wanted: list[float] = []
        size = 0.0
        if step["symbol"] == "u_0" and step["group"] == "Section":
            wanted = [section.axis[1] for _, _, section in oracle.sections]
        elif step["symbol"] in ("u_0", "EI") and step["group"] == "Long-term deflection":
            soft = [oracle.softened(section) for _, _, section in oracle.sections]
            wanted = [section.axis[1] if step["symbol"] == "u_0" else section.EI for section in soft]
        elif step["symbol"] == "EI":
            wanted = [section.EI for _, _, section in oracle.sections]
        elif step["symbol"] == "w" and step["group"] == "Loads":
            wanted = [abs(line[2]) for loads in oracle.loads.values() for line in loads.lines]
        elif step["symbol"] in ("R_1", "R_2"):
            wanted = [float(force) for force in oracle.response(combination).force]
        elif step["symbol"] in QUANTITIES and combination in oracle.combinations:
            quantity = QUANTITIES[step["symbol"]]
            wanted = values_at(oracle, quantity, combination, at)
            size = float(np.abs(oracle.curve(quantity, combination)[1]).max())
        if wanted:
            size = max(size, *(abs(each) for each in wanted))
            if not any(abs(each - value) <= 2e-5 * size + 1e-6 for each in wanted):
                yield f"step {title!r}: {value!r}, the oracle has {wanted}"


def _place(title: str) -> tuple[float, str]:
    found = re.search(r"at (-?[\d.e+]+) mm, combination (.+)$", title)
    return (float(found[1]), found[2]) if found else (0.0, "")
