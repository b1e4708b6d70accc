"""A batch of modules: N couples in series between two plates, as circuit and as thermal path.

Every member of ``Modules`` is a float or an array of the batch shape (B,); one design is a batch of one.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from functools import cached_property
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from tegdesign.leg.exact import LegSolution, Slopes, solve_leg
from tegdesign.material.curve import Array
from tegdesign.material.material import Material
from tegdesign.module.electrode import path_over_section, resistivity_at
from tegdesign.module.gap import conduction, radiation
from tegdesign.module.spreading import spreading_resistance

Value = float | Array


@dataclass(frozen=True)
class Modules:
    """Geometry and parts of modules, SI units; areas and resistances are per module unless they say otherwise.

    Attributes
    ----------
    materials : sequence of Material
        All materials of the batch; ``n`` and ``p`` index into it.
    leg_length, side_n, side_p, pitch : m
        Square legs on a square grid of ``pitch``; the gap between facing legs is pitch - (side_n + side_p)/2.
    couples : number of couples in series
    footprint : m^2
        Plate area, edges included.
    contact_resistivity_n, contact_resistivity_p : ohm m^2
        Electrical resistance of one joint times its area; each leg has two.
    contact_thermal : m^2 K/W
        Thermal resistance of one joint times the leg area.
    electrode_thickness, electrode_resistivity, electrode_coefficient, electrode_conductivity
        m, ohm m at 20 degC, 1/K, W/m/K.
    substrate_thickness_hot, substrate_conductivity_hot, ... cold : m, W/m/K
    interface_hot, interface_cold : m^2 K/W of footprint
    filler_conductivity, filler_exponent, emittance_hot, emittance_cold
        k at 300 K [W/m/K] and its power of T/300 K; emittance 0 switches radiation off.
    edge_conductance : W/K from the hot to the cold plate beside everything else
    lead_resistance : ohm per module
    spreading : 1 counts the spreading of heat into the plates, 0 leaves it out
    """

    materials: Sequence[Material]
    n: NDArray[np.intp]
    p: NDArray[np.intp]
    leg_length: Value
    side_n: Value
    side_p: Value
    pitch: Value
    couples: Value
    footprint: Value
    contact_resistivity_n: Value = 0.0
    contact_resistivity_p: Value = 0.0
    contact_thermal: Value = 0.0
    electrode_thickness: Value = 0.0
    electrode_resistivity: Value = 0.0
    electrode_coefficient: Value = 0.0
    electrode_conductivity: Value = 390.0
    substrate_thickness_hot: Value = 0.0
    substrate_conductivity_hot: Value = 1.0
    substrate_thickness_cold: Value = 0.0
    substrate_conductivity_cold: Value = 1.0
    interface_hot: Value = 0.0
    interface_cold: Value = 0.0
    filler_conductivity: Value = 0.0
    filler_exponent: Value = 0.0
    emittance_hot: Value = 0.0
    emittance_cold: Value = 0.0
    edge_conductance: Value = 0.0
    lead_resistance: Value = 0.0
    spreading: Value = 1.0

    @property
    def size(self) -> int:
        """Number of designs in the batch."""
        return int(self.n.size)

    def take(self, which: Any) -> Modules:
        """Return the designs ``which`` (mask or indices) of the batch, with all that is already worked out of them."""
        values = {name: v[which] if np.ndim(v) else v for name, v in self.__dict__.items() if name != "materials"}
        own = {f.name for f in fields(self)}
        part = Modules(self.materials, **{name: v for name, v in values.items() if name in own})
        part.__dict__.update(values)
        return part

    def tile(self, times: int) -> Modules:
        """Return the batch repeated, what does not depend on temperature worked out once."""
        for name in ("contacts", "electrode_paths", "resistance_hot", "resistance_cold", "gap_area", "leg_area"):
            getattr(self, name)
        return self.take(np.tile(np.arange(self.size), times))

    @cached_property
    def area_n(self) -> Array:
        """Area of an n leg [m^2]."""
        return np.asarray(self.side_n) ** 2

    @cached_property
    def area_p(self) -> Array:
        """Area of a p leg [m^2]."""
        return np.asarray(self.side_p) ** 2

    @cached_property
    def leg_area(self) -> Array:
        """Area of all legs of a module [m^2]."""
        return np.asarray(self.couples * (self.area_n + self.area_p))

    @cached_property
    def gap(self) -> Array:
        """Gap between the facing sides of neighbouring legs [m]."""
        return np.asarray(self.pitch - (np.asarray(self.side_n) + self.side_p) / 2)

    @cached_property
    def contacts(self) -> Array:
        """Electrical resistance of the joints of one side of a module [ohm]."""
        return np.asarray(
            self.couples * (self.contact_resistivity_n / self.area_n + self.contact_resistivity_p / self.area_p)
        )

    @cached_property
    def electrode_paths(self) -> Array:
        """Sum of length over section of the electrodes of one side of a module [1/m]; 0 where switched off."""
        t = np.asarray(self.electrode_thickness, dtype=float)
        safe = np.where(t > 0, t, 1.0)
        paths = path_over_section(self.side_n, self.gap, safe) + path_over_section(self.side_p, self.gap, safe)
        return np.where(t > 0, self.couples * paths, 0.0)

    def thermal_parts(self, side: str) -> dict[str, Array]:
        """Return the thermal resistances [K/W] of one side ("hot" or "cold") from the outer face to the junction."""
        thickness = np.asarray(getattr(self, f"substrate_thickness_{side}"), dtype=float)
        conductivity = getattr(self, f"substrate_conductivity_{side}")
        cell = self.pitch * np.asarray(self.pitch)
        patches = [np.asarray(a) * (a + self.gap / 2) for a in (self.side_n, self.side_p)]
        spread_n, spread_p = (spreading_resistance(patch, cell, thickness, conductivity) for patch in patches)
        both = spread_n + spread_p
        metal = self.couples * (patches[0] + patches[1])
        return {
            "interface": np.asarray(getattr(self, f"interface_{side}") / self.footprint),
            "substrate": np.asarray(thickness / (conductivity * 2 * self.couples * cell)),
            "spreading": self.spreading * spread_n * spread_p / (np.where(both > 0, both, 1.0) * self.couples),
            "electrode": np.asarray(self.electrode_thickness / (self.electrode_conductivity * metal)),
            "joint": np.asarray(self.contact_thermal / self.leg_area),
        }

    @cached_property
    def resistance_hot(self) -> Array:
        """Thermal resistance from the hot outer face to the hot junction [K/W]."""
        return np.asarray(sum(self.thermal_parts("hot").values()))

    @cached_property
    def resistance_cold(self) -> Array:
        """Thermal resistance from the cold junction to the cold outer face [K/W]."""
        return np.asarray(sum(self.thermal_parts("cold").values()))

    @cached_property
    def gap_area(self) -> Array:
        """Plate area not covered by legs [m^2]."""
        return np.asarray(self.footprint - self.leg_area)

    def bypass(self, hot: Array, cold: Array) -> tuple[Array, Array, Array]:
        """Return the heat that misses the legs [W] and its derivatives by the junction temperatures [W/K]."""
        filler = conduction(hot, cold, self.filler_conductivity, self.filler_exponent)
        eh, ec = (np.asarray(e, dtype=float) for e in (self.emittance_hot, self.emittance_cold))
        on = (eh > 0) & (ec > 0)
        rays = radiation(hot, cold, np.where(on, eh, 1.0), np.where(on, ec, 1.0))
        edge = (self.edge_conductance * (hot - cold), self.edge_conductance, -np.asarray(self.edge_conductance))
        total = [
            self.gap_area * (f / self.leg_length + np.where(on, r, 0.0)) + e
            for f, r, e in zip(filler, rays, edge, strict=True)
        ]
        return total[0], total[1], total[2]


class Flows(NamedTuple):
    """What modules do at given junction temperatures and current, arrays (B,); W, V, ohm per module.

    ``*_slopes`` are derivatives by hot junction, cold junction and module current.
    """

    heat_hot: Array
    heat_cold: Array
    open_voltage: Array
    leg_resistance_n: Array
    leg_resistance_p: Array
    electrode_resistance: Array
    internal_resistance: Array
    voltage: Array
    bypass: Array
    converged: NDArray[np.bool_]
    heat_hot_slopes: Slopes
    heat_cold_slopes: Slopes
    voltage_slopes: Slopes


class Accuracy(NamedTuple):
    """How well legs are solved: arguments of ``solve_leg``."""

    points: int = 4
    tolerance: float = 1e-11
    max_iterations: int = 60


EXACT = Accuracy()


def _legs(
    modules: Modules, which: NDArray[np.intp], hot: Array, cold: Array, j: Array, accuracy: Accuracy
) -> LegSolution:
    """Solve one leg of every module; loops over materials, never over designs."""
    asked = {**accuracy._asdict(), "slopes": True, "check": False}
    if (which == which[:1]).all() and which.size:
        return solve_leg(modules.materials[which[0]], hot, cold, j, **asked)
    used = np.unique(which)
    masks = [which == k for k in used]
    parts = [
        solve_leg(modules.materials[k], hot[m], cold[m], j[m], **asked) for k, m in zip(used, masks, strict=True)
    ]

    def join(values: list[Array]) -> Array:
        out = np.empty(which.size, dtype=values[0].dtype)
        for mask, value in zip(masks, values, strict=True):
            out[mask] = value
        return out

    merged: dict[str, Any] = {}
    for f in fields(LegSolution):
        column: list[Any] = [getattr(part, f.name) for part in parts]
        if isinstance(column[0], Slopes):
            merged[f.name] = Slopes(*(join([s[i] for s in column]) for i in range(3)))
        else:
            merged[f.name] = max(column) if f.name == "iterations" else join(column)
    return LegSolution(**merged)


def flows(modules: Modules, hot: Array, cold: Array, current: Array, accuracy: Accuracy = EXACT) -> Flows:
    """Return heats, voltages and resistances of modules at junction temperatures [K] and module current [A].

    V = V_oc - I R_int with both taken on the temperature profile that the legs have at that current. Joule heat of
    joints and electrodes is set free at the junction it belongs to; heat_hot - heat_cold = I V + I^2 R_leads exactly.
    """
    couples, length = modules.couples, np.asarray(modules.leg_length, dtype=float)
    voltage = leg_heat = np.zeros_like(current)
    dv, dq, dp = (Slopes(voltage, voltage, voltage) for _ in range(3))
    resistances = []
    converged = np.ones(current.shape, dtype=bool)
    for which, area, sign in ((modules.n, modules.area_n, -1.0), (modules.p, modules.area_p, 1.0)):
        j = sign * current * length / area
        leg = _legs(modules, which, hot, cold, j, accuracy)
        if leg.cold_heat_slopes is None or leg.resistance_slopes is None:  # pragma: no cover - asked for above
            raise AssertionError
        scale = couples * area / length  # [m]
        by_j = sign * length / area
        r = leg.resistance_slopes
        resistances.append(leg.resistance * couples * length / area)
        converged &= leg.converged
        voltage = voltage + sign * couples * leg.voltage
        leg_heat = leg_heat + scale * leg.cold_heat
        own_q = leg.cold_heat_slopes
        dq = Slopes(dq.hot + scale * own_q.hot, dq.cold + scale * own_q.cold, dq.current + scale * own_q.current * by_j)
        per = couples * length / area
        dv = Slopes(
            dv.hot + sign * couples * leg.seebeck_hot - current * per * r.hot,
            dv.cold - sign * couples * leg.seebeck_cold - current * per * r.cold,
            dv.current - leg.resistance * per - current * per * r.current * by_j,
        )
    legs_voltage = voltage - current * (resistances[0] + resistances[1])
    dp = Slopes(current * dv.hot, current * dv.cold, legs_voltage + current * dv.current)
    rho, slope = modules.electrode_resistivity, modules.electrode_coefficient
    paths = modules.electrode_paths
    metal_hot, metal_cold = (resistivity_at(t, rho, slope) * paths for t in (hot, cold))
    metal_slope = rho * slope * paths
    square = current * current
    passing = modules.bypass(hot, cold)
    parasitic_hot, parasitic_cold = modules.contacts + metal_hot, modules.contacts + metal_cold
    heat_cold = leg_heat + passing[0] + square * parasitic_cold
    heat_hot = leg_heat + current * legs_voltage + passing[0] - square * parasitic_hot
    internal = resistances[0] + resistances[1] + parasitic_hot + parasitic_cold + modules.lead_resistance
    return Flows(
        heat_hot,
        heat_cold,
        voltage,
        resistances[0],
        resistances[1],
        metal_hot + metal_cold,
        internal,
        voltage - current * internal,
        passing[0],
        converged,
        Slopes(
            dq.hot + dp.hot + passing[1] - square * metal_slope,
            dq.cold + dp.cold + passing[2],
            dq.current + dp.current - 2 * current * parasitic_hot,
        ),
        Slopes(
            dq.hot + passing[1],
            dq.cold + passing[2] + square * metal_slope,
            dq.current + 2 * current * parasitic_cold,
        ),
        Slopes(
            dv.hot - current * metal_slope,
            dv.cold - current * metal_slope,
            dv.current - (parasitic_hot + parasitic_cold + modules.lead_resistance),
        ),
    )
