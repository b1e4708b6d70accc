"""Modules at a given current of either sign, also those that a string drives far beyond their short circuit."""

from __future__ import annotations

from dataclasses import fields, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from tegdesign.errors import ConvergenceError
from tegdesign.leg.exact import Slopes
from tegdesign.material.curve import Array
from tegdesign.module.electrode import resistivity_at
from tegdesign.module.module import Flows, Modules, flows
from tegdesign.system.law import Law
from tegdesign.system.load.base import LoadLaw, MixedLoads
from tegdesign.system.load.given import as_given
from tegdesign.system.operating_point import OperatingPoint, mean_couple, operating_point

Guess = tuple[Array, Array, Array]
_LOOSE = 1e-6  # tolerance for modules whose temperature difference is near the rounding of temperatures
_IDLE = 1e-3  # K between source and sink: power falls with the square, so to a millionth of a millionth


def at_load(
    modules: Modules,
    source: Law,
    sink: Law,
    load: LoadLaw | MixedLoads,
    tolerance: float,
    guess: Guess | None = None,
) -> OperatingPoint:
    """Solve a batch, also where little or no temperature difference is left.

    Modules whose temperature difference is too near the rounding of temperatures for the tolerance are solved to a
    relative 1e-6 instead; with less than a millikelvin between source and sink they count as carrying heat and the
    given current only: none, where the load decides. ``converged`` is false where no state was found.
    """
    with np.errstate(invalid="ignore"):  # two given heats: no difference to tell
        idle = np.abs(source.open_temperature - sink.open_temperature) < _IDLE
    if not idle.any():
        return _with_difference(modules, source, sink, load, tolerance, guess)
    given = load.given
    current = np.where(np.isnan(given), 0.0, given)
    point = _mean_properties(modules, source, sink, current)
    which = np.flatnonzero(~idle)
    if which.size:
        laws = source.take(which), sink.take(which), load.take(which)
        part = _with_difference(modules.take(which), *laws, tolerance, _pick(guess, which))
        point = _exchange(point, which, part)
    return point


def _with_difference(
    modules: Modules, source: Law, sink: Law, load: LoadLaw | MixedLoads, tolerance: float, guess: Guess | None
) -> OperatingPoint:
    point = _attempt(modules, source, sink, load, tolerance, guess)
    bad = np.flatnonzero(~point.converged)
    if bad.size == 0:
        return point
    laws = source.take(bad), sink.take(bad), load.take(bad)
    return _exchange(point, bad, _attempt(modules.take(bad), *laws, max(tolerance, _LOOSE), None))


def _attempt(
    modules: Modules, source: Law, sink: Law, load: LoadLaw | MixedLoads, tolerance: float, guess: Guess | None
) -> OperatingPoint:
    """Solve what can be solved; a module without a state may wander off before it is given up."""
    with np.errstate(over="ignore", invalid="ignore", divide="ignore"):
        return operating_point(modules, source, sink, load, tolerance=tolerance, check=False, guess=guess)


def _pick(guess: Guess | None, which: NDArray[np.intp]) -> Guess | None:
    return None if guess is None else (guess[0][which], guess[1][which], guess[2][which])


def at_current(
    modules: Modules,
    source: Law,
    sink: Law,
    current: Array,
    *,
    exact: NDArray[np.bool_],
    tolerance: float = 1e-11,
    guess: Guess | None = None,
) -> tuple[OperatingPoint, NDArray[np.bool_]]:
    """Solve a batch of modules at given currents [A] (B,).

    A module whose legs have a temperature maximum inside (little temperature difference, much current of others) is
    beyond the exact leg; it is solved with the properties at its mean temperature, which differ little from the true
    ones since that temperature difference is small. Returned with the point: which modules are exact.

    Parameters
    ----------
    exact : ndarray of bool (B,)
        Modules to try with the exact legs.

    Raises
    ------
    ConvergenceError
        A module has no steady state at its current.
    """
    law = LoadLaw(as_given, current, fixed=True)
    if exact.all():
        point = _attempt(modules, source, sink, law, tolerance, guess)
        exact = point.converged.copy()
        if exact.all():
            return point, exact
    else:
        empty = {f.name: np.full(current.size, np.nan) for f in fields(OperatingPoint)}
        point = OperatingPoint(**empty)
        which = np.flatnonzero(exact)
        if which.size:
            laws = source.take(which), sink.take(which), law.take(which)
            part = _attempt(modules.take(which), *laws, tolerance, _pick(guess, which))
            point = _exchange(point, which, part)
            exact = exact.copy()
            exact[which] = part.converged
    rest = np.flatnonzero(~exact)
    part = _mean_properties(modules.take(rest), source.take(rest), sink.take(rest), current[rest])
    point = _exchange(point, rest, part)
    if not np.all(point.converged):
        k = int(np.flatnonzero(~np.asarray(point.converged, dtype=bool))[0])
        raise ConvergenceError(
            f"module number {k} has no steady state at {current[k]:.4g} A: the current of the others is too large for "
            "it; use fewer modules in series, take it out, or give it a bypass diode"
        )
    return replace(point, converged=np.ones(current.size, dtype=bool)), exact


