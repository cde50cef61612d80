"""What would help at the end of a bonded strip: moved, tapered, a thicker or softer line, held down by fasteners."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import replace

import numpy as np

from server.checks.curves import Curve
from server.checks.resistance import Findings
from server.checks.strip_ends import EndCheck, Strain, Stresses, stresses_at, use_of
from server.errors import InputError
from server.mechanics.overlap_laps import BondLine

TIP = 1.5  # mm, to which a taper thins; common practice: 1 to 2 mm
TAPERS = (50.0, 200.0)  # mm
HALVINGS = 6


def tried(check: EndCheck, moment: Curve, strains: Sequence[Strain]) -> list[dict[str, object]]:
    """Each change with what it brings, reckoned anew."""
    found = [_told(what, check, stresses) for what, stresses in _each(check, moment, strains)]
    moved = [each for each in (_moved(check, moment, strains),) if each is not None]
    if moved and not any(_holds(each) for each in (*moved, *found)):
        moved += _together(check, moment, strains)
    return [*moved, *found]


def _holds(told: Mapping[str, object]) -> bool:
    used = told["utilisation"]
    return not isinstance(used, float) or used <= 1


def _together(check: EndCheck, moment: Curve, strains: Sequence[Strain]) -> list[dict[str, object]]:
    """No one change is enough: the end run out and tapered, or with a thicker line too; the first that holds."""
    assert check.end.bonded is not None
    strip, thick = check.end.bonded.strip, _thicker(check.bond)
    tapers = strip.area is None and strip.thickness > TIP and 2 * TAPERS[0] < check.end.bonded.length
    both = [(check.bond, TAPERS[0]), (thick, TAPERS[0])] if tapers else [(thick, 0.0)]
    found: list[dict[str, object]] = []
    for bond, taper in both:
        told = _moved(check, moment, strains, bond, taper)
        found = [] if told is None else [told]
        if told is not None and _holds(told):
            break
    return found


def _thicker(bond: BondLine) -> BondLine:
    return replace(bond, thickness=3 * bond.thickness)


def _each(check: EndCheck, moment: Curve, strains: Sequence[Strain]) -> Iterator[tuple[str, Stresses]]:
    end, bond = check.end, check.bond
    thicker = _thicker(bond)
    softer = replace(bond, shear_modulus=bond.shear_modulus / 4, E=bond.E / 4)
    yield f"bond line {thicker.thickness:g} mm thick", stresses_at(end, thicker, moment, strains)
    yield "adhesive a quarter as stiff", stresses_at(end, softer, moment, strains)
    assert end.bonded is not None
    strip = end.bonded.strip
    for taper in TAPERS:
        if strip.area is None and strip.thickness > TIP and 2 * taper < end.bonded.length:
            words = f"end tapered to {TIP:g} mm over {taper:g} mm"
            yield words, stresses_at(end, bond, moment, strains, taper=taper, tip=TIP)


def _told(what: str, check: EndCheck, found: Stresses) -> dict[str, object]:
    row = int(found.peak_shear.argmax()) if check.governing is None else check.governing.row
    return {
        "what": what,
        "end_shear": float(found.peak_shear[row]),
        "end_peel": float(found.peak_peel[row]),
        "utilisation": use_of(check, found),
    }


def _moved(
    check: EndCheck, moment: Curve, strains: Sequence[Strain], bond: BondLine | None = None, taper: float = 0.0
) -> dict[str, object] | None:
    """How far out the end must run for its limits to hold, with another line or a taper; None where it holds as is."""
    end = check.end
    if check.governing is None or check.governing.utilisation <= 1 or not end.inside:
        return None
    bonded, line = end.bonded, check.bond if bond is None else bond
    assert bonded is not None
    limit = 0.0 if end.side == "left" else float(moment.breaks[-1])

    def solve(place: float) -> Stresses:
        start, stop = (place, None) if end.side == "left" else (None, place)
        return stresses_at(end, line, moment, strains, start=start, stop=stop, taper=taper, tip=TIP if taper else 0.0)

    extra = f", tapered to {TIP:g} mm over {taper:g} mm" if taper else ""
    extra += f", bond line {line.thickness:g} mm thick" if line is not check.bond else ""
    try:
        furthest = solve(limit)
    except InputError:
        return None
    used = use_of(check, furthest)
    if used is None:
        return None
    if used > 1:
        return _told(f"end run out to {limit:g} mm, the member's own end{extra}: still not enough", check, furthest)
    holds, fails, best = limit, end.at, furthest
    for _ in range(HALVINGS):
        middle = (holds + fails) / 2
        stresses = solve(middle)
        if (use_of(check, stresses) or 0.0) <= 1:
            holds, best = middle, stresses
        else:
            fails = middle
    shown = np.floor(holds) if end.side == "left" else np.ceil(holds)
    return _told(f"end run out to {shown:g} mm from the left{extra}", check, best)


def hold_down(check: EndCheck) -> tuple[float, float]:
    """The pull that fasteners at the end must hold [N], and how far from the end it reaches [mm]."""
    bonded, end, course = check.end.bonded, check.end, check.stresses.course
    assert bonded is not None
    row = int(check.stresses.peak_peel.argmax()) if check.governing is None else check.governing.row
    at = course.at if end.side == "left" else course.at[-1] - course.at[::-1]
    peel = course.peel[:, row] if end.side == "left" else course.peel[::-1, row]
    if peel[0] <= 0:
        return 0.0, 0.0
    first = int(np.argmax(peel < 0)) or len(peel)
    return float(np.trapezoid(peel[:first], at[:first]) * bonded.width), float(at[first - 1])


def words(check: EndCheck, others: Sequence[EndCheck], findings: Findings) -> None:
    """The caution of a piece's worse end: how it stands, and what to change; its other end in a few words."""
    end, bonded = check.end, check.end.bonded
    assert bonded is not None
    row = int(check.stresses.peak_shear.argmax()) if check.governing is None else check.governing.row
    taken = check.result["force_to_pick_up"]
    pull, reach = hold_down(check)
    held = f" End fasteners would have to hold {pull:.0f} N within {reach:.3g} mm." if pull > 0 else ""
    told = "; ".join(
        f"{c['what']} ({c['utilisation']:.2f})" for c in check.changes if isinstance(c["utilisation"], float)
    )
    changes = f" What helps, with the utilisation it brings: {told}." if told else ""
    other = "".join(
        f" Its other end, at {each.end.at:g} mm, has {each.stresses.peak_shear.max():.3g} and "
        f"{each.stresses.peak_peel.max():.3g} MPa."
        for each in others
    )
    findings.caution(
        "end of a bonded piece",
        f"{end.title[:1].upper() + end.title[1:]}: {bonded.part.name} must pick up {taken:.0f} N there at once: shear "
        f"{check.stresses.peak_shear[row]:.3g} MPa and peel {check.stresses.peak_peel[row]:.3g} MPa, against a mean of "
        f"{check.result['mean_shear_at_end']:.3g} MPa.{other}{changes}{held} Linear elastic, an upper estimate: the "
        "softer piece's own shear and a fillet of adhesive relieve the end.",
        answer=True,
    )
