"""A converter that tracks the maximum power point within its window of input voltage."""

from __future__ import annotations

from typing import Annotated, Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray
from pydantic import Field, model_validator

from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.load.base import LoadLaw, LoadLimit, Terminal, numbers
from tegdesign.system.load.charger import Charger
from tegdesign.system.load.efficiency_table import EfficiencyTable
from tegdesign.system.load.laws import aim, aim_at_voltage, forward, most_power

Volt = Annotated[float, Measure("V"), Field(gt=0)]


def tracking(at: Terminal, number: Array) -> tuple[Array, Array]:
    """Return I - I_wanted and its slope; ``number`` holds the least and the greatest voltage of one module.

    Wanted is the current of most power, but not less than at the greatest voltage, nor more than at the least, nor
    below zero. Power has one top over current, so an edge of the window is the best that a clamped converter can do.
    """
    least, greatest = number
    best = aim(at, *most_power(at, number))
    wanted = np.minimum(np.maximum(best, aim_at_voltage(at, greatest)), aim_at_voltage(at, least))
    return forward(at, wanted)


class Converter(Charger):
    """A direct-current converter with tracking; input open where it cannot run.

    Power out = efficiency x power in - standby; below zero where standby takes more. It starts when the steady
    open-circuit voltage reaches ``start_voltage``, and then runs down to ``running_voltage[0]``.
    """

    kind: Literal["converter"] = "converter"
    running_voltage: tuple[Volt, Volt]
    start_voltage: Volt | None = None
    input_voltage_limit: Volt
    efficiency: Annotated[float, Measure(""), Field(gt=0, le=1)] | None = None
    efficiency_table: EfficiencyTable | None = None
    standby_power: Annotated[float, Measure("W"), Field(ge=0)] = 0.0

    @model_validator(mode="after")
    def _in_order(self) -> Converter:
        least, greatest = self.running_voltage
        if least > greatest:
            raise ValueError(f"running_voltage is upside down: {least:g} V is above {greatest:g} V; exchange them")
        if self.start < least:
            raise ValueError(
                f"start_voltage {self.start:g} V is below the least running_voltage, {least:g} V; raise it or "
                "leave it out"
            )
        if self.input_voltage_limit < max(greatest, self.start):
            raise ValueError(
                f"input_voltage_limit {self.input_voltage_limit:g} V is below running_voltage or start_voltage, "
                f"{max(greatest, self.start):g} V; the limit counts at open circuit and must lie above both"
            )
        if (self.efficiency is None) == (self.efficiency_table is None):
            raise ValueError("give either efficiency, one number, or efficiency_table")
        known = self.efficiency_table.voltage if self.efficiency_table else None
        if known and (known[0] > least or known[-1] < greatest):
            raise ValueError(
                f"efficiency_table covers {known[0]:g} V to {known[-1]:g} V, running_voltage is {least:g} V to "
                f"{greatest:g} V; add points or narrow running_voltage"
            )
        return self

    @property
    def start(self) -> float:
        """Open-circuit voltage [V] needed to start: the least running voltage if none is given."""
        return self.running_voltage[0] if self.start_voltage is None else self.start_voltage

    def law(self, series: Array, parallel: Array) -> LoadLaw:
        """Return dP/dI = 0 within the window of running voltage / series, its edge outside, no current below."""
        return LoadLaw(tracking, np.stack([numbers(edge / series, series) for edge in self.running_voltage]))

    def starts(self, start_voltage: ArrayLike) -> NDArray[np.bool_]:
        """Tell whether a steady open-circuit voltage [V] starts the converter."""
        return np.asarray(start_voltage) >= self.start

    def limits(self) -> tuple[LoadLimit, ...]:
        """Return start, greatest input voltage, powers of the table, and the greatest current."""
        known = self.efficiency_table.power if self.efficiency_table else None
        ends: tuple[LoadLimit, ...] = ()
        if known:
            ends = (
                LoadLimit("first power of the efficiency table", "rated", "power", "least", known[0]),
                LoadLimit("last power of the efficiency table", "rated", "power", "most", known[-1]),
            )
        return (
            LoadLimit("voltage to start the converter", "open circuit", "voltage", "least", self.start),
            LoadLimit("input voltage of the converter", "open circuit", "voltage", "most", self.input_voltage_limit),
            *ends,
            *super().limits(),
        )

    def supply(self, voltage: Array, current: Array) -> tuple[Array, NDArray[np.bool_]]:
        """Return the power out [W], and where the power in lies outside the efficiency table."""
        power = voltage * current
        if self.efficiency_table is None:
            efficiency: Array = np.full(power.shape, self.efficiency, dtype=float)
            outside = np.zeros(power.shape, dtype=bool)
        else:
            efficiency, outside = self.efficiency_table.at(voltage, power)
        return efficiency * power - self.standby_power, outside

    def words(self) -> str:
        """Return the load in words."""
        least, greatest = self.running_voltage
        table = "from a table" if self.efficiency is None else f"{self.efficiency:.6g}"
        return (
            f"converter tracking most power from {least:.6g} V to {greatest:.6g} V, start at {self.start:.6g} V, "
            f"at most {self.input_voltage_limit:.6g} V, efficiency {table}, "
            f"standby {self.standby_power:.6g} W{self.behind()}"
        )
