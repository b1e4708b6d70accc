"""Junction temperatures and current together, for a batch of generators: Newton's method with exact derivatives."""

from __future__ import annotations

from dataclasses import dataclass, fields
from typing import Any

import numpy as np
from numpy.typing import NDArray

from tegdesign.errors import ConvergenceError
from tegdesign.leg.exact import Slopes
from tegdesign.material.curve import Array
from tegdesign.module.module import EXACT, Accuracy, Flows, Modules, flows
from tegdesign.system.law import Law
from tegdesign.system.load.base import LoadLaw, MixedLoads, Terminal

BALANCE = 1e-9  # largest allowed misfit of the heat balance, relative to the heat input
_RETREATS = 8  # half steps back from states that the legs cannot carry before a design is given up


@dataclass(frozen=True)
class OperatingPoint:
    """State of one module of every generator of a batch, arrays (B,), SI units.

    Heats and power are per module; ``balance_residual`` [W] is heat in by the law of the source, less heat out by
    the law of the sink, less power and lead loss. ``face_*`` are the outer plate faces.
    """

    hot_junction: Array
    cold_junction: Array
    hot_face: Array
    cold_face: Array
    current: Array
    voltage: Array
    open_voltage: Array
    internal_resistance: Array
    leg_resistance_n: Array
    leg_resistance_p: Array
    electrode_resistance: Array
    heat_in: Array
    heat_out: Array
    bypass: Array
    balance_residual: Array
    voltage_slope: Array
    heat_slope: Array
    converged: NDArray[np.bool_]
    iterations: NDArray[np.intp]

    @property
    def power(self) -> Array:
        """Electrical power at the leads of one module [W]."""
        return self.voltage * self.current

    @property
    def efficiency(self) -> Array:
        """Power over heat drawn from the source face; 0 without heat."""
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.where(self.heat_in != 0, self.power / self.heat_in, 0.0)

    def take(self, which: Any) -> OperatingPoint:
        """Return the designs ``which``."""
        return OperatingPoint(**{f.name: getattr(self, f.name)[which] for f in fields(self)})


def first_guess(modules: Modules, source: Law, sink: Law) -> tuple[Array, Array, Array]:
    """Return junction temperatures and current by conduction alone, with the Peltier heat as extra conductance."""
    hot = np.full(modules.size, 400.0)
    cold = np.full(modules.size, 320.0)
    heat, current = np.zeros(modules.size), np.zeros(modules.size)
    given, most = (source, sink), np.full(modules.size, np.inf)
    bent = bool(source.terms or sink.terms)
    if bent:  # tangents are taken between the temperatures without heat, where they meet
        most, least = source.open_temperature, sink.open_temperature
        span = np.where(np.isfinite(most) & (most > least), most - least, 0.0)
        hot, cold = np.where(span > 0, least + 0.75 * span, hot), np.where(span > 0, least + 0.25 * span, cold)
    for _ in range(8 if bent else 3):
        source = given[0].tangent(hot + modules.resistance_hot * heat, heat)
        sink = given[1].tangent(cold - modules.resistance_cold * heat, -heat)
        mean, difference = (hot + cold) / 2, np.maximum(hot - cold, 1.0)
        seebeck, resistance, conductance = mean_couple(modules, mean, hot, cold)
        zt = seebeck**2 * mean / (resistance * conductance)
        passing = modules.bypass(hot, np.minimum(cold, hot - 1.0))[0] / difference
        k = conductance * (1 + zt / 2) + np.maximum(passing, 0.0)
        # a (T + R q) + b q = c with q = k (Th - Tc); the sink takes -q
        k_hot = (source.a * modules.resistance_hot + source.b) * k
        k_cold = (sink.a * modules.resistance_cold + sink.b) * k
        determinant = (source.a + k_hot) * (sink.a + k_cold) - k_hot * k_cold
        hot = (source.c * (sink.a + k_cold) + k_hot * sink.c) / determinant
        cold = (sink.c * (source.a + k_hot) + k_cold * source.c) / determinant
        if bent:
            hot = np.minimum(hot, most)
            cold = np.minimum(cold, hot)
        hot, cold = np.clip(hot, 60.0, 4000.0), np.clip(cold, 50.0, 3900.0)
        heat = k * (hot - cold)
        current = seebeck * np.maximum(hot - cold, 0.0) / (2 * resistance)
    return hot, cold, current


