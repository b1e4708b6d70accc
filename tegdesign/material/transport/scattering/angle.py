"""The integral over the scattering angle that elastic mechanisms of a Kane band share."""

from __future__ import annotations

from functools import cached_property
from math import comb

import numpy as np

from tegdesign.material.curve import Array

# Below this beta the closed forms lose digits (error 1e-16 / beta^2); the series is right to 1e-14 there.
_SERIES_BELOW = 0.01
# Coefficients of (-beta)^k, k = 7..0, in the second moments of order 1 and 2.
_SERIES = tuple(tuple(comb(k + order - 1, k) / (k + 3) for k in reversed(range(8))) for order in (1, 2))


class Deflection:
    """Integrals over the angle in a screened potential, worked out when first asked for and then shared.

    ``beta`` = 4 k^2 / q_s^2 of any shape, no unit, with the inverse screening length q_s. The moments are
    ``integral_0^1 y^m / (1 + beta y)^order dy`` with y = (1 - cos theta) / 2: closed forms with the second from
    the first, and for small beta the series of the second and the first from it, as no digits are lost that way.
    """

    def __init__(self, beta: Array) -> None:
        """Take beta and note where it is small."""
        self._small = np.flatnonzero(beta < _SERIES_BELOW)
        self._beta = beta.ravel()[self._small]
        self._above = np.maximum(beta, _SERIES_BELOW) if self._small.size else beta
        self._inverse = 1 / self._above

    def integral(self, mixing: Array, order: int) -> Array:
        """Return ``integral_0^1 y (1 - 2 K y) / (1 + beta y)^order dy`` for order 1 or 2, K = ``mixing``, no unit.

        The golden rule for a potential that falls with the momentum transfer q as 1 / (q^2 + q_s^2)^order
        leads to it, weighted by momentum loss and overlap 1 - K (1 - cos theta). It holds the screening
        functions of Brooks and Herring (order 2) and of Ravich, Efimova and Tamarchenko 1971, Phys. Status
        Solidi B 43, 11 (order 1, memory); the tests compare with numerical integration over the angle.
        """
        first, second = self._first_order if order == 1 else self._second_order
        if not mixing.any():
            return first
        part = second * mixing
        part *= -2
        part += first
        return np.asarray(part)

    @cached_property
    def _logarithm(self) -> Array:
        """log(1 + beta) / beta to the last digit: what 1 + beta rounds off stands in both."""
        shifted = 1 + self._above
        result = np.log(shifted)
        shifted -= 1
        result /= shifted
        return np.asarray(result)

    @cached_property
    def _first_order(self) -> tuple[Array, Array]:
        """Moments 1 and 2 of order 1."""
        first = 1 - self._logarithm
        first *= self._inverse
        second = 0.5 - first
        return self._finished(first, second, 1)

    @cached_property
    def _second_order(self) -> tuple[Array, Array]:
        """Moments 1 and 2 of order 2."""
        first = 1 + self._above
        np.divide(-1, first, out=first)
        first += self._logarithm
        first *= self._inverse
        second = self._first_order[0] - first
        return self._finished(first, second, 2)

    def _finished(self, first: Array, second: Array, order: int) -> tuple[Array, Array]:
        """Divide the second moment by beta, which it still lacks, and put in the series where beta is small."""
        second *= self._inverse
        if self._small.size:
            series = np.zeros_like(self._beta)
            for coefficient in _SERIES[order - 1]:
                series *= -self._beta
                series += coefficient
            before = 0.5 if order == 1 else self._first_order[0].ravel()[self._small]
            second.put(self._small, series)
            first.put(self._small, before - self._beta * series)
        return first, second


def angle_integral(beta: Array, mixing: Array, order: int) -> Array:
    """Return the integral of ``Deflection`` once, for beta and mixing that broadcast and order 1 or 2."""
    return Deflection(beta).integral(mixing, order)
