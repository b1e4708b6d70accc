"""Linear response: what the moments of the transport distribution say about a conductor."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.transport.constants import BOLTZMANN, CHARGE, SEEBECK_UNIT


class Channel(NamedTuple):
    """Moments of one band, level or table over the Fermi window, arrays of one shape.

    ``conductance`` is the integral of Xi (-df/dE) [S/m], ``distance`` the mean of (E - mu)/kT weighted with
    it, E the electron energy for every carrier, ``spread`` the integral of Xi (-df/dE) ((E - mu)/kT -
    distance)^2 [S/m].
    """

    conductance: Array
    distance: Array
    spread: Array


class CurrentDriven(NamedTuple):
    """E = resistivity J + seebeck dT/dx and q = peltier J - thermal_conductivity dT/dx, per metre.

    [ohm m], [V/K], [V], [W/m/K]; E is the gradient of the electrochemical potential over +e.
    """

    resistivity: Array
    seebeck: Array
    peltier: Array
    thermal_conductivity: Array

    @property
    def kelvin_ratio(self) -> Array:
        """Peltier over Seebeck coefficient [K]; the second Kelvin relation says it is the temperature."""
        return np.asarray(self.peltier / self.seebeck)

    def of_sample(self, length: ArrayLike, area: ArrayLike) -> tuple[Array, Array, Array, Array]:
        """Return S [V/K], Peltier coefficient [V], conductance [S], heat conductance at zero current
        [W/K].
        """
        shape = np.asarray(area, dtype=float) / np.asarray(length, dtype=float)
        return self.seebeck, self.peltier, shape / self.resistivity, shape * self.thermal_conductivity


class VoltageDriven(NamedTuple):
    """J = conductivity E - thermal_current dT/dx and q = peltier_heat E - heat_conductivity dT/dx, per metre.

    [S/m], [A/m/K], [A/m], [W/m/K]; E is the gradient of the electrochemical potential over +e, the last one
    the heat conductivity at zero voltage.
    """

    conductivity: Array
    thermal_current: Array
    peltier_heat: Array
    heat_conductivity: Array

    def current_driven(self) -> CurrentDriven:
        """Return the coefficients of the same conductor driven by current, by inverting the two equations."""
        seebeck = self.thermal_current / self.conductivity
        return CurrentDriven(
            np.asarray(1 / self.conductivity),
            np.asarray(seebeck),
            np.asarray(self.peltier_heat / self.conductivity),
            np.asarray(self.heat_conductivity - self.peltier_heat * seebeck),
        )

    def of_sample(self, length: ArrayLike, area: ArrayLike) -> tuple[Array, Array, Array, Array]:
        """Return the four coefficients times area/length [S], [A/K], [A], [W/K], for voltage and temperature
        difference.
        """
        shape = np.asarray(area, dtype=float) / np.asarray(length, dtype=float)
        a, b, c, d = (np.asarray(shape * value) for value in self)
        return a, b, c, d


@dataclass(frozen=True, eq=False)
class Response:
    """Electronic properties at temperatures and chemical potentials of one shape, from channels that add.

    The L_j of the channels add; S and kappa_e come out once, at the end. Written with the mean distance and
    the spread instead of L_1 and L_2, kappa_e is a sum of positive terms; its second part, present only with
    two or more channels, is the bipolar one. Mahan and Sofo 1996, PNAS 93, 7436, doi 10.1073/pnas.93.15.7436.

    Parameters
    ----------
    temperature, chemical_potential : ndarray
        [K], [J].
    channels : tuple of Channel
        One for each band, level or conductance function.
    """

    temperature: Array
    chemical_potential: Array
    channels: tuple[Channel, ...]

    def __post_init__(self) -> None:
        """Refuse a conductor without carriers."""
        total = self.conductivity
        wrong = ~((total > 0) & np.isfinite(total))
        if wrong.any():
            k = np.unravel_index(np.argmax(wrong), total.shape)
            raise InputError(
                f"no carriers: conductivity {total[k]:.3g} S/m at {self.temperature[k]:.6g} K and chemical "
                f"potential {self.chemical_potential[k] / CHARGE:.6g} eV but must be finite and above 0; "
                "raise the temperature or the doping"
            )

    @cached_property
    def conductivity(self) -> Array:
        """Electrical conductivity sigma = L_0 [S/m]."""
        return np.asarray(sum(c.conductance for c in self.channels))

    @cached_property
    def distance(self) -> Array:
        """Mean distance of the conducting electrons from the chemical potential, (E - mu)/kT."""
        return np.asarray(sum(c.conductance * c.distance for c in self.channels) / self.conductivity)

    @property
    def seebeck_coefficient(self) -> Array:
        """S = -L_1 / (T L_0) = -(k/e) times the mean distance [V/K]."""
        return np.asarray(-SEEBECK_UNIT * self.distance)

    @property
    def reduced_seebeck(self) -> Array:
        """S in units of k/e, signed."""
        return np.asarray(-self.distance)

    @cached_property
    def own_thermal_conductivity(self) -> Array:
        """Sum of the kappa_e every channel would have alone [W/m/K]."""
        spread = np.asarray(sum(c.spread for c in self.channels))
        return np.asarray(SEEBECK_UNIT**2 * self.temperature * spread)

    @cached_property
    def bipolar_thermal_conductivity(self) -> Array:
        """kappa_e minus the sum over the channels alone [W/m/K]: carriers that go round between channels."""
        apart = sum(c.conductance * (c.distance - self.distance) ** 2 for c in self.channels)
        return np.asarray(SEEBECK_UNIT**2 * self.temperature * apart)

    @cached_property
    def electronic_thermal_conductivity(self) -> Array:
        """kappa_e = (L_2 - L_1^2 / L_0) / T, at zero current [W/m/K]."""
        return self.own_thermal_conductivity + self.bipolar_thermal_conductivity

    @property
    def bipolar_share(self) -> Array:
        """Share of the bipolar part in kappa_e; 0 where kappa_e is 0."""
        total = self.electronic_thermal_conductivity
        return np.divide(self.bipolar_thermal_conductivity, total, out=np.zeros_like(total), where=total > 0)

    @property
    def lorenz_number(self) -> Array:
        """L = kappa_e / (sigma T) [W ohm/K^2], the bipolar part included."""
        return np.asarray(self.electronic_thermal_conductivity / (self.conductivity * self.temperature))

    @property
    def power_factor(self) -> Array:
        """Sigma S^2 [W/m/K^2]."""
        return np.asarray(self.conductivity * self.seebeck_coefficient**2)

    @property
    def transport_integrals(self) -> Array:
        """L_0 [S/m], L_1 [S V/m], L_2 [S V^2/m] of all channels, first axis j; q = +e for every band."""
        unit = BOLTZMANN * self.temperature / CHARGE
        second = sum(c.spread + c.conductance * c.distance**2 for c in self.channels)
        return np.stack([self.conductivity, self.conductivity * self.distance * unit, np.asarray(second) * unit**2])

    def voltage_driven(self) -> VoltageDriven:
        """Return the coefficients driven by voltage and temperature difference, from the L_j."""
        zeroth, first, second = self.transport_integrals
        return VoltageDriven(
            zeroth, np.asarray(-first / self.temperature), -first, np.asarray(second / self.temperature)
        )

    def current_driven(self) -> CurrentDriven:
        """Return the coefficients driven by current and temperature difference."""
        seebeck = self.seebeck_coefficient
        return CurrentDriven(
            np.asarray(1 / self.conductivity),
            seebeck,
            np.asarray(seebeck * self.temperature),
            self.electronic_thermal_conductivity,
        )


def combine(*responses: Response) -> Response:
    """Return the response of conductors in parallel that have equal temperatures and chemical potentials.

    Raises
    ------
    InputError
        Their temperatures or chemical potentials differ.
    """
    first = responses[0]
    for other in responses[1:]:
        if not (
            np.array_equal(first.temperature, other.temperature)
            and np.array_equal(first.chemical_potential, other.chemical_potential)
        ):
            raise InputError(
                "conductors in parallel have different temperatures or chemical potentials; give equal ones"
            )
    channels = tuple(channel for response in responses for channel in response.channels)
    return Response(first.temperature, first.chemical_potential, channels)