def mean_couple(modules: Modules, mean: Array, hot: Array, cold: Array) -> tuple[Array, Array, Array]:
    """Return Seebeck coefficient, resistance and conductance of the modules at mean properties."""
    seebeck, resistance, conductance = np.zeros(mean.shape), np.zeros(mean.shape), np.zeros(mean.shape)
    for which, area, sign in ((modules.n, modules.area_n, -1.0), (modules.p, modules.area_p, 1.0)):
        area = np.broadcast_to(area, mean.shape)
        alone = which[:1] if (which == which[:1]).all() else None  # the usual case is spared the masks
        for k in np.unique(which) if alone is None else alone:
            m, material = which == k if alone is None else slice(None), modules.materials[k]
            t = np.clip(mean[m], *material.range)
            seebeck[m] += sign * material.seebeck_coefficient(t)
            resistance[m] += material.resistivity(t) / area[m]
            conductance[m] += material.thermal_conductivity(t) * area[m]
    return (
        modules.couples * seebeck,
        modules.couples * modules.leg_length * resistance + 2 * modules.contacts + modules.lead_resistance,
        modules.couples * conductance / modules.leg_length,
    )


def operating_point(
    modules: Modules,
    source: Law,
    sink: Law,
    load: LoadLaw | MixedLoads,
    *,
    tolerance: float = 1e-11,
    max_iterations: int = 60,
    check: bool = True,
    guess: tuple[Array, Array, Array] | None = None,
    legs: Accuracy = EXACT,
    extrapolate: bool = False,
) -> OperatingPoint:
    """Solve a batch of generators for both junction temperatures and the current of one module.

    Parameters
    ----------
    modules, source, sink, load
        Batches of the same size B; source and sink laws are per module.
    tolerance : float
        Size of the last Newton step relative to the junction difference and to the current. Heat balances close
        to 1e-9 of the heat input, or to ``tolerance`` where a larger one is asked for.
    check : bool
        Raise where a design did not converge; otherwise look at ``converged``.
    guess : tuple of arrays, optional
        Hot junction, cold junction, current to start from.
    legs : Accuracy
        How well the legs are solved.
    extrapolate : bool
        Add the last Newton step to temperatures, current, voltage and heats, by their slopes: the error is then the
        square of the step, so that a search can stop at a large one. Resistances and residual stay as they were.

    Raises
    ------
    ConvergenceError
        No operating point was found, or the heat balance does not close to 1e-9 of the heat input.
    """
    size = modules.size
    hot, cold, current = (np.array(v, dtype=float) for v in (guess or first_guess(modules, source, sink)))
    free = np.isnan(load.given)
    current = np.where(free, current, load.given)
    sound = [hot.copy(), cold.copy(), np.where(free, 0.0, current)]  # last state that the legs could carry
    retreats = np.zeros(size, dtype=np.intp)
    result = _Record(size)
    todo = np.arange(size)
    limit = np.full(size, np.inf)
    secant = np.full((3, size), np.nan)
    part, s, k, law = modules, source, sink, load
    for iteration in range(1, max_iterations + 1):
        h, c, i = hot[todo], cold[todo], current[todo]
        now = flows(part, h, c, i, legs)
        steps_now = _newton(part, s, k, law, h, c, i, now, secant[:, todo])
        step_h, step_c, step_i, terminal, misfit, secant[:, todo] = steps_now
        balance = _balance(part, i, now, misfit)
        with np.errstate(divide="ignore", invalid="ignore"):
            size_now = np.maximum(np.abs(step_h), np.abs(step_c)) / np.abs(h - c)
            size_now = np.maximum(size_now, np.where(step_i == 0, 0.0, np.abs(step_i) / np.maximum(np.abs(i), 1e-300)))
            done = (size_now < tolerance) | ((size_now < 1e-9) & (size_now >= 0.5 * limit[todo]))
            done &= np.abs(balance) <= max(BALANCE, tolerance) * np.abs(now.heat_hot)
        usable = np.isfinite(size_now) & now.converged
        done &= usable
        limit[todo] = size_now
        # damping: the legs stay warmer on the hot side, the current below the short-circuit current
        with np.errstate(invalid="ignore", over="ignore"):
            old = h - c
            shrink = np.where(old + step_h - step_c < 0.2 * old, 0.8 * old / np.maximum(step_c - step_h, 1e-300), 1.0)
            reach = np.maximum(np.abs(step_h), np.abs(step_c))
            shrink = np.minimum(shrink, np.minimum(1.0, 400.0 / np.maximum(reach, 1e-300)))
            ceiling = 1.02 * now.open_voltage / now.internal_resistance
            next_i = np.where(free[todo], np.clip(i + step_i, 0.0, ceiling), i)
            steps = (step_h, step_c, next_i - i) if extrapolate else None
            result.store(todo, h, c, i, now, terminal, balance, part, done, iteration, steps)
        # a state that the legs cannot carry (temperature not monotone) is taken back half way
        for values, here, there in zip(
            (hot, cold, current), (h, c, i), (h + shrink * step_h, c + shrink * step_c, next_i), strict=True
        ):
            safe = sound.pop(0)
            values[todo] = np.where(usable, there, (here + safe[todo]) / 2)
            safe[todo] = np.where(usable, here, safe[todo])
            sound.append(safe)
        retreats[todo] += ~usable
        go_on = ~done & (retreats[todo] <= _RETREATS)
        if not go_on.any():
            break
        if not go_on.all():
            todo = todo[go_on]
            part, s, k, law = modules.take(todo), source.take(todo), sink.take(todo), load.take(todo)
    point = result.freeze()
    known = source.known(point.hot_face, point.heat_in) & sink.known(point.cold_face, -point.heat_out)
    point.converged[:] &= known
    if check:
        _insist(point, known)
    return point


