"""What the rest of the program knows of a material, whichever kind of file it came from."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.errors import DataRangeError
from tegdesign.material.curve import Array, Curve
from tegdesign.material.lorenz import lorenz_rule

if TYPE_CHECKING:
    import pandas as pd

Polarity = Literal["n", "p"]


@dataclass(frozen=True)
class Stated:
    """A number and the words on where it comes from; ``(memory)`` in them is passed on to every print."""

    value: float
    basis: str = ""


@dataclass(frozen=True, eq=False)
class Material:
    """Seebeck coefficient, resistivity and thermal conductivity of an n- or p-type material, with its papers.

    Parameters
    ----------
    name, composition : str
        Name in the library and chemical composition.
    polarity : "n" or "p"
        Sign of the Seebeck coefficient.
    seebeck_coefficient, resistivity, thermal_conductivity : Curve
        [V/K], [ohm m], [W/m/K]; each may have its own temperature list.
    service_limit : Stated
        Highest temperature for continuous use [K].
    density : Stated
        [kg/m^3].
    air_limit : Stated or None
        Temperature above which air or vacuum attacks the bare material [K].
    source, doi, verification : str
        Paper, its identifier, and what of it was seen.
    compilation, obtained : str
        Data set through which the values came, and what was done to them.
    hazards, hazard_tags : str, tuple of str
        What to mind, in words, and the same as single words to filter by.
    uncertainty : tuple of float
        Relative standard uncertainty of the three properties, in the order above.
    warnings : tuple of str
        To be passed on wherever the material is used.
    path : str
        File the material was read from.
    """

    name: str
    composition: str
    polarity: Polarity
    seebeck_coefficient: Curve
    resistivity: Curve
    thermal_conductivity: Curve
    service_limit: Stated
    density: Stated
    source: str
    doi: str = ""
    verification: str = ""
    compilation: str = ""
    obtained: str = ""
    air_limit: Stated | None = None
    hazards: str = ""
    hazard_tags: tuple[str, ...] = ()
    notes: tuple[str, ...] = ()
    uncertainty: tuple[float, float, float] = (0.06, 0.08, 0.11)
    uncertainty_basis: str = ""
    warnings: tuple[str, ...] = ()
    path: str = ""

    @property
    def kind(self) -> str:
        """Kind of its file: ``table`` of measured points, ``bands`` when it is computed."""
        return "table"

    @property
    def majority_doping(self) -> float | None:
        """Carriers that the dopants give, at the cold end where graded [1/m^3]; None where not known."""
        return None

    @property
    def range(self) -> tuple[float, float]:
        """Temperatures between which all three properties are known [K]."""
        ranges = [c.range for c in (self.seebeck_coefficient, self.resistivity, self.thermal_conductivity)]
        return max(r[0] for r in ranges), min(r[1] for r in ranges)

    def outside(self, low: ArrayLike, high: ArrayLike) -> tuple[Array, Array]:
        """Return by how many kelvin ``low`` lies below and ``high`` above the known range (0 when inside)."""
        first, last = self.range
        return np.maximum(first - np.asarray(low, dtype=float), 0.0), np.maximum(
            np.asarray(high, dtype=float) - last, 0.0
        )

    @property
    def measured_temperatures(self) -> Array:
        """All temperatures at which a property was measured [K], rising."""
        lists = [
            c.temperature for c in (self.seebeck_coefficient, self.resistivity, self.thermal_conductivity)
        ]
        return np.unique(np.concatenate(lists))

    def properties(self, temperature: ArrayLike | None = None) -> dict[str, Array]:
        """Return the properties as columns whose names carry the unit, shape (K,) each.

        Without temperatures [K] those of all its points serve; nan says that a property is not known there.

        Raises
        ------
        DataRangeError
            A temperature asked for lies outside the range of the data.
        """
        if temperature is None:
            t = self.measured_temperatures
        else:
            t = np.atleast_1d(np.asarray(temperature, dtype=float))
            first, last = self.range
            wrong = t[~((t >= first) & (t <= last))]
            if wrong.size:
                raise DataRangeError(
                    f"{self.name} at {wrong[0]:.6g} K: its properties are known from {first:.6g} K to "
                    f"{last:.6g} K; ask inside"
                )
        s, rho, kappa = (
            np.where((t >= curve.range[0]) & (t <= curve.range[1]), curve(t), np.nan)
            for curve in (self.seebeck_coefficient, self.resistivity, self.thermal_conductivity)
        )
        return {
            "temperature_K": t,
            "seebeck_coefficient_V_per_K": s,
            "resistivity_ohm_m": rho,
            "thermal_conductivity_W_per_m_K": kappa,
            "power_factor_W_per_m_K2": s**2 / rho,
            "figure_of_merit": s**2 * t / (rho * kappa),
        }

    def figure_of_merit(self, temperature: ArrayLike) -> Array:
        """Return zT = S^2 T / (rho kappa) at a temperature [K]."""
        t = np.asarray(temperature, dtype=float)
        return np.asarray(
            self.seebeck_coefficient(t) ** 2 * t / (self.resistivity(t) * self.thermal_conductivity(t))
        )

    def electronic_thermal_conductivity(self, temperature: ArrayLike) -> Array:
        """Return the part of the carriers in kappa [W/m/K] at a temperature [K], by ``lorenz_rule``."""
        t = np.asarray(temperature, dtype=float)
        return np.asarray(lorenz_rule(self.seebeck_coefficient(t)) * t / self.resistivity(t))

    def lattice_thermal_conductivity(self, temperature: ArrayLike) -> Array:
        """Return kappa less the part of the carriers [W/m/K] at a temperature [K]."""
        t = np.asarray(temperature, dtype=float)
        return np.asarray(self.thermal_conductivity(t) - self.electronic_thermal_conductivity(t))

    @property
    def electronic_basis(self) -> str:
        """Where the electronic part comes from."""
        return "estimated by the Lorenz number of Kim et al. 2015, doi 10.1063/1.4908244; bipolar part in the rest"

    def compatibility_factor(self, temperature: ArrayLike) -> Array:
        """Return s = (sqrt(1 + zT) - 1) / (S T) [1/V].

        Snyder and Ursell 2003, Phys. Rev. Lett. 91, 148301, doi 10.1103/PhysRevLett.91.148301.
        """
        t = np.asarray(temperature, dtype=float)
        return np.asarray((np.sqrt(1 + self.figure_of_merit(t)) - 1) / (self.seebeck_coefficient(t) * t))


def to_frame(material: Material, temperature: ArrayLike | None = None) -> pd.DataFrame:
    """Return ``material.properties(temperature)`` as a table, same columns, units and errors."""
    import pandas as pd

    return pd.DataFrame(material.properties(temperature))
