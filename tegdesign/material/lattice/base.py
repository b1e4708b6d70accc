"""The interface of every lattice model, and what those without grains share."""

from __future__ import annotations

from typing import Protocol

from numpy.typing import ArrayLike

from tegdesign.errors import InputError
from tegdesign.material.curve import Array


class Lattice(Protocol):
    """A model of the thermal conductivity of the lattice."""

    @property
    def has_grain_size(self) -> bool:
        """Whether the conductivity depends on a grain size."""
        ...

    def conductivity(self, temperature: ArrayLike, grain_size: ArrayLike | None = None) -> Array:
        """Return the conductivity [W/m/K] at temperatures [K] and, where the model has them, grain sizes [m].

        The two broadcast; without a grain size that of the model serves.
        """
        ...


class WithoutGrains:
    """A lattice model that knows no grains."""

    has_grain_size = False

    def _refuse(self, grain_size: ArrayLike | None) -> None:
        if grain_size is not None:
            raise InputError(
                f"grain_size was given but the lattice model {type(self).__name__} has none; leave it "
                "out or use a Debye-Callaway model with boundary scattering"
            )
