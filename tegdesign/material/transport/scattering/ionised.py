"""Ionised impurities with a screened Coulomb potential."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi

import numpy as np

from tegdesign.material.curve import Array
from tegdesign.material.transport.constants import CHARGE, HBAR, VACUUM_PERMITTIVITY
from tegdesign.material.transport.law import above_zero
from tegdesign.material.transport.scattering.states import States, Surroundings


@dataclass(frozen=True)
class IonisedImpurity:
    """Static relative permittivity, charge of an impurity in e, and density of impurities [1/m^3].

    Without a density there are as many as the net doping needs, |n - p| / charge. 1/tau follows from the
    golden rule with the potential Z e^2 / (eps (q^2 + q_s^2)), screened by the carriers of all bands,
    q_s^2 = (e^2/eps) dn/dmu. Parabolic limit: Brooks 1955, Adv. Electron. Electron Phys. 7, 85,
    doi 10.1016/S0065-2539(08)60957-9. Born approximation: fails for slow carriers and heavy doping at low
    temperature.
    """

    permittivity: float
    charge: float = 1.0
    density: float | None = None

    screened = True

    def __post_init__(self) -> None:
        """Refuse parameters that are not above 0."""
        above_zero(self.permittivity, "permittivity of ionised impurities")
        above_zero(self.charge, "charge of ionised impurities [e]")
        if self.density is not None:
            above_zero(self.density, "density of ionised impurities [1/m^3]")

    def rate(self, states: States, around: Surroundings) -> Array:
        """Return 1/tau [1/s] in the shape of the states."""
        absolute = self.permittivity * VACUUM_PERMITTIVITY
        screening = CHARGE**2 / absolute * around.screening
        number = around.net_density / self.charge if self.density is None else self.density
        strength = number * (2 * self.charge * CHARGE**2 / (absolute * screening)) ** 2 / 2
        rate = (2 * pi / HBAR * strength) * states.density
        rate *= states.deflection(self.permittivity, around).integral(states.mixing, 2)
        return np.asarray(rate)
