"""Walks the models along a path: which names are known there, which kind of quantity a field holds."""

from __future__ import annotations

import re
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from functools import lru_cache
from types import NoneType, UnionType
from typing import Annotated, Any, Literal, Union, get_args, get_origin

from pydantic import BaseModel, Tag

from server.documents.common import MARK
from server.documents.quantities import Count, Quantity


@dataclass(frozen=True)
class Spot:
    """One alternative of what may stand at a place: its type, its markers and its tag in a union."""

    annotation: Any
    markers: tuple[Any, ...] = ()
    tag: str = ""

    @property
    def model(self) -> type[BaseModel] | None:
        """The model class, where an object with fixed names stands here."""
        if isinstance(self.annotation, type) and issubclass(self.annotation, BaseModel):
            return self.annotation
        return None


def spots(annotation: Any, markers: Sequence[Any] = (), tag: str = "") -> Iterator[Spot]:
    """Every alternative of ``annotation``, with unions and markers taken apart."""
    origin = get_origin(annotation)
    if origin is Annotated:
        inner, *more = get_args(annotation)
        tags = [marker.tag for marker in more if isinstance(marker, Tag)]
        yield from spots(inner, (*markers, *more), tags[0] if tags else tag)
    elif origin is Union or origin is UnionType:
        for arm in get_args(annotation):
            if arm is not NoneType:
                yield from spots(arm, markers, tag)
    else:
        yield Spot(annotation, tuple(markers), tag)


def names(model: type[BaseModel]) -> list[str]:
    """The names a document may use in ``model``."""
    return [field.alias or name for name, field in model.model_fields.items()]


def inside(spot: Spot, element: str | int) -> list[Spot]:
    """What may stand under ``element`` (a name or an index) of ``spot``."""
    if spot.model is not None:
        for name, field in spot.model.model_fields.items():
            if (field.alias or name) == element:
                return list(spots(field.annotation, field.metadata))
        return []
    origin, arguments = get_origin(spot.annotation), get_args(spot.annotation)
    if origin is dict:
        return list(spots(arguments[1]))
    if origin is list:
        return list(spots(arguments[0]))
    if origin is tuple and isinstance(element, int) and element < len(arguments):
        return list(spots(arguments[element]))
    return []


def locate(model: type[BaseModel], location: Sequence[str | int]) -> list[Spot]:
    """What may stand at pydantic's error ``location``; its tags choose among the arms of unions."""
    found = [Spot(model)]
    for element in location:
        if isinstance(element, str) and element.startswith(MARK):
            found = [spot for spot in found if spot.tag == element]
        else:
            found = [deeper for spot in found for deeper in inside(spot, element)]
    return found


def wanted(found: Sequence[Spot]) -> str:
    """What to enter at a place, in words: 'a length greater than 0, such as 4.2 m'; '' where nothing helps."""
    for spot in found:
        for marker in spot.markers:
            if isinstance(marker, Quantity):
                return marker.wanted()
            if isinstance(marker, Count):
                return f"a whole number from {marker.least} to {marker.most}"
        if get_origin(spot.annotation) is Literal:
            values = ", ".join(f"'{value}'" for value in get_args(spot.annotation))
            return f"one of {values}" if "," in values else values
        if spot.model is not None:
            return "an object with " + ", ".join(names(spot.model))
        if get_origin(spot.annotation) is dict:
            return 'an object of named entries, {"NAME": ...}'
        if get_origin(spot.annotation) is tuple:
            return "a list of two values"
        if get_origin(spot.annotation) is list:
            return "a list"
        if spot.annotation is str:
            return "a text"
        if spot.annotation is bool:
            return "true or false"
    return ""


_ELEMENT = re.compile(r"([^.\[\]]+)|\[(\d+|\*)\]")


@lru_cache(maxsize=2048)
def kind_of(model: type[BaseModel], path: str, choice: str = "") -> str | None:
    """The unit kind (a name of ``units.KINDS``) of the field at ``path``; None for texts, counts and choices.

    Names between dots may be any, '*' included. Where the arms of a union differ ('loads.*[0].value'), ``choice`` is
    the text that tells them apart ('line').
    """
    elements: list[str | int] = [name or (0 if index == "*" else int(index)) for name, index in _ELEMENT.findall(path)]
    return _kind([Spot(model)], elements, choice)


def _kind(found: list[Spot], elements: list[str | int], choice: str) -> str | None:
    chosen = [spot for spot in found if spot.tag == MARK + choice] or found
    if not elements:
        return next((m.kind for spot in chosen for m in _markers(spot) if isinstance(m, Quantity)), None)
    for spot in chosen:
        # A name of a dict may hold dots itself: let it swallow one element after another.
        reach = len(elements) if get_origin(spot.annotation) is dict else 1
        for taken in range(1, reach + 1):
            kind = _kind(inside(spot, elements[0]), elements[taken:], choice)
            if kind is not None:
                return kind
    return None


def _markers(spot: Spot) -> Iterator[Any]:
    yield from spot.markers
    if get_origin(spot.annotation) in (tuple, list):
        for deeper in inside(spot, 0):
            yield from deeper.markers
