"""The doping of a material that suits a temperature or a span of temperatures best, the generator left aside."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from tegdesign.material.bands.material import BandMaterial
from tegdesign.material.curve import Array

_GRID = 17  # dopings of the first look, evenly in the logarithm
_SPAN_NODES = 5


def figure_of_merit(temperature: Array, properties: Array) -> Array:
    """Return zT from S, rho and kappa (first axis) at temperatures [K]."""
    s, rho, kappa = properties
    return np.asarray(s**2 * temperature / (rho * kappa))


def power_factor(temperature: Array, properties: Array) -> Array:
    """Return S^2 / rho [W/m/K^2]."""
    return np.asarray(properties[0] ** 2 / properties[1])


def best_doping(
    material: BandMaterial,
    first: float,
    last: float,
    merit: Callable[[Array, Array], Array] = figure_of_merit,
    bounds: tuple[float, float] | None = None,
    grain_size: float | None = None,
) -> tuple[float, float]:
    """Return the doping [1/m^3] of the largest mean merit between two temperatures [K], and that mean.

    Equal temperatures ask for one temperature. The best of a grid over the bounds, refined to 1e-3 of the doping by
    parabolas in its logarithm; at a bound the bound itself.
    """
    low, high = np.log(material.doping_bounds if bounds is None else bounds)
    x, w = np.polynomial.legendre.leggauss(_SPAN_NODES if last > first else 1)
    t, w = first + (last - first) * (x + 1) / 2, w / 2

    def mean(log_doping: Array) -> Array:
        doping = np.exp(log_doping)[:, None]
        size = material.grain_size if grain_size is None else grain_size
        return np.asarray(merit(t, material.crystal.properties(t, doping, size)) @ w)

    grid = np.linspace(low, high, _GRID)
    step = (high - low) / (_GRID - 1)
    values = mean(grid)
    at, best = float(grid[np.argmax(values)]), float(values.max())
    trial = at
    while step > 1e-3:
        near = np.clip(np.append(at + step * np.array([-1.0, -0.5, 0.5, 1.0]), trial), low, high)
        points, heights = np.append(near, at), np.append(mean(near), best)
        a, b, _ = np.polyfit(points - at, heights, 2)
        trial = float(np.clip(at - b / (2 * a), at - step, at + step)) if a < 0 else at
        k = int(np.argmax(heights))
        at, best = float(points[k]), float(heights[k])
        step /= 5
    return float(np.exp(at)), best
