"""Material file of kind ``bands``: the properties follow from bands, scattering, doping and a lattice."""

from __future__ import annotations

from functools import cached_property
from typing import Annotated, Any, Literal

import numpy as np
from pydantic import Field, model_validator

from tegdesign.errors import TegdesignError
from tegdesign.material.bands.carriers import BandEntry, Density, Grain
from tegdesign.material.bands.crystal import Crystal, Doping
from tegdesign.material.bands.laws import EnergyLaw, breaks
from tegdesign.material.bands.material import BandMaterial, check_doping
from tegdesign.material.bands.phonons import AnyLattice
from tegdesign.material.curve import Curve
from tegdesign.material.file import MaterialFile, Temperature
from tegdesign.material.transport.bands import Bands


class BandsFile(MaterialFile):
    """A material given by parameters; its doping, and its grain size where it has grains, can be chosen.

    ``doping`` counts the carriers of its polarity that the dopants give, all ionised; ``parameters_basis`` says
    where the parameters come from.
    """

    kind: Literal["bands"]
    temperatures: tuple[Temperature, Temperature] = Field(description="between which the parameters hold")
    doping: Density
    doping_bounds: tuple[Density, Density]
    doping_basis: str = ""
    grain_size: Grain | None = None
    grain_size_bounds: tuple[Grain, Grain] | None = None
    laid_over: str = Field("", description="measured material it was held against")
    parameters_basis: str = ""
    gap: EnergyLaw | None = None
    bands: Annotated[tuple[BandEntry, ...], Field(min_length=1)]
    lattice: AnyLattice

    @model_validator(mode="after")
    def _sound(self) -> BandsFile:
        for name in ("temperatures", "doping_bounds", "grain_size_bounds"):
            ends = getattr(self, name)
            if ends is not None and not ends[0] < ends[1]:
                raise ValueError(f"{name} must rise, got {ends[0]:.6g} and {ends[1]:.6g}; exchange them")
        carrier = "electron" if self.polarity == "n" else "hole"
        if all(band.carrier != carrier for band in self.bands):
            raise ValueError(
                f"polarity {self.polarity} needs a band with carrier = '{carrier}'; add one or mend the polarity"
            )
        grains = self._has_grains
        if grains != (self.grain_size is not None) or grains != (self.grain_size_bounds is not None):
            raise ValueError(
                "grain_size and grain_size_bounds are needed exactly where a band or the lattice has scattering of "
                f"kind 'grain boundary', which {'is' if grains else 'is not'} the case here"
            )
        if self.grain_size is not None and self.grain_size_bounds is not None:
            low, high = self.grain_size_bounds
            if not low <= self.grain_size <= high:
                raise ValueError(f"grain_size {self.grain_size:.6g} m is outside its bounds, {low:.6g} to {high:.6g} m")
        try:
            check_doping("doping", [self.doping], self.doping_bounds)
            seebeck = self.curves()[0]
        except TegdesignError as error:
            raise ValueError(str(error)) from error
        sign = self.crystal.sign * seebeck.value  # negative for the right polarity
        if np.all(sign > 0):
            raise ValueError(
                f"polarity {self.polarity} is contradicted by the bands: S is {seebeck.value[0] * 1e6:.4g} uV/K at "
                f"{seebeck.temperature[0]:.6g} K; mend the polarity, the doping or the masses"
            )
        return self

    @property
    def _has_grains(self) -> bool:
        return any(band.has_grains for band in self.bands) or self.crystal.lattice.has_grain_size

    @cached_property
    def crystal(self) -> Crystal:
        """Bands and lattice."""
        kinks = [*breaks(self.gap), *(t for band in self.bands for t in band.breaks)]
        kinks += getattr(self.lattice, "temperatures", ())
        return Crystal(
            Bands(tuple(band.build() for band in self.bands), None if self.gap is None else self.gap.build()),
            self.lattice.build(),
            1 if self.polarity == "n" else -1,
            self.temperatures,
            np.array(kinks, dtype=float),
        )

    @cached_property
    def _curves(self) -> tuple[Curve, Curve, Curve]:
        s, rho, kappa = self.crystal.curves(Doping(self.doping), self.grain_size)
        return s, rho, kappa

    def curves(self) -> tuple[Curve, Curve, Curve]:
        """Return Seebeck coefficient [V/K], resistivity [ohm m] and thermal conductivity [W/m/K]."""
        return self._curves

    def to_material(self, path: str = "") -> BandMaterial:
        """Return the material at the doping of the file, ready for others."""
        plain: dict[str, Any] = dict(vars(super().to_material(path)))
        return BandMaterial(
            **plain,
            crystal=self.crystal,
            doping=Doping(self.doping),
            doping_bounds=self.doping_bounds,
            doping_basis=self.doping_basis,
            grain_size=self.grain_size,
            grain_bounds=self.grain_size_bounds,
            laid_over=self.laid_over,
        )
