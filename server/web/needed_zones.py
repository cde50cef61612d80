"""The zones of spacing that the flow asks for, put into the boxes of the form: what the result found, as if typed."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from itertools import pairwise
from typing import Any

from server.sheets.values import in_units
from server.web.form_shape import Shaped
from server.web.panel import Judged

BUTTON = "needed_zones"
_PARTS = {"SI": (("m", 1000.0), ("mm", 1.0)), "US": (("ft", 304.8), ("in", 25.4))}
_SIZE = {"SI": 1.0, "US": 25.4}


def put(values: Mapping[str, str], judged: Judged, paths: Mapping[str, str], system: str) -> tuple[Shaped, str]:
    """Return the boxes with the needed zones in them, and in words what was put in and where there are none."""
    kept = {name: text for name, text in values.items() if name != BUTTON}
    if not judged.result:
        return Shaped(kept, "joints"), "No zones yet: the check has no result. See what is still wanted or at fault."
    filled: dict[str, str] = {}
    without = []
    joints: Sequence[Mapping[str, Any]] = judged.result["joints"]
    for number, joint in enumerate(joints):
        box = paths.get(f"section.joints[{number}].spacing")
        if box is None or joint.get("role") not in ("sole", "fall-back"):
            continue
        zones = joint.get("spacing_schedule") or ()
        if zones:
            filled[box] = _typed(zones, system)
        else:
            without.append(f"{joint['id']}: {in_units(_why(joint), system)}")
    return Shaped(kept | filled, "joints", next(iter(filled), "")), " ".join(_told(len(filled), without))


def _told(count: int, without: Sequence[str]) -> Iterator[str]:
    if count:
        yield f"The zones are put in for {count} joint{'s' if count > 1 else ''}."
    if without:
        yield f"No zones for {'; '.join(without)}"
    if not count and not without:
        yield "No fasteners here carry a flow, so none asks for a spacing."


def _why(joint: Mapping[str, Any]) -> str:
    given = str(joint.get("schedule_note") or "")
    if given:
        return given
    return "the flow on its fasteners is not known; give them a first spacing, their shear resistance and slip modulus."


def _typed(zones: Sequence[Mapping[str, float]], system: str) -> str:
    spacings = [f"{zone['spacing'] / _SIZE[system]:.9g}" for zone in zones]
    if len(zones) == 1:
        return spacings[0]
    ends = _places([zones[0]["from"], *(zone["to"] for zone in zones)], system)
    return "; ".join(
        f"{start} to {end}: {spacing}" for (start, end), spacing in zip(pairwise(ends), spacings, strict=True)
    )


def _places(ends: Sequence[float], system: str) -> list[str]:
    """Places in the larger unit where that takes few digits for all of them, else in the smaller one, its unit said."""
    (large, by), (small, part) = _PARTS[system]
    whole = [round(at / by, 3) for at in ends]
    if all(abs(each * by - at) < 1e-9 * max(at, 1.0) for each, at in zip(whole, ends, strict=True)):
        return [f"{each:g} {large}" for each in whole]
    return [f"{at / part:.9g} {small}" for at in ends]
