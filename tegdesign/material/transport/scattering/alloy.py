"""Disorder of an alloy."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi

import numpy as np

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.transport.constants import HBAR
from tegdesign.material.transport.law import above_zero
from tegdesign.material.transport.scattering.states import States, Surroundings


@dataclass(frozen=True)
class Alloy:
    """Alloy scattering potential [J], fraction 0..1 of one of the two constituents, volume of an atom [m^3].

    1/tau = (3 pi^3 / (4 hbar)) x (1 - x) Omega U^2 g (1 - 4K/3), g the density of states of one valley and
    spin. Prefactors differ in the literature, and U goes with them: this is the one of Harrison and Hauser
    1976, Phys. Rev. B 13, 5347, doi 10.1103/PhysRevB.13.5347, used for lead salts by Wang et al. 2013, Adv.
    Funct. Mater. 23, 1586, doi 10.1002/adfm.201201576 (memory); the golden rule alone gives 0.27 of it.
    """

    potential: float
    fraction: float
    atomic_volume: float

    screened = False

    def __post_init__(self) -> None:
        """Refuse parameters out of bounds."""
        above_zero(self.potential, "potential of alloy scattering [J]")
        above_zero(self.atomic_volume, "atomic_volume of alloy scattering [m^3]")
        if not 0 < self.fraction < 1:
            raise InputError(
                f"fraction of alloy scattering is {self.fraction:g} but must lie between 0 and 1; "
                "leave the mechanism out for a pure material"
            )

    def rate(self, states: States, around: Surroundings) -> Array:
        """Return 1/tau [1/s] in the shape of the states."""
        strength = self.fraction * (1 - self.fraction) * self.atomic_volume * self.potential**2
        factor = 3 * pi**3 / (4 * HBAR) * strength
        return np.asarray(factor * states.overlapping)
