"""Thermal radiation from or to surroundings, with convection beside it."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field, model_validator

from tegdesign.material.curve import Array
from tegdesign.module.gap import STEFAN_BOLTZMANN
from tegdesign.quantity import Measure
from tegdesign.system.boundary.base import Area, Boundary, ConvectionLoss, Temperature, air_with_film
from tegdesign.system.boundary.shape import FourthPower
from tegdesign.system.law import Law, bent, law


class Radiation(Boundary):
    """A glowing body as source; space, sky or a room as sink.

    Q = eps sigma A (T^4 - T_face^4) + h A (T_air - T_face). Grey surroundings that are large or black; otherwise
    ``emittance`` is the exchange factor of both, view factor included. Air is at the temperature of the surroundings
    unless it has its own.
    """

    kind: Literal["radiation"] = "radiation"
    temperature: Temperature
    emittance: Annotated[float, Measure(""), Field(gt=0, le=1)]
    area: Area | None = None
    coefficient: ConvectionLoss = 0.0
    air_temperature: Temperature | None = None

    @model_validator(mode="after")
    def _air_with_film(self) -> Radiation:
        air_with_film(self.air_temperature, self.coefficient)
        return self

    def bare_law(self, footprint: Array, modules: Array) -> Law:
        """Return the law of radiation and convection; A is the footprint if not given."""
        area = footprint if self.area is None else self.area / modules
        g, s = self.coefficient * area, self.emittance * STEFAN_BOLTZMANN * area
        air = self.temperature if self.air_temperature is None else self.air_temperature
        return bent(law(g, 1.0, g * air + s * self.temperature**4, footprint), FourthPower(), s)

    @property
    def reference_temperature(self) -> float:
        """Temperature of the surroundings [K]."""
        return self.temperature

    def at(self, temperature: float) -> Radiation:
        """Return other surroundings [K]; air with a temperature of its own keeps it."""
        return self.model_copy(update={"temperature": temperature})

    def places(self, heat: Array) -> list[tuple[str, float | Array]]:
        """Return the surroundings."""
        return [("surroundings", self.temperature)]
