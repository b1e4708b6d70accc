"""Results as values: everything named with its unit, ready for print, JSON and pandas."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import asdict, dataclass, field
from functools import cached_property
from typing import TYPE_CHECKING, Any, cast

from tegdesign.design.condition import OPEN, RATED, Condition
from tegdesign.design.design import Design
from tegdesign.material.material import Material

if TYPE_CHECKING:
    import pandas as pd

    from tegdesign.design.evaluate import Evaluation
    from tegdesign.design.margin_result import Margins
    from tegdesign.material.bands.material import BandMaterial


@dataclass(frozen=True)
class Rung:
    """One place on the way of the heat and its temperature; ``drop_K`` is the fall from the place before."""

    place: str
    T_K: float
    drop_K: float


@dataclass(frozen=True)
class State:
    """The whole generator in one state. Voltage, current, power and heat are totals of all modules.

    ``power_W`` is at the leads, ``delivered_power_W`` what reaches the user behind a converter or battery.
    """

    name: str
    conditions: str
    power_W: float
    delivered_power_W: float
    voltage_V: float
    current_A: float
    load_resistance_ohm: float | None
    open_circuit_voltage_V: float
    internal_resistance_ohm: float
    efficiency: float
    efficiency_of_given_heat: float | None
    heat_in_W: float
    heat_out_W: float
    bypass_heat_W: float
    lead_loss_W: float
    T_hot_junction_K: float
    T_cold_junction_K: float
    T_hot_face_K: float
    T_cold_face_K: float
    heat_flux_hot_W_per_m2: float
    current_density_n_A_per_m2: float
    current_density_p_A_per_m2: float
    leg_resistance_n_ohm: float
    leg_resistance_p_ohm: float
    contact_resistance_ohm: float
    electrode_resistance_ohm: float
    lead_resistance_ohm: float
    heat_balance_residual_W: float
    ladder: tuple[Rung, ...]

    def to_row(self) -> dict[str, Any]:
        """Return the numbers of the state by their names with units, and the name of the state."""
        return {k: v for k, v in asdict(self).items() if k not in ("ladder", "conditions")}

    @property
    def load_ratio(self) -> float | None:
        """Load resistance over internal resistance."""
        return (
            None
            if self.load_resistance_ohm is None
            else self.load_resistance_ohm / self.internal_resistance_ohm
        )

    @property
    def junction_difference_K(self) -> float:
        """Temperature difference between the junctions."""
        return self.T_hot_junction_K - self.T_cold_junction_K

    @property
    def face_thermal_resistance_K_per_W(self) -> float | None:
        """Temperature difference of the outer faces over the heat drawn, all modules together."""
        return (self.T_hot_face_K - self.T_cold_face_K) / self.heat_in_W if self.heat_in_W > 0 else None


@dataclass(frozen=True)
class Check:
    """One limit or requirement in one state; ``margin`` is the room left in ``unit``, negative where it is missed."""

    name: str
    state: str
    value: float
    limit: float
    unit: str
    sense: str
    passed: bool

    @property
    def margin(self) -> float:
        """Room left; negative where the limit is broken."""
        return self.limit - self.value if self.sense == "most" else self.value - self.limit


@dataclass(frozen=True)
class DataUse:
    """How a leg's temperatures lie against the data of its material: kelvins with the end values held."""

    leg: str
    material: str
    state: str
    T_first_K: float
    T_last_K: float
    below_K: float
    above_K: float


@dataclass(frozen=True)
class Loss:
    """What one loss takes: share of the internal resistance or of the heat, and the power without it.

    ``bypass`` includes ``radiation``. Under a given heat a gain can be negative: what conducts better cools the legs.
    """

    name: str
    share_of_internal_resistance: float | None
    share_of_heat: float | None
    power_without_it_W: float
    power_gained_without_it_W: float


