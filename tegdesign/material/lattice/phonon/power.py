"""A rate with powers of frequency and temperature."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tegdesign.material.curve import Array
from tegdesign.material.lattice.phonon.phonons import Phonons
from tegdesign.material.transport.law import above_zero


@dataclass(frozen=True)
class PowerRate:
    """1/tau = coefficient omega^a T^b, omega in rad/s and T in K; the unit of the coefficient follows
    [s^(a-1)/K^b].

    Low-temperature forms are of this kind (longitudinal a = 2, b = 3; transverse a = 1, b = 4), and a
    constant rate: Holland 1963, Phys. Rev. 132, 2461, doi 10.1103/PhysRev.132.2461.
    """

    coefficient: float
    frequency_exponent: float = 0.0
    temperature_exponent: float = 0.0

    def __post_init__(self) -> None:
        """Refuse a coefficient that is not above 0."""
        above_zero(self.coefficient, "coefficient of a phonon rate")

    def rate(self, phonons: Phonons) -> Array:
        """Return 1/tau [1/s] in the shape of the phonons."""
        warm = self.coefficient * phonons.temperature**self.temperature_exponent
        return np.asarray(warm * phonons.frequency**self.frequency_exponent)
