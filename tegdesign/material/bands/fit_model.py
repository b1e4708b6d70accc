"""What a fit adjusts: bands and a lattice as few numbers, each with unit, bounds and first value."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from typing import Any, TypeVar

import numpy as np
from pydantic import TypeAdapter

from tegdesign.errors import InputError, closest
from tegdesign.material.bands.carriers import BandEntry
from tegdesign.material.bands.crystal import Crystal
from tegdesign.material.bands.laws import EnergyLaw
from tegdesign.material.bands.phonons import AnyLattice
from tegdesign.material.curve import Array
from tegdesign.material.material import Polarity
from tegdesign.material.transport.bands import BandResponse, Bands
from tegdesign.material.transport.constants import CHARGE
from tegdesign.quantity import SI, conversion, parse, write

REFERENCE = 300.0  # [K] at which mobility, gap, offset, mass and lattice conductivity are given
Values = Mapping[str, float]
Kept = TypeVar("Kept")

# name: power of the energy, power of temperature of the mobility at energy kT, and whether a fit adjusts the latter.
# Usual values for deformation potential, alloy, polar optical and impurity scattering: tau ~ E^r, common practice.
SCATTERING = {
    "acoustic": (-0.5, -1.5, True),  # a free power of temperature takes in what disorder adds, of the same r
    "alloy": (-0.5, -0.5, False),
    "polar": (0.5, -0.5, True),
    "ionised": (1.5, 1.5, True),
    "constant": (0.0, 0.0, True),
}
# name: kind in the file, the power of temperature it starts with (None: it has none) and whether a fit adjusts it
LATTICE = {
    "constant": ("constant", None, False),
    "inverse": ("inverse power", 1.0, False),
    "inverse power": ("inverse power", 1.0, True),
    "alloy": ("alloy", 1.0, False),
}
DISPERSION = ("parabolic", "kane")
# Unit and bounds of a ratio of mobilities. Carriers that hardly move only hide or add others: a fit likes them where it
# lacks another freedom, a crystal does not. Common practice, no source.
_RATIO = ("", "", 0.02, 50.0)


@dataclass(frozen=True)
class Parameter:
    """One number of the model: SI unit, unit shown, bounds, first value; ``step`` is its natural size, None: its own.

    Where the step is its own the fit adjusts the logarithm.
    """

    name: str
    unit: str
    shown: str
    low: float
    high: float
    start: float
    free: bool
    meaning: str
    step: float | None = None

    def scaled(self, value: float) -> float:
        """Return what the fit adjusts."""
        return float(np.log(value)) if self.step is None else value / self.step

    def value(self, scaled: float) -> float:
        """Return the value [SI] of what the fit adjusts, not beyond the bounds by rounding."""
        value = float(np.exp(scaled)) if self.step is None else scaled * self.step
        return min(max(value, self.low), self.high)

    def spread(self, value: float, sigma: float) -> float:
        """Return the uncertainty of the value [SI] from that of what the fit adjusts."""
        return sigma * (value if self.step is None else self.step)

    def rounded(self, value: float) -> float:
        """Return a value [SI] to six digits in the unit shown, which is how a file has it."""
        return min(max(self.short(value, 6), self.low), self.high)

    def short(self, value: float, digits: int) -> float:
        """Return a value [SI] to some digits in the unit shown."""
        factor, _ = conversion(self.shown, self.unit)
        return parse(f"{value / factor:.{digits}g} {self.shown}", self.unit)

    def text(self, value: float) -> str:
        """Return a value [SI] with its unit."""
        return write(value, self.unit, self.shown)

    def checked(self, value: float) -> float:
        """Return a value [SI] given by the user.

        Raises
        ------
        InputError
            It lies outside the bounds.
        """
        if not self.low <= value <= self.high:
            raise InputError(
                f"{self.name} = {self.text(value)} cannot be held: its bounds are {self.text(self.low)} and "
                f"{self.text(self.high)}; check its unit"
            )
        return value


@dataclass(frozen=True)
class Model:
    """The form of the model: how many bands, which dispersion, scattering and lattice.

    Parameters
    ----------
    polarity : "n" or "p"
        Of the majority carriers.
    range : tuple of float
        Temperatures of the table [K].
    bands : int
        Majority bands, 1 or 2; the second is parabolic.
    minority : bool
        Whether there is a band across the gap.
    dispersion : str
        ``parabolic`` or ``kane``: of the bands on both sides of the gap, with the gap as energy of Kane's dispersion.
    scattering, lattice : str
        Names in ``SCATTERING`` and ``LATTICE``.
    """

    polarity: Polarity
    range: tuple[float, float]
    bands: int = 1
    minority: bool = True
    dispersion: str = "parabolic"
    scattering: str = "acoustic"
    lattice: str = "inverse power"

    def __post_init__(self) -> None:
        """Refuse words that are none."""
        for what, word, known in (
            ("bands", self.bands, (1, 2)),
            ("dispersion", self.dispersion, DISPERSION),
            ("scattering", self.scattering, tuple(SCATTERING)),
            ("lattice", self.lattice, tuple(LATTICE)),
        ):
            if word not in known:
                raise InputError(f"{what} of a fit is {word!r}; write {' or '.join(map(str, known))}")

    @property
    def text(self) -> str:
        """The form in words."""
        majority, minority = ("conduction", "valence") if self.polarity == "n" else ("valence", "conduction")
        count = "one" if self.bands == 1 else "two"
        other = f"and one {minority} band" if self.minority else f"without a {minority} band"
        return (
            f"{count} {majority} band{'s' if self.bands == 2 else ''} {other}, {self.dispersion}, {self.scattering} "
            f"scattering, lattice {self.lattice}"
        )

    def parameters(self) -> dict[str, Parameter]:
        """Return all numbers of the model by name, in the order in which they are told."""
        return {parameter.name: parameter for parameter in self._parameters()}

    def parameter(self, name: str) -> Parameter:
        """Return one number of the model.

        Raises
        ------
        InputError
            The model has none of this name.
        """
        known = self.parameters()
        if name not in known:
            near = closest(name, list(known)) or f"; it has {', '.join(known)}"
            raise InputError(f"'{name}' is no parameter of this model ({self.text}){near}")
        return known[name]

    def _parameters(self) -> Iterator[Parameter]:
        energy, power, adjusted = SCATTERING[self.scattering]
        at = f"at {REFERENCE:g} K"
        yield Parameter("doping", "1/m^3", "1/cm^3", 1e21, 1e30, 1e25, True, "majority carriers of the dopants")
        yield Parameter("mass", "", "", 0.01, 10.0, 1.0, False, f"density-of-states mass, all valleys, {at} [m_e]")
        yield Parameter("mass_exponent", "", "", -1.5, 1.5, 0.0, False, "power of T of all masses", 1.0)
        yield Parameter("mobility", "m^2/V/s", "cm^2/V/s", 1e-7, 50.0, 1e-2, True, f"at energy kT and {REFERENCE:g} K")
        words = "power of T of all mobilities, at energy kT"
        yield Parameter("mobility_exponent", "", "", -4.0, 4.0, power, adjusted, words, 1.0)
        yield Parameter("energy_exponent", "", "", -1.2, 2.0, energy, False, "power of the energy in tau", 1.0)
        if self.bands == 2:
            yield Parameter("second_mass_ratio", "", "", 0.1, 9.0, 3.0, True, "mass of the second band over mass")
            yield Parameter("second_mobility_ratio", *_RATIO, 0.2, True, "mobility of the second band over mobility")
            yield Parameter(
                "second_offset", "J", "eV", 0.0, 1.5 * CHARGE, 0.1 * CHARGE, True, f"of the second band, {at}",
                0.1 * CHARGE,
            )  # fmt: skip
            yield _slope("second_offset_slope")
        if self.minority:
            yield Parameter("gap", "J", "eV", 0.01 * CHARGE, 6 * CHARGE, 0.5 * CHARGE, True, at)
            yield _slope("gap_slope")
            yield Parameter("minority_mass_ratio", "", "", 0.1, 9.0, 1.0, False, "mass of the minority band over mass")
            words = "mobility of the minority band over mobility"
            yield Parameter("minority_mobility_ratio", *_RATIO, 1.0, True, words)
        elif self.dispersion == "kane":
            words = f"energy of Kane's dispersion {at}"
            yield Parameter("gap", "J", "eV", 0.01 * CHARGE, 6 * CHARGE, 0.5 * CHARGE, True, words)
            yield _slope("gap_slope")
        kind, exponent, adjusted = LATTICE[self.lattice]
        words = f"lattice conductivity {at}" + (" without disorder" if kind == "alloy" else "")
        yield Parameter("lattice", "W/m/K", "W/m/K", 1e-3, 1e3, 1.0, True, words)
        if exponent is not None:
            words = "power of 1/T in the lattice conductivity"
            yield Parameter("lattice_exponent", "", "", 0.0, 3.0, exponent, adjusted, words, 1.0)
        if kind == "alloy":
            yield Parameter("disorder", "", "", 1e-6, 9.9, 0.1, True, "Gamma of the alloy")
            yield Parameter("debye_temperature", "K", "K", 20.0, 2500.0, 200.0, False, "of the alloy")
            yield Parameter("velocity", "m/s", "m/s", 300.0, 2e4, 2500.0, False, "of sound in the alloy")
            yield Parameter("atomic_volume", "m^3", "nm^3", 3e-30, 1e-27, 2.5e-29, False, "of the alloy")

    def parts(self, values: Values, digits: int = 17) -> dict[str, Any]:
        """Return ``gap``, ``bands`` and ``lattice`` of the file of kind bands that has these values [SI].

        ``digits`` are those of products of values; 17 are all.
        """

        def times(name: str, ratio: str) -> float:
            return float(f"{values[name] * values[ratio]:.{digits}g}")

        majority, minority = ("electron", "hole") if self.polarity == "n" else ("hole", "electron")
        names = {"electron": "conduction", "hole": "valence"}
        gap = _law(values, "gap") if "gap" in values else None
        kane = gap if self.dispersion == "kane" else None
        bands = [_band(values, names[majority], majority, values["mass"], values["mobility"], None, kane)]
        if self.bands == 2:
            mass, mobility = times("mass", "second_mass_ratio"), times("mobility", "second_mobility_ratio")
            offset = _law(values, "second_offset")
            bands.append(_band(values, f"second {names[majority]}", majority, mass, mobility, offset, None))
        if self.minority:
            mass, mobility = times("mass", "minority_mass_ratio"), times("mobility", "minority_mobility_ratio")
            bands.append(_band(values, names[minority], minority, mass, mobility, None, kane))
        return {"gap": gap if self.minority else None, "bands": tuple(bands), "lattice": self._lattice(values)}

    def _lattice(self, values: Values) -> Any:
        kind, exponent, _ = LATTICE[self.lattice]
        pure: dict[str, Any] = {"kind": "constant", "value": SI(values["lattice"])}
        if exponent is not None:
            pure |= {"kind": "inverse power", "exponent": values["lattice_exponent"], "reference": SI(REFERENCE)}
        if kind != "alloy":
            return _LATTICE.validate_python(pure)
        held = {name: SI(values[name]) for name in ("debye_temperature", "velocity", "atomic_volume")}
        return _LATTICE.validate_python({"kind": kind, "pure": pure, "disorder": values["disorder"], **held})

    def crystal(self, values: Values) -> Crystal:
        """Return bands and lattice with these values [SI]."""
        parts = self.parts(values)
        gap = None if parts["gap"] is None else parts["gap"].build()
        bands = Bands(tuple(band.build() for band in parts["bands"]), gap)
        sign = 1 if self.polarity == "n" else -1
        return Crystal(bands, parts["lattice"].build(), sign, self.range, np.array([]))


class Prediction:
    """The three properties at fixed temperatures [K], shape (K,), for ever new values.

    Neutrality is most of the work and does not ask for mobilities, and carriers do not ask for the lattice: the last
    of both are kept.
    """

    def __init__(self, model: Model, temperature: Array) -> None:
        """Take form and temperatures."""
        self.model, self.temperature = model, temperature
        self._levels: dict[tuple[float, ...], Array] = {}
        self._responses: dict[tuple[float, ...], BandResponse] = {}

    def __call__(self, values: Values) -> Array:
        """Return S [V/K], rho [ohm m] and kappa [W/m/K] of these values [SI], shape (3, K)."""
        crystal = self.model.crystal(values)
        t, doping = self.temperature, crystal.sign * values["doping"]
        level = _kept(
            self._levels, values, _MOBILITIES | _OF_LATTICE, lambda: crystal.bands.chemical_potential(t, doping)
        )
        response = _kept(self._responses, values, _OF_LATTICE, lambda: crystal.bands.at(t, level))
        kappa = response.electronic_thermal_conductivity + crystal.lattice.conductivity(self.temperature)
        return np.stack([response.seebeck_coefficient, 1 / response.conductivity, kappa])


_MOBILITIES = {"mobility", "mobility_exponent", "energy_exponent", "second_mobility_ratio", "minority_mobility_ratio"}
_OF_LATTICE = {"lattice", "lattice_exponent", "disorder", "debye_temperature", "velocity", "atomic_volume"}
_KEPT = 4  # the point and a step or two from it


def _kept(store: dict[tuple[float, ...], Kept], values: Values, without: set[str], make: Callable[[], Kept]) -> Kept:
    """Return what is made from the values other than ``without``; once for the same ones."""
    key = tuple(value for name, value in values.items() if name not in without)
    if key not in store:
        if len(store) >= _KEPT:
            del store[next(iter(store))]
        store[key] = make()
    else:  # the latest used stays longest
        store[key] = store.pop(key)
    return store[key]
_LATTICE: TypeAdapter[Any] = TypeAdapter(AnyLattice)
_ENERGY: TypeAdapter[Any] = TypeAdapter(EnergyLaw)


def _slope(name: str) -> Parameter:
    step = 1e-4 * CHARGE
    words = f"change of the {name.removesuffix('_slope').replace('_', ' ')} with T"
    return Parameter(name, "J/K", "meV/K", -20 * step, 20 * step, 0.0, False, words, step)


def _law(values: Values, name: str) -> Any:
    value, slope = SI(values[name]), SI(values[f"{name}_slope"])
    if not slope:
        return _ENERGY.validate_python({"kind": "constant", "value": value})
    return _ENERGY.validate_python({"kind": "linear", "value": value, "slope": slope, "reference": SI(REFERENCE)})


def _band(
    values: Values, name: str, carrier: str, mass: float, mobility: float, offset: Any, kane_gap: Any
) -> BandEntry:
    exponent = values["mass_exponent"]
    scattering = {
        "kind": "mobility",
        "mobility": SI(mobility),
        "temperature_exponent": values["mobility_exponent"],
        "energy_exponent": values["energy_exponent"],
        "reference": SI(REFERENCE),
    }
    entry: dict[str, Any] = {"name": name, "carrier": carrier, "scattering": (scattering,), "kane_gap": kane_gap}
    entry["mass"] = mass if not exponent else {"kind": "power", "value": mass, "exponent": exponent}
    return BandEntry.model_validate(entry if offset is None else entry | {"offset": offset})


def unit_of(name: str) -> str:
    """Return the SI unit of a parameter of any form of the model; that of an unknown name is none."""
    every = (Model("n", (1.0, 2.0), bands=2, lattice=lattice).parameters() for lattice in LATTICE)
    return next((known[name].unit for known in every if name in known), "")
