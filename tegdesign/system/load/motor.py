"""A motor, of a fan for instance: a resistance when it runs, a lower one while it stands."""

from __future__ import annotations

from typing import Annotated, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray
from pydantic import Field, model_validator

from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.load.base import Load, LoadLaw, LoadLimit, numbers
from tegdesign.system.load.laws import ohmic

Ohm = Annotated[float, Measure("ohm"), Field(gt=0)]


class Motor(Load):
    """A motor that takes voltage or current to break loose: until it turns, it loads the generator with its winding."""

    kind: Literal["motor"] = "motor"
    resistance: Ohm
    stalled_resistance: Ohm
    start_voltage: Annotated[float, Measure("V"), Field(gt=0)] | None = None
    start_current: Annotated[float, Measure("A"), Field(gt=0)] | None = None

    @model_validator(mode="after")
    def _can_be_checked(self) -> Motor:
        if self.stalled_resistance > self.resistance:
            raise ValueError(
                f"stalled_resistance {self.stalled_resistance:g} ohm is above resistance, {self.resistance:g} ohm; a "
                "motor that stands draws more, exchange them"
            )
        if self.start_voltage is None and self.start_current is None:
            raise ValueError("nothing tells when the motor starts; give start_voltage, start_current or both")
        return self

    def law(self, series: Array, parallel: Array) -> LoadLaw:
        """Return V = I R parallel / series for each module, the motor running."""
        return LoadLaw(ohmic, numbers(self.resistance * parallel / series, series))

    def start_law(self, series: Array, parallel: Array) -> LoadLaw:
        """Return the same with the stalled resistance."""
        return LoadLaw(ohmic, numbers(self.stalled_resistance * parallel / series, series))

    def starts(self, start_voltage: ArrayLike) -> NDArray[np.bool_]:
        """Tell whether a terminal voltage [V] across the stalled motor, and the current it drives, are enough."""
        return np.asarray(start_voltage) >= max(
            self.start_voltage or 0.0, (self.start_current or 0.0) * self.stalled_resistance
        )

    def limits(self) -> tuple[LoadLimit, ...]:
        """Return voltage and current to start, those that are given."""
        asked: tuple[tuple[Literal["voltage", "current"], float | None], ...] = (
            ("voltage", self.start_voltage),
            ("current", self.start_current),
        )
        return tuple(
            LoadLimit(f"{quantity} to start the motor", "start", quantity, "least", bound)
            for quantity, bound in asked
            if bound is not None
        )

    def words(self) -> str:
        """Return the load in words."""
        needs = [f"{self.start_voltage:.6g} V"] if self.start_voltage is not None else []
        needs += [f"{self.start_current:.6g} A"] if self.start_current is not None else []
        return (
            f"motor of {self.resistance:.6g} ohm running, {self.stalled_resistance:.6g} ohm stalled, starts at "
            f"{' and '.join(needs)}"
        )
