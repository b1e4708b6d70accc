"""The phonons of a branch as a scattering mechanism sees them, and the interface of a mechanism."""

from __future__ import annotations

from typing import NamedTuple, Protocol

from tegdesign.material.curve import Array


class Phonons(NamedTuple):
    """Angular frequency [rad/s], hbar omega / kT, temperature [K], velocity [m/s], grain size [m] or None;
    broadcast.
    """

    frequency: Array
    reduced: Array
    temperature: Array
    velocity: float
    grain_size: Array | None


class PhononScattering(Protocol):
    """A scattering mechanism of phonons."""

    def rate(self, phonons: Phonons) -> Array:
        """Return the relaxation rate 1/tau [1/s] in the shape of the phonons."""
        ...
