"""The lattice conductivity of an alloy from that of the pure crystal."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.lattice.base import Lattice
from tegdesign.material.transport.constants import PLANCK
from tegdesign.material.transport.law import above_zero


@dataclass(frozen=True)
class Alloy:
    """A pure lattice model with point defects added.

    kappa = kappa_pure arctan(u) / u, u^2 = pi^2 theta Omega kappa_pure Gamma / (h v^2). Umklapp and point
    defects only, temperatures above the Debye temperature; other scattering in the pure model makes it
    approximate. Klemens 1960, Phys. Rev. 119, 507, doi 10.1103/PhysRev.119.507; Callaway and von Baeyer
    1960, Phys. Rev. 120, 1149, doi 10.1103/PhysRev.120.1149.

    Parameters
    ----------
    pure : Lattice
        The crystal without disorder.
    debye_temperature, velocity, atomic_volume : float
        theta [K], mean velocity of sound [m/s], volume of an atom [m^3].
    disorder : float
        Gamma, see ``disorder.disorder``; 0 or above.
    """

    pure: Lattice
    debye_temperature: float
    velocity: float
    atomic_volume: float
    disorder: float

    def __post_init__(self) -> None:
        """Refuse parameters out of bounds."""
        above_zero(self.debye_temperature, "debye_temperature of an alloy [K]")
        above_zero(self.velocity, "velocity of an alloy [m/s]")
        above_zero(self.atomic_volume, "atomic_volume of an alloy [m^3]")
        if not self.disorder >= 0:
            raise InputError(f"disorder of an alloy is {self.disorder:g} but must be 0 or above")

    @property
    def has_grain_size(self) -> bool:
        """Whether the pure model depends on a grain size."""
        return self.pure.has_grain_size

    def conductivity(self, temperature: ArrayLike, grain_size: ArrayLike | None = None) -> Array:
        """Return the conductivity [W/m/K] at temperatures [K] and grain sizes [m] that broadcast; raises as
        ``pure``.
        """
        pure = self.pure.conductivity(temperature, grain_size)
        scale = pi**2 * self.debye_temperature * self.atomic_volume * self.disorder
        u = np.sqrt(scale * pure / (PLANCK * self.velocity**2))
        share = np.divide(np.arctan(u), u, out=np.ones_like(u), where=u > 0)
        return np.asarray(pure * share)
