"""Chemical potential from charge neutrality, for a batch of points at once."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from tegdesign.errors import ConvergenceError, InputError
from tegdesign.material.curve import Array
from tegdesign.material.transport.constants import BOLTZMANN

Count = Callable[[Array, NDArray[np.intp]], tuple[Array, Array]]


def solve(
    count: Count,
    temperature: Array,
    net_doping: Array,
    edge: Array,
    sign: Array,
    tolerance: float = 1e-7,
    iterations: int = 80,
) -> Array:
    """Return the chemical potential [J], shape (P,), at which electrons less holes equal the net doping.

    Newton's method on ``ln(n + acceptors) - ln(p + donors)``, which rises steadily with mu and is nearly
    straight both for few and for many carriers; from the second step on the change of its slope counts too
    (Halley's method). A step that leaves the bracket found so far is replaced by its middle.

    Parameters
    ----------
    count : callable
        Of chemical potentials [J], shape (Q,), and the Q points they belong to; returns the carrier
        density of every band [1/m^3] and its derivative by the reduced level per kT, [1/(J m^3)], shape (B,
        Q) each.
    temperature, net_doping : ndarray, shape (P,)
        [K], [1/m^3], donors positive.
    edge, sign : ndarray, shapes (B, P) and (B,)
        Band edges [J]; 1 for conduction bands, -1 for valence bands.
    tolerance : float
        Last step in kT; what is left after it is less than its square, as the slope changes by less than
        its own size in kT.
    iterations : int
        Limit on the steps.

    Raises
    ------
    InputError
        Without doping, and the gap is so wide that no carriers are left.
    ConvergenceError
        The tolerance was not reached.
    """
    electron = sign > 0
    unit = BOLTZMANN * temperature
    mu = _start(edge, electron, net_doping, unit)
    low, high = np.full_like(mu, -np.inf), np.full_like(mu, np.inf)
    before, steepness = np.full_like(mu, np.nan), np.full_like(mu, np.nan)
    left = np.arange(mu.size)
    for _ in range(iterations):
        density, slope = count(mu[left], left)
        n, p = density[electron].sum(axis=0), density[~electron].sum(axis=0)
        dn, dp = slope[electron].sum(axis=0), slope[~electron].sum(axis=0)
        doping, kt = net_doping[left], unit[left]
        up, down = n + np.maximum(-doping, 0.0), p + np.maximum(doping, 0.0)
        _refuse_empty(up, down, temperature[left])
        height = np.log(up / down)
        now, slope_now = mu[left], dn / up + dp / down
        step = -height / slope_now
        bending = step * (slope_now - steepness[left]) / (2 * slope_now * (now - before[left]))
        step /= np.where(np.abs(bending) < 0.5, 1 + bending, 1.0)  # nan, so 1, in the first round
        before[left], steepness[left] = now, slope_now
        low[left] = np.where(height <= 0, now, low[left])
        high[left] = np.where(height >= 0, now, high[left])
        target = now + step
        done = np.abs(step) <= tolerance * np.maximum(kt, np.abs(now - edge[:, left]).min(axis=0))
        outside = ~done & ((target <= low[left]) | (target >= high[left]))
        middle = low[left][outside] / 2 + high[left][outside] / 2
        target[outside] = middle
        mu[left] = target
        left = left[~done]
        if left.size == 0:
            return mu
    k = left[0]
    raise ConvergenceError(
        f"charge neutrality not reached in {iterations} steps at {temperature[k]:.6g} K and net doping "
        f"{net_doping[k]:.6g} 1/m^3; check the bands and the doping"
    )


def _start(edge: Array, electron: NDArray[np.bool_], net_doping: Array, unit: Array) -> Array:
    """Return 2 kT outside the band that the dopants fill, or the middle of the gap without doping."""
    conduction = np.min(edge[electron], axis=0, initial=np.inf)
    valence = np.max(edge[~electron], axis=0, initial=-np.inf)
    start = np.where(net_doping > 0, conduction - 2 * unit, valence + 2 * unit)
    neutral = net_doping == 0
    start[neutral] = (conduction[neutral] + valence[neutral]) / 2
    return np.asarray(start)


def _refuse_empty(up: Array, down: Array, temperature: Array) -> None:
    empty = (up <= 0) | (down <= 0)
    if empty.any():
        raise InputError(
            f"no carriers at {temperature[np.argmax(empty)]:.6g} K without doping: the gap is too wide; "
            "give a net doping or raise the temperature"
        )