@dataclass(frozen=True)
class Ceiling:
    """What exchangers, interfaces and plates let any legs of this pair give; None where nothing external limits."""

    power_W: float | None
    share_reached: float | None
    words: str


@dataclass(frozen=True)
class Sanity:
    """Closed forms of constant properties at the mean junction temperature, beside the exact answer."""

    power_W: float
    efficiency: float
    open_circuit_voltage_V: float
    module_figure_of_merit: float
    carnot_efficiency: float
    power_deviation: float
    efficiency_deviation: float


@dataclass(frozen=True)
class Caution:
    """A warning with identity, trigger and source; text, PDF and JSON read the same list."""

    id: str
    title: str
    value: str
    limit: str
    text: str
    source: str


@dataclass(frozen=True)
class Mass:
    """Leg material of all modules."""

    leg: str
    material: str
    legs: int
    volume_m3: float
    mass_kg: float
    density_basis: str


@dataclass(frozen=True)
class Conduction:
    """What conducts heat in a leg: means over its rated temperatures, and where the part of the carriers is from."""

    leg: str
    material: str
    T_cold_K: float
    T_hot_K: float
    thermal_conductivity_W_per_m_K: float
    electronic_thermal_conductivity_W_per_m_K: float
    lattice_thermal_conductivity_W_per_m_K: float
    basis: str