def _exchange(point: OperatingPoint, which: NDArray[np.intp], part: OperatingPoint) -> OperatingPoint:
    """Return the point with the modules ``which`` taken from another one."""
    values = {}
    for f in fields(OperatingPoint):
        values[f.name] = getattr(point, f.name).copy()
        values[f.name][which] = getattr(part, f.name)
    return OperatingPoint(**values)


class _Pinned:
    """Both heat equations of modules at given currents, linearised at a state: the junctions follow what is changed."""

    def __init__(self, modules: Modules, source: Law, sink: Law, hot: Array, cold: Array, now: Flows) -> None:
        rh, rc = modules.resistance_hot, modules.resistance_cold
        self.now = now
        self.hot_face, self.cold_face = hot + rh * now.heat_hot, cold - rc * now.heat_cold
        self.misfit_hot, self.by_hot_face, b_hot = source.evaluate(self.hot_face, now.heat_hot)
        self.misfit_cold, self.by_cold_face, b_cold = sink.evaluate(self.cold_face, -now.heat_cold)
        self.weight_hot = self.by_hot_face * rh + b_hot
        self.weight_cold = -(self.by_cold_face * rc + b_cold)
        qh, qc = now.heat_hot_slopes, now.heat_cold_slopes
        self.matrix = (
            self.by_hot_face + self.weight_hot * qh.hot, self.weight_hot * qh.cold,
            self.weight_cold * qc.hot, self.by_cold_face + self.weight_cold * qc.cold,
        )  # fmt: skip

    def junctions(self, hot: Array | float, cold: Array | float) -> tuple[Array, Array]:
        """Return the changes of both junctions that take away ``hot`` and ``cold`` from the two equations."""
        m11, m12, m21, m22 = self.matrix
        determinant = m11 * m22 - m12 * m21
        return np.asarray((hot * m22 - cold * m12) / determinant), np.asarray((m11 * cold - m21 * hot) / determinant)

    def outputs(self, change: tuple[Array, Array]) -> tuple[Array, Array, Array]:
        """Return the changes of heat in, heat out and voltage with both junctions."""
        slopes = self.now.heat_hot_slopes, self.now.heat_cold_slopes, self.now.voltage_slopes
        heat_in, heat_out, voltage = (s.hot * change[0] + s.cold * change[1] for s in slopes)
        return heat_in, heat_out, voltage


def fluid_slopes(
    modules: Modules, source: Law, sink: Law, point: OperatingPoint, exact: NDArray[np.bool_]
) -> tuple[tuple[Array, Array, Array], tuple[Array, Array, Array]]:
    """Return derivatives of heat in, heat out and voltage at given current by the fluid of the source and of the sink.

    W/K and V/K per module, (B,) each; exact derivatives, the junctions follow.
    """
    h, c, i = point.hot_junction, point.cold_junction, point.current
    now = _all_flows(modules, h, c, i, exact)
    pinned = _Pinned(modules, source, sink, h, c, now)
    return (
        pinned.outputs(pinned.junctions(pinned.by_hot_face, 0.0)),
        pinned.outputs(pinned.junctions(0.0, pinned.by_cold_face)),
    )


