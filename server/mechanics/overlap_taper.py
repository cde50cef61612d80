r"""Adherends that thin towards their free end: thickness, stiffness and arm along the bond.

Units: N, mm, MPa. The face that is bonded stays straight; the other one slopes, so the axis moves towards the bond as
the adherend thins:

.. math:: t(x) = t_{tip} + (t - t_{tip})\min(1, x/\ell_t), \qquad c(x) = t(x)/2

with x from the free end. An overlap shorter than the taper is tapered over all of its length.
"""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import NDArray

from server.errors import InputError, positive
from server.mechanics.overlap_laps import Lap, Plate
from server.mechanics.overlap_solver import Adherend

Array = NDArray[np.float64]
Free = Literal["left", "right"]
TAPERED = ("single-lap", "double-lap", "strap", "double-strap")


def tapered(lap: Lap) -> bool:
    """Whether an adherend of the lap thins towards its free end."""
    return bool(lap.inner.taper or lap.outer.taper)


def check_taper(lap: Lap) -> None:
    """Refuse tapers that no joint has or that have no method here, by name."""
    for name, plate in (("inner", lap.inner), ("outer", lap.outer)):
        if not plate.taper:
            continue
        positive(f"{name}.taper", plate.taper, "mm")
        positive(f"{name}.tip", plate.tip, "mm")
        if plate.tip > plate.thickness:
            raise InputError(f"{name}.tip", f"a tip of {plate.tip:g} mm is thicker than the adherend.")
        if lap.layout not in TAPERED or (name == "inner" and lap.layout != "single-lap"):
            raise InputError(f"{name}.taper", f"the {name} adherend of a {lap.layout} has no end that could taper.")


def _reach(plate: Plate, places: Array, lengths: Array) -> Array:
    return np.minimum(plate.taper, lengths).reshape(-1, *(1,) * (places.ndim - 1))


def _inward(places: Array, lengths: Array, free: Free) -> Array:
    return places if free == "left" else lengths.reshape(-1, *(1,) * (places.ndim - 1)) - places


def thickness_at(plate: Plate, places: Array, lengths: Array, free: Free) -> Array:
    """Thickness [mm] at places ``(bonds, ...)`` from the left end; ``free`` the end towards which it thins."""
    if not plate.taper:
        return np.full(places.shape, plate.thickness)
    share = np.clip(_inward(places, lengths, free) / _reach(plate, places, lengths), 0.0, 1.0)
    return np.asarray(plate.tip + (plate.thickness - plate.tip) * share)


def beam_at(plate: Plate, width: float, places: Array, lengths: Array, free: Free) -> Adherend:
    """A plate in cylindrical bending, tapered, at the collocation points ``(bonds, elements, 3)``."""
    thick = thickness_at(plate, places, lengths, free)
    stiffness = plate.plane_modulus * thick * width
    reach = _reach(plate, places, lengths)
    thins = _inward(places, lengths, free) < reach
    slope = np.where(thins, (plate.thickness - plate.tip) / reach / 2, 0.0)
    return Adherend(1 / stiffness, 12 / (stiffness * thick**2), thick / 2, slope if free == "left" else -slope)


def breaks_of(lap: Lap, lengths: Array) -> Array:
    """Places where a taper ends, as further nodes of the mesh ``(bonds, number)``."""
    found = []
    if lap.outer.taper:
        found.append(np.minimum(lap.outer.taper, lengths))
    if lap.inner.taper:
        found.append(np.maximum(lengths - lap.inner.taper, 0.0))
    inside = [np.where((each > 0) & (each < lengths), each, lengths / 2) for each in found]  # all of it: no break
    return np.stack(inside, axis=1) if inside else np.zeros((len(lengths), 0))
