"""Stresses of a splice under its load, elastic or with the bond yielding, and the largest of them with their places."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server.checks.splice_limits import Demands
from server.checks.splice_model import SIDES, Model
from server.mechanics.overlap_laps import Action, Response, peaks, respond
from server.mechanics.overlap_strength import yield_strength, yielded_response
from server.mechanics.overlap_tube import sections, walls
from server.working import Working

Array = NDArray[np.float64]
METHOD = "two beams on shear and peel springs (D. A. Bigwood and A. D. Crocombe, Int. J. Adhesion 9 (1989) 229)"
SHEAR_LAG = "shear lag of two bars (O. Volkersen 1938), by the same solver"
JUST_BELOW = 0.9999
WALL = "T*r/J"


@dataclass(frozen=True, eq=False)
class Stresses:
    """Along the bond: places [mm], stresses [MPa] by field, one stack of places a face; the elastic response."""

    at: Array
    fields: Mapping[str, Array]
    response: Response
    yields: bool = False
    turning: tuple[float, float] = (0.0, 0.0)

    @property
    def demands(self) -> Demands:
        """The largest of each with its place."""
        along = np.abs(self.shear)
        found = {
            "shear": (float(along.max()), self._place(along)),
            "peel": (max(float(self.fields["peel"].max()), 0.0), self._place(self.fields["peel"])),
            **{
                name: (float(np.abs(self.fields[name]).max()), self._place(np.abs(self.fields[name])))
                for name in ("inner", "outer")
            },
        }
        shear, peel, inner, outer = (found[name][0] for name in ("shear", "peel", *SIDES))
        return Demands(shear, peel, inner, outer, {name: at for name, (_, at) in found.items()}, self.turning)

    @property
    def shear(self) -> Array:
        """Shear, along and around together in a tube that turns; with its sign otherwise."""
        around = self.fields.get("shear_around")
        along = self.fields["shear"]
        return along if around is None or not around.any() else np.hypot(along, around)

    @property
    def governing_face(self) -> tuple[Array, Array]:
        """Shear and peel of the bond line that is stressed more (the two of a double lap that bends differ)."""
        count = len(self.at)
        shear = self.shear.reshape(-1, count)
        peel = self.fields["peel"].reshape(-1, count)
        face = int(np.abs(shear).max(axis=1).argmax())
        return shear[face], peel[min(face, len(peel) - 1)]

    def _place(self, values: Array) -> float:
        """The leftmost place of the largest value, ties within the solver's own error counted as ties."""
        largest = float(values.max())
        near = np.flatnonzero(values >= largest - 1e-6 * abs(largest)) % len(self.at)
        return float(self.at[near.min()])


def elastic(model: Model, book: Working) -> Stresses:
    """Elastic stresses under the load."""
    assert model.lap is not None
    response = respond(model.lap, model.length, model.action)
    fields = {name: field[0] for name, field in response.under(model.axial).items()}
    found = Stresses(response.at[0], fields, response, turning=_turning(model, book))
    _tell(model, found, book)
    return found


def ultimate(model: Model, tau: float, strain: float) -> float:
    """The axial load [N] (torque over bond radius, where only torque acts) at which the yielding bond breaks."""
    assert model.lap is not None
    found = yield_strength(model.lap, model.length, _scaled(model), shear_yield=tau, strain_limit=strain)
    return float(found.load[0])


def _turning(model: Model, book: Working) -> tuple[float, float]:
    """Shear in the walls of the tubes under the torque, at their outer faces."""
    lap, torque = model.lap, abs(model.action.torque)
    if lap is None or lap.layout != "tube-lap" or not torque:
        return 0.0, 0.0
    found = [
        book.step(
            f"Shear in the wall of the {name} tube", symbol, WALL,
            {"T": (torque, "N*mm"), "r": (radius, "mm"), "J": (polar, "mm4")},
            "MPa", "torsion of round tubes", group="Stresses along the bond",
        )
        for name, symbol, (_, radius), (_, polar) in zip(
            ("inner", "outer"), ("tau_i", "tau_o"), walls(lap), sections(lap), strict=True
        )
    ]  # fmt: skip
    return found[0], found[1]


