"""Electrical loads: each says which current flows and what reaches the user. One file a kind."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from tegdesign.system.load.base import Delivery, Load, LoadLaw, LoadLimit, MixedLoads, mixed
from tegdesign.system.load.battery import Battery
from tegdesign.system.load.converter import Converter
from tegdesign.system.load.efficient import BestEfficiency
from tegdesign.system.load.given import GivenCurrent
from tegdesign.system.load.matched import Matched
from tegdesign.system.load.motor import Motor
from tegdesign.system.load.resistance import Resistance

AnyLoad = Annotated[
    Matched | BestEfficiency | Resistance | GivenCurrent | Battery | Converter | Motor,
    Field(discriminator="kind"),
]

__all__ = [
    "AnyLoad",
    "Battery",
    "BestEfficiency",
    "Converter",
    "Delivery",
    "GivenCurrent",
    "Load",
    "LoadLaw",
    "LoadLimit",
    "Matched",
    "MixedLoads",
    "Motor",
    "Resistance",
    "mixed",
]
