"""The load that draws the most power of the whole system, thermal resistances included."""

from __future__ import annotations

from typing import Literal

from tegdesign.material.curve import Array
from tegdesign.system.load.base import Load, LoadLaw, numbers
from tegdesign.system.load.laws import most_power


class Matched(Load):
    """Tracking converter or chosen resistor at the maximum power point."""

    kind: Literal["matched"] = "matched"

    @property
    def adapts(self) -> bool:
        """It does."""
        return True

    def law(self, series: Array, parallel: Array) -> LoadLaw:
        """Return dP/dI = 0."""
        return LoadLaw(most_power, numbers(0.0, series))

    def words(self) -> str:
        """Return the load in words."""
        return "matched load (most power of the whole system)"
