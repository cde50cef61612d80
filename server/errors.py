"""The failures we expect and can explain. Everything else is a bug and is logged as one."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray


class JointError(Exception):
    """Base of every failure we expect and can explain to the user."""


class InputError(JointError, ValueError):
    """One argument or field has an unusable value.

    Mechanics names its argument; ``checks`` puts the document's path before it.
    """

    def __init__(self, field: str, message: str) -> None:
        super().__init__(message)
        self.field = field


@dataclass(frozen=True)
class Fault:
    """What is wrong with one field of a document: where, and what to do about it."""

    path: str
    message: str

    def __str__(self) -> str:
        return f"{self.path}: {self.message}" if self.path else self.message


class DocumentError(JointError, ValueError):
    """A document that cannot be read; carries every fault found, not only the first."""

    def __init__(self, faults: Sequence[Fault]) -> None:
        super().__init__("; ".join(str(fault) for fault in faults))
        self.faults = tuple(faults)


def positive(field: str, value: ArrayLike, unit: str) -> NDArray[np.float64]:
    """Return ``value`` as floats; raise InputError naming ``field`` unless all are finite and above zero."""
    array = np.asarray(value, dtype=float)
    bad = array[~(np.isfinite(array) & (array > 0))]
    if bad.size:
        raise InputError(field, f"{field} is {bad[0]:g} {unit}; enter a number greater than 0 {unit}.")
    return array
