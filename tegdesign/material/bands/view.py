"""What an engineer reads from a material: both parts of kappa; of computed ones level, carriers, bands, best doping."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tegdesign.errors import InputError
from tegdesign.material.bands.crystal import Doping
from tegdesign.material.bands.material import BandMaterial, check_doping
from tegdesign.material.bands.optimum import best_doping, figure_of_merit, power_factor
from tegdesign.material.curve import Array
from tegdesign.material.material import Material
from tegdesign.material.transport.band import Band
from tegdesign.material.transport.bands import BandResponse
from tegdesign.material.transport.constants import BOLTZMANN
from tegdesign.material.transport.derived import quality_factor, weighted_mobility
from tegdesign.material.transport.law import at_temperature

if TYPE_CHECKING:
    import pandas as pd

Columns = dict[str, Any]

_STEP = 50.0  # [K] between the temperatures at which a computed material is shown
_AIMS = {"figure of merit": figure_of_merit, "power factor": power_factor}


def computed(material: Material, wish: str) -> BandMaterial:
    """Return the material as one whose doping can be chosen.

    Raises
    ------
    InputError
        It is measured; the message says which wish (``--doping``) that rules out.
    """
    if not isinstance(material, BandMaterial):
        raise InputError(
            f"{wish}: {material.name} is a table of measured values, so its doping and grain size are what they are; "
            "take a material of kind bands ('tegdesign materials --kind bands' lists them)"
        )
    return material


def middle(material: Material) -> float:
    """Return the middle of the range of a material [K]."""
    return sum(material.range) / 2


def usual_temperatures(material: Material) -> Array:
    """Return the temperatures [K] to show a material at: measured points, or even steps where it is computed."""
    if not isinstance(material, BandMaterial):
        return material.measured_temperatures
    first, last = material.range
    steps = np.arange(np.ceil(first / _STEP), np.floor(last / _STEP) + 1) * _STEP
    return np.unique(np.concatenate([[first], steps, [last]]))


def properties(material: Material, temperature: ArrayLike | None = None) -> Columns:
    """Return the columns of ``material.properties`` and more, names with unit, shape (K,) each.

    Of every kind both parts of kappa (``material.electronic_basis`` says by what). Of a computed material what
    ``at_doping`` tells as well. Without temperatures [K] the ``usual_temperatures`` serve.

    Raises
    ------
    DataRangeError
        A temperature asked for lies outside the range of the data.
    """
    if isinstance(material, BandMaterial):
        base = material.properties(usual_temperatures(material) if temperature is None else temperature)
        t = base["temperature_K"]
        return _told(material, t, material.doping.at(t)) | base  # where both tell, the curves that a design uses
    base = material.properties(temperature)
    t, kappa = base["temperature_K"], base["thermal_conductivity_W_per_m_K"]
    known = np.isfinite(base["seebeck_coefficient_V_per_K"] + base["resistivity_ohm_m"])
    electronic = np.where(known, material.electronic_thermal_conductivity(t), np.nan)
    return base | {
        "electronic_thermal_conductivity_W_per_m_K": electronic,
        "lattice_thermal_conductivity_W_per_m_K": kappa - electronic,
    }


def to_frame(material: Material, temperature: ArrayLike | None = None) -> pd.DataFrame:
    """Return ``properties(material, temperature)`` as a table, same columns, units and errors."""
    import pandas as pd

    return pd.DataFrame(properties(material, temperature))


def at_doping(material: BandMaterial, temperature: ArrayLike, doping: ArrayLike) -> Columns:
    """Return properties, level and carriers at temperatures [K] and dopings [1/m^3] that broadcast, as columns.

    The names are those of ``material.properties``. Leading band: the one that carries most of the current of the
    majority carriers; ``reduced_level_kT`` is the chemical potential above its edge, into the band. Weighted mobility
    and quality factor are those of the one acoustic band that would have this S and rho. The bipolar share is that of
    all carriers that go round between bands, of the same kind too.

    Raises
    ------
    DataRangeError
        A temperature lies outside the range of the material.
    InputError
        A doping is out of its bounds.
    """
    t, n = np.broadcast_arrays(np.asarray(temperature, dtype=float), np.asarray(doping, dtype=float))
    material.properties(t.ravel())  # refuses temperatures outside
    check_doping(material.name, [float(n.min()), float(n.max())], material.doping_bounds)
    return _told(material, t.ravel(), n.ravel())


def _told(material: BandMaterial, t: Array, doping: Array) -> Columns:
    response = material.crystal.response(t, doping, material.grain_size)
    lattice = material.crystal.lattice_conductivity(t, material.grain_size)
    s, electronic = response.seebeck_coefficient, response.electronic_thermal_conductivity
    mobility = weighted_mobility(s, 1 / response.conductivity, t)
    lead = _leading(material, response)
    level = np.take_along_axis(response.reduced_level, lead[None], axis=0)[0]
    gap = material.crystal.bands.gap
    electrons, holes = response.electron_density, response.hole_density
    majority, minority = (electrons, holes) if material.polarity == "n" else (holes, electrons)
    return {
        "temperature_K": t,
        "seebeck_coefficient_V_per_K": s,
        "resistivity_ohm_m": 1 / response.conductivity,
        "thermal_conductivity_W_per_m_K": electronic + lattice,
        "power_factor_W_per_m_K2": response.power_factor,
        "figure_of_merit": response.power_factor * t / (electronic + lattice),
        "electronic_thermal_conductivity_W_per_m_K": electronic,
        "lattice_thermal_conductivity_W_per_m_K": lattice,
        "doping_1_per_m3": doping,
        "majority_density_1_per_m3": majority,
        "minority_density_1_per_m3": minority,
        "leading_band": np.array([band.name for band in response.bands])[lead],
        "reduced_level_kT": level,
        "level_above_edge_J": level * BOLTZMANN * t,
        "gap_J": np.full_like(t, np.nan) if gap is None else at_temperature(gap, t, "gap"),
        "seebeck_coefficient_k_per_e": response.reduced_seebeck,
        "weighted_mobility_m2_per_V_s": mobility,
        "quality_factor": quality_factor(mobility, t, lattice),
        "lorenz_number_W_ohm_per_K2": response.lorenz_number,
        "bipolar_share": response.bipolar_share,
    }


def _leading(material: BandMaterial, response: BandResponse) -> NDArray[np.intp]:
    """Return the number of the leading band at every point."""
    carrier = "electron" if material.polarity == "n" else "hole"
    conductance = [
        channel.conductance if band.carrier == carrier else np.full_like(channel.conductance, -1.0)
        for band, channel in zip(response.bands, response.channels, strict=True)
    ]
    return np.asarray(np.argmax(conductance, axis=0))


def bands(material: BandMaterial, temperature: ArrayLike, doping: ArrayLike | None = None) -> list[Columns]:
    """Return one set of columns a band, in the order of the file: parameters as they are at the temperatures [K].

    Energies [J] are counted from the edge into the band; ``kane_gap_J`` is nan where the band is parabolic. Without
    a doping [1/m^3] that of the material serves.
    """
    t = np.asarray(temperature, dtype=float).ravel()
    n = material.doping.at(t) if doping is None else np.asarray(doping, dtype=float).ravel()
    response = material.crystal.response(t, n, material.grain_size)
    return [
        {
            "temperature_K": t,
            "name": band.name,
            "carrier": band.carrier,
            "degeneracy": band.degeneracy,
            **_parameters_at(band, t),
            "reduced_level_kT": response.reduced_level[k],
            "density_1_per_m3": response.density[k],
            "conductivity_share": response.channels[k].conductance / response.conductivity,
        }
        for k, band in enumerate(response.bands)
    ]


def _parameters_at(band: Band, t: Array) -> Columns:
    mass = at_temperature(band.mass, t, "mass")
    inertial, kane = band.inertial_mass, band.kane_gap
    return {
        "mass_electron_masses": mass,
        "inertial_mass_electron_masses": mass if inertial is None else at_temperature(inertial, t, "inertial mass"),
        "edge_offset_J": band.edge_offset(t),
        "kane_gap_J": np.full_like(t, np.nan) if kane is None else at_temperature(kane, t, "Kane gap"),
    }


def best(material: BandMaterial, temperature: ArrayLike) -> list[Columns]:
    """Return, for every temperature [K], the dopings of the largest zT and of the largest power factor.

    Within the bounds of the material and at its grain size; ``at_bound`` says ``lower`` or ``upper`` where the bound
    itself is the best, so that more may lie beyond. Each record holds what ``at_doping`` tells; so does a last
    one, ``as made``, of the doping the material has.
    """
    found = []
    for t in np.asarray(temperature, dtype=float).ravel():
        low, high = material.doping_bounds
        choices = {aim: best_doping(material, t, t, merit)[0] for aim, merit in _AIMS.items()}
        choices["as made"] = float(material.doping.at(t))
        for aim, doping in choices.items():
            bound = "lower" if doping <= low * (1 + 1e-6) else "upper" if doping >= high * (1 - 1e-6) else ""
            row = {name: column[0].item() for name, column in at_doping(material, [t], [doping]).items()}
            found.append({"aim": aim, "at_bound": bound} | row)
    return found


def against_doping(material: BandMaterial, temperature: ArrayLike, points: int = 41) -> Columns:
    """Return ``at_doping`` between the bounds, evenly in the logarithm, the first temperature [K] first."""
    low, high = material.doping_bounds
    n = np.clip(np.geomspace(low, high, points), low, high)
    t = np.asarray(temperature, dtype=float).ravel()
    return at_doping(material, np.repeat(t, points), np.tile(n, t.size))


def made(material: Material, doping: float | None = None, grain_size: float | None = None) -> Material:
    """Return the material at another doping [1/m^3] or grain size [m]; as it is without both.

    Raises
    ------
    InputError
        It is measured, has no grains, or one of the two is out of its bounds.
    """
    if doping is None and grain_size is None:
        return material
    wish = "--doping" if doping is not None else "--grain-size"
    return computed(material, wish).made(None if doping is None else Doping(doping), grain_size)
