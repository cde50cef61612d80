"""Shear flow in the joints of a built-up section, wherever equilibrium or symmetry settles it by hand.

Units: N, mm, MPa. Every piece p must be held along the member by its joints: the sum of their flows, with sign, is
``V ES_p / EI``. A joint that alone holds two parts together is a clean cut. Mirror symmetry makes flows of several
joints equal; where these together part the section, they share the flow of what they cut off.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.graph import Ends, bridges, components, ring_through
from server.mechanics.section import Piece, SectionProperties
from server.mechanics.symmetry import Failure, JointLine, Symmetry, SymmetryFinder

__all__ = ["JointFlow", "JointLine", "joint_flows", "listed", "tied"]


@dataclass(frozen=True)
class JointFlow:
    """What one joint carries: flow = V x share / EI.

    ``split`` "cut", "symmetry", or None where neither settles it; ``first_moment`` E-weighted, of the whole cut-off
    part [N mm], above the neutral axis positive; ``first_moment_other_side`` that of all other pieces, equal and
    opposite; ``share`` this joint's part of it [N mm], with the sign of the flow on the joint's first piece;
    ``cut_off`` pieces of the cut-off part; ``partners`` the joints that are cut together, in equal shares (this one
    included); ``reason`` in words. For a joint that carries nothing by symmetry ``cut_off`` is empty and both moments
    are 0; where ``split`` is None the numbers are None; "field" comes from the field of shear alone.
    """

    split: Literal["cut", "symmetry", "field"] | None
    first_moment: float | None
    first_moment_other_side: float | None
    share: float | None
    cut_off: tuple[int, ...]
    partners: tuple[int, ...]
    reason: str


def tied(count: int, joints: Sequence[JointLine]) -> list[int]:
    """Pieces, of ``count``, that no chain of joints ties to the first one."""
    body = components(count, [(joint.first, joint.second) for joint in joints])[0]
    return sorted(set(range(count)) - set(body))


def joint_flows(pieces: Sequence[Piece], properties: SectionProperties, joints: Sequence[JointLine]) -> list[JointFlow]:
    r"""Flow in every joint that a cut or mirror symmetry settles.

    .. math:: \sum_{joints\ of\ p} \pm q_j = \frac{V\,ES_p}{EI}, \qquad q = \frac{V\,ES_{cut\ off}}{n\,EI}

    with n = 1 for a clean cut, and n the number of joints cut together where symmetry makes their flows equal.

    Parameters
    ----------
    pieces : sequence of Piece
        The pieces; lengths in [mm], E and G in [MPa].
    properties : SectionProperties
        Of the same pieces.
    joints : sequence of JointLine
        The joints; pieces that touch without one carry nothing between them. Lines in [mm].

    Returns
    -------
    list of JointFlow
        One for each joint; first moments in [N mm].

    Raises
    ------
    InputError
        If a joint names a piece that is not there, or the joints leave a piece untied.

    Notes
    -----
    Joints are rigid, or alike in their stiffness where ``key`` is equal. Three movements are tried about the neutral
    axis: the mirror image about the vertical axis, which leaves bending strain as it is; about the horizontal axis, and
    half a turn, both of which change its sign. Geometry, E, G and joints must match to a millionth of the size. A joint
    that a movement maps on itself with the flow reversed carries nothing. Joints in a ring that these leave closed
    depend on how the pieces deform: split is None.

    References
    ----------
    .. [1] D. J. Jourawski, "Sur la resistance d'un corps prismatique...", Annales des Ponts et Chaussees 12 (1856); any
       mechanics of materials text ("shear flow in built-up beams"); from memory.
    .. [2] That the cuts tried here are all there are is the signed-graph form of Kirchhoff's law: T. Zaslavsky,
       "Signed graphs", Discrete Applied Mathematics 4 (1982); from memory. The tests compare with linear algebra.

    Examples
    --------
    >>> from server.mechanics.section import properties, rectangle
    >>> tee = [Piece("web", rectangle(20, 100, (40, 0)), 1.0), Piece("flange", rectangle(100, 20, (0, 100)), 1.0)]
    >>> line = JointLine(0, 1, np.array([40.0, 100.0]), np.array([60.0, 100.0]))
    >>> flow = joint_flows(tee, properties(tee), [line])[0]
    >>> flow.split, flow.share, flow.cut_off  # 2000 mm2 each, 120 mm apart centroid to centroid over two
    ('cut', -60000.0, (1,))
    """
    ends = [(joint.first, joint.second) for joint in joints]
    for number, (a, b) in enumerate(ends):
        if not (0 <= a < len(pieces) and 0 <= b < len(pieces)) or a == b:
            raise InputError(f"joints[{number}]", f"Joint {number + 1} joins pieces {a} and {b}; name two pieces.")
    loose = tied(len(pieces), joints)
    if loose:
        names = listed([pieces[place].name for place in loose])
        raise InputError("joints", f"No chain of joints ties {names} to {pieces[0].name}; add a joint.")
    cuts = bridges(len(pieces), ends)
    section = _Section(pieces, properties, joints, ends)
    if len(cuts) == len(ends):
        return [section.clean_cut(joint, cuts[joint]) for joint in range(len(ends))]
    by_symmetry = section.by_symmetry([joint for joint in range(len(ends)) if joint not in cuts])
    return [
        section.clean_cut(joint, cuts[joint]) if joint in cuts else by_symmetry[joint] for joint in range(len(ends))
    ]


@dataclass
class _Classes:
    """Joints whose flows are equal but for sign, under one or more movements.

    ``members`` of each class; ``of`` (joint -> class); ``sign`` of each joint's flow in its class; ``nil`` classes
    whose flow a movement reverses, so that it is nothing.
    """

    members: list[list[int]] = field(default_factory=list)
    of: list[int] = field(default_factory=list)
    sign: list[int] = field(default_factory=list)
    nil: set[int] = field(default_factory=set)


def classes_under(symmetries: Sequence[Symmetry], count: int) -> _Classes:
    """Sort ``count`` joints into classes of equal flow."""
    result = _Classes(of=[-1] * count, sign=[1] * count)
    for root in range(count):
        if result.of[root] >= 0:
            continue
        number = len(result.members)
        result.of[root] = number
        members = [root]
        for joint in members:  # grows while it is walked
            for symmetry in symmetries:
                image, sign = symmetry.joints[joint], symmetry.signs[joint] * result.sign[joint]
                if result.of[image] < 0:
                    result.of[image], result.sign[image] = number, sign
                    members.append(image)
                elif result.sign[image] != sign:
                    result.nil.add(number)
        result.members.append(sorted(members))
    return result


class _Section:
    """One section while its joints are being settled."""

    def __init__(
        self, pieces: Sequence[Piece], properties: SectionProperties, joints: Sequence[JointLine], ends: Ends
    ) -> None:
        self.pieces, self.properties, self.joints, self.ends = pieces, properties, joints, ends
        self.moment: list[float] = properties.first_moments.tolist()
        stiffness: NDArray[np.float64] = properties.pieces.area * np.array([piece.E for piece in pieces], dtype=float)
        self.stiffness: list[float] = stiffness.tolist()

    def clean_cut(self, joint: int, side: list[int]) -> JointFlow:
        """The joint alone parts the section into ``side`` and the rest."""
        part, rest = self._outer(side)
        moment, other = self._moments(part, rest)
        share = moment if self.ends[joint][0] in part else -moment
        reason = f"A cut through this joint alone takes off {self._names(part)}."
        return JointFlow("cut", moment, other, share, tuple(part), (joint,), reason)

    def by_symmetry(self, open_joints: list[int]) -> dict[int, JointFlow]:
        """Settle the joints that lie in rings, by as few movements as will do."""
        looks: list[Symmetry | Failure] = []
        settled: dict[int, JointFlow] = {}
        for symmetries in self._attempts(looks):
            self._settle(symmetries, [joint for joint in open_joints if joint not in settled], settled)
            if len(settled) == len(open_joints):
                return settled
        for joint in open_joints:
            if joint not in settled:
                settled[joint] = JointFlow(None, None, None, None, (), (), self._why_not(joint, looks))
        return settled

    def _attempts(self, looks: list[Symmetry | Failure]) -> Iterator[list[Symmetry]]:
        """One movement after the other, then both mirrors; what was looked for is added to ``looks``."""
        finder = SymmetryFinder(self.pieces, self.properties, self.joints)
        found: list[Symmetry] = []
        for about in ("the vertical axis", "the horizontal axis", "half a turn"):
            if about == "half a turn" and found:
                break  # both mirrors make a half turn, one alone excludes it
            look = finder.look(about)
            looks.append(look)
            if isinstance(look, Symmetry):
                found.append(look)
                yield [look]
        if len(found) == 2:
            yield found

    def _settle(self, symmetries: list[Symmetry], waiting: list[int], settled: dict[int, JointFlow]) -> None:
        """Settle every waiting joint whose class carries nothing, or parts the section."""
        classes = classes_under(symmetries, len(self.ends))
        words = _by_which(symmetries)
        for joint in waiting:
            if joint in settled:
                continue
            number = classes.of[joint]
            if number in classes.nil:
                reason = f"{words} its flow is the opposite of itself, so it carries nothing."
                settled[joint] = JointFlow("symmetry", 0.0, 0.0, 0.0, (), (joint,), reason)
                continue
            self._share(set(classes.members[number]), classes, symmetries, words, settled)

    def _share(
        self,
        opened: set[int],
        classes: _Classes,
        symmetries: list[Symmetry],
        words: str,
        settled: dict[int, JointFlow],
    ) -> None:
        """Cut the joints ``opened``, one class; of every part that comes off with its flows all one way, settle these.

        Parts with fewest joints come first, and what is settled stays.
        """
        cuts = []
        for side in self._parts(opened, symmetries):
            inside = set(side)
            edge = sorted(j for j in opened if (self.ends[j][0] in inside) != (self.ends[j][1] in inside))
            outward = {classes.sign[j] * (1 if self.ends[j][0] in inside else -1) for j in edge}
            if len(outward) == 1:
                cuts.append((len(edge), side, edge))
        for n, side, edge in sorted(cuts):
            if all(joint in settled for joint in edge):
                continue
            part, rest = self._outer(side)
            moment, other = self._moments(part, rest)
            alone = f"{words} this joint carries all of the flow of {self._names(part)}."
            shared = f"{words} {self._joint_names(edge)} share the flow of {self._names(part)} equally."
            for joint in edge:
                share = (moment if self.ends[joint][0] in part else -moment) / n
                flow = JointFlow(
                    "symmetry", moment, other, share, tuple(part), tuple(edge), alone if n == 1 else shared
                )
                settled.setdefault(joint, flow)

    def _parts(self, opened: set[int], symmetries: list[Symmetry]) -> list[list[int]]:
        """Bodies that are left when joints are cut, and each together with its images."""
        bodies = components(len(self.pieces), self.ends, opened)
        if len(bodies) == 1:
            return []
        body_of = {piece: number for number, body in enumerate(bodies) for piece in body}
        parts = list(bodies)
        for number in range(len(bodies)):
            images = [number]
            for body in images:  # grows while it is walked
                for symmetry in symmetries:
                    image = body_of[symmetry.pieces[bodies[body][0]]]
                    if image not in images:
                        images.append(image)
            if 1 < len(images) < len(bodies) and number == min(images):
                parts.append(sorted(piece for body in images for piece in bodies[body]))
        return parts

    def _outer(self, side: list[int]) -> tuple[list[int], list[int]]:
        """A side and the rest: the one farther from the neutral axis first; of like ones the smaller.

        Both have the same first moment but for sign, so the farther one is the one with the smaller EA. Twins come in
        the order of the pieces, the one without the first piece first.
        """
        inside = set(side)
        rest = [piece for piece in range(len(self.pieces)) if piece not in inside]
        EA_side = sum(self.stiffness[piece] for piece in side)
        EA_rest = sum(self.stiffness[piece] for piece in rest)
        if abs(EA_side - EA_rest) > 1e-9 * (EA_side + EA_rest):
            return (side, rest) if EA_side < EA_rest else (rest, side)
        if len(side) != len(rest):
            return (side, rest) if len(side) < len(rest) else (rest, side)
        return (side, rest) if 0 not in inside else (rest, side)

    def _moments(self, part: list[int], rest: list[int]) -> tuple[float, float]:
        return sum(self.moment[piece] for piece in part), sum(self.moment[piece] for piece in rest)

    def _names(self, places: Sequence[int]) -> str:
        return listed([self.pieces[place].name for place in places])

    def _joint_names(self, places: Sequence[int]) -> str:
        return listed(["/".join(self.pieces[piece].name for piece in self.ends[place]) for place in places])

    def _why_not(self, joint: int, looks: Sequence[Symmetry | Failure]) -> str:
        """Which ring is closed, and why symmetry does not open it."""
        ring = ring_through(len(self.pieces), self.ends, joint)
        if len(ring) == 2:
            text = f"{self._names(ring)} are joined along more than one line, which no single cut opens"
        else:
            text = f"{self._names(ring)} form a ring that no single cut opens"
        found = [look for look in looks if isinstance(look, Symmetry)]
        causes = "; ".join(self._failure(look) for look in looks[:2] if isinstance(look, Failure))
        if not found:
            return f"{text}, and mirror symmetry does not settle it: {causes}."
        alike = f"{text}. {_by_which(found)} that makes some flows alike, but leaves open how they divide here"
        return f"{alike}; {causes}." if causes else f"{alike}."

    def _failure(self, failure: Failure) -> str:
        places = failure.pieces or failure.joints
        has = "has" if len(places) == 1 else "have"
        if failure.pieces:
            return f"about {failure.about} {self._names(places)} {has} no mirror image of the same shape, E and G"
        names = f"the joint{'s' if len(places) > 1 else ''} {self._joint_names(places)}"
        return f"about {failure.about} {names} {has} no mirror image of the same line, width, adhesive and fasteners"


def _by_which(symmetries: Sequence[Symmetry]) -> str:
    """Opening words: which movement maps the section on itself."""
    abouts = [symmetry.about for symmetry in symmetries]
    if abouts == ["half a turn"]:
        return "Half a turn maps the section on itself:"
    return f"The section is its own mirror image about {' and '.join(abouts)}:"


def listed(names: Sequence[str]) -> str:
    """Names in a row: a, b and c."""
    return names[0] if len(names) == 1 else f"{', '.join(names[:-1])} and {names[-1]}"
