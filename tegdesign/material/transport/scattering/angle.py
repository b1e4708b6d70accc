"""The integral over the scattering angle that elastic mechanisms of a Kane band share."""

from __future__ import annotations

from math import comb

import numpy as np

from tegdesign.material.curve import Array

# Below this beta the closed forms lose digits (error 1e-16 / beta^2); the series is right to 1e-14 there.
_SERIES_BELOW = 0.01
_TERMS = 8


def angle_integral(beta: Array, mixing: Array, order: int) -> Array:
    """Return ``integral_0^1 y (1 - 2 K y) / (1 + beta y)^order dy`` for order 1 or 2, shapes broadcast, no
    unit.

    y = (1 - cos theta) / 2, K = ``mixing`` and beta = 4 k^2 / q_s^2 with the inverse screening length q_s.
    The golden rule for a potential that falls with the momentum transfer q as 1 / (q^2 + q_s^2)^order leads
    to it, weighted by momentum loss and overlap 1 - K (1 - cos theta). It holds the screening functions of
    Brooks and Herring (order 2) and of Ravich, Efimova and Tamarchenko 1971, Phys. Status Solidi B 43, 11
    (order 1, memory); the tests compare with numerical integration over the angle.
    """
    b = np.maximum(beta, _SERIES_BELOW)
    log = np.log1p(b) / b
    if order == 1:
        first = (1 - log) / b
        second = (0.5 - first) / b
    else:
        inverse = 1 / (1 + b)
        first = (log - inverse) / b
        second = (1 - 2 * log + inverse) / b**2
    small = beta < _SERIES_BELOW
    if np.any(small):
        s = beta[small]
        first[small], second[small] = (_series(s, power, order) for power in (1, 2))
    return np.asarray(first - 2 * mixing * second)


def _series(beta: Array, power: int, order: int) -> Array:
    """Integral of y^power / (1 + beta y)^order from 0 to 1, in powers of beta."""
    result = np.zeros_like(beta)
    for k in reversed(range(_TERMS)):
        result = result * -beta + comb(k + order - 1, k) / (power + k + 1)
    return result
