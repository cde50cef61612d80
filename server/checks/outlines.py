"""From the document's shapes to outlines in their place; what is no outline is refused here, by name."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from server import documents
from server.errors import DocumentError, Fault, InputError
from server.mechanics.outlines import sound
from server.mechanics.polygon import edges_of, moments
from server.mechanics.section import rectangle
from server.mechanics.shapes import (
    Shape,
    drawn_angle,
    drawn_channel,
    drawn_i,
    drawn_rectangle,
    drawn_round,
    drawn_tee,
    drawn_tube,
    placed,
    polygon,
)

MOST_CORNERS = 5000  # of all typed outlines together
WIDEST = 50_000.0  # mm: no section is wider or deeper
THINNEST = 0.05  # mm: contacts are found to this


def outlines(pieces: Mapping[str, documents.Piece]) -> dict[str, Shape]:
    """Every piece's outline in its place; DocumentError names each piece that has none."""
    typed = sum(
        len(spec.points) + sum(len(hole) for hole in spec.holes)
        for spec in pieces.values()
        if isinstance(spec, documents.Polygon)
    )
    if typed > MOST_CORNERS:
        raise DocumentError(
            [Fault("section.pieces", f"The polygons have {typed} corners; at most {MOST_CORNERS} are read.")]
        )
    found: dict[str, Shape] = {}
    faults: list[Fault] = []
    for name, spec in pieces.items():
        try:
            found[name] = outline(spec)
            _refuse_slivers(found[name], spec)
        except InputError as error:
            message = str(error)
            faults.append(Fault(_path(name, error.field, spec), message[0].upper() + message[1:]))
    if not faults:
        faults = list(_too_wide(found))
    if faults:
        raise DocumentError(faults)
    return found


def outline(spec: documents.Piece) -> Shape:
    """One piece's outline in its place; raise InputError naming the field."""
    if isinstance(spec, documents.Rectangle) and not (spec.corner_radius or spec.chamfer):
        return polygon(rectangle(spec.width, spec.depth, spec.at, spec.turn))
    if isinstance(spec, documents.Polygon):
        shape = polygon(spec.points, spec.holes)
        sound(shape.rings)
    else:
        shape = _drawn(spec)
    return placed(shape, spec.at, spec.turn)


def _drawn(spec: documents.Piece) -> Shape:
    match spec:
        case documents.Rectangle():
            return drawn_rectangle(spec.width, spec.depth, corner_radius=spec.corner_radius, chamfer=spec.chamfer)
        case documents.Round():
            return drawn_round(spec.diameter, spec.wall or 0.0)
        case documents.Tube():
            return drawn_tube(spec.width, spec.depth, spec.wall, spec.corner_radius)
        case documents.AngleProfile():
            return drawn_angle(spec.width, spec.depth, spec.wall, spec.root_radius, spec.toe_radius)
        case documents.Channel() | documents.IProfile() | documents.Tee():
            draw = {"channel": drawn_channel, "i": drawn_i, "tee": drawn_tee}[spec.shape]
            return draw(spec.width, spec.depth, spec.web, spec.flange, spec.root_radius, spec.toe_radius)
        case _:
            raise AssertionError(spec)


def _path(name: str, field: str, spec: documents.Piece) -> str:
    """The document's field for a drawing's argument; 'radius' is whichever radius was given."""
    if field == "radius":
        given = [each for each in ("root_radius", "toe_radius", "corner_radius") if getattr(spec, each, 0.0)]
        field = given[0] if given else "shape"
    return f"section.pieces.{name}.{field}"


def _refuse_slivers(shape: Shape, spec: documents.Piece) -> None:
    """A piece that is thinner than the tolerance of contacts touches everything near it."""
    thickness = _mean_thickness(shape, spec)
    if thickness < THINNEST:
        thin = next((n for n in ("wall", "web", "flange") if getattr(spec, n, None)), "points")
        if isinstance(spec, documents.Rectangle):
            thin = "width" if spec.width < spec.depth else "depth"
        raise InputError(
            thin,
            f"the piece is a sliver {thickness:.2g} mm thick on average; contacts are found to {THINNEST:g} mm, so let "
            "it be thicker than that.",
        )


def _mean_thickness(shape: Shape, spec: documents.Piece) -> float:
    """Twice the area over the perimeter [mm]; by hand for a rectangle, of which most sections are made."""
    if isinstance(spec, documents.Rectangle):
        return spec.width * spec.depth / (spec.width + spec.depth)
    area = float(moments(edges_of([shape.rings]))[0][0])
    return 2 * area / sum(float(np.hypot(*(np.roll(ring, -1, axis=0) - ring).T).sum()) for ring in shape.rings)


def _too_wide(found: Mapping[str, Shape]) -> list[Fault]:
    if np.ptp(np.concatenate([shape.rings[0] for shape in found.values()]), axis=0).max() <= WIDEST:
        return []
    boxes = {name: shape.box() for name, shape in found.items()}
    low = np.min([box[0] for box in boxes.values()], axis=0)
    faults = []
    for name, (_, high) in boxes.items():
        for axis, word in enumerate(("across", "up")):
            reach = float(high[axis] - low[axis])
            if reach > WIDEST:
                faults.append(
                    Fault(
                        f"section.pieces.{name}",
                        f"{name!r} makes the section {reach / 1000:.6g} m wide {word}; at most {WIDEST / 1000:g} m is "
                        "reckoned. Look at its sizes, its place, and their units.",
                    )
                )
                break
    return faults
