"""What is judged of a splice: which demand stands against which strength, and what is missing for it."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from server.checks.resistance import Claim, Findings, Kind, Strength, Weigher
from server.checks.splice_model import SIDES, Model
from server.working import Working

SYMBOLS = {
    "shear": "tau_max",
    "peel": "sigma_peel",
    "inner": "sigma_i",
    "outer": "sigma_o",
    "inner_turn": "tau_i",
    "outer_turn": "tau_o",
}
YIELD_SHEAR = "f_y/sqrt(3)"
VON_MISES = "von Mises' yield condition"


@dataclass(frozen=True)
class Cases:
    """The one load of a splice, as the judge weighs combinations."""

    names: tuple[str, ...]
    durations: tuple[str | None, ...]
    strength: tuple[int, ...] = (0,)

    @property
    def strength_names(self) -> tuple[str, ...]:
        """As ``names``."""
        return self.names


def cases_of(duration: str | None) -> Cases:
    """The load of a splice with its duration."""
    return Cases(("as given",), (duration,))


@dataclass(frozen=True)
class Demands:
    """The largest stresses [MPa] and where they are [mm]; ``peel`` 0 where nothing pulls.

    ``turning``: shear that a torque puts into the walls of inner and outer tube.
    """

    shear: float
    peel: float
    inner: float
    outer: float
    at: Mapping[str, float]
    turning: tuple[float, float] = (0.0, 0.0)

    def of(self, name: str) -> float:
        """One of them; 'inner_turn' and 'outer_turn' name the walls' shear."""
        if name.endswith("_turn"):
            return self.turning[SIDES.index(name.removesuffix("_turn"))]
        return float(getattr(self, name))


@dataclass(frozen=True)
class Limit:
    """A strength and the demand it stands against: 'shear', 'peel', 'inner', 'outer' or 'load'."""

    demand: str
    strength: Strength


def limits_of(model: Model, demands: Demands | None, judge: Weigher, book: Working) -> list[Limit]:
    """Every limit whose strength is known; the others are named in the findings. Without demands: all of them."""
    book.begin("Strengths")
    elastic = model.document.response == "elastic"
    pulled = demands is None or demands.peel > 0
    found = []
    if elastic:
        found.append(("shear", _shear_yield(model, judge)))
    if pulled:
        found.append(("peel", _peel(model, judge)))
    for side, name in enumerate(SIDES):
        found.append((name, _stretched(model, side, judge)))
        found.append(("shear", _surface_shear(model, side, judge, book)))
        if demands is not None and demands.turning[side]:
            found.append((f"{name}_turn", _surface_shear(model, side, judge, Working(record=False), "wall")))
        if pulled:
            found.append(("peel", _surface_peel(model, side, judge)))
    return [Limit(demand, strength) for demand, strength in found if strength is not None]


def claim(limit: Limit, demands: Demands) -> Claim:
    """The limit as the judge weighs it."""
    symbol = SYMBOLS[limit.demand]
    at = demands.at.get(limit.demand, 0.0)
    return Claim(
        limit.strength, symbol, np.array([demands.of(limit.demand)]), np.array([at]), np.zeros(1, dtype=np.intp)
    )


def _adhesive(model: Model, judge: Weigher, value: float | None, what: str, unit: str = "MPa") -> Strength | None:
    name = model.document.bond
    return judge.strength(
        value, what=f"adhesive {name}, {what}", unit=unit, kind="adhesive", owner=name, holder=model.adhesive
    )


def _shear_yield(model: Model, judge: Weigher) -> Strength | None:
    if model.adhesive.shear_yield is None:
        judge.findings.miss(
            f"shear_yield of adhesive {model.document.bond!r}: the peak at the end of a bond stands against the yield "
            "stress of the adhesive itself, from thick-adherend shear tests (ISO 11003-2, ASTM D5656). A lap coupon's "
            "strength is a mean over that coupon's overlap and cannot stand in for it."
        )
    return _adhesive(model, judge, model.adhesive.shear_yield, "shear yield")


