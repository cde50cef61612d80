"""Flows that the field gives, in the same words as those by hand, and how both stand beside each other.

Units: N, mm, MPa.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from server.mechanics.flow import JointFlow, listed
from server.mechanics.graph import Ends, components
from server.mechanics.polygon import Array
from server.mechanics.section import Piece, SectionProperties

AGREE = 0.005  # hand and field, of the flow; contract of the check
_LITTLE = 0.05  # of the largest share: what is less is compared with that


def by_field(
    pieces: Sequence[Piece], properties: SectionProperties, ends: Ends, hand: Sequence[JointFlow], share: Array
) -> list[JointFlow]:
    """Take the flows that no cut or symmetry settles from the field; leave the others as they are.

    Parameters
    ----------
    pieces : sequence of Piece
        The n pieces; lengths in [mm], E in [MPa].
    properties : SectionProperties
        Of the same pieces; first moments in [N mm].
    ends : sequence of (int, int)
        The two pieces of each joint.
    hand : sequence of JointFlow
        What cuts and symmetry say of each joint.
    share : numpy.ndarray
        Of each joint, from the field, on its first piece [N mm].

    Returns
    -------
    list of JointFlow
        ``split`` "field" where the hand has None. ``cut_off`` is the piece of the joint, with what hangs on it, that
        has the larger first moment; ``partners`` all joints that hold it.

    References
    ----------
    .. [1] Equilibrium of the part that is cut off; own choice of the part.
    """
    found = []
    for joint, flow in enumerate(hand):
        if flow.split is not None:
            found.append(flow)
            continue
        parts = [_cut_off(len(pieces), ends, hand, piece) for piece in ends[joint]]
        moments = [sum(float(properties.first_moments[piece]) for piece in part) for part, _ in parts]
        best = 0 if abs(moments[0]) >= abs(moments[1]) * (1 - 1e-9) else 1
        part, partners = parts[best]
        names = listed([pieces[piece].name for piece in part])
        held = listed(["/".join(pieces[piece].name for piece in ends[other]) for other in partners])
        reason = f"{flow.reason} The field of shear in the section divides the flow of {names} among {held}."
        found.append(
            replace(
                flow,
                split="field",
                first_moment=moments[best],
                first_moment_other_side=-moments[best],
                share=float(share[joint]),
                cut_off=tuple(part),
                partners=tuple(partners),
                reason=reason,
            )
        )
    return found


def _cut_off(count: int, ends: Ends, hand: Sequence[JointFlow], piece: int) -> tuple[list[int], list[int]]:
    """A piece with all that hangs on it by clean cuts, and the joints that hold this part."""
    opened = [joint for joint, pair in enumerate(ends) if piece in pair and hand[joint].split != "cut"]
    body = next(body for body in components(count, ends, opened) if piece in body)
    return body, opened


def differences(hand: Sequence[JointFlow], share: Array) -> list[float | None]:
    """Of each joint the difference between field and hand over the hand's share; None where there is no hand's."""
    known = [abs(flow.share) for flow in hand if flow.share is not None]
    least = _LITTLE * max(known, default=0.0)
    found: list[float | None] = []
    for flow, value in zip(hand, share.tolist(), strict=True):
        scale = 0.0 if flow.share is None else max(abs(flow.share), least)
        away = 0.0 if flow.share is None else abs(value - flow.share)
        found.append(None if flow.share is None else away / scale if scale else 0.0)
    return found
