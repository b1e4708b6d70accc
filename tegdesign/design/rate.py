"""Rate a given design: its states, limits, losses, ceiling, data range and cautions."""

from __future__ import annotations

import os
from collections.abc import Iterator, Sequence
from dataclasses import replace

import numpy as np

from tegdesign.design.caution import cautions
from tegdesign.design.condition import OPEN, SHORT, Condition
from tegdesign.design.design import Design, as_design
from tegdesign.design.evaluate import Candidates, Evaluation, Job
from tegdesign.design.parts import Losses
from tegdesign.design.rating import Ceiling, Check, Conduction, DataUse, Loss, Mass, Rating, Sanity, State
from tegdesign.design.state import Ask, solve, state_of
from tegdesign.errors import DataRangeError
from tegdesign.leg.closed_form import Couple, best_efficiency, power_ceiling
from tegdesign.material.material import Material
from tegdesign.module.module import Modules
from tegdesign.system.load import BestEfficiency, Matched
from tegdesign.system.operating_point import OperatingPoint

_SWITCHED = tuple(Losses.model_fields)
_NODES = 24  # of the means over the temperatures of a leg


def rate(design: Design | str | os.PathLike[str], *, refuse_outside_data: bool = True) -> Rating:
    """Return the rating of a design: rated state, open circuit, both optima, short circuit, losses, cautions.

    Raises
    ------
    InputError
        The design cannot be read or is impossible.
    DataRangeError
        A leg would be used farther outside its data than the design allows (not raised without
        ``refuse_outside_data``: then the failed check stands in the result).
    ConvergenceError
        A state has no operating point.
    """
    design = as_design(design)
    conditions = design.conditions
    asks = [
        *(Ask.of(condition, design.losses) for condition in conditions),
        Ask("most power", design.source, design.sink, Matched(), design.losses),
        Ask("best efficiency", design.source, design.sink, BestEfficiency(), design.losses),
        Ask("short circuit", design.source, design.sink, SHORT, design.losses, required=False),
    ]
    without = [name for name in _SWITCHED if getattr(design.losses, name)]
    asks += [
        Ask(
            name,
            design.source,
            design.sink,
            design.load,
            design.losses.model_copy(update={name: False}),
            False,
        )
        for name in without
    ]
    base = len(asks) - len(without)
    end = len(asks)
    asks += [
        Ask(c.name, inlet, c.sink, OPEN, design.losses, required=False, reversed=c.reversed)
        for c in conditions
        if c.load is OPEN and (inlet := c.source.inlet_end()) is not None
    ]
    modules, point = solve(design, asks)
    states, notes = [], []
    for k, ask in enumerate(asks[:base]):
        if point.converged[k]:
            states.append(state_of(design, ask, modules, point, k))
        else:
            notes.append(f"{ask.name}: no steady state with temperature falling all along the legs; left out")
    pair = (modules.materials[0], modules.materials[1])
    evaluation = _as_evaluation(design, conditions, pair, point)
    notes += _deliver(states, evaluation)
    checks = tuple(_checks(evaluation))
    if refuse_outside_data:
        insist_on_data(checks, pair, design.materials.hold_outside_data)
    rated = states[0]
    bare = Rating(
        design=design,
        materials=pair,
        states=tuple(states),
        checks=checks,
        data=tuple(_data(states, pair)),
        losses=tuple(_losses(states, modules, point, without, base, design.module.modules)),
        ceiling=_ceiling(design, modules, pair, rated),
        sanity=_sanity(modules, pair, rated, design),
        masses=tuple(_masses(design, pair)),
        cautions=(),
        notes=tuple(notes),
        evaluation=evaluation,
        conduction=tuple(_conduction(pair, rated)),
        inlet_ends=tuple(
            state_of(design, asks[k], modules, point, k) for k in range(end, len(asks)) if point.converged[k]
        ),
    )
    return replace(bare, cautions=cautions(bare))



def _deliver(states: list[State], e: Evaluation) -> Iterator[str]:
    """Set what reaches the user in the loaded states (in place); yield what is to be said of it."""
    for k, condition in enumerate(e.job.states):
        if condition.of:
            continue
        before = e.points.get(condition.start) or e.points.get(condition.opened) or e.points[condition.name]
        start = float(before.voltage[0] * e.candidates.series[0])
        delivery = condition.load.delivery(states[k].voltage_V, states[k].current_A, start)
        states[k] = replace(states[k], delivered_power_W=float(delivery.power))
        if not delivery.started:
            yield f"{condition.name}: the load does not start at {start:.4g} V; what holds is its open circuit or start"
        if delivery.outside_table:
            yield f"{condition.name}: input power outside the efficiency table of the load; the end value is held"


