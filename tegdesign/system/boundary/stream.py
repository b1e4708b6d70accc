"""A stream of finite heat capacity: effectiveness and number of transfer units."""

from __future__ import annotations

from typing import Annotated, Literal

import numpy as np
from pydantic import model_validator

from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.boundary.base import Area, Boundary, Coefficient, Positive, Temperature
from tegdesign.system.boundary.exchanger import Enlargement, FinEfficiency, Fins, Fouling, fins_once, on_base
from tegdesign.system.boundary.film import Film
from tegdesign.system.law import Law, law


class Stream(Boundary):
    """Flue gas, brine or coolant that changes its temperature on the way along the plate.

    The plate counts as one temperature: Q = C (1 - exp(-U A / C)) (T_in - T_face), C = mass flow x heat capacity
    (effectiveness of an exchanger with one side isothermal). U A is film, fouling, fins and areal wall in series,
    everywhere along the stream; a wall resistance [K/W] comes after, between that plate and the modules.
    """

    kind: Literal["stream"] = "stream"
    inlet_temperature: Temperature
    mass_flow: Annotated[float, Measure("kg/s", "g/s"), Positive]
    heat_capacity: Annotated[float, Measure("J/kg/K"), Positive]
    coefficient: Coefficient
    area: Area | None = None
    area_enlargement: Enlargement = 1.0
    fin_efficiency: FinEfficiency = 1.0
    fouling_resistance: Fouling | None = None
    fins: Fins | None = None
    least_outlet_temperature: Temperature | None = None
    most_outlet_temperature: Temperature | None = None

    @model_validator(mode="after")
    def _sound(self) -> Stream:
        fins_once(self.area_enlargement, self.fin_efficiency, self.fins)
        least, most = self.least_outlet_temperature, self.most_outlet_temperature
        if least is not None and most is not None and least >= most:
            raise ValueError(
                f"least_outlet_temperature {least:.2f} K is not below most_outlet_temperature {most:.2f} K; mend one"
            )
        return self

    @property
    def capacity_rate(self) -> float:
        """Mass flow times heat capacity [W/K]."""
        return self.mass_flow * self.heat_capacity

    def bare_law(self, footprint: Array, modules: Array) -> Law:
        """Return the effectiveness law, shared evenly by the modules; A is their footprint if not given."""
        whole = footprint * modules
        on_area = on_base(
            self.coefficient, self.area_enlargement, self.fin_efficiency, self.fouling_resistance, self.fins
        )
        film = on_area * (whole if self.area is None else self.area)
        transfer = 1 / (1 / film + (self.wall_areal_resistance or 0.0) / whole)
        g = self.capacity_rate * -np.expm1(-transfer / self.capacity_rate) / modules
        return law(g, 1.0, g * self.inlet_temperature, footprint)

    def wall(self, area: Array) -> Array:
        """Return the resistance after the exchanger [K/W]; the areal one is part of the exchanger."""
        return np.asarray(self.wall_resistance or 0.0)

    @property
    def reference_temperature(self) -> float:
        """Inlet temperature [K]."""
        return self.inlet_temperature

    def inlet_end(self) -> Film:
        """Return the film at the inlet, where the stream has not cooled yet."""
        shared = {name: getattr(self, name) for name in Film.model_fields if name in type(self).model_fields}
        return Film.model_construct(**{**shared, "kind": "film", "temperature": self.inlet_temperature})

    def outlet_temperature(self, heat: Array) -> Array:
        """Return the outlet temperature [K] after a heat [W] has left the stream, in all."""
        return np.asarray(self.inlet_temperature - heat / self.capacity_rate)

    def outcomes(self, heat: Array) -> dict[str, Array]:
        """Return the outlet temperature."""
        return {"outlet_temperature_K": self.outlet_temperature(heat)}

    def bounds(self) -> list[tuple[str, str, float]]:
        """Return the limits of the outlet temperature: acid dew point, boiling, freezing."""
        asked = (("least", self.least_outlet_temperature), ("most", self.most_outlet_temperature))
        return [("outlet_temperature_K", sense, bound) for sense, bound in asked if bound is not None]

    def at(self, temperature: float) -> Stream:
        """Return the stream with another inlet temperature [K]."""
        return self.model_copy(update={"inlet_temperature": temperature})

    def places(self, heat: Array) -> list[tuple[str, float | Array]]:
        """Return inlet and outlet of the stream."""
        return [("stream inlet", self.inlet_temperature), ("stream outlet", self.outlet_temperature(heat))]
