"""The field of shear in a check: when it is solved, what it lacks, and how it stands beside what is found by hand."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal

from server.errors import InputError
from server.mechanics.contacts import Contact
from server.mechanics.field import TARGET, Bond, Field, remembered_field
from server.mechanics.field_flow import AGREE, by_field, differences
from server.mechanics.flow import JointFlow
from server.mechanics.section import Piece, SectionProperties

Wanted = Literal["never", "auto", "always"]


@dataclass(frozen=True, eq=False)
class Settled:
    """The flow of every joint of one cross-section.

    ``hand`` what cuts and symmetry say; ``flows`` with what the field adds; ``field`` None where it was not solved, and
    ``why_not`` in words where it was wanted; ``apart`` difference between hand and field of each joint, where there are
    both.
    """

    hand: tuple[JointFlow, ...]
    flows: tuple[JointFlow, ...]
    field: Field | None
    why_not: str
    apart: tuple[float | None, ...]


def settle(
    pieces: Sequence[Piece],
    properties: SectionProperties,
    hand: Sequence[JointFlow],
    bonds: Sequence[Bond],
    *,
    wanted: Wanted,
    always: str = "",
) -> Settled:
    """Solve the field where it is wanted or needed; ``always`` says in words what else needs it."""
    nothing = tuple(hand), tuple(hand), None
    none: tuple[float | None, ...] = (None,) * len(hand)
    if wanted == "never" and not always:
        return Settled(*nothing, "", none)
    if wanted == "auto" and not always and all(flow.split is not None for flow in hand):
        return Settled(*nothing, "", none)
    lacking = [piece.name for piece in pieces if piece.G is None]
    if lacking:
        return Settled(*nothing, f"it needs the shear modulus G of {', '.join(lacking)}", none)
    try:
        field = remembered_field(pieces, properties, bonds)
    except InputError as error:
        return Settled(*nothing, str(error), none)
    flows = by_field(pieces, properties, [(bond.first, bond.second) for bond in bonds], hand, field.share)
    return Settled(tuple(hand), tuple(flows), field, "", tuple(differences(hand, field.share)))


def bond_of(first: int, second: int, contact: Contact, width: float | None) -> Bond:
    """A joint on its contact as the field sees it, rigid."""
    return Bond(first, second, contact.start, contact.end, contact.gap, width, None, contact.line)


def doubts(settled: Settled, ids: Sequence[str]) -> list[str]:
    """What keeps the verdict open: the field not solved, not fine enough, or unlike the hand's result."""
    found = []
    if settled.why_not:
        found.append(f"the section's shear field: {settled.why_not}.")
    field = settled.field
    if field is None:
        return found
    worst = float(field.error[:, 0].max(initial=0.0))
    if worst > TARGET:
        found.append(
            f"the section's shear field: its estimated error is still {worst:.2%} of a joint's flow on the finest "
            f"mesh; {TARGET:.1%} is wanted. Simplify the finest shapes of the section."
        )
    for name, apart in zip(ids, settled.apart, strict=True):
        if apart is not None and apart > AGREE:
            found.append(
                f"joint {name}: its flow by hand and by the field differ by {apart:.2%}, more than {AGREE:.1%}; look "
                "for contacts that the hand cut takes as open, or report the section."
            )
    return found
