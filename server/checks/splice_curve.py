"""Strength against overlap, the useful length, and what a change of the joint would bring."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.overlap_laps import DOUBLE, Action, BondLine, Lap, Layout, Plate, respond
from server.mechanics.overlap_strength import LONGER, Curve, Limits, curve, strength, yield_strength
from server.mechanics.overlap_tube import sections

Array = NDArray[np.float64]
DRAWN = 2.5  # the curve is drawn to this many times the overlap, or a little beyond the useful one
DUCTILE = 500.0  # strain limit over the strain at yield: beyond it, and beyond any adhesive, each length takes seconds
COARSE = 1.35  # ratio of neighbouring overlaps where the bond yields, which takes longer to reckon


@dataclass(frozen=True)
class Holds:
    """How a joint's strength is reckoned: what stresses may reach [MPa], and how the bond yields, or None."""

    limits: Limits
    sign: float
    yields: tuple[float, float] | None = None
    reduction: float = 1.0

    def strength(self, lap: Lap, lengths: Array, action: Action) -> Array:
        """The axial load each overlap holds [N]; infinite where nothing limits it."""
        if self.yields is not None:
            tau, strain = self.yields
            found = yield_strength(lap, lengths, action, shear_yield=tau, strain_limit=strain, whole=False)
            return found.load * self.reduction
        return strength(respond(lap, lengths, action), self.limits, sign=self.sign)

    def sharp(self, lap: Lap) -> bool:
        """Whether the bond yields so early, against its limit, that only the joint's own length is reckoned."""
        return self.yields is not None and self.yields[1] * lap.bond.shear_modulus > DUCTILE * self.yields[0]

    @property
    def known(self) -> bool:
        """Whether anything limits the joint."""
        return self.yields is not None or any(
            math.isfinite(self.limits.of(name)) for name in ("shear", "peel", "inner", "outer")
        )


def transfer_length(lap: Lap) -> float:
    """The length over which the shear stress falls by e, from stretching alone [mm]."""
    if lap.layout == "tube-lap":
        (A_i, _), (A_o, _) = sections(lap)
        soft = lap.bond_width * (1 / (lap.inner.E * A_i) + 1 / (lap.outer.E * A_o))
    else:
        share = 2.0 if lap.layout in DOUBLE else 1.0
        soft = share / (lap.inner.plane_modulus * lap.inner.thickness)
        soft += 1 / (lap.outer.plane_modulus * lap.outer.thickness)
    return math.sqrt(lap.bond.thickness / (lap.bond.shear_modulus * soft))


@lru_cache(maxsize=64)
def strength_curve(lap: Lap, action: Action, length: float, holds: Holds) -> Curve | None:
    """Strength over overlap with the useful length; None where nothing limits the joint.

    Kept by content: the load that is typed does not change it, and neither do a title or a note.
    """
    if not holds.known:
        return None
    own = transfer_length(lap)
    if lap.layout == "scarf":
        own = lap.inner.thickness

    def held(lengths: Array) -> Array:
        found = holds.strength(lap, lengths, action)
        if not np.isfinite(found).all():
            raise InputError("load.axial", "no axial load brings this joint to its limits.")
        return found

    try:
        step = COARSE if holds.yields is not None else LONGER**2
        return curve(held, low=min(own / 2, length / 3), high=max(4 * own, 1.5 * length), step=step)
    except InputError:
        return None


def drawn(found: Curve, length: float) -> dict[str, list[float]]:
    """The part of the curve that is drawn."""
    end = max(DRAWN * length, 1.3 * min(found.useful or length, 10 * length))
    kept = (found.overlap <= end * 1.2) & (found.overlap >= min(length, found.useful or length) / 20)
    return {"overlap": found.overlap[kept].tolist(), "strength": found.strength[kept].tolist()}


@dataclass(frozen=True)
class Change:
    """What one change of the joint brings: in words, and the load that the joint then holds [N]."""

    what: str
    strength: float
    gain: float


def changes(lap: Lap, action: Action, length: float, now: float, holds: Holds) -> list[Change]:
    """What longer, wider, thicker, softer or double would bring, each reckoned anew with the same limits."""
    if not holds.known or not 0 < now < math.inf:
        return []
    return [Change(what, new, new / now - 1) for what, new in _strengths_of_changes(lap, action, length, holds)]


