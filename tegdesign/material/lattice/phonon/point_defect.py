"""Point defects: atoms that differ in mass or size."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi

import numpy as np

from tegdesign.material.curve import Array
from tegdesign.material.lattice.phonon.phonons import Phonons
from tegdesign.material.transport.law import above_zero


@dataclass(frozen=True)
class PointDefect:
    """1/tau = coefficient omega^4, coefficient [s^3].

    Klemens 1955, Proc. Phys. Soc. A 68, 1113, doi 10.1088/0370-1298/68/12/303; for long waves.
    """

    coefficient: float

    def __post_init__(self) -> None:
        """Refuse a coefficient that is not above 0."""
        above_zero(self.coefficient, "coefficient of point-defect scattering [s^3]")

    @classmethod
    def from_disorder(cls, disorder: float, atomic_volume: float, velocity: float) -> PointDefect:
        """Return Omega Gamma / (4 pi v^3) from the disorder parameter, volume of an atom [m^3], velocity
        [m/s].
        """
        above_zero(atomic_volume, "atomic_volume of point-defect scattering [m^3]")
        above_zero(velocity, "velocity of point-defect scattering [m/s]")
        return cls(atomic_volume * disorder / (4 * pi * velocity**3))

    def rate(self, phonons: Phonons) -> Array:
        """Return 1/tau [1/s] in the shape of the phonons."""
        return np.asarray(self.coefficient * phonons.frequency**4)
