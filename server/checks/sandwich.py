"""Faces on a soft core: wrinkling of the face, shear of the core, pull between face and core.

Units: N, mm, MPa. A face that is over 100 times as stiff as what it is bonded to is taken as the face of a sandwich: it
may wrinkle long before it is strained out, and the check is not proven without the values that say when.

The wrinkling stress 0.5 (E_f E_c G_c)^(1/3) is the practical value of Hoff and Mautner (Journal of the Aeronautical
Sciences 12, 1945; from memory): the ideal face on a thick core has 0.91, and 0.5 allows for the waves of a real one. It
does not depend on the face's thickness. Dimpling over the cells of a honeycomb is not covered.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from server import documents
from server.checks.actions import Actions
from server.checks.crosssection import Body, Part, Site
from server.checks.joints import JointCheck
from server.checks.pieces import PieceCheck
from server.checks.resistance import Claim, Judge, Strength
from server.checks.rules import Origin, Printed

STIFFER = 100.0
WRINKLING = "0.5*(E_f*E_c*G_c)**(1/3)"
SOURCE = "practical value of Hoff and Mautner (1945) for faces that are not quite flat; from memory"


@dataclass(frozen=True)
class Face:
    """A face, the core under it, and the bond between them."""

    site: Site
    face: Part
    core: Part


def faces(body: Body) -> list[Face]:
    """Every bond of a face to a core that is over 100 times softer."""
    found = []
    for site in body.sites:
        soft, stiff = sorted((site.first, site.second), key=lambda part: part.material.E)
        if site.bonded and stiff.material.E > STIFFER * soft.material.E:
            found.append(Face(site, stiff, soft))
    return found


def add_sandwich_claims(
    joints: Sequence[JointCheck],
    pieces: Sequence[PieceCheck],
    body: Body,
    judge: Judge,
    *,
    upper_stiffness: bool,
) -> None:
    """Add what a sandwich is judged by; name what is missing for it."""
    by_part = {piece.part.index: piece for piece in pieces}
    by_site = {joint.site.index: joint for joint in joints}
    wrinkled: set[tuple[int, int]] = set()
    for each in faces(body):
        _name_missing(each, judge)
        piece = by_part[each.face.index]
        if not upper_stiffness and (each.face.index, each.core.index) not in wrinkled:
            wrinkled.add((each.face.index, each.core.index))
            piece.claims = [*piece.claims, *_wrinkling(each, piece, judge)]
        joint = by_site[each.site.index]
        joint.claims = [*joint.claims, *_pull(each, body, judge.actions, judge)]


def _name_missing(each: Face, judge: Judge) -> None:
    core, why = each.core, f"{each.face.name} is over {STIFFER:g} times stiffer than {each.core.name}"
    of = f"of {core.spec.material!r} (core {core.name})"
    if core.shear_modulus is None:
        judge.findings.miss(f"shear modulus {of}: {why}, and the face may wrinkle; core shear tests, or its record.")
    given = core.material.strengths
    if (given.rolling_shear if core.body_rolls else given.shear) is None:
        judge.findings.miss(f"shear strength {of}: {why}; core shear tests (as ASTM C273), or its record.")
    if given.tension_across is None:
        judge.findings.miss(
            f"tension strength across {of}: {why}, and a wrinkling or pulled face tears off it; flatwise tension tests "
            "(as ASTM C297), or its record."
        )
    if _adhesive(each, judge).peel_strength is None:
        judge.findings.miss(
            f"tension strength across the bond {each.site.id} (peel_strength of adhesive {each.site.spec.adhesive!r}): "
            f"{why}; flatwise tension tests of face on core, or the bond's record."
        )


def _adhesive(each: Face, judge: Judge) -> documents.Adhesive:
    assert each.site.spec.adhesive is not None
    adhesive = judge.document.adhesives[each.site.spec.adhesive]
    assert isinstance(adhesive, documents.Adhesive)
    return adhesive


def _wrinkling(each: Face, piece: PieceCheck, judge: Judge) -> Iterator[Claim]:
    """The face's mean compression against its wrinkling stress."""
    face, core, bent = each.face, each.core, piece.bent
    if bent is None or core.shear_modulus is None:
        return
    pressed = -bent.stress[2]
    entry, columns = pressed.argmax(axis=0), np.arange(pressed.shape[1])
    demand = pressed[entry, columns]
    if demand.max() <= 0:
        return
    step = Printed(
        f"Stress at which {face.name} wrinkles on {core.name}",
        "f_k",
        WRINKLING,
        {
            "E_f": (face.material.E, "MPa"),
            "E_c": (core.material.E, "MPa"),
            "G_c": (core.shear_modulus, "MPa"),
        },
        "MPa",
        SOURCE,
    )
    strength = judge.strength(
        step.value,
        what=f"wrinkling of {face.name}",
        unit="MPa",
        kind="material",
        owner=face.spec.material,
        holder=face.material,
    )
    assert strength is not None
    strength = strength._replace(before=(step,))
    yield Claim(strength, "sigma_c", np.maximum(demand, 0.0), bent.at[entry, columns], bent.stretch[entry])


