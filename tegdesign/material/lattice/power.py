"""Lattice conductivity that falls with a power of temperature."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.lattice.base import WithoutGrains
from tegdesign.material.transport.law import above_zero, temperatures


@dataclass(frozen=True)
class InversePower(WithoutGrains):
    """``value (reference / T)^exponent``: value [W/m/K] at the reference temperature [K].

    Exponent 1 is A/T, phonon-phonon scattering alone well above the Debye temperature; 0.5 is usual in
    alloys.
    """

    value: float
    exponent: float = 1.0
    reference: float = 300.0

    def __post_init__(self) -> None:
        """Refuse parameters out of bounds."""
        above_zero(self.value, "lattice conductivity [W/m/K]")
        above_zero(self.reference, "reference temperature of the lattice conductivity [K]")
        if not 0 <= self.exponent <= 3:
            raise InputError(
                f"exponent of the lattice conductivity is {self.exponent:g} but must lie from 0 to 3; "
                "usual are 0.5 to 1.5"
            )

    def conductivity(self, temperature: ArrayLike, grain_size: ArrayLike | None = None) -> Array:
        """Return the conductivity [W/m/K] at temperatures [K] of any shape; InputError if a grain size is
        given.
        """
        self._refuse(grain_size)
        return np.asarray(self.value * (self.reference / temperatures(temperature)) ** self.exponent)
