"""Typed models of the lattice conductivity."""

from __future__ import annotations

from typing import Annotated, Literal

from pydantic import Field, model_validator

from tegdesign.material.bands.carriers import Positive
from tegdesign.material.curve import Curve
from tegdesign.material.file import Strict, Temperature
from tegdesign.material.lattice import alloy, callaway
from tegdesign.material.lattice.base import Lattice
from tegdesign.material.lattice.constant import Constant
from tegdesign.material.lattice.phonon.boundary import Boundary
from tegdesign.material.lattice.phonon.holland import TransverseUmklapp
from tegdesign.material.lattice.phonon.phonons import PhononScattering
from tegdesign.material.lattice.phonon.point_defect import PointDefect
from tegdesign.material.lattice.phonon.power import PowerRate
from tegdesign.material.lattice.phonon.umklapp import Umklapp
from tegdesign.material.lattice.power import InversePower
from tegdesign.material.lattice.table import Table
from tegdesign.quantity import Measure

Conductivity = Annotated[float, Measure("W/m/K"), Field(gt=0)]
Velocity = Annotated[float, Measure("m/s"), Field(gt=0, lt=1e5)]


class ConstantLattice(Strict):
    """The same at every temperature."""

    kind: Literal["constant"]
    value: Conductivity

    def build(self) -> Lattice:
        """Return the model."""
        return Constant(self.value)


class InversePowerLattice(Strict):
    """``value (reference / T)^exponent``."""

    kind: Literal["inverse power"]
    value: Conductivity
    exponent: Annotated[float, Field(strict=True, ge=0, le=3)] = 1.0
    reference: Temperature = 300.0

    def build(self) -> Lattice:
        """Return the model."""
        return InversePower(self.value, self.exponent, self.reference)


class TableLattice(Strict):
    """Given at temperatures, monotone cubic between them."""

    kind: Literal["table"]
    temperatures: tuple[Temperature, ...]
    values: tuple[Conductivity, ...]

    @model_validator(mode="after")
    def _function(self) -> TableLattice:
        if len(self.temperatures) != len(self.values):
            raise ValueError(f"{len(self.values)} values for {len(self.temperatures)} temperatures; give one for each")
        self.build()
        return self

    def build(self) -> Lattice:
        """Return the model."""
        return Table(Curve(self.temperatures, self.values))  # type: ignore[arg-type]


class UmklappRate(Strict):
    """1/tau = coefficient omega^2 T exp(-freezing / T)."""

    kind: Literal["umklapp"]
    coefficient: Annotated[float, Measure("s/K"), Field(gt=0)]
    freezing: Annotated[float, Measure("K"), Field(ge=0)] = 0.0

    def build(self) -> PhononScattering:
        """Return the mechanism."""
        return Umklapp(self.coefficient, self.freezing)


class TransverseUmklappRate(Strict):
    """1/tau = coefficient omega^2 / sinh(hbar omega / kT)."""

    kind: Literal["transverse umklapp"]
    coefficient: Annotated[float, Measure("s"), Field(gt=0)]

    def build(self) -> PhononScattering:
        """Return the mechanism."""
        return TransverseUmklapp(self.coefficient)


class PointDefectRate(Strict):
    """1/tau = coefficient omega^4."""

    kind: Literal["point defect"]
    coefficient: Annotated[float, Measure("s^3"), Field(gt=0)]

    def build(self) -> PhononScattering:
        """Return the mechanism."""
        return PointDefect(self.coefficient)


class GrainBoundaryRate(Strict):
    """1/tau = v / (path_per_size x grain size); the size is that of the material."""

    kind: Literal["grain boundary"]
    path_per_size: Positive = 1.0

    def build(self) -> PhononScattering:
        """Return the mechanism; the size is always given with the temperatures."""
        return Boundary(1.0, self.path_per_size)


class PowerLawRate(Strict):
    """1/tau = coefficient omega^a T^b with SI units throughout."""

    kind: Literal["power"]
    coefficient: Positive
    frequency_exponent: float = 0.0
    temperature_exponent: float = 0.0

    def build(self) -> PhononScattering:
        """Return the mechanism."""
        return PowerRate(self.coefficient, self.frequency_exponent, self.temperature_exponent)


AnyRate = Annotated[
    UmklappRate | TransverseUmklappRate | PointDefectRate | GrainBoundaryRate | PowerLawRate,
    Field(discriminator="kind"),
]


class BranchEntry(Strict):
    """A stretch of the phonon spectrum: velocity, ends as temperatures, share of the three polarisations."""

    velocity: Velocity
    upper: Temperature
    lower: Annotated[float, Measure("K"), Field(ge=0)] = 0.0
    weight: Annotated[float, Field(strict=True, gt=0, le=1)] = 1.0
    scattering: Annotated[tuple[AnyRate, ...], Field(min_length=1)]

    def build(self) -> callaway.Branch:
        """Return the branch."""
        rates = tuple(rate.build() for rate in self.scattering)
        return callaway.Branch(self.velocity, self.upper, rates, self.lower, self.weight)


class DebyeCallawayLattice(Strict):
    """Branches whose conductivities add."""

    kind: Literal["debye-callaway"]
    branches: Annotated[tuple[BranchEntry, ...], Field(min_length=1)]

    def build(self) -> Lattice:
        """Return the model."""
        return callaway.DebyeCallaway(tuple(branch.build() for branch in self.branches))


class AlloyLattice(Strict):
    """A pure crystal with disorder added."""

    kind: Literal["alloy"]
    pure: PureLattice
    debye_temperature: Temperature
    velocity: Velocity
    atomic_volume: Annotated[float, Measure("m^3", "nm^3"), Field(gt=0)]
    disorder: Annotated[float, Field(strict=True, ge=0, lt=10)]

    def build(self) -> Lattice:
        """Return the model."""
        pure = self.pure.build()
        return alloy.Alloy(pure, self.debye_temperature, self.velocity, self.atomic_volume, self.disorder)


PureLattice = Annotated[
    ConstantLattice | InversePowerLattice | TableLattice | DebyeCallawayLattice, Field(discriminator="kind")
]
AnyLattice = Annotated[
    ConstantLattice | InversePowerLattice | TableLattice | DebyeCallawayLattice | AlloyLattice,
    Field(discriminator="kind"),
]
AlloyLattice.model_rebuild()
