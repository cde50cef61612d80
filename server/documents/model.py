"""The base of every part of a document."""

from __future__ import annotations

from pydantic import BaseModel, ConfigDict


class Model(BaseModel):
    """Base of every part: unknown names are refused, nothing changes after reading."""

    model_config = ConfigDict(extra="forbid", frozen=True)