def _as_evaluation(
    design: Design, conditions: tuple[Condition, ...], pair: tuple[Material, Material], point: OperatingPoint
) -> Evaluation:
    """Return the design as a batch of one, so that its limits are those of the sizing."""
    g = design.module
    job = Job(
        conditions, design.stack, design.losses, design.require, design.aim, design.materials.hold_outside_data, pair,
    )  # fmt: skip
    numbers = (
        g.leg_length, g.leg_side_n, g.leg_side_p, g.pitch, g.couples, g.width * g.depth, g.modules_in_series,
        g.modules_in_parallel,
    )  # fmt: skip
    geometry = Candidates(
        np.zeros(1, dtype=np.intp), np.ones(1, dtype=np.intp), *(np.full(1, float(v)) for v in numbers)
    )
    return Evaluation(job, geometry, {state.name: point.take([k]) for k, state in enumerate(job.states)})


def _checks(evaluation: Evaluation) -> Iterator[Check]:
    for limit in evaluation.limits:
        passed = bool(limit.violation[0] <= 1e-9)
        yield Check(
            limit.key,
            limit.state,
            float(limit.value[0]),
            float(limit.bound[0]),
            limit.unit,
            limit.sense,
            passed,
        )


def insist_on_data(checks: Sequence[Check], pair: tuple[Material, Material], hold: float) -> None:
    """Refuse a design that uses material data farther outside their range than allowed.

    Raises
    ------
    DataRangeError
        With leg, temperature, limit and the key that would allow it.
    """
    broken = [c for c in checks if "data point" in c.name and not c.passed]
    if not broken:
        return
    worst = min(broken, key=lambda c: c.margin)
    leg = pair[0] if "n leg" in worst.name else pair[1]
    first, last = leg.range
    side, edge = ("above", last) if worst.sense == "most" else ("below", first)
    need = hold - worst.margin
    raise DataRangeError(
        f"{worst.state}: junction at {worst.value:.1f} K is {abs(worst.value - edge):.1f} K {side} {edge:.1f} K, "
        f"the {'last' if side == 'above' else 'first'} measured point of {leg.name}; choose a material "
        f'whose data cover it, or allow the end values to be held: materials.hold_outside_data = '
        f'"{np.ceil(need):.0f} K" (now {hold:g} K)'
    )


def _data(states: Sequence[State], pair: tuple[Material, Material]) -> Iterator[DataUse]:
    for state in states:
        for leg, m in zip("np", pair, strict=True):
            below, above = m.outside(state.T_cold_junction_K, state.T_hot_junction_K)
            yield DataUse(leg, m.name, state.name, *m.range, float(below), float(above))


def _conduction(pair: tuple[Material, Material], rated: State) -> Iterator[Conduction]:
    """Yield the mean thermal conductivity of each leg over its temperatures, that of carriers and lattice apart."""
    cold, hot = rated.T_cold_junction_K, rated.T_hot_junction_K
    x, w = np.polynomial.legendre.leggauss(_NODES)
    t = (hot + cold) / 2 + x * (hot - cold) / 2
    for leg, m in zip("np", pair, strict=True):
        whole, carriers = (
            float(w @ kappa(t)) / 2 for kappa in (m.thermal_conductivity, m.electronic_thermal_conductivity)
        )
        yield Conduction(leg, m.name, cold, hot, whole, carriers, whole - carriers, m.electronic_basis)


def _losses(
    states: Sequence[State],
    modules: Modules,
    point: OperatingPoint,
    without: Sequence[str],
    base: int,
    count: int,
) -> Iterator[Loss]:
    rated = states[0]
    internal = rated.internal_resistance_ohm
    of_resistance = {
        "contacts": rated.contact_resistance_ohm / internal,
        "electrodes": rated.electrode_resistance_ohm / internal,
        "leads": rated.lead_resistance_ohm / internal,
    }
    of_heat = {"bypass": rated.bypass_heat_W / rated.heat_in_W if rated.heat_in_W else None}
    for k, name in enumerate(without):
        if not point.converged[base + k]:
            continue
        power = float(point.power[base + k]) * count
        yield Loss(name, of_resistance.get(name), of_heat.get(name), power, _change(power, rated.power_W))
    most = next(s.power_W for s in states if s.name == "most power")
    yield Loss("load not matched", None, None, most, _change(most, rated.power_W))


def _change(power: float, rated: float) -> float:
    """Return the difference, nothing where it is only rounding."""
    return power - rated if abs(power - rated) > 1e-12 * abs(rated) else 0.0


def _mean_couple(pair: tuple[Material, Material], modules: Modules, mean: float) -> Couple:
    """Return one couple of constant properties at the mean junction temperature, joints and metal left out."""
    n, p = pair
    length = float(np.asarray(modules.leg_length)[0])
    an, ap = float(modules.area_n[0]), float(modules.area_p[0])
    return Couple(
        np.asarray(p.seebeck_coefficient(mean) - n.seebeck_coefficient(mean)),
        np.asarray(n.resistivity(mean) * length / an + p.resistivity(mean) * length / ap),
        np.asarray((n.thermal_conductivity(mean) * an + p.thermal_conductivity(mean) * ap) / length),
    )


