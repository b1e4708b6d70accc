"""Source and sink are one idea: how much heat flows at a given face temperature? One file a kind."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from tegdesign.system.boundary.base import Boundary
from tegdesign.system.boundary.film import Film
from tegdesign.system.boundary.heat import FixedHeat
from tegdesign.system.boundary.heat_sink import HeatSink
from tegdesign.system.boundary.irradiance import Irradiance
from tegdesign.system.boundary.natural import NaturalConvection
from tegdesign.system.boundary.radiation import Radiation
from tegdesign.system.boundary.stream import Stream
from tegdesign.system.boundary.surface import Surface

AnyBoundary = Annotated[
    Surface | FixedHeat | Film | Stream | Radiation | Irradiance | NaturalConvection | HeatSink,
    Field(discriminator="kind"),
]

__all__ = [
    "AnyBoundary",
    "Boundary",
    "Film",
    "FixedHeat",
    "HeatSink",
    "Irradiance",
    "NaturalConvection",
    "Radiation",
    "Stream",
    "Surface",
]
