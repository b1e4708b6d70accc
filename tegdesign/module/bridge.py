"""Thermal bridges from plate to plate beside the module: bolts and frames that clamp or seal it."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.material.curve import Array


def bar(area: ArrayLike, length: ArrayLike, conductivity: ArrayLike) -> Array:
    """Return k A / l [W/K] of a frame, seal or spacer: section [m^2], distance of the plates [m], [W/m/K].

    One-dimensional: ends at the temperatures of the plates, no heat lost on the way.
    """
    section, distance, k = (np.asarray(v, dtype=float) for v in (area, length, conductivity))
    return np.asarray(k * section / distance)


def bolts(
    number: ArrayLike,
    diameter: ArrayLike,
    length: ArrayLike,
    conductivity: ArrayLike,
    washer_resistance: ArrayLike = 0.0,
) -> Array:
    """Return the conductance [W/K] of bolts from plate to plate, side by side.

    Parameters
    ----------
    number : array_like
        Of bolts.
    diameter, length : array_like
        Of the shank, and between the places where head and nut touch their plates [m].
    conductivity : array_like
        Of the bolt [W/m/K].
    washer_resistance : array_like
        Of insulating washers and sleeves of one bolt, in series with it [K/W].
    """
    n, w = np.asarray(number, dtype=float), np.asarray(washer_resistance, dtype=float)
    one = bar(np.pi / 4 * np.asarray(diameter, dtype=float) ** 2, length, conductivity)
    return np.asarray(n * one / (1 + w * one))
