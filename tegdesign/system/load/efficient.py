"""The load at which the largest share of the heat becomes power."""

from __future__ import annotations

from typing import Literal

from tegdesign.material.curve import Array
from tegdesign.system.load.base import Load, LoadLaw, Terminal, numbers


def best_efficiency(at: Terminal, number: Array) -> tuple[Array, Array]:
    """Return Q dP/dI - P dQ/dI over Q and its slope, V and Q taken as straight in I; exact once it is met."""
    by_power = at.voltage + at.current * at.voltage_slope
    share = at.current * at.voltage / at.heat
    return by_power - share * at.heat_slope, 2 * at.voltage_slope


class BestEfficiency(Load):
    """A load chosen for efficiency: where the heat costs money or is all there is."""

    kind: Literal["efficiency"] = "efficiency"

    @property
    def adapts(self) -> bool:
        """It does."""
        return True

    def law(self, series: Array, parallel: Array) -> LoadLaw:
        """Return d(P/Q)/dI = 0."""
        return LoadLaw(best_efficiency, numbers(0.0, series))

    def words(self) -> str:
        """Return the load in words."""
        return "load of best efficiency"
