"""A fluid of constant temperature behind a film coefficient, with fins."""

from __future__ import annotations

from typing import Literal

from pydantic import model_validator

from tegdesign.material.curve import Array
from tegdesign.system.boundary.base import Area, Boundary, Coefficient, Temperature
from tegdesign.system.boundary.exchanger import Enlargement, FinEfficiency, Fins, Fouling, fins_once, on_base
from tegdesign.system.law import Law, law


class Film(Boundary):
    """Plenty of gas or liquid: its temperature stays, the film carries the drop."""

    kind: Literal["film"] = "film"
    temperature: Temperature
    coefficient: Coefficient
    area: Area | None = None
    area_enlargement: Enlargement = 1.0
    fin_efficiency: FinEfficiency = 1.0
    fouling_resistance: Fouling | None = None
    fins: Fins | None = None

    @model_validator(mode="after")
    def _fins_once(self) -> Film:
        fins_once(self.area_enlargement, self.fin_efficiency, self.fins)
        return self

    def bare_law(self, footprint: Array, modules: Array) -> Law:
        """Return Q = h A (fins) (T_fluid - T_face); A is the footprint if not given."""
        area = footprint if self.area is None else self.area / modules
        g = area * on_base(
            self.coefficient, self.area_enlargement, self.fin_efficiency, self.fouling_resistance, self.fins
        )
        return law(g, 1.0, g * self.temperature, footprint)

    @property
    def reference_temperature(self) -> float:
        """Temperature of the fluid [K]."""
        return self.temperature

    def at(self, temperature: float) -> Film:
        """Return the film with a fluid of another temperature [K]."""
        return self.model_copy(update={"temperature": temperature})

    def places(self, heat: Array) -> list[tuple[str, float | Array]]:
        """Return the fluid."""
        return [("fluid", self.temperature)]
