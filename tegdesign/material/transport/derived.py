"""What people read from transport properties: reduced level, weighted mobility, quality factor, published
rules.
"""

from __future__ import annotations

from math import pi

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.errors import ConvergenceError, InputError
from tegdesign.material.curve import Array
from tegdesign.material.transport.constants import (
    BOLTZMANN,
    CHARGE,
    ELECTRON_MASS,
    PLANCK,
    SEEBECK_UNIT,
)
from tegdesign.material.transport.law import above_zero
from tegdesign.material.transport.window import fermi_window, half_power


def single_band(level: ArrayLike, exponent: float = -0.5) -> tuple[Array, Array, Array]:
    """Return reduced conductivity, |S| in k/e and Lorenz number in (k/e)^2 of one parabolic band with tau ~
    E^exponent.

    The first is p F_(p-1)(level) with p = exponent + 1.5, so F_0 for acoustic phonons (exponent -0.5);
    levels of any shape.
    """
    window = fermi_window(level)
    total, mean, spread = window.moments(half_power(window.energy, exponent + 1.5))
    return total, mean, np.asarray(spread / total)


def level_from_seebeck(seebeck: ArrayLike, exponent: float = -0.5) -> Array:
    """Return the reduced level of the parabolic band with tau ~ E^exponent that has this Seebeck coefficient
    [V/K].

    Its sign does not matter. One band only: near intrinsic conduction the level is not that of the material.

    Raises
    ------
    InputError
        A Seebeck coefficient is zero, not finite, or so large (above 0.05 V/K) that no carriers are left.
    ConvergenceError
        The level was not found.
    """
    wanted = np.abs(np.asarray(seebeck, dtype=float)) / SEEBECK_UNIT
    above_zero(wanted, "Seebeck coefficient in k/e")
    if wanted.max() > 600:
        raise InputError(f"Seebeck coefficient is {wanted.max() * SEEBECK_UNIT:.4g} V/K but must be below 0.05 V/K")
    p = exponent + 1.5
    # Bounds: the mean energy is at least the classical p + 1, and |S| lies below the Mott value plus the
    # classical one.
    low, high = p + 1 - wanted, pi**2 * p / (3 * wanted) + p + 1
    level = np.where(wanted > 1.5, low, high - p - 1)
    level = np.clip(level, low, high)
    for _ in range(100):
        window = fermi_window(level)
        part = window.weight * half_power(window.energy, p)
        change = part * np.tanh(window.distance / 2)  # derivative of the window by the level
        total, first = part.sum(axis=-1), (part * window.energy).sum(axis=-1)
        slope = ((change * window.energy).sum(axis=-1) * total - first * change.sum(axis=-1)) / total**2 - 1
        error = (part * window.distance).sum(axis=-1) / total - wanted  # falls with the level
        low, high = np.where(error >= 0, level, low), np.where(error <= 0, level, high)
        step = -error / slope
        if np.all(np.abs(step) <= 1e-11 * np.maximum(1.0, np.abs(level))):
            return np.asarray(level + step)
        level = level + step
        level = np.where((level > low) & (level < high), level, (low + high) / 2)
    raise ConvergenceError("reduced level not found from the Seebeck coefficient in 100 steps; check its values")


def transport_coefficient(weighted_mobility: ArrayLike, temperature: ArrayLike) -> Array:
    """Return sigma_E0 [S/m], with sigma = sigma_E0 F_0(level), from weighted mobility [m^2/(V s)] and
    temperature [K].

    sigma_E0 = 8 pi e (2 m_e kT)^1.5 mu_w / (3 h^3): Kang and Snyder 2017, arXiv 1710.06896; acoustic phonons.
    """
    t = np.asarray(temperature, dtype=float)
    states = 8 * pi * CHARGE * (2 * ELECTRON_MASS * BOLTZMANN * t) ** 1.5 / (3 * PLANCK**3)
    return np.asarray(states * np.asarray(weighted_mobility, dtype=float))


def weighted_mobility(seebeck: ArrayLike, resistivity: ArrayLike, temperature: ArrayLike) -> Array:
    """Return the weighted mobility mu_0 (m/m_e)^1.5 [m^2/(V s)] from S [V/K], rho [ohm m] and T [K], which
    broadcast.

    Exact for one parabolic band with acoustic scattering; raises as ``level_from_seebeck``.
    """
    above_zero(resistivity, "resistivity [ohm m]")
    reduced, _, _ = single_band(level_from_seebeck(seebeck))
    conductivity = 1 / np.asarray(resistivity, dtype=float)
    return np.asarray(conductivity / (reduced * transport_coefficient(1.0, temperature)))


def weighted_mobility_rule(seebeck: ArrayLike, resistivity: ArrayLike, temperature: ArrayLike) -> Array:
    """Return the weighted mobility [m^2/(V s)] by the published approximation, arguments as above.

    Within 3.3 % above the exact one for 20 to 300 uV/K. Snyder et al. 2020, Adv. Mater. 32, 2001537,
    doi 10.1002/adma.202001537.
    """
    s = np.abs(np.asarray(seebeck, dtype=float)) / SEEBECK_UNIT
    t = np.asarray(temperature, dtype=float)
    classical = np.exp(s - 2) / (1 + np.exp(-5 * (s - 1)))
    metallic = 3 / pi**2 * s / (1 + np.exp(5 * (s - 1)))
    scale = 331e-4 * 1e-5 / np.asarray(resistivity, dtype=float) * (t / 300) ** -1.5
    return np.asarray(scale * (classical + metallic))


def quality_factor(weighted_mobility: ArrayLike, temperature: ArrayLike, lattice_conductivity: ArrayLike) -> Array:
    """Return B = (k/e)^2 sigma_E0 T / kappa_lattice, no unit, from [m^2/(V s)], [K] and [W/m/K].

    Kang and Snyder 2017, arXiv 1710.06896. With the level it fixes the figure of merit of one acoustic band.
    """
    above_zero(lattice_conductivity, "lattice_conductivity [W/m/K]")
    coefficient = transport_coefficient(weighted_mobility, temperature)
    return np.asarray(SEEBECK_UNIT**2 * coefficient * np.asarray(temperature, dtype=float) / lattice_conductivity)
