"""A material prepared for the leg solver: properties and integrals at collocation nodes between its table points.

The nodes between two table points are the same for every leg made of the material, so all that can be known of
them is worked out once; only the two end pieces of a leg, where its own temperatures cut a panel, are its own.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property, lru_cache
from itertools import pairwise
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from tegdesign.material.curve import Array, Curve, horner
from tegdesign.material.material import Material

# Panels with the end values held reach from here up to this far above the last point, so that an iteration may
# wander outside the data; whether the answer may stay there is decided by whoever asked for it.
_LOWEST, _BEYOND = 1.0, 3000.0
_STEEP = np.log(2.0)  # a table interval over which rho or kappa changes by more than this factor is split


@lru_cache(maxsize=8)
def gauss_rule(points: int) -> tuple[Array, Array, Array]:
    """Return nodes and weights of Gauss-Legendre on [0, 1] and the matrix of integrals from 0 to each node."""
    x, w = np.polynomial.legendre.leggauss(points)
    x, w = (x + 1) / 2, w / 2
    powers = np.arange(1, points + 1)
    to_node = (x[:, None] ** powers / powers) @ np.linalg.inv(np.vander(x, points, increasing=True))
    return x, w, to_node


class Rows(NamedTuple):
    """Which rows of the coefficients of ``Panels`` belong to which property."""

    thomson: slice
    rho: slice
    kappa: slice
    seebeck: slice


@dataclass(frozen=True, eq=False)
class Panels:
    """One material on K panels with m nodes each.

    Attributes
    ----------
    edges : ndarray (K+1,)
        Table temperatures [K] with a held panel below and above.
    coefficients : ndarray (4 d + 5, K)
        Polynomials in T less the left edge, lowest power first: first d + 2 rows of the Thomson integral
        (integral of S dT) - S T [V], then d + 1 each of rho, kappa and S; ``rows`` tells which. Cubics of a table
        have d = 3.
    conductivity, product, thomson : ndarray (K, m)
        At the nodes: kappa times width and Gauss weight, rho kappa times width, the Thomson integral.
    """

    points: int
    edges: Array
    coefficients: Array
    conductivity: Array
    product: Array
    thomson: Array

    def pick(self, panel: NDArray[np.intp]) -> Array:
        """Return the coefficients (4 d + 5, ...) of panels (...)."""
        return self.coefficients.take(panel, axis=1, mode="clip")  # the quickest of the modes

    @cached_property
    def rows(self) -> Rows:
        """Rows of the coefficients of each property."""
        d = (len(self.coefficients) - 5) // 4
        cuts = np.cumsum([0, d + 2, d + 1, d + 1, d + 1]).tolist()
        return Rows(*(slice(first, last) for first, last in pairwise(cuts)))


def prepare(material: Material, points: int = 4, subdivide: int = 1) -> Panels:
    """Return the panels of a material; kept, so a second call with the same material costs nothing.

    Parameters
    ----------
    points : int
        Gauss points in each panel.
    subdivide : int
        Split every panel into so many equal ones, to show convergence.
    """
    key = (points, subdivide)
    cache: dict[tuple[int, int], Panels] = material.__dict__.setdefault("_panels", {})
    if key not in cache:
        cache[key] = _prepare(
            (material.seebeck_coefficient, material.resistivity, material.thermal_conductivity), points, subdivide
        )
    return cache[key]


def _prepare(curves: tuple[Curve, Curve, Curve], points: int, subdivide: int) -> Panels:
    table = np.unique(np.concatenate([c.temperature for c in curves]))
    change = np.max([np.abs(np.diff(np.log(c(table)))) for c in curves[1:]], axis=0)
    parts = subdivide * np.ceil(np.maximum(change / _STEEP, 1.0)).astype(int)
    step = np.repeat(np.diff(table) / parts, parts)
    within = np.arange(parts.sum()) - np.repeat(np.cumsum(parts) - parts, parts)
    table = np.append(np.repeat(table[:-1], parts) + within * step, table[-1])
    edges = np.concatenate([[min(_LOWEST, table[0] / 2)], table, [table[-1] + _BEYOND]])
    left, width = edges[:-1], np.diff(edges)
    degree = max(len(c.coefficients) for c in curves) - 1
    seebeck, rho, kappa = (_on_panels(c, edges, degree) for c in curves)
    none = np.zeros((1, left.size))
    integral = np.concatenate([none, seebeck / np.arange(1.0, degree + 2)[:, None]])
    thomson = integral - np.concatenate([seebeck * left, none])  # less S T, T = left + s
    thomson[1:] -= seebeck
    thomson[0, 1:] += np.cumsum(horner(integral, width))[:-1]
    x, weight, _ = gauss_rule(points)
    s = x[:, None] * width
    conductivity = horner(kappa, s) * width
    return Panels(
        points,
        edges,
        np.concatenate([thomson, rho, kappa, seebeck]),
        conductivity.T * weight,
        (horner(rho, s) * conductivity).T.copy(),
        horner(thomson, s).T.copy(),
    )


def _on_panels(curve: Curve, edges: Array, degree: int) -> Array:
    """Return the polynomials of a curve shifted to the left edge of each panel; constant where it is held."""
    left, middle = edges[:-1], (edges[:-1] + edges[1:]) / 2
    first, last = curve.range
    k = np.clip(np.searchsorted(curve.temperature, middle, side="right") - 1, 0, curve.temperature.size - 2)
    s = left - curve.temperature[k]
    shifted = np.zeros((degree + 1, left.size))
    own = len(curve.coefficients)
    shifted[:own] = curve.coefficients[:, k]
    for done in range(own - 1):  # repeated synthetic division
        for power in range(own - 2, done - 1, -1):
            shifted[power] += s * shifted[power + 1]
    held = np.zeros_like(shifted)
    held[0] = np.where(middle < first, curve.value[0], curve.value[-1])
    return np.where((middle < first) | (middle > last), held, shifted)
