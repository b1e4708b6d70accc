"""A fixed heat flow with a leak to ambient, decaying where it is a radioisotope."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field, model_validator

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.boundary.base import Boundary, Positive, Temperature
from tegdesign.system.law import Law, law


class FixedHeat(Boundary):
    """A flame of fixed fuel, a radioisotope, an absorber: the heat is given, the temperature is a result.

    ``heat`` is that at age nought; with a half-life the heat now is heat x 2^(-age / half_life).
    """

    kind: Literal["heat"] = "heat"
    heat: Annotated[float, Measure("W"), Positive]
    leak_conductance: Annotated[float, Measure("W/K"), Field(ge=0)] = 0.0
    ambient_temperature: Temperature = 293.15
    half_life: Annotated[float, Measure("s", "year"), Positive] | None = None
    age: Annotated[float, Measure("s", "year"), Field(ge=0)] | None = None

    @model_validator(mode="after")
    def _decay_whole(self) -> FixedHeat:
        if self.age is not None and self.half_life is None:
            raise ValueError("age needs a half_life to count by; add half_life or drop age")
        if self.given_heat <= 0:
            raise ValueError("nothing is left of the heat after this age; mend age or half_life")
        return self

    def bare_law(self, footprint: Array, modules: Array) -> Law:
        """Return Q = heat now - leak (T_face - T_ambient), shared evenly by the modules."""
        leak = self.leak_conductance / modules
        return law(leak, 1.0, self.given_heat / modules + leak * self.ambient_temperature, footprint)

    @property
    def reference_temperature(self) -> float:
        """Temperature of the ambient [K]."""
        return self.ambient_temperature

    def words(self) -> str:
        """Return the source in words; the ambient always stands in it, and the heat now where it decays."""
        now = "" if self.half_life is None else f", heat now {self.given_heat:.6g} W"
        return self._told(self.model_dump(exclude={"kind"})) + now

    @property
    def given_heat(self) -> float:
        """The heat of the source now [W]."""
        lives = 0.0 if self.half_life is None else (self.age or 0.0) / self.half_life
        return float(self.heat * 2.0**-lives)

    def scaled(self, share: float) -> FixedHeat:
        """Return the source with a share of its heat."""
        return self.model_copy(update={"heat": self.heat * share})

    def at(self, temperature: float) -> FixedHeat:
        """Refuse: the temperature of a given heat is a result."""
        raise InputError(
            f"a source of kind 'heat' has no temperature that could be set to {temperature:.6g} K, it is a result; "
            'vary source.heat instead: --map "source.heat=100 W, 200 W"'
        )

    def places(self, heat: Array) -> list[tuple[str, float | Array]]:
        """Return the ambient that the leak goes to."""
        return [("ambient", self.ambient_temperature)]
