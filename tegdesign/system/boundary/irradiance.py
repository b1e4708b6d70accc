"""An absorber in sunlight or in the glow of a furnace: given irradiance, losses back."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field, model_validator

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.module.gap import STEFAN_BOLTZMANN
from tegdesign.quantity import Measure
from tegdesign.system.boundary.base import (
    Area,
    Boundary,
    ConvectionLoss,
    Emittance,
    Positive,
    Temperature,
    air_with_film,
)
from tegdesign.system.boundary.shape import FourthPower
from tegdesign.system.law import Law, bent, law

_Share = Annotated[float, Measure(""), Field(gt=0, le=1)]


class Irradiance(Boundary):
    """Light on an aperture, all of it led to an absorber that radiates back and loses heat to air.

    Q = E A tau alpha - (A / C) (eps sigma (T_face^4 - T_surroundings^4) + h (T_face - T_air)), with the aperture A
    shared by all modules and the concentration C, aperture over absorber area. ``transmittance`` holds cover and
    mirrors, ``emittance`` the exchange of the absorber with surroundings, through the cover.
    """

    kind: Literal["irradiance"] = "irradiance"
    irradiance: Annotated[float, Measure("W/m^2"), Positive]
    aperture: Area
    concentration: Annotated[float, Measure(""), Positive] = 1.0
    transmittance: _Share = 1.0
    absorptance: _Share
    emittance: Emittance
    surroundings_temperature: Temperature = 293.15
    coefficient: ConvectionLoss = 0.0
    air_temperature: Temperature | None = None

    @model_validator(mode="after")
    def _air_with_film(self) -> Irradiance:
        air_with_film(self.air_temperature, self.coefficient)
        return self

    def bare_law(self, footprint: Array, modules: Array) -> Law:
        """Return the law of the absorber, shared evenly by the modules."""
        area = self.aperture / self.concentration / modules
        g, s = self.coefficient * area, self.emittance * STEFAN_BOLTZMANN * area
        taken = self.given_heat * self.transmittance * self.absorptance / modules
        cold = self.surroundings_temperature
        air = cold if self.air_temperature is None else self.air_temperature
        straight = law(g, 1.0, taken + g * air + s * cold**4, footprint)
        return bent(straight, FourthPower(), s) if self.emittance else straight

    @property
    def reference_temperature(self) -> float:
        """Temperature of the surroundings [K]."""
        return self.surroundings_temperature

    @property
    def given_heat(self) -> float:
        """Radiant power on the aperture [W], before cover and absorber."""
        return self.irradiance * self.aperture

    def scaled(self, share: float) -> Irradiance:
        """Return a share of the irradiance."""
        return self.model_copy(update={"irradiance": self.irradiance * share})

    def at(self, temperature: float) -> Irradiance:
        """Refuse: the temperature of an absorber is a result."""
        raise InputError(
            f"a source of kind 'irradiance' has no temperature that could be set to {temperature:.6g} K, it is a "
            'result; vary source.irradiance instead: --map "source.irradiance=500 W/m2, 1000 W/m2"'
        )

    def words(self) -> str:
        """Return the source in words; the surroundings always stand in it."""
        return self._told(self.model_dump(exclude={"kind"}))

    def places(self, heat: Array) -> list[tuple[str, float | Array]]:
        """Return the surroundings that the losses go to."""
        return [("surroundings", self.surroundings_temperature)]
