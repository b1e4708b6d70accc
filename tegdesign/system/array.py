"""Arrays of modules at unequal temperatures: currents, mismatch, modules driven backwards, faults."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tegdesign.errors import ConvergenceError
from tegdesign.material.curve import Array
from tegdesign.module.module import Modules
from tegdesign.system.driven import at_current, at_load
from tegdesign.system.law import Law
from tegdesign.system.load import Matched
from tegdesign.system.load.base import LoadLaw, MixedLoads
from tegdesign.system.operating_point import OperatingPoint
from tegdesign.system.strings import Currents, Lines, Strings, solve_lines

_ROUNDS = 40
_TOLERANCE = 1e-10


@dataclass(frozen=True)
class ArrayPoint:
    """State of arrays of modules: per module (M,), string (S,) and array (A,), SI units.

    ``module`` is the state of each module at the current through its legs, ``exact`` false where mean properties had
    to do (``system.driven``); ``module_voltage`` and ``bypass_current`` are between its leads, where the bypass diode
    sits. ``voltage`` and ``current`` are what the load sees.
    """

    module: OperatingPoint
    exact: NDArray[np.bool_]
    module_voltage: Array
    bypass_current: Array
    string_current: Array
    voltage: Array
    current: Array
    iterations: int

    @property
    def power(self) -> Array:
        """Power at the load of each array [W] (A,)."""
        return self.voltage * self.current

    @property
    def module_power(self) -> Array:
        """Power that each module gives [W] (M,); negative where it is driven backwards."""
        return self.module.power

    @property
    def backwards(self) -> NDArray[np.bool_]:
        """Modules that take power from the others instead of giving it (M,)."""
        return np.asarray(self.module_power < -1e-9 * np.abs(self.module_power).max())


def array_point(
    modules: Modules,
    source: Law,
    sink: Law,
    strings: Strings,
    load: LoadLaw | MixedLoads,
    *,
    tolerance: float = _TOLERANCE,
) -> ArrayPoint:
    """Solve arrays of modules, each behind its own source and sink, with the junctions following the currents.

    Each round solves all modules exactly at their currents, then the network of their tangents (``solve_lines``):
    Newton's method for the whole array. A matched load finds a summit of the power; with diodes there may be others.

    Parameters
    ----------
    modules, source, sink
        Batches of M modules, all arrays together.
    load : LoadLaw or MixedLoads
        Of size A, for the whole array as if it was one module: ``Matched().law(ones, ones)`` with ones of size A.
    tolerance : float
        Last change of module currents and voltages, relative to the largest.

    Raises
    ------
    InputError
        All strings of an array are open.
    ConvergenceError
        No state was found.
    """
    size = modules.size
    current, exact, start = np.zeros(size), np.ones(size, dtype=bool), None
    guess, last, again = None, np.inf, True
    for iteration in range(1, _ROUNDS + 1):
        point, exact = at_current(modules, source, sink, current, exact=exact, guess=guess)
        guess = point.hot_junction, point.cold_junction, current
        lines = Lines(current, point.voltage, point.voltage_slope, point.heat_in, point.heat_slope)
        found = solve_lines(strings, lines, load, start)
        start = found.string
        change = float(np.max(np.abs(found.module - current)) / max(float(np.abs(found.module).max()), 1e-300))
        if np.all(found.module == current):
            change = 0.0
        if change <= tolerance or (change < 1e2 * tolerance and change >= 0.5 * last):
            if exact.all() or not again:
                return _result(point, exact, found, strings, iteration)
            exact, again, change = np.ones(size, dtype=bool), False, np.inf  # some may be exact here
        last, current = change, found.module
    raise ConvergenceError(
        f"currents of the array not found in {_ROUNDS} rounds (last relative change {last:.2g}); another load, or "
        "fewer unequal modules in a string, may help"
    )


def linear_array(
    open_voltage: ArrayLike, internal_resistance: ArrayLike, strings: Strings, load: LoadLaw | MixedLoads
) -> Currents:
    """Return the currents of modules with V = V_oc - I R each: temperatures frozen, the limit of stiff junctions.

    Parameters
    ----------
    open_voltage, internal_resistance : array_like (M,)
        V and ohm, for example of an ``OperatingPoint``.
    """
    voltage, resistance = (np.asarray(v, dtype=float) for v in (open_voltage, internal_resistance))
    none = np.zeros(voltage.shape)
    return solve_lines(strings, Lines(none, voltage, -resistance, none, none), load)


def independent_power(modules: Modules, source: Law, sink: Law, strings: Strings) -> Array:
    """Return what each array would give with a matched load for every module that is whole [W] (A,).

    A module whose source is not warmer than its sink gives nothing.

    Raises
    ------
    ConvergenceError
        A module has no operating point.
    """
    whole = np.flatnonzero(~(strings.broken | strings.shorted))
    spread = source.take(whole).open_temperature > sink.take(whole).open_temperature
    which, power = whole[spread], np.zeros(modules.size)
    if which.size:
        ones = np.ones(which.size)
        load = Matched().law(ones, ones)
        point = at_load(modules.take(which), source.take(which), sink.take(which), load, _TOLERANCE)
        if not point.converged.all():
            k = which[~point.converged][0]
            raise ConvergenceError(
                f"module number {k} has no operating point at its own matched load; look at it alone"
            )
        power[which] = point.power
    return strings.of_arrays(strings.of_strings(power))


def mismatch_loss(power: Array, independent: Array) -> Array:
    """Return 1 - P_array / sum of P_i,max (A,): the share lost by joining unequal modules."""
    return np.asarray(1 - power / independent)


def _result(
    point: OperatingPoint, exact: NDArray[np.bool_], found: Currents, strings: Strings, iterations: int
) -> ArrayPoint:
    bypassed = found.string[strings.string] - found.module
    none = strings.shorted | (strings.bypass is None)
    return ArrayPoint(
        point, exact, found.module_voltage, np.where(none, 0.0, bypassed), found.string, found.voltage, found.current,
        iterations,
    )  # fmt: skip
