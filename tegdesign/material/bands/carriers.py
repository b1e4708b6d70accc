"""Typed bands and what scatters their carriers."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field

from tegdesign.material.bands.laws import ConstantEnergy, Energy, EnergyLaw, MassLaw, breaks
from tegdesign.material.file import Strict, Temperature, Word
from tegdesign.material.transport import band
from tegdesign.material.transport.scattering.acoustic import Acoustic
from tegdesign.material.transport.scattering.alloy import Alloy
from tegdesign.material.transport.scattering.grain import GrainBoundary
from tegdesign.material.transport.scattering.ionised import IonisedImpurity
from tegdesign.material.transport.scattering.mobility import Mobility
from tegdesign.material.transport.scattering.polar import PolarOptical
from tegdesign.material.transport.scattering.states import Mechanism
from tegdesign.quantity import SI, Measure

Positive = Annotated[float, Field(strict=True, gt=0, allow_inf_nan=False)]
PositiveEnergy = Annotated[float, Measure("J", "eV"), Field(gt=0)]
Density = Annotated[float, Measure("1/m^3", "1/cm^3"), Field(gt=0)]
Grain = Annotated[float, Measure("m", "nm"), Field(gt=0, lt=1e-2)]


class AcousticPhonons(Strict):
    """Deformation potential of the band edge and elastic constant of longitudinal waves."""

    kind: Literal["acoustic"]
    deformation_potential: PositiveEnergy
    elastic_constant: Annotated[float, Measure("Pa", "GPa"), Field(gt=0)]

    def build(self) -> Mechanism:
        """Return the mechanism."""
        return Acoustic(self.deformation_potential, self.elastic_constant)


class AlloyDisorder(Strict):
    """Scattering potential of an alloy, fraction of one of its two constituents, volume of an atom."""

    kind: Literal["alloy"]
    potential: PositiveEnergy
    fraction: Annotated[float, Field(strict=True, gt=0, lt=1)]
    atomic_volume: Annotated[float, Measure("m^3", "nm^3"), Field(gt=0)]

    def build(self) -> Mechanism:
        """Return the mechanism."""
        return Alloy(self.potential, self.fraction, self.atomic_volume)


class GivenMobility(Strict):
    """Mobility at energy kT above the edge and the reference temperature, with its powers."""

    kind: Literal["mobility"]
    mobility: Annotated[float, Measure("m^2/V/s", "cm^2/V/s"), Field(gt=0)]
    temperature_exponent: Annotated[float, Field(strict=True, ge=-6, le=6)] = 0.0
    energy_exponent: Annotated[float, Field(strict=True, gt=-1.5, le=2)] = -0.5
    reference: Temperature = 300.0

    def build(self) -> Mechanism:
        """Return the mechanism."""
        return Mobility(self.mobility, self.temperature_exponent, self.energy_exponent, self.reference)


class PolarOpticalPhonons(Strict):
    """Relative permittivity, static and at optical frequencies."""

    kind: Literal["polar optical"]
    static_permittivity: Positive
    optical_permittivity: Positive

    def build(self) -> Mechanism:
        """Return the mechanism."""
        return PolarOptical(self.static_permittivity, self.optical_permittivity)


class IonisedImpurities(Strict):
    """Screened charged impurities, as many as the doping needs unless their density is given."""

    kind: Literal["ionised impurity"]
    permittivity: Positive
    charge: Positive = 1.0
    density: Density | None = None

    def build(self) -> Mechanism:
        """Return the mechanism."""
        return IonisedImpurity(self.permittivity, self.charge, self.density)


class GrainBoundaries(Strict):
    """Mean free path between boundaries in grain sizes; the size is that of the material."""

    kind: Literal["grain boundary"]
    path_per_size: Positive = 1.0

    def build(self) -> Mechanism:
        """Return the mechanism; the size is always given with the temperatures."""
        return GrainBoundary(1.0, self.path_per_size)


Scattering = Annotated[
    AcousticPhonons | AlloyDisorder | GivenMobility | PolarOpticalPhonons | IonisedImpurities | GrainBoundaries,
    Field(discriminator="kind"),
]


class BandEntry(Strict):
    """One band; energies are counted from its edge into the band, masses in electron masses."""

    name: Word
    carrier: Literal["electron", "hole"]
    mass: MassLaw
    inertial_mass: MassLaw | None = None
    degeneracy: Annotated[float, Field(strict=True, gt=0, le=100)] = 1.0
    offset: EnergyLaw = ConstantEnergy(value=SI(0.0))
    kane_gap: EnergyLaw | None = None
    scattering: Annotated[tuple[Scattering, ...], Field(min_length=1)]

    def build(self) -> band.Band:
        """Return the band."""
        return band.Band(
            carrier=self.carrier,
            mass=self.mass.build(),
            scattering=tuple(mechanism.build() for mechanism in self.scattering),
            inertial_mass=None if self.inertial_mass is None else self.inertial_mass.build(),
            degeneracy=self.degeneracy,
            offset=self.offset.build(),
            kane_gap=None if self.kane_gap is None else self.kane_gap.build(),
            name=self.name,
        )

    @property
    def has_grains(self) -> bool:
        """Whether grain boundaries scatter the carriers."""
        return any(isinstance(mechanism, GrainBoundaries) for mechanism in self.scattering)

    @property
    def breaks(self) -> list[float]:
        """Temperatures [K] at which a parameter has a kink."""
        return breaks(self.offset, self.kane_gap)


__all__ = ["BandEntry", "Density", "Energy", "Grain", "Positive", "Scattering"]
