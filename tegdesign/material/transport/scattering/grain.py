"""Grain boundaries, as a mean free path."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from tegdesign.material.curve import Array
from tegdesign.material.transport.law import above_zero
from tegdesign.material.transport.scattering.states import States, Surroundings


@dataclass(frozen=True)
class GrainBoundary:
    """Grain size [m], and mean free path between boundary collisions in grain sizes.

    1/tau = v / (path_per_size * size), v the group velocity; boundaries without a barrier. A grain size that
    is given with the temperatures of a computation takes the place of the one here. Common practice, no
    source.
    """

    size: float
    path_per_size: float = 1.0

    screened = False

    def __post_init__(self) -> None:
        """Refuse parameters that are not above 0."""
        above_zero(self.size, "size of grains [m]")
        above_zero(self.path_per_size, "path_per_size of grain boundaries")

    def rate(self, states: States, around: Surroundings) -> Array:
        """Return 1/tau [1/s] in the shape of the states."""
        given = around.grain_size
        size = self.size if given is None else given
        return np.asarray(states.speed / (self.path_per_size * size))
