"""A single sharp level."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.material.curve import Array
from tegdesign.material.transport.constants import BOLTZMANN
from tegdesign.material.transport.law import above_zero, temperatures
from tegdesign.material.transport.response import Channel, Response


@dataclass(frozen=True)
class Level:
    """Conduction at one energy [J] only: Xi = strength delta(E - energy), strength [S J/m].

    Mahan and Sofo 1996, PNAS 93, 7436, doi 10.1073/pnas.93.15.7436.
    """

    energy: float
    strength: float

    def __post_init__(self) -> None:
        """Refuse a strength that is not above 0."""
        above_zero(self.strength, "strength of a level [S J/m]")

    def at(self, temperature: ArrayLike, chemical_potential: ArrayLike) -> Response:
        """Return the response at temperatures [K] and chemical potentials [J] that broadcast."""
        t, mu = np.broadcast_arrays(temperatures(temperature), np.asarray(chemical_potential, dtype=float))
        x: Array = (self.energy - mu) / (BOLTZMANN * t)
        tail = np.exp(-np.abs(x))
        conductance = self.strength / (BOLTZMANN * t) * tail / (1 + tail) ** 2
        return Response(t, mu, (Channel(np.asarray(conductance), x, np.zeros_like(x)),))
