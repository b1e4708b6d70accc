"""One band, parabolic or Kane: its states and its transport distribution."""

from __future__ import annotations

from dataclasses import dataclass
from math import pi
from typing import Literal, NamedTuple

import numpy as np
from numpy.typing import NDArray

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.transport.constants import BOLTZMANN, CHARGE, ELECTRON_MASS, HBAR
from tegdesign.material.transport.law import Law, above_zero, at_temperature, positive_at
from tegdesign.material.transport.scattering.states import Mechanism, States, Surroundings
from tegdesign.material.transport.window import Window

Carrier = Literal["electron", "hole"]


class Edge(NamedTuple):
    """What a band takes from the temperature, shape (P, 1) each.

    Temperature [K], masses at the edge [kg], and kT over Kane's energy (no unit; None when parabolic).
    """

    temperature: Array
    mass: Array
    inertial_mass: Array
    bend: Array | None

    def part(self, chosen: slice | NDArray[np.intp]) -> Edge:
        """Return the same of some of the points."""
        bend = None if self.bend is None else self.bend[chosen]
        return Edge(self.temperature[chosen], self.mass[chosen], self.inertial_mass[chosen], bend)


@dataclass(frozen=True)
class Band:
    """Equal, isotropic valleys of one kind of carrier; every energy is counted from the band edge into the
    band.

    Parameters
    ----------
    carrier : "electron" or "hole"
        Conduction or valence band.
    mass : float or law
        Density-of-states mass of one valley at the edge, in electron masses.
    scattering : tuple of Mechanism
        Their rates add at every energy (Matthiessen's rule inside the integral).
    inertial_mass : float or law, optional
        Mass that governs the velocity, in electron masses; ``mass`` if not given.
    degeneracy : float
        Number of valleys.
    offset : float or law
        How far the edge lies inside the band from the principal edge of its kind [J]; may be negative.
    kane_gap : float or law, optional
        Energy E_k [J] of Kane's dispersion E (1 + E/E_k) = (hbar k)^2 / (2 m); parabolic if not given.
    name : str
        For messages and tables.
    """

    carrier: Carrier
    mass: Law
    scattering: tuple[Mechanism, ...]
    inertial_mass: Law | None = None
    degeneracy: float = 1.0
    offset: Law = 0.0
    kane_gap: Law | None = None
    name: str = ""

    def __post_init__(self) -> None:
        """Refuse what can be seen to be wrong without a temperature."""
        if self.carrier not in ("electron", "hole"):
            raise InputError(f"carrier of {self.label} is {self.carrier!r}; write 'electron' or 'hole'")
        if not self.scattering:
            raise InputError(f"scattering of {self.label} is empty; give one or more mechanisms")
        above_zero(self.degeneracy, f"degeneracy of {self.label}")
        for value, what in (
            (self.mass, "mass"),
            (self.inertial_mass, "inertial_mass"),
            (self.kane_gap, "kane_gap"),
        ):
            if isinstance(value, (int, float)):
                above_zero(value, f"{what} of {self.label}")

    @property
    def label(self) -> str:
        """The band in words, for messages."""
        return f"band {self.name}" if self.name else f"the {self.carrier} band"

    @property
    def sign(self) -> int:
        """Direction of the band on the energy axis and sign of minus its charge: 1 for electrons, -1 for
        holes.
        """
        return 1 if self.carrier == "electron" else -1

    def edge(self, temperature: Array) -> Edge:
        """Return what the band takes from temperatures [K], shape (P,).

        Raises
        ------
        InputError
            A mass or the Kane gap is not above 0 at one of the temperatures.
        """
        t = temperature[..., None]
        mass = positive_at(self.mass, t, f"mass of {self.label}") * ELECTRON_MASS
        inertial = mass
        if self.inertial_mass is not None:
            inertial = positive_at(self.inertial_mass, t, f"inertial_mass of {self.label}") * ELECTRON_MASS
        bend = None
        if self.kane_gap is not None:
            bend = BOLTZMANN * t / positive_at(self.kane_gap, t, f"kane_gap of {self.label}")
        return Edge(t, mass, inertial, bend)

    def states(self, temperature: Array, energy: Array) -> States:
        """Return the states at energies [kT above the edge], shape (P, N), for temperatures [K], shape (P,);
        raises as ``edge``.
        """
        return states_above(self.edge(temperature), energy)

    def distribution(self, states: States, around: Surroundings) -> Array:
        """Return the transport distribution Xi [S/m] of the states, in their shape.

        Xi = e^2 (v^2/3) tau g = e^2 N (2 m)^1.5 gamma^1.5 tau / (3 pi^2 hbar^3 m_inertial gamma').

        Raises
        ------
        InputError
            Nothing scatters the carriers.
        """
        return self._conduction_unit(states) * self._conduction(states, around)

    def conduction(self, states: States, around: Surroundings, window: Window) -> tuple[Array, Array, Array]:
        """Return conductance [S/m], mean distance [kT] and spread [S/m] of Xi over the window, shape (P,) each;
        raises as ``distribution``.
        """
        conductance, distance, spread = window.moments(self._conduction(states, around))
        unit = self._conduction_unit(states)[:, 0]
        return conductance * unit, distance, spread * unit

    def _conduction(self, states: States, around: Surroundings) -> Array:
        """Return gamma^1.5 tau / gamma' [J^1.5 s]."""
        rate = self.scattering[0].rate(states, around)
        for mechanism in self.scattering[1:]:
            rate += mechanism.rate(states, around)
        if not rate.min() > 0:
            raise InputError(
                f"scattering of {self.label} is 0 1/s but must be above 0 (ionised impurities alone do "
                "that at zero net doping); give their density or a second mechanism"
            )
        rate *= states.slope
        return np.divide(states.volume, rate, out=rate)

    def _conduction_unit(self, states: States) -> Array:
        """Return what turns it into Xi, one value a point."""
        return np.asarray(CHARGE**2 * self._states_unit(states) / states.inertial_mass)

    def _states_unit(self, states: States) -> Array:
        return np.asarray(self.degeneracy * (2 * states.mass) ** 1.5 / (3 * pi**2 * HBAR**3))

    def carriers(self, states: States, window: Window) -> Array:
        """Return the carriers of the window [1/m^3], shape (P,): the integral of the states below each energy,
        N (2 m gamma)^1.5 / (3 pi^2 hbar^3).
        """
        return np.asarray(self._states_unit(states)[:, 0] * window.integral(states.volume))

    def carriers_slope(self, states: States, window: Window) -> Array:
        """Return the change of the carriers with the level [1/(J m^3)], shape (P,): the integral of the density
        of states, both spins and all valleys.
        """
        return np.asarray(2 * self.degeneracy * window.integral(states.density))

    def edge_offset(self, temperature: Array) -> Array:
        """Return the offset of the edge [J] at temperatures [K], in their shape."""
        return at_temperature(self.offset, temperature, f"offset of {self.label}")


def states_above(edge: Edge, energy: Array) -> States:
    """Return the states at energies [kT above the edge], shape (P, N)."""
    if edge.bend is None:
        gamma, slope = BOLTZMANN * edge.temperature * energy, np.ones(1)
    else:
        slope = 2 * edge.bend * energy
        slope += 1
        gamma = slope + 1  # twice 1 + E/E_kane
        gamma *= energy
        gamma *= BOLTZMANN / 2 * edge.temperature
    return States(edge.temperature, energy, gamma, slope, edge.mass, edge.inertial_mass)
