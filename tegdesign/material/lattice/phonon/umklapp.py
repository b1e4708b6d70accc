"""Umklapp processes: phonons scattered by phonons."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.lattice.phonon.phonons import Phonons
from tegdesign.material.transport.constants import HBAR
from tegdesign.material.transport.law import above_zero


@dataclass(frozen=True)
class Umklapp:
    """1/tau = coefficient omega^2 T exp(-freezing / T): coefficient [s/K], freezing temperature [K], 0 for
    none.

    Klemens 1958 and Slack and Galginaitis 1964, Phys. Rev. 133, A253, doi 10.1103/PhysRev.133.A253 (form
    from memory).
    """

    coefficient: float
    freezing: float = 0.0

    def __post_init__(self) -> None:
        """Refuse parameters out of bounds."""
        above_zero(self.coefficient, "coefficient of Umklapp scattering [s/K]")
        if not self.freezing >= 0:
            raise InputError(
                f"freezing temperature of Umklapp scattering is {self.freezing:g} K but must be 0 or above"
            )

    @classmethod
    def from_gruneisen(cls, gruneisen: float, atomic_mass: float, velocity: float, debye_temperature: float) -> Umklapp:
        """Return the estimate hbar g^2 / (M v^2 theta), freezing at theta / 3, from mean atomic mass [kg],
        [m/s], [K].

        Slack and Galginaitis 1964, as above; Morelli, Heremans and Slack 2002, Phys. Rev. B 66, 195304,
        doi 10.1103/PhysRevB.66.195304. Right within a factor of two (memory).
        """
        for value, what in (
            (gruneisen, "Grueneisen parameter"),
            (atomic_mass, "atomic mass [kg]"),
            (velocity, "velocity [m/s]"),
            (debye_temperature, "Debye temperature [K]"),
        ):
            above_zero(value, f"{what} of Umklapp scattering")
        return cls(HBAR * gruneisen**2 / (atomic_mass * velocity**2 * debye_temperature), debye_temperature / 3)

    def rate(self, phonons: Phonons) -> Array:
        """Return 1/tau [1/s] in the shape of the phonons."""
        warm = self.coefficient * phonons.temperature * np.exp(-self.freezing / phonons.temperature)
        return np.asarray(warm * phonons.frequency**2)
