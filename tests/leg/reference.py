"""One leg by scipy, independent of ``tegdesign.leg``: boundary value problem in the position along the leg.

With x the position over the length, y = (T, Q, R): T' = (j S T - Q)/kappa, Q' = j (rho j + S T'), R' = rho,
T(0) = hot, T(1) = cold, R(0) = 0. Properties by scipy's own monotone cubic, ends held.
"""

from __future__ import annotations

from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray
from scipy.integrate import solve_bvp
from scipy.interpolate import PchipInterpolator

from tegdesign.material.curve import Curve
from tegdesign.material.material import Material

Array = NDArray[np.float64]
# Start mesh and tolerance. At a kink of the table the refinement can run into rounding error and give up; another
# mesh or less to ask gets past it (an answer asked to 1e-8 is right to about 1e-11, to 1e-7 about 1e-9).
TRIALS = ((400, 1e-9), (650, 1e-9), (300, 1e-8), (901, 1e-8), (500, 1e-7))
QUICK = ((400, 1e-7), (650, 1e-7), (300, 1e-6))


class Answer(NamedTuple):
    """Scaled heats and power [W/m], resistance [ohm m], highest temperature inside [K], the mesh and values there."""

    hot_heat: float
    cold_heat: float
    power: float
    resistance: float
    peak: float
    mesh: Array
    values: Array


class Properties:
    """S, rho, kappa of a material, by scipy."""

    def __init__(self, material: Material) -> None:
        curves = (material.seebeck_coefficient, material.resistivity, material.thermal_conductivity)
        self.curves = [PchipInterpolator(t, c(t)) for c, t in ((c, self.points(c)) for c in curves)]
        self.ranges = [c.range for c in curves]

    @staticmethod
    def points(curve: Curve) -> Array:
        """Points of a table; of a computed property so many that the cubic between them does not matter."""
        if curve.pieces is None:
            return curve.temperature
        return np.unique(np.concatenate([curve.temperature, np.linspace(*curve.range, 2001)]))

    def __call__(self, temperature: Array) -> list[Array]:
        return [c(np.clip(temperature, *r)) for c, r in zip(self.curves, self.ranges, strict=True)]

    def voltage(self, cold: float, hot: float) -> float:
        """Integral of S dT, ends held."""
        curve, (first, last) = self.curves[0], self.ranges[0]
        inside = curve.integrate(np.clip(cold, first, last), np.clip(hot, first, last))
        below = min(hot, first) - min(cold, first)
        above = max(hot, last) - max(cold, last)
        return float(inside + below * curve(first) + above * curve(last))


def conduction_start(get: Properties, hot: float, cold: float, size: int) -> tuple[Array, Array]:
    """Return mesh and values of the leg without current, by the trapezoidal rule."""
    t = np.linspace(hot, cold, size)
    _, rho, kappa = get(t)
    steps = (kappa[1:] + kappa[:-1]) / 2 * -np.diff(t)
    x = np.concatenate([[0.0], np.cumsum(steps)])
    resistance = np.concatenate([[0.0], np.cumsum(steps * (rho[1:] + rho[:-1]) / 2)])
    return x / x[-1], np.stack([t, np.full(size, x[-1]), resistance / x[-1]])


def matched_current(material: Material, hot: float, cold: float) -> float:
    """Return half of E / r with r on the temperature profile without current [A/m]."""
    get = Properties(material)
    _, y = conduction_start(get, hot, cold, 4001)
    return float(get.voltage(cold, hot) / y[2, -1] / 2)


def solve(
    material: Material,
    hot: float,
    cold: float,
    j: float,
    *,
    start: tuple[Array, Array] | None = None,
    trials: tuple[tuple[int, float], ...] = TRIALS,
) -> Answer:
    """Return the leg by ``scipy.integrate.solve_bvp``; raises when no start mesh leads to the tolerance."""
    get = Properties(material)

    def slope(x: Array, y: Array) -> Array:
        s, rho, kappa = get(y[0])
        fall = (j * s * y[0] - y[1]) / kappa
        return np.stack([fall, j * (rho * j + s * fall), rho])

    def ends(a: Array, b: Array) -> Array:
        return np.array([a[0] - hot, b[0] - cold, a[2]])

    for size, tol in trials:
        if start is None:
            x, y = conduction_start(get, hot, cold, size)
            y[1] += j * get(y[0])[0] * y[0]
        else:
            (x, y), start = start, None
        found: Any = solve_bvp(slope, ends, x, y, tol=tol, max_nodes=3000)
        if found.status == 0:
            t, q, r = found.y
            power = j * (get.voltage(cold, hot) - j * r[-1])
            return Answer(q[0], q[-1], power, r[-1], float(t.max()), found.x, found.y)
    raise AssertionError(f"no reference for {material.name} at {hot:g} K, {cold:g} K, {j:g} A/m")
