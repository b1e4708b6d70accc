"""Quadrature over the Fermi window: fixed nodes, placed for each reduced level, one numpy call for a
batch.
"""

from __future__ import annotations

from collections.abc import Iterator
from functools import lru_cache
from math import pi
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.material.curve import Array

HALF_WIDTH = 40.0  # [kT]; the window there is 2e-17 of its peak
BLOCK = 512  # levels at a time, so that the arrays of one block stay in the processor's cache
_NODES = 48
_STEP = 0.5  # [kT] between the levels that share a rule
_FIRST, _LAST = -16, 80  # their range in steps; below it the window has one shape, above it moves


class Window(NamedTuple):
    """Nodes of the quadrature, last axis the node.

    ``energy`` above the band edge and ``distance`` from the chemical potential are in units of kT, both
    counted into the band; ``weight`` includes the window -df/dx, so that
    ``sum(weight * g(energy))`` is the integral of ``g(z) (-df/dz)`` from the band edge upwards.
    """

    energy: Array
    distance: Array
    weight: Array

    def integral(self, shape: Array) -> Array:
        """Return the integral of a shape over the window."""
        return np.asarray(np.einsum("...n,...n->...", self.weight, shape))

    def moments(self, shape: Array) -> tuple[Array, Array, Array]:
        """Return integral, mean distance [kT] and central second moment [kT^2] of a shape over the window.

        Together they hold the moments of order 0, 1 and 2, as ``K0``, ``K1 = K0 mean`` and
        ``K2 = centre + K0 mean^2``, but the heat conductivity follows from them without a difference of large
        numbers and is never negative. The mean is 0 where the integral underflows to 0.
        """
        part = self.weight * shape
        total = part.sum(axis=-1)
        first = np.einsum("...n,...n->...", part, self.distance)
        mean = np.divide(first, total, out=np.zeros_like(total), where=total > 0)
        away = self.distance - mean[..., None]
        part *= away
        return total, mean, np.asarray(np.einsum("...n,...n->...", part, away))


@lru_cache(maxsize=8)
def gauss(nodes: int) -> tuple[Array, Array]:
    """Return nodes and weights of the Gauss-Legendre rule on 0..1, shape (nodes,) each."""
    t, w = np.polynomial.legendre.leggauss(nodes)
    return (t + 1) / 2, w / 2


def fermi_window(level: ArrayLike) -> Window:
    """Return the quadrature for reduced levels (chemical potential above the band edge in kT) of any shape.

    Smooth integrands, and such with z^p, p > 0, at the edge come out to 1e-11 relative for all levels; levels
    below about -700 underflow to weight 0. The nodes come from a table with one rule for every half kT of
    the level, so that the window costs no exponential function a node: exp(level - z) is a product.
    """
    rules = _rules()
    eta = np.asarray(level, dtype=float)
    cell = np.clip(np.rint(eta / _STEP), _FIRST, _LAST).astype(np.intp) - _FIRST
    deep = np.maximum(eta - HALF_WIDTH, 0.0)  # there the nodes move with the level
    ratio = np.exp(eta - deep - _STEP * (cell + _FIRST))[..., None]
    # take() copies also for a single level, where an index would give a view into the table.
    energy, weight = rules.energy.take(cell, axis=0), rules.rising.take(cell, axis=0)
    weight *= ratio
    weight += rules.falling.take(cell, axis=0)
    weight *= weight
    np.divide(ratio, weight, out=weight)
    distance = energy - (eta - deep)[..., None]
    if deep.any():
        energy += deep[..., None]
    return Window(energy, distance, weight)


class _Rules(NamedTuple):
    """Nodes z above the edge for the levels in the middle of the cells, and the weight w of each, shape (C, N).

    With t = exp(level - z) and r = exp(distance of a level from its middle), w times the window is
    ``w r t / (1 + r t)^2 = r / (falling + r rising)^2``: ``falling`` = (w t)^-0.5, ``rising`` = (t / w)^0.5.
    """

    energy: Array
    falling: Array
    rising: Array


@lru_cache(maxsize=1)
def _rules() -> _Rules:
    """Return Gauss rules from the edge (or 40 kT below the level when it lies deeper) to 40 kT above the
    level.

    z = u^4 flattens the edge, and u = c + b sinh(s) opens the nodes around the poles of the Fermi function
    that are nearest, z = level +- i pi: after Johnston and Elliott 2005, Int. J. Numer. Methods Eng. 62, 564,
    doi 10.1002/nme.1208 (memory).
    """
    # Freeing one large array tells the C library to keep what is freed later: else every block of points
    # gives its
    # arrays back to the system and gets them anew, which takes longer than the arithmetic.
    np.empty(1 << 21)
    t, w = gauss(_NODES)
    level = _STEP * np.arange(_FIRST, _LAST + 1)[:, None]
    pole = np.sqrt(np.sqrt(level + 1j * pi))
    centre, breadth = pole.real, pole.imag
    end = (np.maximum(level, 0.0) + HALF_WIDTH + _STEP) ** 0.25
    first = -np.arcsinh(centre / breadth)
    width = np.arcsinh((end - centre) / breadth) - first
    s = first + width * t
    u = centre + breadth * np.sinh(s)
    energy = u**4
    weight, tail = 4 * u**3 * breadth * np.cosh(s) * width * w, np.exp(level - energy)
    return _Rules(energy, 1 / np.sqrt(weight * tail), np.sqrt(tail / weight))


def half_power(base: Array, exponent: float) -> Array:
    """Return ``base ** exponent``, by square roots and products where the exponent is a small half
    integer.
    """
    halves = round(2 * exponent)
    if 2 * exponent != halves or abs(halves) > 8:
        return np.asarray(base**exponent)
    whole, odd = divmod(abs(halves), 2)
    result = np.sqrt(base) if odd else np.ones_like(base)
    for _ in range(whole):
        result = result * base
    return np.asarray(1 / result if halves < 0 else result)


def blocks(size: int, length: int = BLOCK) -> Iterator[slice]:
    """Yield slices that cover ``range(size)``, at most ``length`` long each."""
    for start in range(0, size, length):
        yield slice(start, min(start + length, size))
