"""A material whose properties are computed, so that its doping and grain size can be chosen."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.errors import InputError
from tegdesign.material.bands.crystal import Crystal, Doping
from tegdesign.material.curve import Array
from tegdesign.material.material import Material
from tegdesign.material.transport.bands import BandResponse


@dataclass(frozen=True, eq=False, kw_only=True)
class BandMaterial(Material):
    """A material given by bands and lattice, at one doping and grain size.

    Parameters
    ----------
    crystal : Crystal
        What it is computed from.
    doping : Doping
        Carriers of its polarity [1/m^3].
    doping_bounds : tuple of float
        Least and most that can be made or that the parameters were fitted for [1/m^3].
    grain_size : float or None
        [m]; None where nothing depends on it.
    grain_bounds : tuple of float or None
        [m].
    laid_over : str
        Name of the measured material that it was held against.
    """

    crystal: Crystal
    doping: Doping
    doping_bounds: tuple[float, float]
    doping_basis: str = ""
    grain_size: float | None = None
    grain_bounds: tuple[float, float] | None = None
    laid_over: str = ""

    @property
    def kind(self) -> str:
        """Kind of its file."""
        return "bands"

    @property
    def majority_doping(self) -> float:
        """Carriers that the dopants give, at the cold end where graded [1/m^3]."""
        return self.doping.cold

    def response(self, temperature: ArrayLike) -> BandResponse:
        """Return carriers and electronic properties at temperatures [K] inside the range."""
        t = np.asarray(temperature, dtype=float)
        return self.crystal.response(t, self.doping.at(t), self.grain_size)

    def electronic_thermal_conductivity(self, temperature: ArrayLike) -> Array:
        """Return the part of the carriers [W/m/K], bipolar part included, from the transport integrals."""
        return self.response(self._held(temperature)).electronic_thermal_conductivity

    @property
    def electronic_basis(self) -> str:
        """Where the electronic part comes from."""
        return "from the transport integrals, bipolar part included"

    def _held(self, temperature: ArrayLike) -> Array:
        return np.asarray(np.clip(np.asarray(temperature, dtype=float), *self.crystal.range))

    def made(
        self, doping: Doping | None = None, grain_size: float | None = None, tolerance: float = 1e-8
    ) -> BandMaterial:
        """Return the material with another doping or grain size.

        Raises
        ------
        InputError
            Doping or grain size is out of the bounds of the material, or it has no grains.
        """
        doping = self.doping if doping is None else doping
        check_doping(self.name, [doping.cold, *([doping.hot] if doping.hot is not None else [])], self.doping_bounds)
        if grain_size is not None:
            self._check_grain(grain_size)
        grain_size = self.grain_size if grain_size is None else grain_size
        seebeck, rho, kappa = self.crystal.curves(doping, grain_size, tolerance)
        return replace(
            self, doping=doping, grain_size=grain_size, seebeck_coefficient=seebeck, resistivity=rho,
            thermal_conductivity=kappa,
        )  # fmt: skip

    def check_doping(self, values: Sequence[float]) -> None:
        """Refuse dopings [1/m^3] outside the bounds of the material."""
        check_doping(self.name, values, self.doping_bounds)

    def _check_grain(self, grain_size: float) -> None:
        if self.grain_bounds is None:
            raise InputError(f"{self.name}: grain size {grain_size * 1e9:.6g} nm was given but its model has no grains")
        low, high = self.grain_bounds
        if not low * (1 - 1e-9) <= grain_size <= high * (1 + 1e-9):
            raise InputError(
                f"{self.name}: grain size {grain_size * 1e9:.6g} nm is outside its bounds, {low * 1e9:.6g} nm to "
                f"{high * 1e9:.6g} nm; choose one inside"
            )


def check_doping(name: str, values: Sequence[float], bounds: tuple[float, float]) -> None:
    """Refuse dopings [1/m^3] outside the bounds of a material."""
    low, high = bounds
    for value in values:
        if not low * (1 - 1e-9) <= value <= high * (1 + 1e-9):
            raise InputError(
                f"{name}: doping {value * 1e-6:.6g} 1/cm^3 is outside its bounds, {low * 1e-6:.6g} 1/cm^3 to "
                f"{high * 1e-6:.6g} 1/cm^3; choose one inside"
            )