def _newton(
    modules: Modules,
    source: Law,
    sink: Law,
    load: LoadLaw | MixedLoads,
    hot: Array,
    cold: Array,
    current: Array,
    now: Flows,
    before: Array,
) -> tuple[Array, Array, Array, Terminal, tuple[Array, Array], Array]:
    """Return the steps in both temperatures and the current; the two heat equations are eliminated by hand.

    Current, condition of the load and its slope (3, B) of the step ``before`` mend the slope of this one, since some
    loads cannot know it well: by as much as the slopes failed to foretell the change of the condition.
    """
    rh, rc = modules.resistance_hot, modules.resistance_cold
    qh, qc = now.heat_hot_slopes, now.heat_cold_slopes
    face_h, face_c = hot + rh * now.heat_hot, cold - rc * now.heat_cold
    f_h, a_h, b_h = source.evaluate(face_h, now.heat_hot)
    f_c, a_c, b_c = sink.evaluate(face_c, -now.heat_cold)
    weight_h, weight_c = a_h * rh + b_h, -(a_c * rc + b_c)
    m11, m12, m1 = a_h + weight_h * qh.hot, weight_h * qh.cold, weight_h * qh.current
    m21, m22, m2 = weight_c * qc.hot, a_c + weight_c * qc.cold, weight_c * qc.current
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        determinant = m11 * m22 - m12 * m21

        def solve(one: Array, two: Array) -> tuple[Array, Array]:
            return (one * m22 - two * m12) / determinant, (m11 * two - m21 * one) / determinant

        free_h, free_c = solve(-f_h, -f_c)  # step at given current
        by_i_h, by_i_c = solve(-m1, -m2)  # junctions follow the current
        v = now.voltage_slopes
        v_slope = v.current + v.hot * by_i_h + v.cold * by_i_c
        q_slope = qh.current + qh.hot * by_i_h + qh.cold * by_i_c
        moved_v = now.voltage + v.hot * free_h + v.cold * free_c
        moved_q = now.heat_hot + qh.hot * free_h + qh.cold * free_c
        terminal = Terminal(current, moved_v, v_slope, moved_q, q_slope)
        value, slope = load.evaluate(terminal)
        foretold = (current - before[0]) * (slope + before[2]) / 2
        mend = (value - before[1]) / foretold
        step_i = -value / (slope * np.clip(np.where(np.isfinite(mend), mend, 1.0), 0.5, 2.0))
    misfit = _as_heat(f_h, weight_h, a_h * face_h), _as_heat(f_c, weight_c, a_c * face_c)
    after = np.array([current, value, slope])
    return free_h + by_i_h * step_i, free_c + by_i_c * step_i, step_i, terminal, misfit, after


