"""A given mobility with power laws in temperature and energy."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.transport.constants import CHARGE
from tegdesign.material.transport.law import above_zero
from tegdesign.material.transport.scattering.states import States, Surroundings
from tegdesign.material.transport.window import half_power


@dataclass(frozen=True)
class Mobility:
    """Mobility e tau / m_inertial of a carrier at energy kT and the reference temperature [m^2/(V s)], and
    its powers.

    tau = (m_inertial mobility / e) (T / reference)^temperature_exponent (E/kT)^energy_exponent, E above the
    band edge. Usual energy exponents: -0.5 acoustic phonons and alloy, 0 constant, 0.5 polar optical, 1.5
    ionised impurities. With -0.5 it is the mu_0 of the weighted mobility mu_0 (m/m_e)^1.5: Kang and Snyder
    2017, arXiv 1710.06896.
    """

    mobility: float
    temperature_exponent: float = 0.0
    energy_exponent: float = -0.5
    reference: float = 300.0

    screened = False

    def __post_init__(self) -> None:
        """Refuse parameters out of bounds."""
        above_zero(self.mobility, "mobility [m^2/(V s)]")
        above_zero(self.reference, "reference temperature of a mobility [K]")
        if not -1.5 < self.energy_exponent <= 2:
            raise InputError(
                f"energy_exponent of a mobility is {self.energy_exponent:g} but must lie above -1.5, "
                "where conduction at the band edge would diverge, and not above 2; usual are -0.5 to 1.5"
            )

    def rate(self, states: States, around: Surroundings) -> Array:
        """Return 1/tau [1/s] in the shape of the states."""
        warm = (states.temperature / self.reference) ** -self.temperature_exponent
        factor = CHARGE / (self.mobility * states.inertial_mass) * warm
        return np.asarray(factor * half_power(states.energy, -self.energy_exponent))
