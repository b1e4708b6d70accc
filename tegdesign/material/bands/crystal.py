"""A crystal by its bands and its lattice, its doping, and what the rest of the program needs of the two."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.errors import InputError
from tegdesign.material.bands.pieces import curves
from tegdesign.material.curve import Array, Curve
from tegdesign.material.lattice.base import Lattice
from tegdesign.material.transport.bands import BandResponse, Bands


@dataclass(frozen=True)
class Doping:
    """Majority carriers that the dopants give [1/m^3], even or graded along the leg.

    A graded leg has ``cold`` at the first temperature of ``span`` and ``hot`` at the last [K], linear in
    temperature between, held beyond. Along a leg temperature is close to linear in length, so the grade is too.
    """

    cold: float
    hot: float | None = None
    span: tuple[float, float] | None = None

    def __post_init__(self) -> None:
        """Refuse a grade without the temperatures it belongs to."""
        if (self.hot is None) != (self.span is None):
            raise InputError("a graded doping needs both the doping of the hot end and the temperatures of the ends")
        if self.span is not None and not self.span[0] < self.span[1]:
            raise InputError(
                f"a graded doping lies between {self.span[0]:.6g} K and {self.span[1]:.6g} K; the second must be hotter"
            )

    @property
    def graded(self) -> bool:
        """Whether the doping changes along the leg."""
        return self.hot is not None and self.hot != self.cold

    def at(self, temperature: Array) -> Array:
        """Return the doping [1/m^3] where a leg has these temperatures [K]."""
        if self.hot is None or self.span is None:
            return np.full(np.shape(temperature), self.cold)
        return np.asarray(np.interp(temperature, self.span, (self.cold, self.hot)))


@dataclass(frozen=True, eq=False)
class Crystal:
    """Bands and lattice of one composition; donors (n) or acceptors (p) give the carriers.

    Parameters
    ----------
    bands : Bands
        Electronic part.
    lattice : Lattice
        Thermal conductivity of the lattice.
    sign : int
        1 for donors, -1 for acceptors.
    range : tuple of float
        Temperatures between which the parameters hold [K].
    breaks : ndarray
        Temperatures at which a parameter has a kink [K].
    """

    bands: Bands
    lattice: Lattice
    sign: int
    range: tuple[float, float]
    breaks: Array

    def response(self, temperature: ArrayLike, doping: ArrayLike, grain_size: ArrayLike | None = None) -> BandResponse:
        """Return carriers and electronic properties at temperatures [K], dopings [1/m^3], grain sizes [m]."""
        return self.bands.doped(temperature, self.sign * np.asarray(doping, dtype=float), grain_size)

    def lattice_conductivity(self, temperature: ArrayLike, grain_size: ArrayLike | None = None) -> Array:
        """Return the lattice conductivity [W/m/K] at temperatures [K] and, where the lattice has them, grain sizes."""
        return self.lattice.conductivity(temperature, grain_size if self.lattice.has_grain_size else None)

    def properties(self, temperature: Array, doping: ArrayLike, grain_size: ArrayLike | None = None) -> Array:
        """Return S [V/K], rho [ohm m] and kappa [W/m/K], first axis the property."""
        response = self.response(temperature, doping, grain_size)
        kappa = response.electronic_thermal_conductivity + self.lattice_conductivity(temperature, grain_size)
        return np.stack([response.seebeck_coefficient, 1 / response.conductivity, kappa])

    def curves(self, doping: Doping, grain_size: float | None, tolerance: float = 1e-8) -> list[Curve]:
        """Return the three properties against temperature, within ``tolerance`` of the integrals.

        Raises
        ------
        InputError
            A parameter is out of bounds at a temperature, or there are no carriers.
        ConvergenceError
            Neutrality was not reached, or a property jumps.
        """
        ends = () if doping.span is None else doping.span
        return curves(
            lambda t: self.properties(t, doping.at(t), grain_size),
            *self.range,
            np.concatenate([self.breaks, ends]),
            tolerance,
        )