@dataclass(frozen=True)
class Rating:
    """A design in its states, with everything an engineer needs to judge it."""

    design: Design
    materials: tuple[Material, Material]
    states: tuple[State, ...]
    checks: tuple[Check, ...]
    data: tuple[DataUse, ...]
    losses: tuple[Loss, ...]
    ceiling: Ceiling
    sanity: Sanity
    masses: tuple[Mass, ...]
    cautions: tuple[Caution, ...]
    notes: tuple[str, ...]
    conduction: tuple[Conduction, ...]
    evaluation: Evaluation = field(repr=False, compare=False)  # the asked states as they were solved
    inlet_ends: tuple[State, ...] = ()  # each open circuit, of the module that meets a stream first

    def state(self, name: str) -> State:
        """Return a state by its name: ``rated``, ``most power``, ``best efficiency``, ``open circuit`` ..."""
        return next(s for s in self.states if s.name == name)

    @cached_property
    def conditions(self) -> tuple[Condition, ...]:
        """Conditions of every state that is asked for: rated and named ones, each with its open circuit and start."""
        return self.design.conditions

    @property
    def loaded(self) -> tuple[Condition, ...]:
        """Conditions of the states that were named, after that of the rated one; without open circuits and starts."""
        return tuple(c for c in self.conditions if not c.of)

    def around(self, loaded: Condition) -> tuple[State, ...]:
        """Return a loaded state with its open circuit and start, those there are."""
        return tuple(self.state(c.name) for c in self.conditions if loaded.name in (c.name, c.of))

    @property
    def asked(self) -> tuple[State, ...]:
        """The states that are asked for, without the optima and the short circuit that are always told."""
        return tuple(self.state(c.name) for c in self.conditions)

    @property
    def nominal(self) -> tuple[State, ...]:
        """The states between the nominal source and sink: all but the named ones with theirs."""
        named = {c.name for c in self.conditions if RATED not in (c.name, c.of)}
        return tuple(s for s in self.states if s.name not in named)

    @property
    def opened(self) -> tuple[Condition, ...]:
        """Conditions of the states without current, that of the nominal case first."""
        return tuple(c for c in self.conditions if c.load is OPEN)

    def duration_s(self, condition: Condition) -> float | None:
        """Return for how long a state lasts [s], also for its open circuit and start; None where it is continuous."""
        return next((s.duration for s in self.design.states if s.name in (condition.name, condition.of)), None)

    def __contains__(self, name: object) -> bool:
        """Tell whether a state of this name was found."""
        return any(s.name == name for s in self.states)

    @property
    def rated(self) -> State:
        """The state at the load of the design."""
        return self.states[0]

    @property
    def failed(self) -> tuple[Check, ...]:
        """Checks that are not passed."""
        return tuple(c for c in self.checks if not c.passed)

    @property
    def met(self) -> bool:
        """Whether every limit and requirement holds."""
        return not self.failed

    @cached_property
    def margins(self) -> Margins:
        """How far the design is from failing; found when it is first asked for."""
        from tegdesign.design.margin import margins

        return margins(self.evaluation)

    @property
    def held(self) -> tuple[DataUse, ...]:
        """Uses of data outside their range."""
        return tuple(d for d in self.data if d.below_K > 0 or d.above_K > 0)

    @property
    def module_height_m(self) -> float:
        """Distance of the outer plate faces of a module, interfaces left out."""
        stack = self.design.stack
        plates = stack.hot.substrate_thickness + stack.cold.substrate_thickness
        return self.design.module.leg_length + 2 * stack.electrode_thickness + plates

    @property
    def assumptions(self) -> tuple[str, ...]:
        """Keys of the design whose values came from defaults."""
        return tuple(self.design.assumed)

    def to_frame(self) -> pd.DataFrame:
        """Return the states as a table, one row each, column names with units."""
        import pandas as pd

        return pd.DataFrame([s.to_row() for s in self.states]).set_index("name")

    def ladder_frame(self) -> pd.DataFrame:
        """Return the ladders of temperatures of all states as one table."""
        import pandas as pd

        return pd.DataFrame([{"state": s.name, **asdict(rung)} for s in self.states for rung in s.ladder])

    def to_dict(self) -> dict[str, Any]:
        """Return everything as plain values for JSON; keys end in their unit."""
        g = self.design.module
        return {
            "met": self.met,
            "title": self.design.title,
            "revision": self.design.revision,
            "design": self.design.model_dump(exclude_none=True),
            "geometry": {
                "couples_per_module": g.couples,
                "modules": g.modules,
                "width_m": g.width,
                "depth_m": g.depth,
                "leg_length_m": g.leg_length,
                "leg_side_n_m": g.leg_side_n,
                "leg_side_p_m": g.leg_side_p,
                "pitch_m": g.pitch,
                "gap_m": g.gap,
                "fill_factor": g.fill_factor,
            },
            "states": [asdict(s) for s in self.states],
            "inlet_ends": [asdict(s) for s in self.inlet_ends],
            "checks": [{**asdict(c), "margin": c.margin} for c in self.checks],
            **self.margins.to_dict(),
            "data_range": [asdict(d) for d in self.data],
            "losses": [asdict(item) for item in self.losses],
            "ceiling": asdict(self.ceiling),
            "sanity": asdict(self.sanity),
            "leg_material": [asdict(m) for m in self.masses],
            "materials": [dict(_material(m)) for m in self.materials],
            "conduction": [asdict(c) for c in self.conduction],
            "cautions": [asdict(c) for c in self.cautions],
            "assumptions": list(self.assumptions),
            "notes": list(self.notes),
        }


def _material(m: Material) -> Iterator[tuple[str, Any]]:
    first, last = m.range
    yield from (("name", m.name), ("composition", m.composition), ("polarity", m.polarity))
    yield from (("T_first_K", first), ("T_last_K", last), ("service_limit_K", m.service_limit.value))
    yield from (("service_limit_basis", m.service_limit.basis), ("source", m.source), ("doi", m.doi))
    yield from (("compilation", m.compilation), ("hazards", m.hazards), ("hazard_tags", list(m.hazard_tags)))
    yield ("kind", m.kind)
    if m.kind == "bands":  # asked without loading what tables do not need
        made = cast("BandMaterial", m)
        yield from (("doping_per_m3", made.doping.cold), ("doping_hot_per_m3", made.doping.hot))
        yield from (("graded_between_K", made.doping.span), ("grain_size_m", made.grain_size))
