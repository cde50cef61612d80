"""Who sent a request: set once by the gate, asked for anywhere."""

from __future__ import annotations

from typing import Annotated

from fastapi import Depends, Request

from server.people import Person


def current(request: Request) -> Person | None:
    """Return who sent the request; None where nobody is signed in, or where the request was refused before."""
    person = getattr(request.state, "person", None)
    return person if isinstance(person, Person) else None


def signed(request: Request) -> Person:
    """Return who sent a request that the gate let in."""
    person = current(request)
    assert person is not None
    return person


def made_by(request: Request, typed: str = "") -> str:
    """Return the name to keep with what is saved: the person's own, or what was typed where nobody signs in."""
    person = current(request)
    return person.name if person is not None and person.named else typed


Who = Annotated[Person, Depends(signed)]
"""The person who acts; ``id`` 0 where the program runs without sign-in."""
