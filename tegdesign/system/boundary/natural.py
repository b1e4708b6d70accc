"""Natural convection: the film grows with the difference it works at."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from tegdesign.material.curve import Array
from tegdesign.module.gap import STEFAN_BOLTZMANN
from tegdesign.quantity import Measure
from tegdesign.system.boundary.base import Area, Boundary, Coefficient, Emittance, Positive, Temperature
from tegdesign.system.boundary.exchanger import Enlargement, FinEfficiency, fin_factor
from tegdesign.system.boundary.shape import FourthPower, PowerOfDifference
from tegdesign.system.law import Law, bent, law


class NaturalConvection(Boundary):
    """A surface or finned sink in still air or liquid: h = coefficient (difference / reference_difference)^exponent.

    Exponent 1/4 for laminar, 1/3 for turbulent boundary layers on plates (e.g. Churchill and Chu 1975, Int. J. Heat
    Mass Transfer 18, 1323, doi 10.1016/0017-9310(75)90243-4, away from their lower ends). ``emittance`` adds radiation
    of the base area, which is the envelope of a finned sink, to surroundings at the temperature of the fluid.
    """

    kind: Literal["natural-convection"] = "natural-convection"
    temperature: Temperature
    coefficient: Coefficient
    reference_difference: Annotated[float, Measure("K", "K", True), Positive]
    exponent: Annotated[float, Measure(""), Field(ge=0, le=1)] = 0.25
    area: Area | None = None
    area_enlargement: Enlargement = 1.0
    fin_efficiency: FinEfficiency = 1.0
    emittance: Emittance = 0.0

    def bare_law(self, footprint: Array, modules: Array) -> Law:
        """Return the law of convection and radiation; A is the footprint if not given."""
        area = footprint if self.area is None else self.area / modules
        wetted = area * fin_factor(self.area_enlargement, self.fin_efficiency)
        g = self.coefficient * wetted / self.reference_difference**self.exponent
        s = self.emittance * STEFAN_BOLTZMANN * area
        own = law(0.0, 1.0, s * self.temperature**4, footprint)
        own = bent(own, PowerOfDifference(), g, self.temperature, self.exponent)
        return bent(own, FourthPower(), s) if self.emittance else own

    @property
    def reference_temperature(self) -> float:
        """Temperature of the fluid [K]."""
        return self.temperature

    def at(self, temperature: float) -> NaturalConvection:
        """Return the boundary with a fluid of another temperature [K]."""
        return self.model_copy(update={"temperature": temperature})

    def places(self, heat: Array) -> list[tuple[str, float | Array]]:
        """Return the fluid."""
        return [("fluid", self.temperature)]
