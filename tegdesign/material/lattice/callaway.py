"""Lattice conductivity from an integral over the phonon spectrum."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.lattice.phonon.boundary import Boundary
from tegdesign.material.lattice.phonon.phonons import Phonons, PhononScattering
from tegdesign.material.transport.constants import BOLTZMANN, HBAR
from tegdesign.material.transport.law import above_zero, temperatures
from tegdesign.material.transport.window import gauss

_NODES = 64
_LAST = 60.0  # hbar omega / kT; beyond it the heat capacity is 1e-20 of its whole


@dataclass(frozen=True)
class Branch:
    """A stretch of the phonon spectrum with one velocity.

    Parameters
    ----------
    velocity : float
        [m/s].
    upper : float
        hbar omega / k at its upper end [K]; the Debye temperature of a whole branch.
    scattering : tuple of PhononScattering
        Their rates add at every frequency.
    lower : float
        hbar omega / k at its lower end [K].
    weight : float
        Share of the three polarisations: 1 for all in one, 2/3 for the transverse, 1/3 for the longitudinal.
    """

    velocity: float
    upper: float
    scattering: tuple[PhononScattering, ...]
    lower: float = 0.0
    weight: float = 1.0

    def __post_init__(self) -> None:
        """Refuse parameters out of bounds."""
        above_zero(self.velocity, "velocity of a phonon branch [m/s]")
        above_zero(self.upper, "upper end of a phonon branch [K]")
        above_zero(self.weight, "weight of a phonon branch")
        if not 0 <= self.lower < self.upper:
            raise InputError(
                f"lower end of a phonon branch is {self.lower:g} K but must be 0 or above and below its "
                f"upper end {self.upper:g} K"
            )
        if not self.scattering:
            raise InputError("scattering of a phonon branch is empty; give one or more mechanisms")

    def conductivity(self, temperature: Array, grain_size: Array | None) -> Array:
        """Return its part [W/m/K]; the arrays have one shape."""
        node, weight = gauss(_NODES)
        first = np.cbrt(np.minimum(self.lower / temperature, _LAST))[..., None]
        width = np.cbrt(np.minimum(self.upper / temperature, _LAST))[..., None] - first
        root = first + width * node  # x = root^3 draws nodes to small frequencies, where boundaries act
        x = root**3
        t = temperature[..., None]
        phonons = Phonons(
            BOLTZMANN / HBAR * t * x,
            x,
            t,
            self.velocity,
            None if grain_size is None else grain_size[..., None],
        )
        rate = self.scattering[0].rate(phonons)
        for mechanism in self.scattering[1:]:
            rate = rate + mechanism.rate(phonons)
        heat = x**4 * np.exp(-x) / np.expm1(-x) ** 2
        integral = (heat / rate * 3 * root**2 * width * weight).sum(axis=-1)
        unit = BOLTZMANN / (2 * pi**2 * self.velocity) * (BOLTZMANN * temperature / HBAR) ** 3
        return np.asarray(self.weight * unit * integral)


@dataclass(frozen=True)
class DebyeCallaway:
    """Branches of the phonon spectrum whose conductivities add.

    kappa = sum of weight k / (2 pi^2 v) (kT/hbar)^3 times the integral of x^4 e^x tau / (e^x - 1)^2 over
    x = hbar omega / kT. Callaway 1959, Phys. Rev. 113, 1046, doi 10.1103/PhysRev.113.1046, without his
    correction for normal processes (they count as resistive); branches: Holland 1963, Phys. Rev. 132, 2461,
    doi 10.1103/PhysRev.132.2461.
    """

    branches: tuple[Branch, ...]

    def __post_init__(self) -> None:
        """Refuse a spectrum without branches."""
        if not self.branches:
            raise InputError("branches of a Debye-Callaway model are empty; give one or more")

    @property
    def has_grain_size(self) -> bool:
        """Whether a branch has boundary scattering."""
        return any(isinstance(one, Boundary) for branch in self.branches for one in branch.scattering)

    def conductivity(self, temperature: ArrayLike, grain_size: ArrayLike | None = None) -> Array:
        """Return the conductivity [W/m/K] at temperatures [K] and grain sizes [m] that broadcast.

        Raises
        ------
        InputError
            A temperature or grain size is not above 0, or no branch has boundary scattering to take a grain
            size.
        """
        t = temperatures(temperature)
        grains: Array | None = None
        if grain_size is not None:
            above_zero(grain_size, "grain_size [m]")
            if not self.has_grain_size:
                raise InputError(
                    "grain_size was given but no branch of the Debye-Callaway model has boundary scattering; "
                    "leave it out or add the mechanism"
                )
            t, grains = np.broadcast_arrays(t, np.asarray(grain_size, dtype=float))
        parts = [branch.conductivity(t, grains) for branch in self.branches]
        return np.asarray(np.sum(parts, axis=0))
