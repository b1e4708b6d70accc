"""Umklapp processes of the upper transverse phonons."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tegdesign.material.curve import Array
from tegdesign.material.lattice.phonon.phonons import Phonons
from tegdesign.material.transport.law import above_zero


@dataclass(frozen=True)
class TransverseUmklapp:
    """1/tau = coefficient omega^2 / sinh(hbar omega / kT), coefficient [s].

    Holland 1963, Phys. Rev. 132, 2461, doi 10.1103/PhysRev.132.2461.
    """

    coefficient: float

    def __post_init__(self) -> None:
        """Refuse a coefficient that is not above 0."""
        above_zero(self.coefficient, "coefficient of transverse Umklapp scattering [s]")

    def rate(self, phonons: Phonons) -> Array:
        """Return 1/tau [1/s] in the shape of the phonons."""
        return np.asarray(self.coefficient * phonons.frequency**2 / np.sinh(phonons.reduced))
