"""A member of layers that bend together and slide on flexible joints, as the slip solver sees it.

Units: N, mm; a joint's stiffness is force per length of member and per slip [N/mm2]. Everything here is plain numbers
that are checked once, when a `LayeredMember` is made.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError
from server.mechanics.beam_model import SAME_PLACE, Beam, Stretch, Support

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Share:
    """A length of a layer of which only a part counts.

    Parameters
    ----------
    start, end : float
        From where to where [mm].
    share : float
        Part of the layer's EA and EI that counts, above 0 [-].
    """

    start: float
    end: float
    share: float


@dataclass(frozen=True, slots=True)
class Layer:
    """What stays plane by itself: one piece, or several that move alike.

    Parameters
    ----------
    start, end : float
        From where to where it runs along the member [mm]; its axial force is zero at both.
    EA : float
        Axial stiffness [N].
    EI : float
        Bending stiffness about its own centroid [N*mm2].
    height : float
        Height of its centroid above any common origin [mm].
    shares : tuple of Share
        Lengths over which only a share of EA and EI counts, as of a skin's effective width; 1 elsewhere.
    """

    start: float
    end: float
    EA: float
    EI: float
    height: float
    shares: tuple[Share, ...] = ()


@dataclass(frozen=True, slots=True)
class Zone:
    """A length of a joint over which its stiffness stays the same.

    Parameters
    ----------
    start, end : float
        From where to where [mm].
    stiffness : float
        Shear flow per slip [N/mm2]; zero where nothing joins the layers.
    """

    start: float
    end: float
    stiffness: float


@dataclass(frozen=True, slots=True)
class FlexibleJoint:
    """What joins two layers and gives way along the member.

    Parameters
    ----------
    first, second : int
        The layers, counted from 0 [-].
    zones : tuple of Zone
        Stiffness along the member [mm, N/mm2]; nothing between zones. It acts only where both layers are.
    """

    first: int
    second: int
    zones: tuple[Zone, ...]


@dataclass(frozen=True)
class LayeredMember:
    """A straight member of layers; refused, with the reason in words, when it cannot be reckoned.

    Parameters
    ----------
    length : float
        Length [mm].
    supports : sequence of Support
        As the beam solver has them [mm, N/mm]. A fixed support clamps every layer: nothing slides there.
    hinges : sequence of float
        Places where the member turns freely [mm]; a hinge cuts every layer.
    layers : sequence of Layer
        In any order [mm, N, N*mm2].
    joints : sequence of FlexibleJoint
        Between the layers, any number between the same two [mm, N/mm2].
    shear : sequence of Stretch, optional
        Shear stiffness GA along the member, end to end [mm, N]; its EI is not looked at. Left out: no shear
        deformation.

    Raises
    ------
    InputError
        If a number is unusable (the field is "layers[1].EA", "joints[0].zones[2].stiffness", ...), two zones of a joint
        overlap, or no layer is present somewhere.
    """

    length: float
    supports: tuple[Support, ...]
    hinges: tuple[float, ...]
    layers: tuple[Layer, ...]
    joints: tuple[FlexibleJoint, ...]
    shear: tuple[Stretch, ...]
    tables: tuple[Array, ...] = field(compare=False, repr=False)
    """Zones of every joint from left to right: start, end, stiffness."""

    def __init__(
        self,
        length: float,
        supports: Sequence[Support],
        hinges: Sequence[float],
        layers: Sequence[Layer],
        joints: Sequence[FlexibleJoint],
        shear: Sequence[Stretch] = (),
    ) -> None:
        object.__setattr__(self, "length", length)
        object.__setattr__(self, "supports", tuple(supports))
        object.__setattr__(self, "hinges", tuple(hinges))
        object.__setattr__(self, "layers", tuple(layers))
        object.__setattr__(self, "joints", tuple(joints))
        object.__setattr__(self, "shear", tuple(shear))
        if not layers:
            raise InputError("layers", "no layer is given; give at least one from 0 to the member's end.")
        for number, layer in enumerate(layers):
            self._check_layer(f"layers[{number}]", layer)
        tables = (self._check_joint(f"joints[{number}]", joint) for number, joint in enumerate(joints))
        object.__setattr__(self, "tables", tuple(tables))
        self._check_covered()

    @property
    def same_place(self) -> float:
        """Distance below which two positions count as one place [mm]."""
        return self.length * SAME_PLACE

    def _check_layer(self, field: str, layer: Layer) -> None:
        self._check_run(field, layer.start, layer.end)
        if not (math.isfinite(layer.EA) and layer.EA > 0):
            raise InputError(f"{field}.EA", f"EA is {layer.EA:g} N; enter a number greater than 0 N.")
        if not (math.isfinite(layer.EI) and layer.EI > 0):
            raise InputError(f"{field}.EI", f"EI is {layer.EI:g} N*mm2; enter a number greater than 0 N*mm2.")
        if not math.isfinite(layer.height):
            raise InputError(f"{field}.height", f"height is {layer.height:g} mm; enter a number.")
        for number, part in enumerate(layer.shares):
            self._check_run(f"{field}.shares[{number}]", part.start, part.end)
            if not (math.isfinite(part.share) and part.share > 0):
                raise InputError(
                    f"{field}.shares[{number}].share", f"share is {part.share:g}; enter a number greater than 0."
                )

    def _check_run(self, field: str, start: float, end: float) -> None:
        slack = self.same_place
        if not (-slack <= start and start + slack < end <= self.length + slack):
            raise InputError(
                f"{field}.end",
                f"it runs from {start:g} to {end:g} mm; it must run to the right, between 0 and {self.length:g} mm.",
            )

    def _check_joint(self, field: str, joint: FlexibleJoint) -> Array:
        """Refuse what is unusable; return the zones in order."""
        for name, layer in (("first", joint.first), ("second", joint.second)):
            if not 0 <= layer < len(self.layers):
                raise InputError(f"{field}.{name}", f"there is no layer {layer}; name 0 to {len(self.layers) - 1}.")
        if joint.first == joint.second:
            raise InputError(f"{field}.second", f"layer {joint.first} is named twice; name two layers.")
        for number, zone in enumerate(joint.zones):
            self._check_run(f"{field}.zones[{number}]", zone.start, zone.end)
            if not (math.isfinite(zone.stiffness) and zone.stiffness >= 0):
                raise InputError(
                    f"{field}.zones[{number}].stiffness",
                    f"stiffness is {zone.stiffness:g} N/mm2; enter a number of at least 0 N/mm2.",
                )
        for left, right in pairwise(sorted(joint.zones, key=lambda zone: zone.start)):
            if right.start < left.end - self.same_place:
                raise InputError(
                    f"{field}.zones", f"two zones overlap between {right.start:g} and {left.end:g} mm; let them meet."
                )
        rows = sorted((zone.start, zone.end, zone.stiffness) for zone in joint.zones)
        return np.array(rows).reshape(-1, 3)

    def _check_covered(self) -> None:
        reached = 0.0
        for layer in sorted(self.layers, key=lambda layer: layer.start):
            if layer.start > reached + self.same_place:
                break
            reached = max(reached, layer.end)
        if reached < self.length - self.same_place:
            raise InputError("layers", f"no layer is present just right of {reached:g} mm; extend one.")

    def outline(self) -> Beam:
        """The bare member as the beam solver has it, cut wherever a layer, a zone or the shear stiffness changes.

        Its EI is that of the layers lying loose: it stands for nothing, and only lets the beam's own checks run.
        """
        places = {0.0, self.length, *(s.start for s in self.shear)}
        for layer in self.layers:
            places.update((layer.start, layer.end, *(end for s in layer.shares for end in (s.start, s.end))))
        ends = [table[:, :2].ravel() for table in self.tables]
        inside, slack = [0.0], self.same_place
        for place in np.unique(np.concatenate([np.array(sorted(places)), *ends])).tolist():
            if inside[-1] + slack < place < self.length - slack:
                inside.append(place)
        cuts = [*inside, self.length]
        return Beam(
            self.length,
            self.supports,
            self.hinges,
            [Stretch(a, b, 1.0, self._GA(0.5 * (a + b))) for a, b in pairwise(cuts)],
        )

    def _GA(self, at: float) -> float:
        return next((s.GA for s in self.shear if s.start <= at <= s.end), math.inf)