def _as_heat(misfit: Array, weight: Array, scale: Array) -> Array:
    """Return the misfit of a boundary law as heat [W]; none where it is only the rounding of temperatures."""
    real = (np.abs(misfit) > 4 * np.finfo(float).eps * np.abs(scale)) & (weight != 0)
    return np.where(real, misfit, 0.0) / np.where(real, weight, 1.0)


def _balance(modules: Modules, current: Array, now: Flows, misfit: tuple[Array, Array]) -> Array:
    """Return heat in less heat out, both by the boundary laws, less power and lead loss [W]."""
    heat_in, heat_out = now.heat_hot - misfit[0], now.heat_cold - misfit[1]
    return np.asarray(heat_in - heat_out - now.voltage * current - current**2 * modules.lead_resistance)


class _Record:
    """Collects the last evaluation of every design."""

    def __init__(self, size: int) -> None:
        self.values = {f.name: np.full(size, np.nan) for f in fields(OperatingPoint)}
        self.values["converged"] = np.zeros(size, dtype=bool)
        self.values["iterations"] = np.zeros(size, dtype=np.intp)

    def store(
        self,
        where: NDArray[np.intp],
        hot: Array,
        cold: Array,
        current: Array,
        now: Flows,
        terminal: Terminal,
        balance: Array,
        modules: Modules,
        done: NDArray[np.bool_],
        iteration: int,
        steps: tuple[Array, Array, Array] | None,
    ) -> None:
        """Keep one evaluation, moved by ``steps`` along its slopes."""
        voltage, heat_hot, heat_cold = now.voltage, now.heat_hot, now.heat_cold
        if steps is not None:
            slopes = now.voltage_slopes, now.heat_hot_slopes, now.heat_cold_slopes
            voltage, heat_hot, heat_cold = (
                value + sum(slope * step for slope, step in zip(by, steps, strict=True))
                for value, by in zip((voltage, heat_hot, heat_cold), slopes, strict=True)
            )
            hot, cold, current = hot + steps[0], cold + steps[1], current + steps[2]
        new = {
            "hot_junction": hot,
            "cold_junction": cold,
            "hot_face": hot + modules.resistance_hot * heat_hot,
            "cold_face": cold - modules.resistance_cold * heat_cold,
            "current": current,
            "voltage": voltage,
            "open_voltage": now.open_voltage,
            "internal_resistance": now.internal_resistance,
            "leg_resistance_n": now.leg_resistance_n,
            "leg_resistance_p": now.leg_resistance_p,
            "electrode_resistance": now.electrode_resistance,
            "heat_in": heat_hot,
            "heat_out": heat_cold,
            "bypass": now.bypass,
            "balance_residual": balance,
            "voltage_slope": terminal.voltage_slope,
            "heat_slope": terminal.heat_slope,
            "converged": done,
            "iterations": np.full(where.size, iteration),
        }
        for name, value in new.items():
            self.values[name][where] = value

    def freeze(self) -> OperatingPoint:
        """Return the point."""
        return OperatingPoint(**self.values)


def _insist(point: OperatingPoint, known: NDArray[np.bool_]) -> None:
    if np.all(point.converged):
        return
    bad = np.flatnonzero(~point.converged)
    k = bad[0]
    if not known[k]:
        raise ConvergenceError(
            f"design number {k} asks for {point.heat_in[k]:.4g} W in and {point.heat_out[k]:.4g} W out per module, "
            "which the table of its source or sink does not reach; give the table points of more heat"
        )
    raise ConvergenceError(
        f"operating point not found for {bad.size} of {point.converged.size} designs; the first (number {k}) "
        f"stopped at junctions {point.hot_junction[k]:.1f} K and {point.cold_junction[k]:.1f} K, "
        f"{point.current[k]:.4g} A, heat balance residual {point.balance_residual[k]:.2g} W; a current too large for "
        "the temperature difference or a source that cannot be balanced are the usual causes"
    )


__all__ = ["OperatingPoint", "Slopes", "first_guess", "mean_couple", "operating_point"]
