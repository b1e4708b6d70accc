"""A fixed heat flow with a leak to ambient."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.boundary.base import Boundary, Positive, Temperature, spread
from tegdesign.system.law import Law, law


class FixedHeat(Boundary):
    """A flame of fixed fuel, a radioisotope, an absorber: the heat is given, the temperature is a result."""

    kind: Literal["heat"] = "heat"
    heat: Annotated[float, Measure("W"), Positive]
    leak_conductance: Annotated[float, Measure("W/K"), Field(ge=0)] = 0.0
    ambient_temperature: Temperature = 293.15

    def law(self, footprint: Array, modules: Array) -> Law:
        """Return Q = heat - leak (T_face - T_ambient), shared evenly by the modules."""
        leak = self.leak_conductance / modules
        return law(leak, 1.0, self.heat / modules + leak * self.ambient_temperature, footprint)

    @property
    def reference_temperature(self) -> float:
        """Temperature of the ambient [K]."""
        return self.ambient_temperature

    def words(self) -> str:
        """Return the source in words; the ambient always stands in it."""
        given = self.model_dump(exclude={"kind"})
        return ", ".join(f"{name.replace('_', ' ')} {value}" for name, value in given.items())

    @property
    def given_heat(self) -> float:
        """The heat of the source [W]."""
        return self.heat

    def at(self, temperature: float) -> FixedHeat:
        """Refuse: the temperature of a given heat is a result."""
        raise InputError(
            f"a source of kind 'heat' has no temperature that could be set to {temperature:.6g} K, it is a result; "
            'vary source.heat instead: --map "source.heat=100 W, 200 W"'
        )

    def stations(self, face: Array, heat: Array) -> list[tuple[str, Array]]:
        """Return the ambient that the leak goes to."""
        return [("ambient", spread(self.ambient_temperature, face))]
