"""The ends of a member's bonds, as part of its check: where bonded pieces stop short, and where materials move."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field

import numpy as np

from server import documents
from server.checks import movement, strip_changes, surfaces
from server.checks.actions import Actions
from server.checks.bond_ends import End, ends_of
from server.checks.crosssection import Body, Part, Site
from server.checks.curves import Curve
from server.checks.resistance import Claim, Findings, Strength, Weighed, Weigher
from server.checks.strip_ends import EndCheck, Strain, bond_line, claim_end, stresses_at, write_end
from server.errors import InputError
from server.mechanics.overlap_laps import BondLine
from server.working import Working


@dataclass(frozen=True)
class Governs:
    """One limit at an end that could govern the check."""

    utilisation: float
    line: str
    at: float


@dataclass
class MemberEnds:
    """Everything found at the ends of bonds: blocks of the result, and what could govern."""

    ends: list[dict[str, object]] = field(default_factory=list)
    movement: list[dict[str, object]] = field(default_factory=list)
    governs: list[Governs] = field(default_factory=list)


def check_ends(
    document: documents.MemberDocument,
    body: Body,
    actions: Actions,
    weigher: Weigher,
    book: Working,
    findings: Findings,
    *,
    only: str = "",
    after: Actions | None = None,
) -> MemberEnds:
    """Check every end of a bonded piece inside the member, and with ``service`` given all ends of unlike pieces.

    ``only`` names the piece to look at; ``after`` are the actions that are shared, where some act before bonding.
    """
    found = MemberEnds()
    sharing = actions if after is None else after
    if sharing.moment is None or sharing.shear is None:
        return found
    states = movement.states_of(document.service, findings) if document.service is not None else []
    ends = [e for e in ends_of(document, body, outer=bool(states) or bool(only)) if not only or e.part.name == only]
    checked: list[tuple[EndCheck, list[Strain]]] = []
    for end in ends:
        wanted = bool(only)
        one = _one(end, document, body, (sharing.moment, sharing.shear), states, weigher, book, findings, found, wanted)
        checked += [] if one is None else [one]
    _advise([each for each in checked if each[0].end.inside or only], sharing.moment, findings)
    _offer(checked, sharing.moment)
    _tell(checked, findings)
    if states:
        _sides(document, body, sharing, ends, states, weigher, book, findings, found)
    if document.service is not None:
        movement.softening(document, body, findings)
    return found


def _one(
    end: End,
    document: documents.MemberDocument,
    body: Body,
    curves: tuple[Curve, Curve],
    states: Sequence[movement.State],
    weigher: Weigher,
    book: Working,
    findings: Findings,
    found: MemberEnds,
    wanted: bool,
) -> tuple[EndCheck, list[Strain]] | None:
    if end.bonded is None:
        if end.inside:
            _no_method(end, findings)
        return None
    others = end.bonded.surfaces[1:]
    strains = movement.strains_of(document, body, end.part, others, states, findings) if states else []
    if not (end.inside or wanted or strains):
        return None
    loose = [s.id for s in body.stretches[0].section.sites if not s.bonded and end.part not in (s.first, s.second)]
    if loose:
        findings.miss(
            f"{end.title}: fasteners join what the piece is bonded to ({', '.join(loose)}) and slip; the end of a "
            "bond on a section that slides has no method here."
        )
        return None
    bond = bond_line(end.bonded, end.title, document, weigher)
    if bond is None:
        return None
    try:
        stresses = stresses_at(end, bond, curves[0], strains)
    except InputError as error:
        findings.miss(f"{end.title}: {error}")
        return None
    check = claim_end(end, bond, stresses, document, weigher, book)
    write_end(check, weigher.weigh(check.claims), weigher, curves, book)
    if check.governing is not None:
        found.governs.append(Governs(check.governing.utilisation, check.line, end.at))
    if strains:
        moves = movement.at_end(check, strains, book)
        moves.result["limits"] = check.result["limits"]
        moves.result["utilisation"] = check.result["utilisation"]
        check.moves = moves.result
        found.movement.append(moves.result)
    if end.inside or wanted:
        found.ends.append(check.result)
    return check, strains


def _no_method(end: End, findings: Findings) -> None:
    findings.miss(
        f"{end.title}: shear and peel where it stops are not known, for {end.reason}. Needed: tests of the end, or a "
        "calculation of its own."
    )
    findings.caution(
        "end of a bonded piece",
        f"{end.title[:1].upper() + end.title[1:]}: the bond's end carries shear and peel well above the mean along the "
        "joint. Run it on towards the support, taper it, or hold its end down with fasteners.",
        answer=True,
    )


def _advise(checked: Sequence[tuple[EndCheck, list[Strain]]], moment: Curve, findings: Findings) -> None:
    """What would help at the worse end of each piece, where it is used hard; and the caution in words."""
    worst: dict[str, tuple[EndCheck, list[Strain]]] = {}
    for check, strains in checked:
        pull, reach = strip_changes.hold_down(check)
        check.result["hold_down"] = {"force": pull, "within": reach} if pull > 0 else None
        name = check.end.part.name
        if name not in worst or check.used > worst[name][0].used * (1 + 1e-9):
            worst[name] = (check, strains)
    for check, strains in worst.values():
        if check.used > ADVISE:
            check.changes = strip_changes.tried(check, moment, strains)
            check.result["changes"] = check.changes
        others = [c for c, _ in checked if c.end.part.name == check.end.part.name and c is not check]
        strip_changes.words(check, others, findings)


ADVISE = 0.8


def _offer(checked: Sequence[tuple[EndCheck, list[Strain]]], moment: Curve) -> None:
    """What another bond line would bring, at the end that each adhesive moves most."""
    worst: dict[str, tuple[EndCheck, list[Strain]]] = {}
    for check, strains in checked:
        if not strains or check.end.bonded is None:
            continue
        name = check.end.bonded.adhesive
        size = float(np.abs(check.stresses.strain_shear).max())
        if name not in worst or size > float(np.abs(worst[name][0].stresses.strain_shear).max()) * (1 + 1e-6):
            worst[name] = (check, strains)
    for check, strains in worst.values():
        assert check.moves is not None
        check.moves["what_if"] = movement.what_if(check, strains, moment)


def _tell(checked: Sequence[tuple[EndCheck, list[Strain]]], findings: Findings) -> None:
    """What moves against what, said once for pieces that move alike."""
    told: dict[str, list[str]] = {}
    for check, strains in checked:
        if not strains:
            continue
        found, bonded = check.stresses, check.end.bonded
        assert bonded is not None
        k = int(np.abs(found.strain_shear).argmax())
        half = abs(strains[k].value) * bonded.length / 2
        text = (
            f"({bonded.part.spec.material}) would move {half:.3g} mm over half the length against what it is bonded "
            f"to ({strains[k].cause}); held, that brings {abs(found.strain_shear[k]):.3g} MPa of shear and "
            f"{found.strain_peel[k]:.3g} MPa of peel to the ends. An upper estimate: the softer piece's own shear "
            "relieves it. A thicker or softer line, a taper, end fasteners or a split piece take it down."
        )
        told.setdefault(text, []).append(bonded.part.name)
    for text, names in told.items():
        findings.caution("movement", f"{', '.join(dict.fromkeys(names))} {text}")


def _sides(
    document: documents.MemberDocument,
    body: Body,
    actions: Actions,
    ends: Sequence[End],
    states: Sequence[movement.State],
    weigher: Weigher,
    book: Working,
    findings: Findings,
    found: MemberEnds,
) -> None:
    for part, sites in movement.side_bonds(body, ends):
        facing = [s.second if s.first is part else s.first for s in sites]
        others = list({each.index: each for each in facing}.values())
        strains = movement.strains_of(document, body, part, others, states, findings)
        bond = _line_of(sites, document, weigher) if strains else None
        if bond is None:
            continue
        moves = movement.lag(part, sites, body, bond, strains, book)
        weighed = _weigh_sides(part, sites, others, moves, actions, document, weigher, book)
        moves.result["limits"] = [weigher.write(w, f"Movement of {part.name}") for w in weighed if w is not None]
        used = max((w.utilisation for w in weighed if w is not None), default=None)
        moves.result["utilisation"] = used
        if used is not None:
            found.governs.append(Governs(used, f"movement at the {moves.line}: {used:.3g} used", part.start))
        found.movement.append(moves.result)
        findings.caution(
            "movement",
            f"{part.name} is bonded on its sides to another material: its free movement is reckoned as shear lag "
            f"alone, {moves.result['end_shear']:.3g} MPa at its ends; how its ends peel away is not.",
        )


def _line_of(sites: Sequence[Site], document: documents.MemberDocument, weigher: Weigher) -> BondLine | None:
    name = sites[0].spec.adhesive
    assert name is not None
    adhesive = document.adhesives[name]
    assert isinstance(adhesive, documents.Adhesive)
    if adhesive.shear_modulus is None or adhesive.thickness is None:
        weigher.findings.miss(
            f"shear_modulus and thickness of adhesive {name!r} ({', '.join(s.id for s in sites)}): unlike materials "
            "are bonded, and what their movement does to the ends follows from the bond line's stiffness."
        )
        return None
    return BondLine(adhesive.shear_modulus, adhesive.E or adhesive.shear_modulus, adhesive.thickness)


def _weigh_sides(
    part: Part,
    sites: Sequence[Site],
    others: Sequence[Part],
    moves: movement.Moves,
    actions: Actions,
    document: documents.MemberDocument,
    weigher: Weigher,
    book: Working,
) -> list[Weighed | None]:
    name = sites[0].spec.adhesive
    assert name is not None
    adhesive = document.adhesives[name]
    assert isinstance(adhesive, documents.Adhesive)
    strengths: list[Strength | None] = [surfaces.shear_yield(weigher, name, adhesive, f" ({moves.line})")]
    for each in (part, *others):
        strengths.append(
            surfaces.surface_shear(weigher, each.spec.material, each.material, each.name, rolls=each.rolls, book=book)
        )
    count = len(actions.strength)
    shear = moves.result["end_shear"]
    assert isinstance(shear, float)
    demand, at = np.full(count, shear), np.full(count, part.start)
    claims = [Claim(s, "tau_epsilon", demand, at, np.zeros(count, dtype=np.intp)) for s in strengths if s is not None]
    return weigher.weigh(claims)


def after_bonding(document: documents.MemberDocument, before: Sequence[str]) -> documents.MemberDocument:
    """The document without the cases that act before bonding: what remains is shared by the bonded section."""
    if not before:
        return document
    first = next(iter(document.loads))
    left = {
        name: combination.model_copy(
            update={
                "factors": {c: f for c, f in combination.factors.items() if c not in before} or {first: 0.0},
                "sustained": {c: s for c, s in combination.sustained.items() if c not in before},
            }
        )
        for name, combination in document.combinations.items()
    }
    return document.model_copy(update={"combinations": left})
