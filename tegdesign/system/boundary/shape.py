"""How boundaries depart from a straight law: fourth powers, powers of the difference, tables."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from tegdesign.material.curve import Array, monotone_slopes
from tegdesign.system.law import Shape


@dataclass(frozen=True)
class FourthPower(Shape):
    """f = s |T| T^3, with s = emittance sigma area [W/K^4]; odd in T so that iterations may wander."""

    def evaluate(self, numbers: Array, temperature: Array, heat: Array) -> tuple[Array, Array, Array]:
        """Return s T^4 and its derivatives."""
        steep = numbers[0] * np.abs(temperature) ** 3
        return steep * temperature, 4 * steep, np.zeros_like(heat)


@dataclass(frozen=True)
class PowerOfDifference(Shape):
    """f = -g |T_far - T|^n (T_far - T): numbers g [W/K^(1+n)], T_far [K], n."""

    def evaluate(self, numbers: Array, temperature: Array, heat: Array) -> tuple[Array, Array, Array]:
        """Return the heat that a film h ~ difference^n brings, negative, and its derivatives."""
        conductance, far, exponent = numbers
        difference = far - temperature
        own = conductance * np.abs(difference) ** exponent
        return -own * difference, (1 + exponent) * own, np.zeros_like(heat)


@dataclass(frozen=True)
class TabledDrop(Shape):
    """f = drop [K] of a table of drop over heat [W], odd in heat: number of modules that share the table.

    ``heats`` and ``drops`` rise from (0, 0); between the points a monotone cubic, beyond the last one its chord, for
    iterations only: such states are not known.
    """

    heats: tuple[float, ...]
    drops: tuple[float, ...]

    @cached_property
    def _points(self) -> tuple[Array, Array, Array]:
        x, y = np.array(self.heats), np.array(self.drops)
        return x, y, monotone_slopes(x, y)

    def evaluate(self, numbers: Array, temperature: Array, heat: Array) -> tuple[Array, Array, Array]:
        """Return the drop at the heat of all modules and its derivatives."""
        x, y, slopes = self._points
        total = np.abs(heat) * numbers[0]
        k = np.clip(np.searchsorted(x, total, side="right") - 1, 0, x.size - 2)
        h, secant = np.diff(x)[k], (np.diff(y) / np.diff(x))[k]
        left, right, s = slopes[k], slopes[k + 1], np.minimum(total - x[k], h)
        square, cube = (3 * secant - 2 * left - right) / h, (left + right - 2 * secant) / h**2
        drop = y[k] + s * (left + s * (square + s * cube))
        slope = left + s * (2 * square + s * 3 * cube)
        beyond = total - x[-1]
        chord = y[-1] / x[-1]
        drop, slope = np.where(beyond > 0, y[-1] + chord * beyond, drop), np.where(beyond > 0, chord, slope)
        return np.sign(heat) * drop, np.zeros_like(heat), slope * numbers[0]

    def known(self, numbers: Array, temperature: Array, heat: Array) -> NDArray[np.bool_]:
        """Tell whether the heat lies in the table, up to rounding."""
        return np.asarray(np.abs(heat) * numbers[0] <= self.heats[-1] * (1 + 1e-9))
