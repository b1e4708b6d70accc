"""A given current: zero for the open circuit, a list for V-I curves."""

from __future__ import annotations

from typing import Annotated, Literal

import numpy as np
from pydantic import Field

from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.load.base import Load, LoadLaw, Terminal, numbers


def as_given(at: Terminal, number: Array) -> tuple[Array, Array]:
    """Return I - I_given and its slope."""
    return at.current - number, np.ones_like(at.current)


class GivenCurrent(Load):
    """A current sink."""

    kind: Literal["current"] = "current"
    current: Annotated[float, Measure("A"), Field(ge=0)]

    @property
    def passive(self) -> bool:
        """A current sink can be asked for more than the short-circuit current."""
        return False

    def law(self, series: Array, parallel: Array) -> LoadLaw:
        """Return I = current / parallel for each module."""
        return LoadLaw(as_given, numbers(self.current / parallel, series), fixed=True)

    def words(self) -> str:
        """Return the load in words."""
        return "open circuit" if self.current == 0 else f"current {self.current:.6g} A"
