"""A fluid of constant temperature behind a film coefficient, with fins."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.boundary.base import Boundary, Positive, Temperature, fin_factor, spread
from tegdesign.system.law import Law, law


class Film(Boundary):
    """Plenty of gas or liquid: its temperature stays, the film carries the drop."""

    kind: Literal["film"] = "film"
    temperature: Temperature
    coefficient: Annotated[float, Measure("W/m^2/K"), Positive]
    area: Annotated[float, Measure("m^2", "cm^2"), Positive] | None = None
    area_enlargement: Annotated[float, Measure(""), Field(ge=1)] = 1.0
    fin_efficiency: Annotated[float, Measure(""), Field(gt=0, le=1)] = 1.0

    def law(self, footprint: Array, modules: Array) -> Law:
        """Return Q = h A (1 + efficiency (enlargement - 1)) (T_fluid - T_face); A is the footprint if not given."""
        area = footprint if self.area is None else self.area / modules
        g = self.coefficient * area * fin_factor(self.area_enlargement, self.fin_efficiency)
        return law(g, 1.0, g * self.temperature, footprint)

    @property
    def reference_temperature(self) -> float:
        """Temperature of the fluid [K]."""
        return self.temperature

    def at(self, temperature: float) -> Film:
        """Return the film with a fluid of another temperature [K]."""
        return self.model_copy(update={"temperature": temperature})

    def stations(self, face: Array, heat: Array) -> list[tuple[str, Array]]:
        """Return the fluid."""
        return [("fluid", spread(self.temperature, face))]
