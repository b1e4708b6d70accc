"""Every limit and requirement of a job, in every state it applies to."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from tegdesign.design.condition import OPEN, Condition, Starting
from tegdesign.design.parts import Require
from tegdesign.material.curve import Array
from tegdesign.system.boundary import AnyBoundary
from tegdesign.system.load import LoadLimit
from tegdesign.system.operating_point import OperatingPoint

if TYPE_CHECKING:
    from tegdesign.design.evaluate import Evaluation

_KELVIN = 50.0  # [K], one unit of violation


class Limit(NamedTuple):
    """One limit in one state over the batch: value and bound in the unit, positive ``violation`` where it is broken."""

    key: str
    state: str
    unit: str
    sense: str  # "most" or "least"
    value: Array
    bound: Array
    scale: Array

    @property
    def hard(self) -> bool:
        """Whether it is a limit of temperature: those come before any requirement."""
        return self.unit == "K"

    @property
    def violation(self) -> Array:
        """By how much the bound is broken, in units of ``scale``; negative is room left."""
        over = self.value - self.bound if self.sense == "most" else self.bound - self.value
        return np.asarray(over / self.scale)


def hot_allowance(require: Require, state: Condition) -> tuple[float, float | None]:
    """Return by how much service limits may be passed [K], and the hot junction that is asked for [K] or None."""
    if not state.short_time:
        return 0.0, require.hot_junction
    return require.short_time_over_service, require.short_time_hot_junction or require.hot_junction


def limits(e: Evaluation) -> Iterator[Limit]:
    """Yield the limits of all candidates: temperatures, source and sink first, then load and requirements."""
    for state in e.job.states:
        yield from _temperatures(e, state, e.points[state.name])
        yield from _sides(e, state, e.points[state.name])
    for state in e.job.states:
        yield from _load(e, state)
        yield from _requirements(e, state)


def _temperatures(e: Evaluation, state: Condition, point: OperatingPoint) -> Iterator[Limit]:
    c, job, require = e.candidates, e.job, e.job.require
    ones, name = np.ones(c.n.size), state.name
    kelvin = _KELVIN * ones
    first, last, service = job.ranges
    hot, cold = point.hot_junction, point.cold_junction
    over, asked_hot = hot_allowance(require, state)
    asked_cold = (state.short_time and require.short_time_cold_junction) or require.cold_junction
    for leg, index in (("n", c.n), ("p", c.p)):
        yield Limit(f"service limit of the {leg} leg", name, "K", "most", hot, service[index] + over, kelvin)
        yield Limit(f"last data point of the {leg} leg", name, "K", "most", hot, last[index] + job.hold, kelvin)
        yield Limit(f"first data point of the {leg} leg", name, "K", "least", cold, first[index] - job.hold, kelvin)
    if asked_hot is not None:
        yield Limit("required hot junction", name, "K", "most", hot, asked_hot * ones, kelvin)
    if asked_cold is not None:
        yield Limit("required cold junction", name, "K", "most", cold, asked_cold * ones, kelvin)


def _sides(e: Evaluation, state: Condition, point: OperatingPoint) -> Iterator[Limit]:
    c, flux = e.candidates, e.job.require.heat_flux
    ones = np.ones(c.n.size)
    sides: tuple[tuple[str, AnyBoundary, Array], ...] = (
        ("sink" if state.reversed else "source", state.source, point.heat_in * c.modules),
        ("source" if state.reversed else "sink", state.sink, -point.heat_out * c.modules),
    )
    for side, boundary, heat in sides:
        outcomes = boundary.outcomes(heat)
        for quantity, sense, bound in boundary.bounds():
            words = f"{quantity.removesuffix('_K').replace('_', ' ')} of the {side}"
            yield Limit(words, state.name, "K", sense, outcomes[quantity], bound * ones, _KELVIN * ones)
    if flux is not None:
        value = point.heat_in / c.footprint
        yield Limit("heat flux at the hot face", state.name, "W/m^2", "most", value, flux * ones, flux * ones)


def _load(e: Evaluation, state: Condition) -> Iterator[Limit]:
    """Yield what the load itself cannot bear or needs, and that it takes power at all."""
    ones = np.ones(e.candidates.n.size)
    if isinstance(state.load, Starting) or state.load is OPEN:
        return
    places = {"rated": state.name, "open circuit": state.opened, "start": state.start}
    for limit in state.load.limits():
        name = places[limit.state]
        value = _at_leads(e, name, limit)
        scale = np.maximum(abs(limit.bound), 1e-12) * ones
        yield Limit(limit.name, name, limit.unit, limit.sense, value, limit.bound * ones, scale)
    if not state.load.passive:
        power = e.points[state.name].power * e.candidates.modules
        yield Limit(
            "power at the leads", state.name, "W", "least", power, 0 * ones, np.maximum(np.abs(power), 1e-12)
        )


def _at_leads(e: Evaluation, name: str, limit: LoadLimit) -> Array:
    c, point = e.candidates, e.points[name]
    voltage, current = point.voltage * c.series, point.current * c.parallel
    return {"voltage": voltage, "current": current, "power": voltage * current}[limit.quantity]


def _requirements(e: Evaluation, state: Condition) -> Iterator[Limit]:
    c, require, name = e.candidates, e.job.require, state.name
    ones = np.ones(c.n.size)
    voltage = e.points[name].voltage * c.series
    low, high = require.voltage or (None, None)
    asked: list[tuple[str, str, str, Array, float | None]] = []
    if "power" in state.held:
        asked.append(("required power", "W", "least", e.delivered(state), require.power))
    if "efficiency" in state.held and require.efficiency is not None:
        asked.append(("required efficiency", "1", "least", e.efficiency_in(state), require.efficiency))
    if "voltage" in state.held:
        asked.append(("lower end of the voltage window", "V", "least", voltage, low))
        asked.append(("upper end of the voltage window", "V", "most", voltage, high))
    if state.load is OPEN:
        asked.append(("open-circuit voltage", "V", "most", voltage, require.open_circuit_voltage))
    for key, unit, sense, value, bound in asked:
        if bound is not None:
            yield Limit(key, name, unit, sense, value, bound * ones, bound * ones)
