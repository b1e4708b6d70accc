"""The states of a band at given energies, as a scattering mechanism sees them, and the interface of a
mechanism.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from math import pi
from typing import Protocol

import numpy as np

from tegdesign.material.curve import Array
from tegdesign.material.transport.constants import CHARGE, HBAR, VACUUM_PERMITTIVITY
from tegdesign.material.transport.scattering.angle import Deflection


@dataclass(frozen=True, eq=False)
class Surroundings:
    """What the other carriers and the grains do to a carrier, one value a point, shape (..., 1).

    ``net_density`` is |n - p| [1/m^3], ``screening`` the change of the carrier density of all bands with the
    chemical potential [1/(J m^3)], ``grain_size`` [m] or None where the mechanism's own value serves.
    """

    net_density: Array
    screening: Array
    grain_size: Array | None = None


@dataclass(frozen=True, eq=False)
class States:
    """States of one valley at energies above the band edge; shapes broadcast, last axis the energy.

    Parameters
    ----------
    temperature : ndarray
        [K].
    energy : ndarray
        Above the band edge in units of kT.
    gamma, slope : ndarray
        Kane's gamma(E) = E (1 + E/E_kane) = (hbar k)^2 / (2 mass) [J], and its derivative (1 when parabolic).
    mass, inertial_mass : ndarray
        Density-of-states mass of one valley, and inertial mass [kg], both at the band edge.
    """

    temperature: Array
    energy: Array
    gamma: Array
    slope: Array
    mass: Array
    inertial_mass: Array

    @cached_property
    def root(self) -> Array:
        """Square root of gamma [J^0.5]."""
        return np.sqrt(self.gamma)

    @cached_property
    def volume(self) -> Array:
        """gamma^1.5 [J^1.5], in proportion to the states below."""
        return np.asarray(self.gamma * self.root)

    @cached_property
    def density(self) -> Array:
        """Density of states of one valley and one spin [1/(J m^3)]: (2 m)^1.5 gamma^0.5 gamma' / (4 pi^2
        hbar^3).
        """
        result = (2 * self.mass) ** 1.5 / (4 * pi**2 * HBAR**3) * self.root
        result *= self.slope
        return np.asarray(result)

    @cached_property
    def speed(self) -> Array:
        """Group velocity [m/s]: (2 gamma / m_inertial)^0.5 / gamma'."""
        return np.asarray(np.sqrt(2 / self.inertial_mass) / self.slope * self.root)

    @cached_property
    def mixing(self) -> Array:
        """Admixture K of the other band: overlap of two states at angle theta is 1 - K (1 - cos theta).

        K = 2 a z (1 + a z) / (1 + 2 a z)^2 = (1 - 1/gamma'^2) / 2; 0 when parabolic.
        """
        result = self.slope * self.slope
        np.divide(-0.5, result, out=result)
        result += 0.5
        return np.asarray(result)

    @cached_property
    def overlapping(self) -> Array:
        """Density of states [1/(J m^3)] times 1 - 4K/3, what scattering into all angles alike leaves of it."""
        result = -4 / 3 * self.mixing
        result += 1
        return np.asarray(result * self.density)

    def deflection(self, permittivity: float, around: Surroundings) -> Deflection:
        """Return the integrals over the angle in a potential screened by the carriers around, permittivity in
        vacuum's; made once for all mechanisms of equal permittivity.
        """
        key = permittivity, around
        if key not in self._deflections:
            per_gamma = 8 * self.mass / HBAR**2 * (permittivity * VACUUM_PERMITTIVITY / CHARGE**2) / around.screening
            self._deflections[key] = Deflection(per_gamma * self.gamma)
        return self._deflections[key]

    @cached_property
    def _deflections(self) -> dict[tuple[float, Surroundings], Deflection]:
        return {}


class Mechanism(Protocol):
    """A scattering mechanism of carriers; ``screened`` says that it asks how many carriers screen it."""

    @property
    def screened(self) -> bool:
        """Whether the rate depends on ``Surroundings.screening``."""
        ...

    def rate(self, states: States, around: Surroundings) -> Array:
        """Return the momentum relaxation rate 1/tau [1/s] of the states, in their shape."""
        ...
