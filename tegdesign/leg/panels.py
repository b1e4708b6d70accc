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


@lru_cache(maxsize=8)
def gauss_rule(points: int) -> tuple[Array, Array, Array]:
    """Return nodes and weights of Gauss-Legendre on [0, 1] and the matrix of integrals from 0 to each node."""
    x, w = np.polynomial.legendre.leggauss(points)
    x, w = (x + 1) / 2, w / 2
    powers = np.arange(1, points + 1)
    to_node = (x[:, None] ** powers / powers) @ np.linalg.inv(np.vander(x, points, increasing=True))
    return x, w, to_node


@dataclass(frozen=True, eq=False)
class Panels:
    """Node data of one material, K panels of m nodes.

    Attributes
    ----------
    edges : ndarray (K+1,)
        Table temperatures [K] with a held panel below and above.
    coefficients : ndarray (3, 4, K)
        Cubics of S, rho, kappa from the left edge of each panel, lowest power first.
    seebeck_integral : ndarray (K+1,)
        Integral of S dT up to each edge [V].
    conductivity, product, thomson : ndarray (K, m)
        kappa, rho kappa and (integral of S dT) - S T at the nodes.
    """

    points: int
    edges: Array
    coefficients: Array
    seebeck_integral: Array
    conductivity: Array
    product: Array
    thomson: Array

    def at(self, panel: NDArray[np.intp], temperature: Array) -> tuple[Array, Array, Array, Array]:
        """Return S, integral of S dT, rho and kappa at temperatures (..., B) lying in panels (B,)."""
        s = temperature - self.edges[panel]
        (a0, a1, a2, a3), (b0, b1, b2, b3), (c0, c1, c2, c3) = self.coefficients[:, :, panel]
        seebeck = a0 + s * (a1 + s * (a2 + s * a3))
        integral = self.seebeck_integral[panel] + s * (a0 + s * (a1 / 2 + s * (a2 / 3 + s * (a3 / 4))))
        return (
            seebeck,
            integral,
            b0 + s * (b1 + s * (b2 + s * b3)),
            c0 + s * (c1 + s * (c2 + s * c3)),
        )


def prepare(material: Material, points: int = 4, subdivide: int = 1) -> Panels:
    """Return the panels of a material; kept, so a second call with the same material costs nothing.

    Parameters
    ----------
    points : int
        Gauss points in each panel; 3 give about 4e-7 in power, 4 about 1e-8.
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
    if subdivide > 1:
        steps = np.arange(subdivide) / subdivide
        table = np.append((table[:-1, None] + np.diff(table)[:, None] * steps).ravel(), table[-1])
    edges = np.concatenate([[min(_LOWEST, table[0] / 2)], table, [table[-1] + _BEYOND]])
    coefficients = np.stack([_on_panels(c, edges) for c in curves])
    width = np.diff(edges)
    a0, a1, a2, a3 = coefficients[0]
    steps = width * (a0 + width * (a1 / 2 + width * (a2 / 3 + width * a3 / 4)))
    x, _, _ = gauss_rule(points)
    panels = Panels(
        points, edges, coefficients, np.concatenate([[0.0], np.cumsum(steps)]), *(np.empty(0),) * 3
    )
    nodes = edges[:-1] + x[:, None] * width
    seebeck, integral, resistivity, conductivity = panels.at(np.arange(width.size), nodes)
    fill = {
        "conductivity": conductivity.T.copy(),
        "product": (resistivity * conductivity).T.copy(),
        "thomson": (integral - seebeck * nodes).T.copy(),
    }
    for name, values in fill.items():
        object.__setattr__(panels, name, values)
    return panels


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
