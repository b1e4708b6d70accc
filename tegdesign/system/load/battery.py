"""A battery or bus of fixed voltage behind a blocking diode."""

from __future__ import annotations

from typing import Annotated, Literal

import numpy as np
from numpy.typing import NDArray
from pydantic import Field

from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.load.base import LoadLaw, LoadLimit, Terminal, numbers
from tegdesign.system.load.charger import Charger
from tegdesign.system.load.laws import aim_at_voltage, forward


def behind_diode(at: Terminal, number: Array) -> tuple[Array, Array]:
    """Return I - max(I at V = V_held + I R, 0) and its slope; ``number`` holds V_held and R of one module."""
    held, resistance = number
    return forward(at, aim_at_voltage(at, held, resistance))


class Battery(Charger):
    """A battery or direct-current bus whose voltage the generator cannot move; current flows into it only."""

    kind: Literal["battery"] = "battery"
    voltage: Annotated[float, Measure("V"), Field(gt=0)]
    blocking_drop: Annotated[float, Measure("V"), Field(ge=0)] = 0.0
    series_resistance: Annotated[float, Measure("ohm"), Field(ge=0)] = 0.0

    @property
    def threshold(self) -> float:
        """Terminal voltage [V] above which current flows."""
        return self.voltage + self.blocking_drop

    def law(self, series: Array, parallel: Array) -> LoadLaw:
        """Return V = (voltage + drop) / series + I R parallel / series for each module, or no current."""
        resistance = self.series_resistance * parallel / series
        return LoadLaw(behind_diode, np.stack([numbers(self.threshold / series, series), numbers(resistance, series)]))

    def limits(self) -> tuple[LoadLimit, ...]:
        """Return that the open circuit must lie above battery and drop, and the greatest current."""
        return (
            LoadLimit("voltage to charge", "open circuit", "voltage", "least", self.threshold),
            *super().limits(),
        )

    def supply(self, voltage: Array, current: Array) -> tuple[Array, NDArray[np.bool_]]:
        """Return the power into the battery: what drop and resistance take is lost."""
        return self.voltage * current, np.zeros(current.shape, dtype=bool)

    def words(self) -> str:
        """Return the load in words."""
        return (
            f"battery or bus of {self.voltage:.6g} V behind a drop of {self.blocking_drop:.6g} V and "
            f"{self.series_resistance:.6g} ohm{self.behind()}"
        )
