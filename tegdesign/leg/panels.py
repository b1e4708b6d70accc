"""A material prepared for the leg solver: properties and integrals at collocation nodes between its table points.

The nodes between two table points are the same for every leg made of the material, so all that can be known of
them is worked out once; only the two end pieces of a leg, where its own temperatures cut a panel, are its own.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from tegdesign.material.curve import Array, Curve
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


def horner(coefficients: Array, s: Array) -> Array:
    """Return the polynomial of coefficients (powers, ...), lowest first, at s; shapes (...) broadcast."""
    out: Array = s * coefficients[-1]
    for c in coefficients[-2:0:-1]:
        out += c
        out *= s
    out += coefficients[0]
    return out


@dataclass(frozen=True, eq=False)
class Panels:
    """One material on K panels with m nodes each.

    Attributes
    ----------
    edges : ndarray (K+1,)
        Table temperatures [K] with a held panel below and above.
    coefficients : ndarray (17, K)
        Polynomials in T less the left edge, lowest power first: rows 0 to 4 the Thomson integral
        (integral of S dT) - S T [V], then four each of rho, kappa and S.
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
        """Return the coefficients (17, ...) of panels (...)."""
        return self.coefficients.take(panel, axis=1, mode="clip")  # the quickest of the modes


THOMSON, RHO, KAPPA, SEEBECK = slice(0, 5), slice(5, 9), slice(9, 13), slice(13, 17)  # rows of the coefficients


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
    seebeck, rho, kappa = (_on_panels(c, edges) for c in curves)
    a0, a1, a2, a3 = seebeck
    none = np.zeros_like(left)
    integral = np.stack([none, a0, a1 / 2, a2 / 3, a3 / 4])
    product = np.stack([a0 * left, a1 * left + a0, a2 * left + a1, a3 * left + a2, a3])  # S T
    thomson = integral - product
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


def _on_panels(curve: Curve, edges: Array) -> Array:
    """Return the cubics of a curve shifted to the left edge of each panel; constant where it is held."""
    left, middle = edges[:-1], (edges[:-1] + edges[1:]) / 2
    first, last = curve.range
    k = np.clip(np.searchsorted(curve.temperature, middle, side="right") - 1, 0, curve.temperature.size - 2)
    a, b, c, e = curve.coefficients[:, k]
    s = left - curve.temperature[k]
    cubic = np.stack([a + s * (b + s * (c + s * e)), b + s * (2 * c + s * 3 * e), c + 3 * s * e, e])
    held = np.zeros_like(cubic)
    held[0] = np.where(middle < first, curve.value[0], curve.value[-1])
    return np.where((middle < first) | (middle > last), held, cubic)