def _all_flows(modules: Modules, hot: Array, cold: Array, current: Array, exact: NDArray[np.bool_]) -> Flows:
    if exact.all():
        return flows(modules, hot, cold, current)
    both = (np.flatnonzero(exact), flows), (np.flatnonzero(~exact), _mean_flows)
    groups = [(w, rule) for w, rule in both if w.size]
    parts = [rule(modules.take(w), hot[w], cold[w], current[w]) for w, rule in groups]

    def join(values: list[Array]) -> Array:
        out = np.empty(hot.size, dtype=values[0].dtype)
        for (w, _), value in zip(groups, values, strict=True):
            out[w] = value
        return out

    merged: list[Any] = []
    for column in zip(*parts, strict=True):
        slopes = isinstance(column[0], Slopes)
        merged.append(Slopes(*(join([s[k] for s in column]) for k in range(3))) if slopes else join(list(column)))
    return Flows(*merged)


def _mean_flows(modules: Modules, hot: Array, cold: Array, current: Array) -> Flows:
    """Return what modules do with leg properties at the mean of the junction temperatures.

    Q_h = K dT + I S T_h - I^2 (R/2 + R_hot) + bypass, Q_c = K dT + I S T_c + I^2 (R/2 + R_cold) + bypass: the leg of
    constant properties, e.g. Goldsmid, Introduction to Thermoelectricity, 2nd ed. 2016, doi 10.1007/978-3-662-49256-7.
    Derivatives of the properties are left out of the slopes.
    """
    i = current
    seebeck, series, conductance = mean_couple(modules, (hot + cold) / 2, hot, cold)
    legs = series - 2 * modules.contacts - modules.lead_resistance
    metal = [
        resistivity_at(t, modules.electrode_resistivity, modules.electrode_coefficient) * modules.electrode_paths
        for t in (hot, cold)
    ]
    at_hot, at_cold = (modules.contacts + m for m in metal)
    passing, by_hot, by_cold = modules.bypass(hot, cold)
    internal = series + metal[0] + metal[1]
    open_voltage, nan = seebeck * (hot - cold), np.full(i.shape, np.nan)
    return Flows(
        conductance * (hot - cold) + i * seebeck * hot - i**2 * (legs / 2 + at_hot) + passing,
        conductance * (hot - cold) + i * seebeck * cold + i**2 * (legs / 2 + at_cold) + passing,
        open_voltage,
        nan,
        nan,
        metal[0] + metal[1],
        internal,
        open_voltage - i * internal,
        np.broadcast_to(passing, i.shape),
        np.ones(i.shape, dtype=bool),
        Slopes(conductance + i * seebeck + by_hot, -conductance + by_cold, seebeck * hot - i * (legs + 2 * at_hot)),
        Slopes(conductance + by_hot, -conductance + i * seebeck + by_cold, seebeck * cold + i * (legs + 2 * at_cold)),
        Slopes(seebeck, -seebeck, -internal),
    )


def _mean_properties(modules: Modules, source: Law, sink: Law, current: Array) -> OperatingPoint:
    """Solve modules at given currents with ``_mean_flows``: Newton's method in both junction temperatures."""
    h, c = (np.where(np.isfinite(law.open_temperature), law.open_temperature, 300.0) for law in (source, sink))
    rounds = 0
    while True:
        rounds += 1
        now = _mean_flows(modules, h, c, current)
        pinned = _Pinned(modules, source, sink, h, c, now)
        step = pinned.junctions(-pinned.misfit_hot, -pinned.misfit_cold)
        size = np.maximum(np.abs(step[0]), np.abs(step[1]))
        if rounds == 60 or np.all(size < 1e-10):
            break
        h, c = np.clip(h + step[0], 50.0, 4000.0), np.clip(c + step[1], 50.0, 4000.0)
    by_current = [slopes.current for slopes in (now.heat_hot_slopes, now.heat_cold_slopes)]
    follow = pinned.junctions(-pinned.weight_hot * by_current[0], -pinned.weight_cold * by_current[1])
    heat_slope, _, voltage_slope = pinned.outputs(follow)
    return OperatingPoint(
        hot_junction=h, cold_junction=c, hot_face=pinned.hot_face, cold_face=pinned.cold_face, current=current,
        voltage=now.voltage, open_voltage=now.open_voltage, internal_resistance=now.internal_resistance,
        leg_resistance_n=now.leg_resistance_n, leg_resistance_p=now.leg_resistance_p,
        electrode_resistance=now.electrode_resistance, heat_in=now.heat_hot, heat_out=now.heat_cold,
        bypass=now.bypass, balance_residual=np.zeros_like(current),
        voltage_slope=voltage_slope + now.voltage_slopes.current, heat_slope=heat_slope + by_current[0],
        converged=size < 1e-8, iterations=np.full(current.size, rounds),
    )  # fmt: skip
