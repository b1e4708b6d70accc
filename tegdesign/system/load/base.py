"""What every load can do."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Callable
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.material.curve import Array
from tegdesign.system.model import Part


class Terminal(NamedTuple):
    """State of one module at its leads, with total derivatives by its current: junction temperatures follow."""

    current: Array
    voltage: Array
    voltage_slope: Array
    heat: Array
    heat_slope: Array


class LoadLaw(NamedTuple):
    """A condition that is zero at the operating point, its slope by current, and the number it depends on."""

    condition: Callable[[Terminal, Array], tuple[Array, Array]]
    number: Array
    fixed: bool = False  # the current is given, so it is not limited to the first quadrant

    def take(self, which: Any) -> LoadLaw:
        """Return the law of the designs ``which``."""
        return self._replace(number=self.number[which])


class Load(Part):
    """What the generator feeds."""

    kind: str

    @abstractmethod
    def law(self, series: Array, parallel: Array) -> LoadLaw:
        """Return the law per module for modules in ``series`` and ``parallel``."""

    @abstractmethod
    def words(self) -> str:
        """Return the load in words, for condition lines."""


def numbers(value: ArrayLike, like: Array) -> Array:
    """Return a value spread over the batch."""
    return np.broadcast_to(np.asarray(value, dtype=float), np.shape(like)).copy()