def _sanity(modules: Modules, pair: tuple[Material, Material], rated: State, design: Design) -> Sanity:
    g, first = design.module, modules.take([0])
    hot, cold = rated.T_hot_junction_K, rated.T_cold_junction_K
    ideal = _mean_couple(pair, first, (hot + cold) / 2)
    parasitic = rated.internal_resistance_ohm - rated.leg_resistance_n_ohm - rated.leg_resistance_p_ohm
    ratio = g.modules_in_series / g.modules_in_parallel
    couples = g.couples
    whole = Couple(
        ideal.seebeck * couples,
        ideal.resistance * couples + parasitic / ratio,
        ideal.conductance * couples + rated.bypass_heat_W / g.modules / max(hot - cold, 1e-9),
    )
    load = rated.load_resistance_ohm
    if load is None:
        power = heat = 0.0
    else:
        _, p, q = whole.at_load(hot, cold, load / ratio / whole.resistance)
        power, heat = float(p) * g.modules, float(q) * g.modules
    efficiency = power / heat if heat else 0.0
    return Sanity(
        power_W=power,
        efficiency=efficiency,
        open_circuit_voltage_V=float(whole.seebeck) * (hot - cold) * g.modules_in_series,
        module_figure_of_merit=float(whole.figure_of_merit) * (hot + cold) / 2,
        carnot_efficiency=1 - cold / hot,
        power_deviation=power / rated.power_W - 1 if rated.power_W else 0.0,
        efficiency_deviation=efficiency / rated.efficiency - 1 if rated.efficiency else 0.0,
    )


def _ceiling(design: Design, modules: Modules, pair: tuple[Material, Material], rated: State) -> Ceiling:
    """Return the power that the outside of the legs allows, whatever the legs, from ideal legs of this pair.

    A given heat: its best efficiency between the lower service limit and the sink. Else films, interfaces and plates
    between source and sink. Both with constant properties at the mean of these temperatures.
    """
    g, first, (n, p) = design.module, modules.take([0]), pair
    footprint, count = np.array([g.width * g.depth]), np.array([float(g.modules)])
    source, sink = (
        side.law(footprint, count).tangent(np.array([face]), np.array([heat / g.modules]))
        for side, face, heat in (
            (design.source, rated.T_hot_face_K, rated.heat_in_W),
            (design.sink, rated.T_cold_face_K, -rated.heat_out_W),
        )
    )
    given, cold = design.source.given_heat, design.sink.reference_temperature
    if given is not None:
        hot = min(n.service_limit.value, p.service_limit.value)
        given = max(given, rated.heat_in_W)  # a leak can also bring heat
        power = float(best_efficiency(_best_z(n, p, (hot + cold) / 2), hot, cold)) * given
        words = (
            f"all of the {given:.4g} W at the best efficiency of ideal legs of this pair between the lower service "
            f"limit, {hot:.0f} K, and the sink, {cold:.0f} K"
        )
        return Ceiling(power, rated.power_W / power, words)
    parts = {
        side: law.resistance + sum(first.thermal_parts(side)[part] for part in ("interface", "substrate"))
        for side, law in (("hot", source), ("cold", sink))
    }
    external = float((parts["hot"] + parts["cold"])[0])
    hot, cold = float(source.open_temperature[0]), float(sink.open_temperature[0])
    if external == 0:
        return Ceiling(None, None, "surfaces are held at the legs, so nothing outside them limits the power")
    # at the optimum the legs hold half of the difference; the rest falls outside, as the resistances go
    lean = float((parts["cold"] - parts["hot"])[0]) / external
    mean = (hot + cold) / 2 + lean * (hot - cold) / 4
    power = float(power_ceiling(_best_z(n, p, mean), hot - cold, mean, external)) * g.modules
    words = (
        f"films, interfaces and plates of {external:.4g} K/W per module and {hot - cold:.1f} K in all let ideal legs "
        "of this pair give so much, whatever their size (constant properties; allow 5 %)"
    )
    return Ceiling(power, rated.power_W / power, words)


def _best_z(n: Material, p: Material, mean: float) -> float:
    """Return Z [1/K] of a pair at its best area ratio; held to the range of the data of each leg."""
    at = [(m, float(np.clip(mean, *m.range))) for m in (n, p)]
    seebeck = sum(abs(float(m.seebeck_coefficient(t))) for m, t in at)
    loss = sum(np.sqrt(float(m.resistivity(t)) * float(m.thermal_conductivity(t))) for m, t in at)
    return float((seebeck / loss) ** 2)


def _masses(design: Design, pair: tuple[Material, Material]) -> Iterator[Mass]:
    g = design.module
    for leg, m, side in zip("np", pair, (g.leg_side_n, g.leg_side_p), strict=True):
        legs = g.couples * g.modules
        volume = legs * side**2 * g.leg_length
        yield Mass(leg, m.name, legs, volume, volume * m.density.value, m.density.basis)