@lru_cache(maxsize=64)
def _strengths_of_changes(lap: Lap, action: Action, length: float, holds: Holds) -> tuple[tuple[str, float], ...]:
    """What each change holds [N]; kept by content, as the curve is."""
    found = []
    for what, changed, longer in _tried(lap, length):
        try:
            new = float(holds.strength(changed, np.array([longer]), action)[0])
        except InputError:
            continue
        if math.isfinite(new):
            found.append((what, new))
    return tuple(found)


def _tried(lap: Lap, length: float) -> Iterator[tuple[str, Lap, float]]:
    bond = lap.bond
    if lap.layout == "scarf":
        flatter = replace(lap, slope=1.5 * lap.slope)
        yield "slope flatter by half", flatter, 1.5 * length
    else:
        yield "overlap longer by half", lap, 1.5 * length
        yield "overlap shorter by half", lap, length / 2
    if lap.layout == "tube-lap":
        yield "diameter larger by half", replace(lap, diameter=1.5 * lap.diameter), length
    else:
        yield "bond wider by half", replace(lap, width=1.5 * lap.width), length
    thicker = [replace(plate, thickness=1.5 * plate.thickness) for plate in (lap.inner, lap.outer)]
    if lap.layout == "scarf":
        scaled = [replace(plate, tip=1.5 * plate.tip) for plate in thicker]
        yield "pieces thicker by half, same slope", replace(lap, inner=scaled[0], outer=scaled[1]), 1.5 * length
    else:
        yield "both adherends thicker by half", _with(lap, thicker[0], thicker[1]), length
        stiff = [plate.E * plate.thickness * s for plate, s in ((lap.inner, 1.0), (lap.outer, float(lap.bonds)))]
        if max(stiff) > 1.2 * min(stiff):
            weak = "inner" if stiff[0] < stiff[1] else "outer"
            pair = (thicker[0], lap.outer) if weak == "inner" else (lap.inner, thicker[1])
            yield f"only the {weak} adherend, the softer one, thicker by half", _with(lap, *pair), length
    yield from _thinned(lap, length)
    softer = BondLine(bond.shear_modulus / 2, bond.E / 2, bond.thickness)
    yield "adhesive half as stiff", replace(lap, bond=softer), length
    yield "bond line twice as thick", replace(lap, bond=replace(bond, thickness=2 * bond.thickness)), length
    if lap.layout in ("single-lap", "strap"):
        double: Layout = "double-lap" if lap.layout == "single-lap" else "double-strap"
        both = replace(lap.outer, thickness=lap.outer.thickness / 2)
        yield (
            f"{'double lap' if lap.layout == 'single-lap' else 'straps on both sides'}, each outer plate half as thick",
            replace(lap, layout=double, outer=both),
            length,
        )


THINNED = 4.0  # the tip tried is this much thinner than the adherend ...
SHALLOW = 10.0  # ... on a slope of 1 to this, over half the overlap at most (common practice)


def _thinned(lap: Lap, length: float) -> Iterator[tuple[str, Lap, float]]:
    """The free ends of plates tapered, where they are not yet."""
    if lap.layout in ("scarf", "tube-lap") or lap.inner.tip or lap.outer.tip:
        return

    def thin(plate: Plate) -> Plate:
        tip = plate.thickness / THINNED
        return replace(plate, tip=tip, taper=min(SHALLOW * (plate.thickness - tip), length / 2))

    outer = thin(lap.outer)
    inner = thin(lap.inner) if lap.layout == "single-lap" else lap.inner
    told = f"free ends tapered to {outer.tip:.3g} mm over {outer.taper:.3g} mm"
    if lap.layout == "single-lap" and (inner.tip, inner.taper) != (outer.tip, outer.taper):
        told += f" (inner {inner.tip:.3g} mm over {inner.taper:.3g} mm)"
    yield told, replace(lap, inner=inner, outer=outer), length


def _with(lap: Lap, inner: Plate, outer: Plate) -> Lap:
    if lap.layout == "tube-lap" and inner.thickness > lap.diameter / 2:
        inner = replace(inner, thickness=lap.diameter / 2)
    return replace(lap, inner=inner, outer=outer)
