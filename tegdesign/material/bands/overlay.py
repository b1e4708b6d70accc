"""A computed material laid over the measured one of its family: how far its properties are off, and where."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from tegdesign.errors import InputError
from tegdesign.material.bands.material import BandMaterial
from tegdesign.material.curve import Array
from tegdesign.material.material import Material

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True)
class Deviation:
    """Of one property, computed less measured as a share of measured [%]: the largest with its sign, where, rms."""

    name: str
    largest_percent: float
    at_K: float
    rms_percent: float

    @property
    def text(self) -> str:
        """The three figures in words."""
        name = self.name.replace("_", " ")
        return f"{name}: largest {self.largest_percent:+.1f} % at {self.at_K:.4g} K, rms {self.rms_percent:.1f} %"


@dataclass(frozen=True, eq=False)
class Overlay:
    """Deviations of a computed material from a measured one, at the measured points both reach.

    Parameters
    ----------
    material, measured : str
        Names of the two.
    temperature : ndarray, shape (K,)
        [K], rising.
    seebeck_coefficient, conductivity, thermal_conductivity : ndarray, shape (K,)
        Computed less measured as a share of measured [%].
    """

    material: str
    measured: str
    temperature: Array
    seebeck_coefficient: Array
    conductivity: Array
    thermal_conductivity: Array

    @property
    def deviations(self) -> tuple[Deviation, Deviation, Deviation]:
        """The figures of the three properties, in the order above."""
        return (
            self._of("seebeck_coefficient", self.seebeck_coefficient),
            self._of("conductivity", self.conductivity),
            self._of("thermal_conductivity", self.thermal_conductivity),
        )

    def _of(self, name: str, percent: Array) -> Deviation:
        k = int(np.argmax(np.abs(percent)))
        rms = float(np.sqrt(np.mean(percent**2)))
        return Deviation(name, float(percent[k]), float(self.temperature[k]), rms)

    @property
    def texts(self) -> tuple[str, ...]:
        """A line that says what is compared, and one a property."""
        first, last = self.temperature[[0, -1]]
        head = f"laid over {self.measured} at {self.temperature.size} points from {first:.4g} K to {last:.4g} K"
        return (head, *(deviation.text for deviation in self.deviations))

    def to_frame(self) -> pd.DataFrame:
        """Return one row a temperature [K], one column a property [%]."""
        import pandas as pd

        return pd.DataFrame(
            {
                "temperature_K": self.temperature,
                "seebeck_coefficient_deviation_percent": self.seebeck_coefficient,
                "conductivity_deviation_percent": self.conductivity,
                "thermal_conductivity_deviation_percent": self.thermal_conductivity,
            }
        )


def overlay(material: BandMaterial, measured: Material) -> Overlay:
    """Return how far the computed material is off the measured one, at its doping and grain size as they are.

    Raises
    ------
    InputError
        The two have no measured temperature in common, or are of unlike polarity.
    """
    if material.polarity != measured.polarity:
        raise InputError(
            f"{material.name} is of polarity {material.polarity}, {measured.name} of polarity {measured.polarity}; "
            "lay it over a material of its own polarity"
        )
    first, last = max(material.range[0], measured.range[0]), min(material.range[1], measured.range[1])
    t = measured.measured_temperatures
    t = t[(t >= first) & (t <= last)]
    if t.size == 0:
        raise InputError(
            f"{measured.name} has no point between {material.range[0]:.6g} K and {material.range[1]:.6g} K, where "
            f"{material.name} is known; lay it over another material"
        )
    made, real = material.properties(t), measured.properties(t)
    s = made["seebeck_coefficient_V_per_K"] / real["seebeck_coefficient_V_per_K"]
    sigma = real["resistivity_ohm_m"] / made["resistivity_ohm_m"]
    kappa = made["thermal_conductivity_W_per_m_K"] / real["thermal_conductivity_W_per_m_K"]
    return Overlay(material.name, measured.name, t, *(100 * (ratio - 1) for ratio in (s, sigma, kappa)))
