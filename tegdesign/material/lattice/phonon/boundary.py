"""Boundaries: of grains or of the sample."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tegdesign.material.curve import Array
from tegdesign.material.lattice.phonon.phonons import Phonons
from tegdesign.material.transport.law import above_zero


@dataclass(frozen=True)
class Boundary:
    """1/tau = v / (path_per_size * size): grain size [m] and mean free path in grain sizes.

    A grain size that is given with the temperatures of a computation takes the place of the one here.
    Casimir 1938, Physica 5, 495, doi 10.1016/S0031-8914(38)80162-2.
    """

    size: float
    path_per_size: float = 1.0

    def __post_init__(self) -> None:
        """Refuse parameters that are not above 0."""
        above_zero(self.size, "size of grains [m]")
        above_zero(self.path_per_size, "path_per_size of boundary scattering")

    def rate(self, phonons: Phonons) -> Array:
        """Return 1/tau [1/s] in a shape that broadcasts with the phonons."""
        size = self.size if phonons.grain_size is None else phonons.grain_size
        return np.asarray(phonons.velocity / (self.path_per_size * size))
