"""The list of all rules."""

from __future__ import annotations

from collections.abc import Callable, Iterable

from tegdesign.design.caution import assembly, data, electrical, junction, load, material, surface
from tegdesign.design.rating import Caution, Rating

Rule = Callable[[Rating], Iterable[Caution]]

RULES: tuple[Rule, ...] = (
    junction.over_service_limit,
    junction.near_service_limit,
    junction.short_time,
    junction.inlet_end,
    junction.loss_of_load,
    junction.coolant_loss,
    junction.air,
    load.does_not_start,
    load.no_power,
    load.input_voltage,
    load.reversed_voltage,
    data.held,
    data.losses_off,
    data.implausible,
    surface.touch,
    surface.condensation,
    electrical.open_circuit_voltage,
    electrical.short_circuit,
    electrical.electrode_current,
    electrical.leg_current,
    assembly.clamping,
    assembly.slender_legs,
    material.toxic,
    material.reactive,
    material.words_of_care,
    data.measured_spread,
)