def _pull(each: Face, body: Body, actions: Actions, judge: Judge) -> Iterator[Claim]:
    """An upward load against the tension strength of core and bond; nothing to judge where every load presses."""
    pulled = _upward(each.site, body, actions)
    if pulled is None or pulled[0].max() <= 0:
        return
    load, at, stretch = pulled
    origin = Origin(
        "Pull between face and core",
        "p/(b*c)",
        {"p": (load, "N/mm")},
        {"b": (each.site.width, "mm"), "c": (each.site.spec.coverage, "")},
        "p: largest net load upward; taken to pull at this face",
    )
    for strength in _tension_strengths(each, judge):
        if strength is not None:
            yield Claim(strength, "sigma_z", origin.demand(), at, stretch, origin)


def _tension_strengths(each: Face, judge: Judge) -> list[Strength | None]:
    core, name = each.core, str(each.site.spec.adhesive)
    return [
        judge.strength(
            _adhesive(each, judge).peel_strength,
            what=f"tension across adhesive {name}",
            unit="MPa",
            kind="adhesive",
            owner=name,
            holder=_adhesive(each, judge),
        ),
        judge.strength(
            core.material.strengths.tension_across,
            what=f"tension across {core.name}",
            unit="MPa",
            kind="material",
            owner=core.spec.material,
            holder=core.material,
        ),
    ]


def _upward(
    site: Site, body: Body, actions: Actions
) -> tuple[NDArray[np.float64], NDArray[np.float64], NDArray[np.intp]] | None:
    """The largest net upward load per length of every strength combination, where the joint is; its place, stretch.

    Shear is the sum of the upward forces to the left, so its slope is the load upward; line loads run straight, so the
    ends of every interval have the extremes.
    """
    curve = actions.shear
    if curve is None:
        return None
    starts, ends, c = curve.breaks[:-1], curve.breaks[1:], curve.coefficients
    powers = np.arange(1, c.shape[2])
    at_start = c[:, :, 1]
    at_end = (c[:, :, 1:] * powers * (ends - starts)[None, :, None] ** (powers - 1)).sum(axis=2)
    within = np.full(len(starts), -1, dtype=np.intp)
    for t, stretch in enumerate(body.stretches):
        if site.present(stretch.start, stretch.end):
            within[(starts >= stretch.start) & (ends <= stretch.end)] = t
    both = np.where((within >= 0)[None, :, None], np.stack((at_start, at_end), axis=2), -np.inf)
    flat = both.reshape(len(both), -1)
    best = flat.argmax(axis=1)
    interval, side = np.divmod(best, 2)
    at = np.where(side == 0, starts[interval], ends[interval])
    return np.maximum(flat[np.arange(len(best)), best], 0.0), at, within[interval]
