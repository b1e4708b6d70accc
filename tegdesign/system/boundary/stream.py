"""A stream of finite heat capacity: effectiveness and number of transfer units."""

from __future__ import annotations

from typing import Annotated, Literal

import numpy as np
from pydantic import Field

from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.boundary.base import Boundary, Positive, Temperature, fin_factor, spread
from tegdesign.system.boundary.film import Film
from tegdesign.system.law import Law, law


class Stream(Boundary):
    """Flue gas, brine or coolant that changes its temperature on the way along the plate.

    The plate counts as one temperature: Q = C (1 - exp(-h A / C)) (T_in - T_face), C = mass flow x heat capacity
    (effectiveness of an exchanger with one side isothermal).
    """

    kind: Literal["stream"] = "stream"
    inlet_temperature: Temperature
    mass_flow: Annotated[float, Measure("kg/s", "g/s"), Positive]
    heat_capacity: Annotated[float, Measure("J/kg/K"), Positive]
    coefficient: Annotated[float, Measure("W/m^2/K"), Positive]
    area: Annotated[float, Measure("m^2", "cm^2"), Positive] | None = None
    area_enlargement: Annotated[float, Measure(""), Field(ge=1)] = 1.0
    fin_efficiency: Annotated[float, Measure(""), Field(gt=0, le=1)] = 1.0

    @property
    def capacity_rate(self) -> float:
        """Mass flow times heat capacity [W/K]."""
        return self.mass_flow * self.heat_capacity

    def law(self, footprint: Array, modules: Array) -> Law:
        """Return the effectiveness law, shared evenly by the modules; A is their footprint if not given."""
        area = footprint * modules if self.area is None else self.area
        transfer = self.coefficient * area * fin_factor(self.area_enlargement, self.fin_efficiency)
        g = self.capacity_rate * -np.expm1(-transfer / self.capacity_rate) / modules
        return law(g, 1.0, g * self.inlet_temperature, footprint)

    @property
    def reference_temperature(self) -> float:
        """Inlet temperature [K]."""
        return self.inlet_temperature

    def inlet_end(self) -> Film:
        """Return the film at the inlet, where the stream has not cooled yet."""
        shared = {name: getattr(self, name) for name in ("coefficient", "area", "area_enlargement", "fin_efficiency")}
        return Film.model_construct(temperature=self.inlet_temperature, **shared)

    def at(self, temperature: float) -> Stream:
        """Return the stream with another inlet temperature [K]."""
        return self.model_copy(update={"inlet_temperature": temperature})

    def stations(self, face: Array, heat: Array) -> list[tuple[str, Array]]:
        """Return inlet and outlet of the stream."""
        return [
            ("stream inlet", spread(self.inlet_temperature, face)),
            ("stream outlet", self.inlet_temperature - heat / self.capacity_rate),
        ]
