"""Acoustic phonons, by their deformation potential."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi

import numpy as np

from tegdesign.material.curve import Array
from tegdesign.material.transport.constants import BOLTZMANN, HBAR
from tegdesign.material.transport.law import above_zero
from tegdesign.material.transport.scattering.states import States, Surroundings


@dataclass(frozen=True)
class Acoustic:
    """Deformation potential of the band edge [J] and elastic constant of longitudinal waves [Pa].

    1/tau = (2 pi / hbar) (kT Xi^2 / C_l) g (1 - 4K/3), g the density of states of one valley and spin;
    elastic, kT above the phonon energies, scattering inside the valley. Bardeen and Shockley 1950, Phys.
    Rev. 80, 72, doi 10.1103/PhysRev.80.72; overlap of Kane bands: Ravich, Efimova and Smirnov 1970 (memory).
    """

    deformation_potential: float
    elastic_constant: float

    screened = False

    def __post_init__(self) -> None:
        """Refuse parameters that are not above 0."""
        above_zero(self.deformation_potential, "deformation_potential of acoustic scattering [J]")
        above_zero(self.elastic_constant, "elastic_constant of acoustic scattering [Pa]")

    def rate(self, states: States, around: Surroundings) -> Array:
        """Return 1/tau [1/s] in the shape of the states."""
        strength = self.deformation_potential**2 / self.elastic_constant
        factor = (2 * pi * BOLTZMANN / HBAR * strength) * states.temperature
        return np.asarray(factor * states.overlapping)