def _peel(model: Model, judge: Weigher) -> Strength | None:
    if model.adhesive.peel_strength is None:
        judge.findings.miss(
            f"peel_strength of adhesive {model.document.bond!r}: the tension across the bond at its end stands "
            "against pull-off or flatwise tension tests of these surfaces (ISO 4624, ASTM C297); a peel test's force "
            "per width is another quantity."
        )
    return _adhesive(model, judge, model.adhesive.peel_strength, "peel")


def joint_load(model: Model, ultimate: float, judge: Weigher) -> Strength | None:
    """The load at which a yielding bond reaches its strain limit, as a strength of the adhesive."""
    return _adhesive(model, judge, ultimate, "shear strain of the yielding bond", "N")


def yield_values(model: Model, findings: Findings) -> tuple[float, float] | None:
    """Yield stress and strain limit; None with what is missing named."""
    adhesive, name = model.adhesive, model.document.bond
    for value, what in ((adhesive.shear_yield, "shear_yield"), (adhesive.shear_strain_limit, "shear_strain_limit")):
        if value is None:
            findings.miss(
                f"{what} of adhesive {name!r}: an elastic-plastic bond needs the whole shear stress-strain curve, from "
                "thick-adherend or napkin-ring tests (ISO 11003)."
            )
    if adhesive.shear_yield is None or adhesive.shear_strain_limit is None:
        return None
    return adhesive.shear_yield, adhesive.shear_strain_limit


def _material(model: Model, side: int, judge: Weigher, value: float | None, what: str) -> Strength | None:
    kind: Kind = "material"
    return judge.strength(
        value, what=what, unit="MPa", kind=kind, owner=model.names[side], holder=model.materials[side]
    )


def _stretched(model: Model, side: int, judge: Weigher) -> Strength | None:
    """Tension along an adherend; yield where the material has no tension strength."""
    material, name = model.materials[side], SIDES[side]
    tension = material.strengths.tension
    value = tension if tension is not None else material.yield_
    word = "tension" if tension is not None or value is None else "yield"
    if value is None:
        judge.findings.miss(
            f"tension strength (or yield) of {model.names[side]!r}: the {name} adherend carries the load and bends at "
            "the overlap's edge."
        )
    return _material(model, side, judge, value, f"{word} of the {name} adherend")


def _surface_shear(model: Model, side: int, judge: Weigher, book: Working, where: str = "surface") -> Strength | None:
    material, name = model.materials[side], SIDES[side]
    rolls = model.rolls(side)
    word = "rolling shear" if rolls else "shear"
    value = material.strengths.rolling_shear if rolls else material.strengths.shear
    if value is None and material.yield_ is not None and not rolls:
        again = side == 1 and model.names[0] == model.names[1]
        derive = book.step if not again else Working(record=False).step
        value = derive(
            f"Shear yield of {model.names[side]}",
            "f_v",
            YIELD_SHEAR,
            {"f_y": (material.yield_, "MPa")},
            "MPa",
            VON_MISES,
        )
    if value is None:
        judge.findings.miss(
            f"{word} strength of {model.names[side]!r} (surface of the {name} adherend): {word} tests of the piece, "
            "or its material record."
        )
    return _material(model, side, judge, value, f"{word} in the {where} of the {name} adherend")


def _surface_peel(model: Model, side: int, judge: Weigher) -> Strength | None:
    material, name = model.materials[side], SIDES[side]
    across = material.strengths.tension_across
    value = across if across is not None else material.yield_
    if value is None:
        judge.findings.miss(
            f"tension_across of {model.names[side]!r} (surface of the {name} adherend): the surface layer is pulled "
            "off at the overlap's end; pull-off tests that break in it (ISO 4624) give the value."
        )
    return _material(model, side, judge, value, f"tension across in the surface of the {name} adherend")


def least(weighed_resistances: Mapping[str, list[float]], name: str) -> float:
    """The least resistance against a demand; infinite where there is none."""
    return min(weighed_resistances.get(name, []), default=math.inf)
