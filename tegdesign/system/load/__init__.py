"""Electrical loads: each says which current flows. One file a kind."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from tegdesign.system.load.base import Load, LoadLaw, MixedLoads, mixed
from tegdesign.system.load.efficient import BestEfficiency
from tegdesign.system.load.given import GivenCurrent
from tegdesign.system.load.matched import Matched
from tegdesign.system.load.resistance import Resistance

AnyLoad = Annotated[Matched | BestEfficiency | Resistance | GivenCurrent, Field(discriminator="kind")]

__all__ = [
    "AnyLoad",
    "BestEfficiency",
    "GivenCurrent",
    "Load",
    "LoadLaw",
    "Matched",
    "MixedLoads",
    "Resistance",
    "mixed",
]
