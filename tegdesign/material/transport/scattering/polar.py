"""Polar optical phonons above their Debye temperature."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi

import numpy as np

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.transport.constants import BOLTZMANN, CHARGE, HBAR, VACUUM_PERMITTIVITY
from tegdesign.material.transport.law import above_zero
from tegdesign.material.transport.scattering.states import States, Surroundings


@dataclass(frozen=True)
class PolarOptical:
    """Relative permittivity, static and at optical frequencies; the difference measures how polar the
    crystal is.

    1/tau = (2 pi / hbar) g <e^2 kT (1/eps_inf - 1/eps_s) / (q^2 + q_s^2)>, averaged over the angle with the
    momentum loss: tau ~ E^0.5 unscreened. Elastic, so for kT well above the phonon energy. Screened by the
    carriers of all bands, q_s^2 = (e^2/eps_s) dn/dmu. Ravich, Efimova and Tamarchenko 1971, Phys. Status
    Solidi B 43, 11, doi 10.1002/pssb.2220430102 (form from memory); prefactor from the golden rule, as in
    Lundstrom 2000, Fundamentals of Carrier Transport, section 2.7 (memory).
    """

    static_permittivity: float
    optical_permittivity: float

    screened = True

    def __post_init__(self) -> None:
        """Refuse a crystal that is not polar."""
        above_zero(self.optical_permittivity, "optical_permittivity of polar optical scattering")
        if not self.static_permittivity > self.optical_permittivity:
            raise InputError(
                f"static_permittivity of polar optical scattering is {self.static_permittivity:g} but must "
                f"lie above the optical_permittivity {self.optical_permittivity:g}; leave the mechanism out "
                "if the crystal is not polar"
            )

    def rate(self, states: States, around: Surroundings) -> Array:
        """Return 1/tau [1/s] in the shape of the states."""
        static = self.static_permittivity * VACUUM_PERMITTIVITY
        polar = 1 / (self.optical_permittivity * VACUUM_PERMITTIVITY) - 1 / static
        screening = CHARGE**2 / static * around.screening
        strength = CHARGE**2 * BOLTZMANN * states.temperature * polar * 2 / screening
        rate = (2 * pi / HBAR * strength) * states.density
        rate *= states.deflection(self.static_permittivity, around).integral(states.mixing, 1)
        return np.asarray(rate)
