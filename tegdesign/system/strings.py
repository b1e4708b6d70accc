"""How modules are joined to strings and arrays, and the currents that follow from straight voltage-current lines."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tegdesign.errors import ConvergenceError, InputError
from tegdesign.material.curve import Array
from tegdesign.system.load.base import LoadLaw, MixedLoads, Terminal

_ROUNDS = 200


class Diode(NamedTuple):
    """A diode that conducts with ``drop`` [V] and ``resistance`` [ohm] above it, and blocks below."""

    drop: float
    resistance: float

    def checked(self, name: str) -> Diode:
        """Return itself, refused where the drop is negative or the resistance not positive."""
        if not (self.drop >= 0 and self.resistance > 0):
            raise InputError(
                f"{name} diode: drop {self.drop:g} V, resistance {self.resistance:g} ohm; the drop may not be negative "
                "and the resistance must be positive, 0.4 V and 0.01 ohm for example"
            )
        return self


@dataclass(frozen=True)
class Strings:
    """Which module is in which string, and which string in which array: strings in series, arrays of parallel strings.

    Attributes
    ----------
    string : ndarray of int (M,)
        String of each module, counted from 0.
    array : ndarray of int (S,)
        Array of each string, counted from 0.
    broken, shorted : ndarray of bool (M,)
        Modules with an open joint: no current passes them; modules whose leads touch: no voltage is left.
    bypass : Diode, optional
        Across each module, conducting where the string would drive the module backwards.
    blocking : Diode, optional
        In each string, so that none takes current from the others.
    """

    string: NDArray[np.intp]
    array: NDArray[np.intp]
    broken: NDArray[np.bool_]
    shorted: NDArray[np.bool_]
    bypass: Diode | None = None
    blocking: Diode | None = None

    @property
    def arrays(self) -> int:
        """Number of arrays."""
        return int(self.array.max()) + 1

    def of_strings(self, modules: Array) -> Array:
        """Return the sum over the modules of each string (S,)."""
        return np.bincount(self.string, modules, self.array.size).astype(float)

    def of_arrays(self, strings: Array) -> Array:
        """Return the sum over the strings of each array (A,)."""
        return np.bincount(self.array, strings, self.arrays).astype(float)


def strings(
    string: ArrayLike,
    array: ArrayLike | None = None,
    *,
    broken: ArrayLike = (),
    shorted: ArrayLike = (),
    bypass: Diode | None = None,
    blocking: Diode | None = None,
) -> Strings:
    """Return how modules are joined.

    Parameters
    ----------
    string : array_like of int (M,)
        String of each module; [0, 0, 0, 1, 1, 1] is two strings of three.
    array : array_like of int (S,), optional
        Array of each string; all in one by default.
    broken, shorted : array_like of int
        Numbers of modules with an open joint, and of those that are shorted.

    Raises
    ------
    InputError
        A number that is left out or does not exist, a diode that cannot be, a string of shorted modules alone.
    """
    own = np.asarray(string, dtype=np.intp)
    count = int(own.max()) + 1 if own.size else 0
    arrays = np.zeros(count, dtype=np.intp) if array is None else np.asarray(array, dtype=np.intp)
    for name, values, size in (("string", own, arrays.size), ("array", arrays, None)):
        top = size if size is not None else (int(values.max()) + 1 if values.size else 0)
        if values.ndim != 1 or values.size == 0 or not np.array_equal(np.unique(values), np.arange(top)):
            raise InputError(f"{name} numbers {values.tolist()} are not 0 to {max(top - 1, 0)}; count without gaps")
    faults = []
    for name, which in (("broken", broken), ("shorted", shorted)):
        numbers = np.asarray(which, dtype=np.intp).reshape(-1)
        if np.any((numbers < 0) | (numbers >= own.size)):
            raise InputError(f"{name} modules {numbers.tolist()}, but there are 0 to {own.size - 1}; mend the number")
        faults.append(np.isin(np.arange(own.size), numbers))
    if np.any(faults[0] & faults[1]):
        raise InputError(
            f"modules {np.flatnonzero(faults[0] & faults[1]).tolist()} are both broken and shorted; choose one"
        )
    dead = np.flatnonzero(np.bincount(own, ~faults[1], count) == 0)
    if dead.size:
        raise InputError(f"string {dead[0]} has shorted modules only and would short its array; take it out")
    for name, diode in (("bypass", bypass), ("blocking", blocking)):
        if diode is not None:
            diode.checked(name)
    return Strings(own, arrays, faults[0], faults[1], bypass, blocking)


class Lines(NamedTuple):
    """Straight lines of modules about the current [A] at which they were looked at: voltage, heat and their slopes."""

    current: Array
    voltage: Array
    voltage_slope: Array
    heat: Array
    heat_slope: Array


class Currents(NamedTuple):
    """What the lines of modules give together: per module (M,), string (S,) and array (A,), A and V.

    ``module_voltage`` is that between the leads with the bypass diode, whose current is the difference of string and
    module current.
    """

    module: Array
    module_voltage: Array
    string: Array
    voltage: Array
    current: Array


def _branches(s: Strings, lines: Lines, string_current: Array) -> tuple[Array, Array, Array, Array]:
    """Return voltage between the leads, its slope by string current, module current and its slope, (M,) each."""
    i = string_current[s.string]
    v, m, x = lines.voltage, lines.voltage_slope, lines.current
    own, own_slope = i, np.ones_like(i)
    between, slope = v + m * (i - x), m
    if s.bypass is not None:
        drop, r = s.bypass
        back = (between < -drop) & ~s.broken
        step = (v + drop + r * (i - x)) / (r - m)
        own = np.where(back, x + step, own)
        own_slope = np.where(back, r / (r - m), own_slope)
        between = np.where(back, v + m * step, between)
        slope = np.where(back, m * r / (r - m), slope)
        between, slope = np.where(s.broken, -drop - r * i, between), np.where(s.broken, -r, slope)
    own, own_slope = np.where(s.broken, 0.0, own), np.where(s.broken, 0.0, own_slope)
    own, own_slope = np.where(s.shorted, x - v / m, own), np.where(s.shorted, 0.0, own_slope)
    return np.where(s.shorted, 0.0, between), np.where(s.shorted, 0.0, slope), own, own_slope


def solve_lines(s: Strings, lines: Lines, load: LoadLaw | MixedLoads, start: Array | None = None) -> Currents:
    """Return the currents at which strings of straight lines meet each other and their load.

    All strings of an array end on one voltage, currents add. Newton's method over the pieces of the lines, a load that
    is straight too takes one step on each piece.

    Parameters
    ----------
    load : LoadLaw or MixedLoads
        Of size A, for the whole array as if it was one module (``series`` = ``parallel`` = 1).
    start : array_like (S,), optional
        String currents [A] to start from, zero by default.

    Raises
    ------
    InputError
        All strings of an array are open.
    ConvergenceError
        The load and the strings do not meet.
    """
    count = s.array.size
    can = np.ones(count, dtype=bool)
    if s.bypass is None:
        can[s.string[s.broken]] = False
    none = np.flatnonzero(s.of_arrays(can.astype(float)) == 0)
    if none.size:
        raise InputError(f"array {none[0]}: every string has an open joint, so no current can flow; mend or bypass one")
    current = np.where(can, np.zeros(count) if start is None else start, 0.0)
    active = can.copy()
    drop, extra = (0.0, 0.0) if s.blocking is None else s.blocking
    for _ in range(_ROUNDS):
        between, slope, own, own_slope = _branches(s, lines, current)
        end, fall = s.of_strings(between) - drop - extra * current, s.of_strings(slope) - extra
        share = np.where(active, -1 / fall, 0.0)  # conductance
        total = s.of_arrays(share)
        at_total = s.of_arrays(share * end) / total
        moved = share * (end - at_total[s.array])  # to one voltage at the same current of the array
        heat = lines.heat + lines.heat_slope * (own + own_slope * moved[s.string] - lines.current)
        by_current = s.of_strings(lines.heat_slope * own_slope) * share / total[s.array]
        amount = s.of_arrays(current)
        terminal = Terminal(amount, at_total, -1 / total, s.of_arrays(s.of_strings(heat)), s.of_arrays(by_current))
        value, by = load.evaluate(terminal)
        step = -value / by
        voltage = at_total - step / total
        new = np.where(active, current + share * (end - voltage[s.array]), 0.0)
        if s.blocking is not None:
            behind = active & (new <= 0)
            opened = can & ~active & (_branches_at_rest(s, lines) - drop > voltage[s.array])
            alone = s.of_arrays((active & ~behind).astype(float)) == 0
            behind &= ~alone[s.array]  # the last string stands for the array, at no less than no current
            new = np.where(behind, 0.0, np.maximum(new, 0.0))
            changed = bool(behind.any() or opened.any())
            active = (active & ~behind) | opened
        else:
            changed = False
        size = np.maximum(np.abs(new), np.abs(current))
        settled = np.all(np.abs(new - current) <= 1e-13 * np.maximum(size, size.max()))
        current = new
        if settled and not changed:
            between, _, own, _ = _branches(s, lines, current)
            return Currents(own, between, current, voltage, s.of_arrays(current))
    raise ConvergenceError(
        f"load and strings do not meet in {_ROUNDS} rounds; the string currents stopped near "
        f"{', '.join(f'{v:.4g}' for v in current[:6])} A; another load, or diodes of more resistance, may help"
    )


def _branches_at_rest(s: Strings, lines: Lines) -> Array:
    """Return the voltage of each string without current [V] (S,)."""
    return s.of_strings(_branches(s, lines, np.zeros(s.array.size))[0])


def connections(
    modules: int, loaded_voltage: ArrayLike, open_voltage: ArrayLike, *, least: float, greatest: float
) -> list[tuple[int, int]]:
    """Return all (series, parallel) of equal modules that keep a voltage window in every state; perhaps none.

    Parameters
    ----------
    modules : int
        All of them are used: series times parallel.
    loaded_voltage, open_voltage : array_like
        Of one module in each state [V]; loaded at the load that is meant to run.
    least, greatest : float
        Voltage [V] that must be kept under load, and that may not be passed at open circuit.

    Raises
    ------
    InputError
        No module, a window upside down, a voltage that is not positive.
    """
    low, high = float(np.min(loaded_voltage)), float(np.max(open_voltage))
    if modules < 1 or not 0 <= least <= greatest:
        raise InputError(f"{modules} modules for {least:g} V to {greatest:g} V: one module at least, lower limit first")
    if not (low > 0 and high > 0):
        raise InputError(f"a module gives {low:g} V loaded, {high:g} V open; leave out states without positive voltage")
    every = (series for series in range(1, modules + 1) if modules % series == 0)
    return [(k, modules // k) for k in every if k * low >= least and k * high <= greatest]
