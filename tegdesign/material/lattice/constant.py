"""Lattice conductivity that does not change with temperature."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.material.curve import Array
from tegdesign.material.lattice.base import WithoutGrains
from tegdesign.material.transport.law import above_zero, temperatures


@dataclass(frozen=True)
class Constant(WithoutGrains):
    """The same lattice conductivity [W/m/K] at every temperature."""

    value: float

    def __post_init__(self) -> None:
        """Refuse a value that is not above 0."""
        above_zero(self.value, "lattice conductivity [W/m/K]")

    def conductivity(self, temperature: ArrayLike, grain_size: ArrayLike | None = None) -> Array:
        """Return the conductivity [W/m/K] at temperatures [K] of any shape; InputError if a grain size is
        given.
        """
        self._refuse(grain_size)
        return np.full_like(temperatures(temperature), self.value)