def _scaled(model: Model) -> Action:
    """What acts beside the load that is scaled up; a push is reckoned as a pull with what else acts turned round."""
    action = model.action
    if model.axial < 0:
        return Action(-action.moment, -action.shear, action.torque, -action.strain)
    return action


def yielding(model: Model, first: Stresses, tau: float, most: float, book: Working) -> Stresses:
    """Stresses with the bond yielding, under the load, or just below what the bond holds where that is less."""
    assert model.lap is not None
    size = abs(model.axial) or abs(model.action.torque) / (model.lap.bond_radius or 1.0)
    load = min(size, JUST_BELOW * most)
    found = yielded_response(model.lap, model.length, load, _scaled(model), shear_yield=tau)
    if found is None:
        return first
    at, fields = found
    sign = -1.0 if model.axial < 0 else 1.0
    known = {name: sign * field for name, field in fields.items()}
    if model.lap.layout in ("tube-lap", "scarf"):
        # peel and pieces stay those of the elastic bond, on the places of the yielding one
        rest = {
            name: np.concatenate([np.interp(at, first.at, part) for part in field.reshape(-1, len(first.at))])
            for name, field in first.fields.items()
            if name not in ("shear", "shear_around")
        }
        known = {**rest, **known}
    result = Stresses(at, known, first.response, yields=True, turning=first.turning)
    book.note(
        "Stresses with the bond yielding in shear",
        f"The bond carries at most {tau:.4g} MPa in shear; peel and adherends stay elastic.",
        float(np.abs(result.shear).max()),
        "MPa",
        symbol="tau_max",
        source=METHOD,
        group="Stresses along the bond",
    )
    return result


def _tell(model: Model, found: Stresses, book: Working) -> None:
    """The step that says which method did the work, how fine, and its own equilibrium check."""
    lap = model.lap
    assert lap is not None
    elements = (len(found.at) - 1) // 4
    along = found.fields["shear"][: len(found.at)]
    carried = float(np.trapezoid(along, found.at)) * lap.bond_width * lap.bonds
    if lap.layout == "scarf":
        carried *= 1 + 1 / lap.slope**2
    method = SHEAR_LAG if lap.layout in ("scarf", "tube-lap") else METHOD
    checks = ""
    if model.axial and not (
        lap.layout in ("double-lap", "double-strap") and (model.action.moment or model.action.shear)
    ):
        checks = f" The shear stress adds up to {carried:.5g} N; the load is {model.axial:.5g} N."
    demands = found.demands
    book.note(
        "Largest shear stress in the bond",
        f"Solved by collocation on {elements} elements, finest at both ends.{checks}",
        demands.shear,
        "MPa",
        symbol="tau_max",
        source=method,
        group="Stresses along the bond",
    )
    for title, symbol, name in (
        ("Largest tension across the bond", "sigma_peel", "peel"),
        ("Largest stress of the inner adherend, stretching and bending", "sigma_i", "inner"),
        ("Largest stress of the outer adherend, stretching and bending", "sigma_o", "outer"),
    ):
        place = f"{demands.at[name]:.4g} mm from the end where the inner adherend is loaded"
        if lap.layout in ("strap", "double-strap"):
            place = f"{demands.at[name]:.4g} mm from the strap's end"
        book.note(title, place, demands.of(name), "MPa", symbol=symbol, group="Stresses along the bond")


def part(model: Model, share: float) -> Demands:
    """The largest elastic stresses under a share of the mechanical load, without any free strain."""
    assert model.lap is not None
    action = model.action
    acting = Action(share * action.moment, share * action.shear, share * action.torque)
    response = respond(model.lap, model.length, acting)
    found = {name: float(value[0]) for name, value in peaks(response.under(share * model.axial)).items()}
    return Demands(found["shear"], found["peel"], found["inner"], found["outer"], {})
