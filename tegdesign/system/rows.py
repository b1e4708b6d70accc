"""Rows of modules along a stream: each row cools (or warms) what the next one sees."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.errors import ConvergenceError, InputError
from tegdesign.material.curve import Array
from tegdesign.module.module import Modules
from tegdesign.system.boundary import Boundary, Stream
from tegdesign.system.driven import at_current, at_load, fluid_slopes
from tegdesign.system.law import Law
from tegdesign.system.load.base import LoadLaw, MixedLoads, Terminal
from tegdesign.system.operating_point import BALANCE, OperatingPoint

_PROBE = 1e-4  # step of the numerical derivatives by stream temperatures, of the junction difference of the row
_KEEP = 1e-2  # relative step below which derivatives are kept
_ROUNDS = 40


@dataclass(frozen=True)
class RowsPoint:
    """State of N rows of every design of a batch, arrays (B, N) in the order in which the source passes them, SI units.

    ``module`` is one module of each row, its fields (B, N). Stream temperatures before and after each row are in the
    direction of that stream; nan on a side that is no stream. ``exact`` is false for modules that the others drive so
    far beyond their short circuit that mean properties had to do (``system.driven``).
    """

    module: OperatingPoint
    modules_per_row: Array
    source_before: Array
    source_after: Array
    sink_before: Array
    sink_after: Array
    balance_residual: Array
    exact: Array
    iterations: int

    @property
    def power(self) -> Array:
        """Electrical power of each row [W] (B, N); negative where a series string drives a row."""
        return self.module.power * self.modules_per_row[:, None]

    @property
    def heat_in(self) -> Array:
        """Heat that each row draws from the source [W] (B, N)."""
        return self.module.heat_in * self.modules_per_row[:, None]

    @property
    def heat_out(self) -> Array:
        """Heat that each row gives to the sink [W] (B, N)."""
        return self.module.heat_out * self.modules_per_row[:, None]

    @property
    def total_power(self) -> Array:
        """Electrical power of all rows [W] (B,)."""
        return np.asarray(self.power.sum(axis=1))


@dataclass(frozen=True)
class _Side:
    """One side of all rows: its law for the fluid at the inlet, and how the fluid passes the rows."""

    law: Law  # (B N,), of the row that meets the fluid as it comes in
    inlet: float
    capacity: float  # W/K; infinite for a side that is no stream
    rows: int
    reverse: bool

    @property
    def passed(self) -> Array:
        """1 where the fluid has passed row m (column) before it comes to row k (line), else 0."""
        earlier = np.tri(self.rows, self.rows, -1)
        return earlier.T if self.reverse else earlier

    def in_order(self, values: Array) -> Array:
        """Return (B, N) in the order in which this fluid passes the rows, or back from there."""
        return values[:, ::-1] if self.reverse else values

    @property
    def flows(self) -> bool:
        return bool(np.isfinite(self.capacity))

    def passing(self, rise: Array, heat: Array, sign: float) -> tuple[Array, Array, Array]:
        """Return fluid temperatures before and after each row [K] and the heat that they tell of [W], (B, N) each."""
        if not self.flows:
            unknown = np.full(rise.shape, np.nan)
            return unknown, unknown, heat
        before, own = self.in_order(self.inlet + rise), self.in_order(heat)
        after = np.concatenate([before[:, 1:], before[:, -1:] + sign * own[:, -1:] / self.capacity], axis=1)
        told = self.capacity * sign * (after - before)
        return self.in_order(before), self.in_order(after), self.in_order(told)


def _warmer(law: Law, rise: Array) -> Law:
    """Return the law of a stream that comes in warmer: stream laws know only the difference to the face."""
    return law._replace(c=law.c + law.a * rise)


def _side(boundary: Boundary, footprint: Array, abreast: Array, places: int, rows: int, reverse: bool) -> _Side:
    """Return one side; a boundary that is no stream is shared evenly by the modules of all places.

    Rows in flow order see the whole flow one after the other, each with its share of the exchanger: for the law of
    one row that is the same as ``places`` such flows side by side over the whole exchanger.
    """
    capacity, inlet = np.inf, boundary.reference_temperature
    if isinstance(boundary, Stream):
        capacity = boundary.capacity_rate
        boundary = boundary.model_copy(update={"mass_flow": boundary.mass_flow * places})
    one_row = boundary.law(footprint, abreast * places)
    return _Side(one_row.take(np.repeat(np.arange(footprint.size), rows)), inlet, capacity, rows, reverse)


def rows_point(
    modules: Modules,
    source: Boundary,
    sink: Boundary,
    load: LoadLaw | MixedLoads,
    *,
    rows: int,
    modules_per_row: ArrayLike = 1,
    counter_current: bool = False,
    one_current: bool = False,
    places: int | None = None,
    tolerance: float = 1e-11,
) -> RowsPoint:
    """Solve N rows of modules along a stream for a batch of B designs, all rows of all designs together.

    Each row is a plate behind its share of the exchanger (effectiveness of a side with one temperature), so one row
    is the ``Stream`` with its modules, and many rows tend to the continuous exchanger with an error that falls as
    1/N^2. A matched load of each row seeks its own most power and takes no account of the rows after it, so that
    tracking itself depends a little on the number of trackers; one current for all seeks the most of all.
    Source and sink streams go the same way, or against each other with ``counter_current``; rows are counted along the
    source. A side that is no stream is the same for all rows. Unknown are the stream temperatures before each row, and
    the current of a string: Newton's method, derivatives exact where one current flows, else from differences.

    Parameters
    ----------
    modules : Modules (B,)
    load : LoadLaw or MixedLoads
        Per module. Size B N, row after row of each design: every row has a load of its own. With ``one_current``
        size B: all rows carry the same current, and the load meets the mean voltage of the modules, as for
        ``series`` x ``parallel`` modules whose every string passes all rows.
    modules_per_row : array_like (B,)
        Modules side by side in a row.
    places : int, optional
        Rows that the exchanger has room for, if not all are fitted; a given area of the boundary is that of all places.

    Raises
    ------
    InputError
        The number of rows is not positive or larger than the places; the source is not warmer than the sink.
    ConvergenceError
        No state was found, or the heat balance does not close to 1e-9 of the heat of all rows.
    """
    places = rows if places is None else places
    if not 1 <= rows <= places:
        raise InputError(f"rows = {rows}, but 1 to {places} are possible; choose another number of rows")
    size = modules.size
    abreast = np.broadcast_to(np.asarray(modules_per_row, dtype=float), (size,)).copy()
    footprint = np.broadcast_to(np.asarray(modules.footprint, dtype=float), (size,)).copy()
    each = np.repeat(np.arange(size), rows)
    hot = _side(source, footprint, abreast, places, rows, reverse=False)
    cold = _side(sink, footprint, abreast, places, rows, reverse=counter_current)
    rise = np.zeros((2, size, rows))  # of the fluid at each row over its inlet, source and sink
    warm, cool = hot.law.open_temperature, cold.law.open_temperature
    if not np.all(warm > cool):
        k = int(np.argmin(warm - cool))
        raise InputError(
            f"source of {warm[k]:.6g} K is not warmer than the sink of {cool[k]:.6g} K; exchange them or change one"
        )
    solver = _Rows(modules.take(each), hot, cold, abreast, load, one_current, tolerance)
    current, last, again = np.zeros(size), np.inf, True
    for iteration in range(1, _ROUNDS + 1):
        point = solver.evaluate(rise, current)
        step, step_current, rounding = solver.newton(point, rise, current)
        with np.errstate(divide="ignore", invalid="ignore"):
            moved = np.abs(step) / np.maximum(rounding, tolerance * np.abs(rise).max(axis=(0, 2))[:, None])
            turned = np.where(step_current == 0, 0.0, np.abs(step_current) / np.maximum(np.abs(current), 1e-300))
        change = max(float(moved.max()) * tolerance, float(turned.max()))
        if change <= tolerance or (change < 1e3 * tolerance and change >= 0.5 * last):
            if solver.exact.all() or not again:
                return solver.result(point, rise, iteration)
            solver.exact, again, change = np.ones(each.size, dtype=bool), False, np.inf  # some may be exact here
        last = solver.change = change
        rise, current = rise + step, current + step_current
    raise ConvergenceError(
        f"stream temperatures of {rows} rows not found in {_ROUNDS} rounds (last relative change {change:.2g}); "
        "fewer rows, or a load of its own for each row, may help"
    )


class _Rows:
    """The equations of all rows."""

    def __init__(
        self, modules: Modules, hot: _Side, cold: _Side, abreast: Array, load: Any, one_current: bool, tolerance: float
    ) -> None:
        self.modules, self.hot, self.cold, self.abreast = modules, hot, cold, abreast
        self.load, self.one_current, self.tolerance = load, one_current, tolerance
        self.shape = abreast.size, hot.rows
        self.lead = np.broadcast_to(np.asarray(modules.lead_resistance, dtype=float), (modules.size,))
        self.exact = np.ones(modules.size, dtype=bool)
        self.guess: tuple[Array, Array, Array] | None = None
        self.moves: dict[int, tuple[Array, ...]] = {}
        self.change = np.inf  # of the last step, relative

    def laws(self, rise: Array, which: Any) -> tuple[Law, Law]:
        """Return both laws of the rows ``which`` with fluids warmer by ``rise`` (2, rows)."""
        hot, cold = (
            _warmer(side.law.take(which), r) if side.flows else side.law.take(which)
            for side, r in zip((self.hot, self.cold), rise, strict=True)
        )
        return hot, cold

    def at_own_load(self, rise: Array, which: Any) -> OperatingPoint:
        """Return the rows ``which`` (2, rows), each at its load."""
        guess = None if self.guess is None else tuple(v[which] for v in self.guess)
        modules, load = self.modules.take(which), self.load.take(which)
        point = at_load(modules, *self.laws(rise, which), load, self.tolerance, guess)
        if not point.converged.all():
            k = int(np.flatnonzero(~point.converged)[0])
            design, row = divmod(int(which[k]), self.shape[1])
            raise ConvergenceError(
                f"row {row + 1} of design {design} has no operating point, junctions at {point.hot_junction[k]:.2f} K "
                f"and {point.cold_junction[k]:.2f} K; a row that finds no temperature difference left is the usual "
                "cause: use fewer rows"
            )
        return point

    def evaluate(self, rise: Array, current: Array) -> OperatingPoint:
        """Return all modules at stream temperatures."""
        flat, everything = rise.reshape(2, -1), np.arange(self.modules.size)
        if self.one_current:
            point, self.exact = at_current(
                self.modules, *self.laws(flat, everything), np.repeat(current, self.shape[1]), exact=self.exact,
                tolerance=self.tolerance, guess=self.guess,
            )  # fmt: skip
        else:
            point = self.at_own_load(flat, everything)
        self.guess = point.hot_junction, point.cold_junction, point.current
        return point

    def newton(self, point: OperatingPoint, rise: Array, current: Array) -> tuple[Array, Array, Array]:
        """Return steps of the fluid temperatures (2, B, N) and the current (B,), and what is rounding [K] (B, 1)."""
        b, n = self.shape
        sides = self.hot, self.cold
        signs = -1.0, 1.0  # the source cools, the sink warms
        scale = self.abreast[:, None]
        heats = [v.reshape(b, n) * scale for v in (point.heat_in, point.heat_out)]
        if self.one_current:  # the load looks at them, so they are exact
            self.moves = self._at_current(point, rise)
        elif self.change > _KEEP:
            self.moves = self._probe(point, rise)
        moves = self.moves
        misfit, matrix = [], np.zeros((b, 2, n, 2, n))
        for k, (side, sign, heat) in enumerate(zip(sides, signs, heats, strict=True)):
            per = sign / side.capacity * side.passed
            misfit.append(rise[k] - heat @ per.T)
            matrix[:, k, :, k, :] += np.eye(n)
            for m, slopes in moves.items():
                matrix[:, k, :, m, :] -= per * slopes[k][:, None, :]
        left = matrix.reshape(b, 2 * n, 2 * n)
        right = -np.concatenate(misfit, axis=1)
        rounding = np.full((b, 1), 4 * np.finfo(float).eps * max(self.hot.inlet, self.cold.inlet))
        if not self.one_current:
            step = np.linalg.solve(left, right[:, :, None])[:, :, 0]
            return step.reshape(b, 2, n).transpose(1, 0, 2), np.zeros(b), rounding
        by_current = [v.reshape(b, n) * scale for v in (point.heat_slope, self._cold_slope(point))]
        pushes = [h @ (sign / s.capacity * s.passed).T for h, sign, s in zip(by_current, signs, sides, strict=True)]
        both = np.linalg.solve(left, np.stack([right, np.concatenate(pushes, axis=1)], axis=2))
        free, follow = (both[:, :, j].reshape(b, 2, n) for j in (0, 1))

        def mean(value: Array, place: int, along: Array) -> Array:
            share = 1.0 if place == 2 else scale  # heats are those of a row
            by_streams = sum(slopes[place] * along[:, m] / share for m, slopes in moves.items())
            return np.asarray((value.reshape(b, n) + by_streams).mean(axis=1))

        terminal = Terminal(
            current,
            mean(point.voltage, 2, free),
            mean(point.voltage_slope, 2, follow),
            mean(point.heat_in, 0, free),
            mean(point.heat_slope, 0, follow),
        )
        value, slope = self.load.evaluate(terminal)
        step_current = -value / slope
        step = free + follow * step_current[:, None, None]
        return step.transpose(1, 0, 2), step_current, rounding

    def _cold_slope(self, point: OperatingPoint) -> Array:
        """Return dQ_out/dI: heat in less power less lead loss."""
        return np.asarray(point.heat_slope - point.voltage - point.current * (point.voltage_slope + 2 * self.lead))

    def _at_current(self, point: OperatingPoint, rise: Array) -> dict[int, tuple[Array, ...]]:
        """Return for each stream the derivatives of heat in and out of a row and of module voltage, (B, N) each."""
        laws = self.laws(rise.reshape(2, -1), np.arange(self.modules.size))
        return self._of_rows(dict(enumerate(fluid_slopes(self.modules, *laws, point, self.exact))))

    def _probe(self, point: OperatingPoint, rise: Array) -> dict[int, tuple[Array, ...]]:
        """Return the same for rows at loads of their own, from differences."""
        size = self.modules.size
        which = [k for k, side in enumerate((self.hot, self.cold)) if side.flows]
        probe = np.maximum(_PROBE * np.abs(point.hot_junction - point.cold_junction), 1e-6)
        copies = np.tile(np.arange(size), len(which))
        flat = rise.reshape(2, -1)
        moved = [flat + probe * (np.arange(2) == k)[:, None] for k in which]
        there = self.at_own_load(np.concatenate(moved, axis=1), copies) if which else point
        parts = {k: slice(j * size, (j + 1) * size) for j, k in enumerate(which)}
        slopes = {
            k: tuple((getattr(there, n)[part] - getattr(point, n)) / probe for n in ("heat_in", "heat_out", "voltage"))
            for k, part in parts.items()
        }
        return self._of_rows(slopes)

    def _of_rows(self, slopes: dict[int, tuple[Array, ...]]) -> dict[int, tuple[Array, ...]]:
        """Return slopes of a module as (B, N), those of heats for the whole row; sides that are no stream left out."""
        units = self.abreast[:, None], self.abreast[:, None], np.ones((1, 1))
        return {
            k: tuple(v.reshape(self.shape) * unit for v, unit in zip(three, units, strict=True))
            for k, three in slopes.items()
            if (self.hot, self.cold)[k].flows
        }

    def result(self, point: OperatingPoint, rise: Array, iterations: int) -> RowsPoint:
        """Return the state after the balance of every row and of all has been held against the streams."""
        shape, scale = self.shape, self.abreast[:, None]
        module = OperatingPoint(**{f.name: getattr(point, f.name).reshape(shape) for f in fields(OperatingPoint)})
        hot, cold = (
            side.passing(r, heat * scale, sign)
            for side, r, heat, sign in (
                (self.hot, rise[0], module.heat_in, -1.0),
                (self.cold, rise[1], module.heat_out, 1.0),
            )
        )
        lost = (module.power + module.current**2 * self.lead.reshape(shape)) * scale
        residual = hot[2] - cold[2] - lost
        whole = np.abs(module.heat_in * scale).sum(axis=1, keepdims=True)
        if not np.all(np.abs(residual) <= max(BALANCE, self.tolerance) * whole):
            raise ConvergenceError(
                f"heat balance of the rows does not close: {np.max(np.abs(residual / whole)):.2g} of the heat, "
                f"at most {BALANCE:.0e}; please report the design"
            )
        return RowsPoint(
            module, self.abreast, hot[0], hot[1], cold[0], cold[1], residual, self.exact.reshape(shape), iterations
        )
