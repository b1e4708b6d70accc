"""Typed parameters that may depend on temperature: a number, or a table with its kind."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Annotated, Any, Literal

from pydantic import BeforeValidator, Field, model_serializer, model_validator

from tegdesign.material.curve import Curve
from tegdesign.material.file import Strict, Temperature
from tegdesign.material.transport.law import Law, Linear, Power
from tegdesign.quantity import Measure, write

Energy = Annotated[float, Measure("J", "eV")]
EnergySlope = Annotated[float, Measure("J/K", "meV/K")]
Number = Annotated[float, Field(strict=True, allow_inf_nan=False)]
Mass = Annotated[float, Field(strict=True, gt=0, lt=100)]


def _as_table(value: object) -> object:
    """Give a bare number the shape of the other laws."""
    return value if isinstance(value, (Mapping, Strict)) else {"kind": "constant", "value": value}


class ConstantEnergy(Strict):
    """The same energy at every temperature."""

    kind: Literal["constant"] = "constant"
    value: Energy

    @model_serializer
    def _bare(self) -> str:
        return write(self.value, "J", "eV")

    def build(self) -> Law:
        """Return the energy [J]."""
        return self.value


class LinearEnergy(Strict):
    """``value + slope (T - reference)``."""

    kind: Literal["linear"]
    value: Energy
    slope: EnergySlope
    reference: Annotated[float, Measure("K"), Field(ge=0)] = 0.0

    def build(self) -> Law:
        """Return the law [J]."""
        return Linear(self.value, self.slope, self.reference)


class TableEnergy(Strict):
    """Energies at given temperatures, monotone cubic between them."""

    kind: Literal["table"]
    temperatures: tuple[Temperature, ...]
    values: tuple[Energy, ...]

    @model_validator(mode="after")
    def _function(self) -> TableEnergy:
        if len(self.temperatures) != len(self.values):
            raise ValueError(f"{len(self.values)} values for {len(self.temperatures)} temperatures; give one for each")
        self.build()
        return self

    def build(self) -> Law:
        """Return the curve [J]."""
        return Curve(self.temperatures, self.values)  # type: ignore[arg-type]


class ConstantMass(Strict):
    """The same mass at every temperature, in electron masses."""

    kind: Literal["constant"] = "constant"
    value: Mass

    @model_serializer
    def _bare(self) -> float:
        return self.value

    def build(self) -> Law:
        """Return the mass in electron masses."""
        return self.value


class PowerMass(Strict):
    """``value (T / reference)^exponent``, in electron masses."""

    kind: Literal["power"]
    value: Mass
    exponent: Annotated[float, Field(strict=True, ge=-3, le=3)]
    reference: Temperature = 300.0

    def build(self) -> Law:
        """Return the law in electron masses."""
        return Power(self.value, self.exponent, self.reference)


EnergyLaw = Annotated[
    ConstantEnergy | LinearEnergy | TableEnergy, Field(discriminator="kind"), BeforeValidator(_as_table)
]
MassLaw = Annotated[ConstantMass | PowerMass, Field(discriminator="kind"), BeforeValidator(_as_table)]


def breaks(*laws: Any) -> list[float]:
    """Return the temperatures [K] at which tables among the laws have a kink in their slope."""
    return [t for law in laws if isinstance(law, TableEnergy) for t in law.temperatures]
