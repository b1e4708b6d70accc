"""A given resistance across all modules."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.load.base import Load, LoadLaw, numbers
from tegdesign.system.load.laws import ohmic


class Resistance(Load):
    """A resistor, heater or lamp."""

    kind: Literal["resistance"] = "resistance"
    resistance: Annotated[float, Measure("ohm"), Field(gt=0)]

    def law(self, series: Array, parallel: Array) -> LoadLaw:
        """Return V = I R parallel / series for each module."""
        return LoadLaw(ohmic, numbers(self.resistance * parallel / series, series))

    def words(self) -> str:
        """Return the load in words."""
        return f"resistance {self.resistance:.6g} ohm"
