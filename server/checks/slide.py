"""The member with joints that slip: solved for every case, combined, and read joint by joint and piece by piece."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks.actions import Actions
from server.checks.crosssection import Body
from server.checks.curves import Curve, largest
from server.checks.holds import Hold, Holds
from server.checks.rules import ULTIMATE_SLIP, chosen
from server.errors import DocumentError, Fault, InputError
from server.mechanics import beam as mechanics
from server.mechanics.beam import Beam, solve
from server.mechanics.slip import Curves, FlexibleJoint, Layer, LayeredMember, Share, SlipResponse, solve_slip

Array = NDArray[np.float64]
ULTIMATE = 2 / 3  # K_u / K_ser, EN 1995-1-1:2004 expression (2.1)
K_U_RULE = ULTIMATE_SLIP


@dataclass(frozen=True, eq=False)
class Slide:
    """The member in one state of its joints; every piece is a layer, every joint slides.

    ``response`` all combinations; ``actions`` those of the check with what the sliding member does; ``ratio`` greatest
    deflection with rigid joints over that with slip, shear deformation left out of both; ``ultimate`` whether strength
    stands on K_u.
    """

    holds: Holds
    body: Body
    actions: Actions
    response: SlipResponse
    strength: SlipResponse
    ratio: float
    rigid_sag: float
    sliding_sag: float
    ultimate: bool

    @cached_property
    def strength_rows(self) -> list[int]:
        """The combinations for strength, or all of them where none is."""
        return list(self.actions.strength) or list(range(len(self.actions.names)))

    def _curve(self, coefficients: Array) -> Curve:
        rows = self.strength_rows
        return Curve(self.response.stations.places, coefficients[rows], tuple(self.actions.names[k] for k in rows))

    @cached_property
    def flows(self) -> tuple[Curve, ...]:
        """Flow of every joint under the combinations for strength, with the sign of its slip."""
        return tuple(self._curve(flow) for flow in self.strength_curves.flow)

    @cached_property
    def slips(self) -> tuple[Curve, ...]:
        """Slip of every joint under the combinations for strength."""
        return tuple(self._curve(slip) for slip in self.strength_curves.slip)

    @cached_property
    def axial(self) -> tuple[Curve, ...]:
        """Axial force of every piece under the combinations for strength."""
        return tuple(self._curve(force) for force in self.strength_curves.axial)

    @cached_property
    def curvature(self) -> Curve:
        """Curvature of the member under the combinations for strength, negative where it sags."""
        return self._curve(self.strength_curves.curvature)

    @cached_property
    def strength_curves(self) -> Curves:
        """All curves of the combinations, on the stiffness that strength stands on."""
        return self.strength.curves_at(self.response.stations)


def layers(body: Body, *, creep: bool = False) -> list[Layer]:
    """Every piece as a layer of its own, in the order of the document; each stretch counts as much as it does."""
    found: dict[int, Layer] = {}
    shares: dict[int, list[Share]] = {}
    for stretch in body.stretches:
        pieces = stretch.section.properties.pieces
        for position, part in enumerate(stretch.section.parts):
            share = stretch.section.share(position)
            if share < 1.0:
                shares.setdefault(part.index, []).append(Share(stretch.start, stretch.end, share))
            if part.index not in found:
                E = part.material.E / (1 + (part.material.creep or 0.0) if creep else 1.0)
                area, inertia = float(pieces.area[position]), float(pieces.inertia[position, 0])
                height = float(pieces.centroid[position, 1])
                found[part.index] = Layer(part.start, part.end, E * area, E * inertia, height)
    return [replace(found[part.index], shares=tuple(shares.get(part.index, ()))) for part in body.parts]


def layered(
    document: documents.MemberDocument,
    body: Body,
    each: Sequence[Hold],
    *,
    deform: bool,
    creep: bool,
    share: float = 1.0,
) -> LayeredMember:
    """The member as layers: every piece one, every joint of the document one between two of them."""
    member = document.member
    shear = []
    if deform:
        for s in body.stretches:
            GA = s.section.softened[1] if creep else s.section.shear_stiffness
            shear.append(mechanics.Stretch(s.start, s.end, 1.0, np.inf if GA is None else GA))
    joints = []
    for hold in each:
        by = share if hold.by == "fasteners" else 1.0
        zones = hold.softened(by) if creep else replace(hold, creep=0.0).softened(by)
        joints.append(FlexibleJoint(hold.site.first.index, hold.site.second.index, zones))
    return LayeredMember(
        member.length,
        [mechanics.Support(s.at, s.kind, s.stiffness or 0.0) for s in member.supports],
        member.hinges,
        layers(body, creep=creep),
        joints,
        shear,
    )


def slide(
    document: documents.MemberDocument, body: Body, actions: Actions, held: Holds, *, flows_only: bool = False
) -> Slide:
    """Solve the member with slip, combine the cases, and put what it does in the place of the rigid member's.

    ``flows_only`` leaves long-term deflection and the effective stiffness out.
    """
    deform, loads, factors = actions.shear_deformation, actions.case_loads, actions.factors
    whole = _solve(layered(document, body, held.each, deform=deform, creep=False), loads)
    combined = whole.combine(factors)
    ultimate = document.basis.method == "limit-state" and K_U_RULE in chosen(document)
    strength = combined
    if ultimate:
        member = layered(document, body, held.each, deform=deform, creep=False, share=ULTIMATE)
        strength = _solve(member, loads).combine(factors)
    long_term = None if flows_only else _long_term(document, body, actions, held, whole)
    response, places = combined.response, combined.stations
    firm = strength.curves_at(places)

    def curve(coefficients: Array | None, chosen: tuple[int, ...]) -> Curve | None:
        if coefficients is None or not chosen:
            return None
        return Curve(places.places, coefficients[list(chosen)], tuple(actions.names[k] for k in chosen))

    sliding = replace(
        actions,
        response=response,
        shear=curve(firm.shear, actions.strength),
        moment=curve(firm.moment, actions.strength),
        sag=curve(response.deflection, actions.deflection),
        long_term=curve(long_term, actions.deflection),
        slips=True,
    )
    rigid_sag, sliding_sag = (0.0, 0.0) if flows_only else _sags(document, body, actions, held, combined)
    ratio = rigid_sag / sliding_sag if sliding_sag > 0 else 1.0
    return Slide(held, body, sliding, combined, strength, ratio, rigid_sag, sliding_sag, ultimate)


def _solve(member: LayeredMember, loads: Sequence[Sequence[mechanics.Load]]) -> SlipResponse:
    try:
        return solve_slip(member, loads)
    except InputError as error:
        raise DocumentError([Fault(f"member.{error.field}", str(error))]) from error


def _long_term(
    document: documents.MemberDocument, body: Body, actions: Actions, held: Holds, whole: SlipResponse
) -> Array | None:
    """The sustained part on pieces and joints after creep, the rest on them as they are (EN 1995-1-1:2004 2.2.3)."""
    creeps = any(part.material.creep is not None for part in body.parts) or any(hold.creep for hold in held.each)
    if not creeps:
        return None
    shares = actions.sustained
    soft = _solve(layered(document, body, held.each, deform=actions.shear_deformation, creep=True), actions.case_loads)
    places = whole.combine(actions.factors).stations
    rest = whole.combine(actions.factors - shares).deflection_at(places)
    return np.asarray(rest + soft.combine(shares).deflection_at(places))


def _sags(
    document: documents.MemberDocument, body: Body, actions: Actions, held: Holds, combined: SlipResponse
) -> tuple[float, float]:
    """Greatest deflection with rigid joints and with slip, shear deformation left out of both."""
    rows = list(actions.deflection or actions.strength)
    bare = combined
    if actions.shear_deformation:
        member = layered(document, body, held.each, deform=False, creep=False)
        bare = _solve(member, actions.case_loads).combine(actions.factors)
    stretches = [mechanics.Stretch(s.start, s.end, s.section.properties.EI) for s in body.stretches]
    supports = [mechanics.Support(s.at, s.kind, s.stiffness or 0.0) for s in document.member.supports]
    rigid = solve(Beam(body.length, supports, document.member.hinges, stretches), actions.case_loads)
    stiff, places = rigid.combine(actions.factors), bare.stations
    return _greatest(stiff.breaks, stiff.deflection[rows]), _greatest(places.places, bare.deflection_at(places)[rows])


def _greatest(breaks: Array, deflection: Array) -> float:
    return largest(*Curve(breaks, deflection, ()).whole.absolute()).value
