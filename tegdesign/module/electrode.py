"""Electrodes that join the legs, and the leads: resistance of metal strips."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.material.curve import Array

# Annealed copper at 20 degC and its temperature coefficient: IEC 60028 (1.7241e-8 ohm m, 0.00393 1/K).
COPPER_RESISTIVITY = 1.7241e-8
COPPER_COEFFICIENT = 0.00393
REFERENCE_TEMPERATURE = 293.15


def resistivity_at(temperature: ArrayLike, resistivity: ArrayLike, coefficient: ArrayLike) -> Array:
    """Return rho_20 (1 + coefficient (T - 293.15 K)) [ohm m]; linear, for metals from about 200 K to 900 K."""
    rise = np.asarray(temperature, dtype=float) - REFERENCE_TEMPERATURE
    return np.asarray(np.asarray(resistivity) * (1 + np.asarray(coefficient) * rise))


def path_over_section(side: ArrayLike, gap: ArrayLike, thickness: ArrayLike) -> Array:
    """Return (gap/2 + side/3) / (thickness side) [1/m] of the strip that serves one end of one square leg.

    Current enters evenly over the leg face, so the mean path under the leg is a third of its side; right to 0.1 %
    of the leg resistance against two-dimensional finite elements (tests/outside/test_fem_leg.py).
    """
    a, g, t = (np.asarray(v, dtype=float) for v in (side, gap, thickness))
    return np.asarray((g / 2 + a / 3) / (t * a))
