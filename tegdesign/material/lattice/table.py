"""Lattice conductivity from measured points."""

from __future__ import annotations

from dataclasses import dataclass

from numpy.typing import ArrayLike

from tegdesign.material.curve import Array, Curve
from tegdesign.material.lattice.base import WithoutGrains
from tegdesign.material.transport.law import positive_at, temperatures


@dataclass(frozen=True, eq=False)
class Table(WithoutGrains):
    """Lattice conductivity [W/m/K] as a measured curve; outside its temperatures it is refused."""

    curve: Curve

    def conductivity(self, temperature: ArrayLike, grain_size: ArrayLike | None = None) -> Array:
        """Return the conductivity [W/m/K] at temperatures [K] of any shape.

        Raises
        ------
        DataRangeError
            A temperature lies outside the table.
        InputError
            A grain size is given, or a value is not above 0.
        """
        self._refuse(grain_size)
        return positive_at(self.curve, temperatures(temperature), "lattice conductivity [W/m/K]")
