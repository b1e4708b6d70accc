"""Base of the typed parts that a person writes: unknown keys refused, values frozen."""

from __future__ import annotations

from pydantic import BaseModel, ConfigDict


class Part(BaseModel):
    """A table of a brief or a design."""

    model_config = ConfigDict(extra="forbid", frozen=True)
