"""Conditions that several kinds of load share; V and I are of one module, V is taken as straight in I."""

from __future__ import annotations

import numpy as np

from tegdesign.material.curve import Array
from tegdesign.system.load.base import Terminal

_BLOCKED = 1e-6


def ohmic(at: Terminal, number: Array) -> tuple[Array, Array]:
    """Return V - I R of one module and its slope."""
    return at.voltage - at.current * number, at.voltage_slope - number


def most_power(at: Terminal, number: Array) -> tuple[Array, Array]:
    """Return dP/dI = V + I dV/dI and its slope; exact once the condition is met."""
    return at.voltage + at.current * at.voltage_slope, 2 * at.voltage_slope


def aim(at: Terminal, condition: Array, slope: Array) -> Array:
    """Return the current [A] at which a condition would be zero if it were straight."""
    return at.current - condition / slope


def aim_at_voltage(at: Terminal, held: Array, resistance: Array | float = 0.0) -> Array:
    """Return the current [A] at which V = held [V] + I x resistance [ohm]; below zero where V is too low for it."""
    return aim(at, at.voltage - held - at.current * resistance, at.voltage_slope - resistance)


def forward(at: Terminal, wanted: Array) -> tuple[Array, Array]:
    """Return I - wanted and its slope, or I and its slope where the load blocks.

    Newton's method changes branch by itself and comes to rest exactly at zero current. A current below a millionth of
    the short circuit counts as blocked: it is a difference of voltages that agree to as many digits, and its own
    digits would be rounding.
    """
    flows = wanted > _BLOCKED * np.abs(at.voltage / at.voltage_slope)
    return at.current - np.where(flows, wanted, 0.0), np.ones_like(at.current)
