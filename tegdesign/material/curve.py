"""A property against temperature: polynomials between its points, their integral, and the ends held."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tegdesign.errors import InputError

Array = NDArray[np.float64]


def monotone_slopes(x: Array, y: Array) -> Array:
    """Return the slopes at the points that keep the cubic between them free of overshoot.

    Weighted harmonic mean of the neighbouring secants inside, one-sided three-point formula limited in
    size and sign at the ends: Fritsch and Butland 1984, SIAM J. Sci. Stat. Comput. 5, 300,
    doi 10.1137/0905021. Written out here because importing ``scipy.interpolate`` alone takes a third of the
    start-up time of the program; tests hold it against ``scipy.interpolate.PchipInterpolator``.
    """
    h = np.diff(x)
    secant = np.diff(y) / h
    if x.size == 2:
        return np.array([secant[0], secant[0]])
    slope = np.zeros_like(y)
    left, right = secant[:-1], secant[1:]
    same = left * right > 0
    w1, w2 = 2 * h[1:] + h[:-1], h[1:] + 2 * h[:-1]
    with np.errstate(divide="ignore", invalid="ignore"):
        inner = (w1 + w2) / (w1 / left + w2 / right)
    slope[1:-1] = np.where(same, inner, 0.0)
    slope[0] = _end_slope(h[0], h[1], secant[0], secant[1])
    slope[-1] = _end_slope(h[-1], h[-2], secant[-1], secant[-2])
    return slope


def _end_slope(h0: float, h1: float, s0: float, s1: float) -> float:
    slope = ((2 * h0 + h1) * s0 - h0 * s1) / (h0 + h1)
    if np.sign(slope) != np.sign(s0):
        return 0.0
    if np.sign(s0) != np.sign(s1) and abs(slope) > 3 * abs(s0):
        return float(3 * s0)
    return float(slope)


def horner(coefficients: Array, s: Array) -> Array:
    """Return the polynomial of coefficients (powers, ...), lowest first, at s; shapes (...) broadcast."""
    out: Array = s * coefficients[-1]
    for c in coefficients[-2:0:-1]:
        out += c
        out *= s
    out += coefficients[0]
    return out


@dataclass(frozen=True, eq=False)
class Curve:
    """One property between temperatures, ends held outside: a cubic without overshoot, or polynomials as given.

    Parameters
    ----------
    temperature : ndarray, shape (K,)
        Strictly increasing temperatures [K], K >= 2.
    value : ndarray, shape (K,)
        Property in its SI unit.
    pieces : ndarray, shape (d+1, K-1), optional
        Power-series coefficients of each interval, lowest power first, from its left end, where the property is
        computed rather than measured; degree d >= 1.
    """

    temperature: Array
    value: Array
    pieces: Array | None = None

    def __post_init__(self) -> None:
        """Refuse lists that are not a function of temperature."""
        t = np.array(self.temperature, dtype=float)
        v = np.array(self.value, dtype=float)
        if t.ndim != 1 or t.shape != v.shape or t.size < 2:
            raise InputError(f"a property needs two or more points, got {t.size}")
        if not (np.all(np.isfinite(t)) and np.all(np.isfinite(v))):
            raise InputError("a property has a value that is not finite")
        if np.any(np.diff(t) <= 0):
            k = int(np.argmax(np.diff(t) <= 0))
            raise InputError(f"temperatures must increase: {t[k]:g} K is followed by {t[k + 1]:g} K")
        t.setflags(write=False)
        v.setflags(write=False)
        object.__setattr__(self, "temperature", t)
        object.__setattr__(self, "value", v)

    @property
    def range(self) -> tuple[float, float]:
        """First and last temperature at which the property is known [K]."""
        return float(self.temperature[0]), float(self.temperature[-1])

    @cached_property
    def coefficients(self) -> Array:
        """Power-series coefficients of each interval, shape (d+1, K-1), lowest power first, from its left."""
        if self.pieces is not None:
            return self.pieces
        t, y = self.temperature, self.value
        d = monotone_slopes(t, y)
        h, secant = np.diff(t), np.diff(y) / np.diff(t)
        c = (3 * secant - 2 * d[:-1] - d[1:]) / h
        e = (d[:-1] + d[1:] - 2 * secant) / h**2
        return np.stack([y[:-1], d[:-1], c, e])

    @cached_property
    def _antiderivative(self) -> Array:
        """Coefficients of the integral from the first temperature, lowest power first, shape (d+2, K-1)."""
        c = self.coefficients
        powers = np.arange(1.0, len(c) + 1)[:, None]
        grown = np.concatenate([np.zeros((1, c.shape[1])), c / powers])
        grown[0, 1:] = np.cumsum(horner(grown, np.diff(self.temperature)))[:-1]
        return grown

    def _locate(self, temperature: ArrayLike) -> tuple[Array, NDArray[np.intp], Array]:
        t = np.asarray(temperature, dtype=float)
        inside = np.clip(t, self.temperature[0], self.temperature[-1])
        k = np.clip(np.searchsorted(self.temperature, inside, side="right") - 1, 0, self.temperature.size - 2)
        return t, k, inside - self.temperature[k]

    def __call__(self, temperature: ArrayLike) -> Array:
        """Return the property at a temperature [K] of any shape; outside the range the end value is held."""
        _, k, s = self._locate(temperature)
        return np.asarray(horner(self.coefficients[:, k], s))

    def integral(self, temperature: ArrayLike) -> Array:
        """Return the exact integral from the first temperature to ``temperature`` [unit * K], ends held."""
        t, k, s = self._locate(temperature)
        inside = horner(self._antiderivative[:, k], s)
        below = np.minimum(t - self.temperature[0], 0.0) * self.value[0]
        above = np.maximum(t - self.temperature[-1], 0.0) * self.value[-1]
        return np.asarray(inside + below + above)
