"""What every boundary can do."""

from __future__ import annotations

from abc import abstractmethod
from typing import Annotated, Any

import numpy as np
from pydantic import Field

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.law import Law
from tegdesign.system.model import Part

Temperature = Annotated[float, Measure("K", "degC"), Field(gt=0, lt=4000)]
Area = Annotated[float, Measure("m^2", "cm^2"), Field(gt=0)]
Coefficient = Annotated[float, Measure("W/m^2/K"), Field(gt=0)]
Emittance = Annotated[float, Measure(""), Field(ge=0, le=1)]
ConvectionLoss = Annotated[float, Measure("W/m^2/K"), Field(ge=0)]
Positive = Field(gt=0)


class Boundary(Part):
    """One side of the generator: the source of heat or its sink.

    Any of them may lie behind a wall: tissue, lining, base plate, heat pipe. ``wall_areal_resistance`` [m^2 K/W]
    counts over the footprint of the modules, ``wall_resistance`` [K/W] is that of one path which all modules share;
    given both, they add.
    """

    kind: str
    wall_areal_resistance: Annotated[float, Measure("m^2*K/W"), Field(ge=0, lt=1e4)] | None = None
    wall_resistance: Annotated[float, Measure("K/W"), Field(ge=0, lt=1e9)] | None = None

    def law(self, footprint: Array, modules: Array) -> Law:
        """Return the law per module for modules of a footprint [m^2] of which ``modules`` share the boundary."""
        return self.bare_law(footprint, modules).behind(self.wall(footprint * modules) * modules)

    @abstractmethod
    def bare_law(self, footprint: Array, modules: Array) -> Law:
        """Return the law before the wall."""

    def wall(self, area: Array) -> Array:
        """Return the resistance of the wall [K/W] over a footprint of all modules [m^2]."""
        return np.asarray((self.wall_areal_resistance or 0.0) / area + (self.wall_resistance or 0.0))

    @property
    @abstractmethod
    def reference_temperature(self) -> float:
        """Temperature that names the state [K]: of the surface, the fluid, the inlet or the ambient."""

    @property
    def given_heat(self) -> float | None:
        """Heat that is all there is [W], None where the heat follows from temperatures."""
        return None

    def scaled(self, share: float) -> Any:
        """Return the boundary with a share of its given heat.

        Raises
        ------
        InputError
            No heat is given.
        """
        raise InputError(f"a source of kind '{self.kind}' has no given heat to take {share:g} of; vary its temperature")

    def inlet_end(self) -> Any:
        """Return the boundary as the module at its hot end sees it, None where all modules see the same."""
        return None

    def outcomes(self, heat: Array) -> dict[str, Array]:
        """Return what follows from the heat [W] that leaves the boundary, in all, by name with unit."""
        return {}

    def bounds(self) -> list[tuple[str, str, float]]:
        """Return the limits the boundary sets on its ``outcomes``: name with unit, "least" or "most", bound."""
        return []

    @abstractmethod
    def at(self, temperature: float) -> Boundary:
        """Return the same boundary with another reference temperature [K]."""

    @abstractmethod
    def places(self, heat: Array) -> list[tuple[str, float | Array]]:
        """Return named temperatures [K] from far away to the wall; ``heat`` [W] leaves the boundary, in all."""

    def stations(self, face: Array, heat: Array, area: Array) -> list[tuple[str, Array]]:
        """Return named temperatures [K] from far away to the module face.

        ``heat`` [W] leaves the boundary, in all; ``area`` [m^2] is the footprint of all modules.
        """
        told = [(name, np.full(face.shape, value)) for name, value in self.places(heat)]
        wall = self.wall(area)
        return [*told, ("far side of wall", face + wall * heat)] if np.any(wall) else told

    def words(self) -> str:
        """Return the boundary in words, with units, for condition lines."""
        return self._told(self.model_dump(exclude_defaults=True, exclude={"kind"}))

    def _told(self, written: dict[str, Any]) -> str:
        """Return kind, keys and values; those of the wall last."""
        shared = {name: written.pop(name) for name in Boundary.model_fields if name in written}
        parts = [(name.replace("_", " "), value) for name, value in {**written, **shared}.items() if value is not None]
        return ", ".join([self.kind, *(f"{name} {_value_in_words(value)}" for name, value in parts)])


def air_with_film(air_temperature: float | None, coefficient: float) -> None:
    """Refuse air that would count for nothing."""
    if air_temperature is not None and coefficient == 0:
        raise ValueError("air_temperature counts only with a coefficient above 0 W/m^2/K; add it or drop the air")


def _value_in_words(value: Any) -> str:
    if isinstance(value, dict):
        inner = (f"{name} {v}" for name, v in value.items())
        return f"({', '.join(inner)})"
    return " | ".join(str(v) for v in value) if isinstance(value, (list, tuple)) else str(value)
