"""States of designs: solved all in one batch, then told as totals of the whole generator."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from tegdesign.design.assemble import modules_of
from tegdesign.design.condition import Condition
from tegdesign.design.design import Design
from tegdesign.design.parts import Losses
from tegdesign.design.rating import Rung, State
from tegdesign.errors import ConvergenceError
from tegdesign.module.module import Modules
from tegdesign.system.boundary import AnyBoundary
from tegdesign.system.law import join
from tegdesign.system.load import AnyLoad, Resistance, mixed
from tegdesign.system.operating_point import OperatingPoint, operating_point


@dataclass(frozen=True)
class Ask:
    """One state to be solved, with the loss switches."""

    name: str
    source: AnyBoundary
    sink: AnyBoundary
    load: Any  # AnyLoad or Starting
    losses: Losses
    required: bool = True  # raise if it is not found; otherwise leave it out with a note
    reversed: bool = False  # what stands as the source is the sink of the design, and the plates are swapped

    @classmethod
    def of(cls, condition: Condition, losses: Losses) -> Ask:
        """Return a required state of these conditions."""
        c = condition
        return cls(c.name, c.source, c.sink, c.load, losses, reversed=c.reversed)


def solve(design: Design, asks: Sequence[Ask]) -> tuple[Modules, OperatingPoint]:
    """Solve several states of one design in one batch.

    Raises
    ------
    ConvergenceError
        A required state has no operating point.
    """
    return solve_all([design] * len(asks), asks)


def solve_all(designs: Sequence[Design], asks: Sequence[Ask]) -> tuple[Modules, OperatingPoint]:
    """Solve one state of each design in one batch; the designs share a pair of materials.

    Raises
    ------
    ConvergenceError
        A required state has no operating point.
    """
    modules = modules_of(designs, [ask.losses for ask in asks], [ask.reversed for ask in asks])
    areas, counts, series, parallel = (
        [np.array([float(v)]) for v in column]
        for column in zip(
            *(
                (g.width * g.depth, g.modules, g.modules_in_series, g.modules_in_parallel)
                for g in (d.module for d in designs)
            ),
            strict=True,
        )
    )
    point = operating_point(
        modules,
        join([ask.source.law(a, n) for ask, a, n in zip(asks, areas, counts, strict=True)]),
        join([ask.sink.law(a, n) for ask, a, n in zip(asks, areas, counts, strict=True)]),
        mixed([ask.load.law(s, p) for ask, s, p in zip(asks, series, parallel, strict=True)]),
        check=False,
    )
    for k, ask in enumerate(asks):
        if ask.required and not point.converged[k]:
            raise ConvergenceError(
                f"{ask.name}: no operating point found ({ask.load.words()}; source {ask.source.words()}; sink "
                f"{ask.sink.words()}); the last try had junctions at {point.hot_junction[k]:.1f} K and "
                f"{point.cold_junction[k]:.1f} K; check the current and the temperatures"
            )
    return modules, point


def state_of(design: Design, ask: Ask, modules: Modules, point: OperatingPoint, k: int) -> State:
    """Return design ``k`` of a solved batch as totals of the whole generator."""
    g, m = design.module, modules.take([k])
    ratio = g.modules_in_series / g.modules_in_parallel
    current = float(point.current[k]) * g.modules_in_parallel
    sign = -1.0 if ask.reversed else 1.0
    told = f"{'reversed, the sink is the hotter side: ' * ask.reversed}{ask.load.words()}; "
    voltage = float(point.voltage[k]) * g.modules_in_series
    module_current = float(point.current[k])
    contacts = 2 * float(m.contacts[0]) * ratio
    leads = float(np.asarray(m.lead_resistance)[0])
    return State(
        name=ask.name,
        conditions=f"{told}source {ask.source.words()}; sink {ask.sink.words()}; steady",
        power_W=voltage * current,
        delivered_power_W=voltage * current,
        voltage_V=sign * voltage,
        current_A=sign * current,
        load_resistance_ohm=_load_resistance(ask.load, voltage, current),
        open_circuit_voltage_V=sign * float(point.open_voltage[k]) * g.modules_in_series,
        internal_resistance_ohm=float(point.internal_resistance[k]) * ratio,
        efficiency=float(point.efficiency[k]),
        efficiency_of_given_heat=voltage * current / given if (given := ask.source.given_heat) else None,
        heat_in_W=float(point.heat_in[k]) * g.modules,
        heat_out_W=float(point.heat_out[k]) * g.modules,
        bypass_heat_W=float(point.bypass[k]) * g.modules,
        lead_loss_W=module_current**2 * leads * g.modules,
        T_hot_junction_K=float(point.hot_junction[k]),
        T_cold_junction_K=float(point.cold_junction[k]),
        T_hot_face_K=float(point.hot_face[k]),
        T_cold_face_K=float(point.cold_face[k]),
        heat_flux_hot_W_per_m2=float(point.heat_in[k]) / (g.width * g.depth),
        current_density_n_A_per_m2=module_current / g.leg_side_n**2,
        current_density_p_A_per_m2=module_current / g.leg_side_p**2,
        leg_resistance_n_ohm=float(point.leg_resistance_n[k]) * ratio,
        leg_resistance_p_ohm=float(point.leg_resistance_p[k]) * ratio,
        contact_resistance_ohm=contacts,
        electrode_resistance_ohm=float(point.electrode_resistance[k]) * ratio,
        lead_resistance_ohm=leads * ratio,
        heat_balance_residual_W=float(point.balance_residual[k]) * g.modules,
        ladder=tuple(_ladder(ask, m, point, k, g.modules)),
    )


def _load_resistance(load: AnyLoad, voltage: float, current: float) -> float | None:
    if isinstance(load, Resistance):
        return load.resistance
    return voltage / current if current > 0 else None


def _ladder(ask: Ask, m: Modules, point: OperatingPoint, k: int, count: int) -> Iterator[Rung]:
    """Yield places from the source to the sink with the fall of temperature before each."""
    places: list[tuple[str, float]] = []
    hot_side, cold_side = ("sink", "source") if ask.reversed else ("source", "sink")
    heat_in, heat_out = float(point.heat_in[k]), float(point.heat_out[k])
    face, area = np.array([point.hot_face[k]]), np.asarray(m.footprint) * count
    for place, value in ask.source.stations(face, np.array([heat_in * count]), area):
        places.append((f"{hot_side} {place}", float(value[0])))
    t = float(point.hot_face[k])
    places.append(("hot face", t))
    parts = m.thermal_parts("hot")
    for name, resistance in parts.items():
        t -= heat_in * float(resistance[0])
        places.append(("hot junction" if name == "joint" else f"behind hot {name}", t))
    t = float(point.cold_junction[k])
    places.append(("cold junction", t))
    for name, resistance in reversed(m.thermal_parts("cold").items()):
        t -= heat_out * float(resistance[0])
        places.append(("cold face" if name == "interface" else f"behind cold {name}", t))
    for place, value in reversed(
        ask.sink.stations(np.array([point.cold_face[k]]), np.array([-heat_out * count]), area)
    ):
        places.append((f"{cold_side} {place}", float(value[0])))
    previous = places[0][1]
    for place, t in places:
        yield Rung(place, t, previous - t)
        previous = t
