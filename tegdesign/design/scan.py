"""Tables and curves of a given design: operating tables, V-I and P-I, power against hot temperature, maps."""

from __future__ import annotations

import os
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from itertools import product
from typing import TYPE_CHECKING, Any

import numpy as np

from tegdesign.design.condition import OPEN, SHORT
from tegdesign.design.design import Design, as_design
from tegdesign.design.rating import State
from tegdesign.design.state import Ask, solve, solve_all, state_of
from tegdesign.document import validate
from tegdesign.errors import DataRangeError, InputError, closest
from tegdesign.system.boundary import AnyBoundary
from tegdesign.system.load import AnyLoad, GivenCurrent, Matched

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True)
class Sweep:
    """States against one or two quantities; ``x`` holds their values, one row a state, in the units ``x_unit``.

    Beside each state: kelvins outside the measured data, the hot junction when the load is lost, and the room that the
    hotter of both leaves to the lower service limit of the legs.
    """

    x_name: tuple[str, ...]
    x_unit: tuple[str, ...]
    x: tuple[tuple[float, ...], ...]
    states: tuple[State, ...]
    outside_data_K: tuple[float, ...]
    T_hot_junction_open_K: tuple[float, ...]
    room_to_service_limit_K: tuple[float, ...]

    @property
    def met(self) -> bool:
        """Whether no state, loaded or open, passes a service limit."""
        return min(self.room_to_service_limit_K) >= 0

    def column(self, quantity: str) -> list[float]:
        """Return a quantity of all states, by its name with unit.

        Raises
        ------
        InputError
            Unknown name.
        """
        known = [k for k, v in self.states[0].__dict__.items() if isinstance(v, float)]
        if quantity not in known:
            raise InputError(f"unknown quantity '{quantity}'{closest(quantity, known)}")
        return [getattr(s, quantity) for s in self.states]

    def rows(self) -> list[dict[str, Any]]:
        """Return one mapping a state: the varied quantities first, then the results, names with units."""
        names = [f"{n}_{u}" if u else n for n, u in zip(self.x_name, self.x_unit, strict=True)]
        return [
            {
                **dict(zip(names, x, strict=True)),
                **s.to_row(),
                "T_hot_junction_open_K": self.T_hot_junction_open_K[k],
                "room_to_service_limit_K": self.room_to_service_limit_K[k],
                "outside_data_K": self.outside_data_K[k],
            }
            for k, (x, s) in enumerate(zip(self.x, self.states, strict=True))
        ]

    def to_frame(self) -> pd.DataFrame:
        """Return the sweep as a table."""
        import pandas as pd

        return pd.DataFrame(self.rows())


def operating_table(
    design: Design | str | os.PathLike[str],
    *,
    hot: Sequence[float] = (),
    cold: Sequence[float] = (),
    loads: Sequence[AnyLoad] = (),
) -> Sweep:
    """Return states for every hot with every cold reference temperature [K] and every load, in one batch.

    Empty lists take the value of the design.

    Raises
    ------
    InputError
        A hot temperature is not above a cold one.
    ConvergenceError
        A state has no operating point.
    """
    design = as_design(design)
    sources = [design.source.at(t) for t in hot] or [design.source]
    sinks = [design.sink.at(t) for t in cold] or [design.sink]
    asks, x = [], []
    for source, sink, load in product(sources, sinks, loads or [design.load]):
        _directed(source, sink)
        asks.append(_ask(design, load.words(), source, sink, load))
        x.append((source.reference_temperature, sink.reference_temperature))
    return _sweep([design] * len(asks), asks, ("T_source", "T_sink"), ("K", "K"), x)


def curve(design: Design | str | os.PathLike[str], points: int = 25) -> Sweep:
    """Return states from the open circuit towards the short circuit, evenly in current; junctions follow the load.

    Ends before the short circuit where a temperature maximum forms inside a leg. States outside the measured data
    are not refused here: ``outside_data_K`` tells by how many kelvin the end values are held.

    Raises
    ------
    ConvergenceError
        The design has no operating point.
    """
    design = as_design(design)
    ends = [
        Ask("open circuit", design.source, design.sink, OPEN, design.losses),
        Ask("most power", design.source, design.sink, Matched(), design.losses),
        Ask("short circuit", design.source, design.sink, SHORT, design.losses, required=False),
    ]
    _, point = solve(design, ends)
    top = point.current[2] if point.converged[2] else 1.7 * point.current[1]
    currents = [float(i) for i in np.linspace(0.0, top, points) * design.module.modules_in_parallel]
    asks = [
        _ask(design, f"{i:.6g} A", design.source, design.sink, GivenCurrent.model_construct(current=i), False)
        for i in currents
    ]
    return _sweep([design] * points, asks, ("current_set",), ("A",), [(i,) for i in currents], refuse=False)


def against_hot(
    design: Design | str | os.PathLike[str], temperatures_K: Sequence[float] | None = None, points: int = 9
) -> Sweep:
    """Return matched-load states against the reference temperature of the source [K].

    Without a list: from a quarter of the way above the sink up to the source's own temperature. For a fixed heat
    the heat is varied instead, from a quarter to the whole of it. States outside the measured data are not refused
    here: ``outside_data_K`` tells by how many kelvin the end values are held.
    """
    design = as_design(design)
    given = design.source.given_heat
    if given is not None:
        shares = [float(share) for share in np.linspace(0.25, 1.0, points)]
        sources: list[AnyBoundary] = [design.source.scaled(share) for share in shares]
        name, unit, x = "source_heat", "W", [(share * given,) for share in shares]
    else:
        top, low = design.source.reference_temperature, design.sink.reference_temperature
        values = temperatures_K or [float(t) for t in np.linspace(low + 0.25 * (top - low), top, points)]
        sources = [design.source.at(t) for t in values]
        name, unit, x = "T_source", "K", [(float(t),) for t in values]
    asks = [
        _ask(design, f"{v[0]:.6g} {unit}", s, design.sink, Matched()) for v, s in zip(x, sources, strict=True)
    ]
    return _sweep([design] * len(asks), asks, (name,), (unit,), x, refuse=False)


def map_over(design: Design | str | os.PathLike[str], axes: Mapping[str, Sequence[str | float]]) -> Sweep:
    """Return states over one or two keys of the design, each with a list of values as they would be written.

    ``map_over(design, {"source.temperature": ["200 degC", "250 degC"], "module.leg_length": ["1 mm", "2 mm"]})``.

    Raises
    ------
    InputError
        Unknown key or impossible value.
    """
    design = as_design(design)
    if not 1 <= len(axes) <= 2:
        raise InputError(f"a map needs one or two keys, got {len(axes)}")
    designs, x = [], []
    for values in product(*axes.values()):
        data = design.model_dump(exclude_none=True)
        for key, value in zip(axes, values, strict=True):
            _put(data, key, value)
        made, findings = validate(data, "", Design)
        if made is None:
            here = " and ".join(f"{key} = {value}" for key, value in zip(axes, values, strict=True))
            raise InputError(f"map at {here}: {findings[0].text}")
        designs.append(made)
        x.append(tuple(_number(made, key) for key in axes))
    asks = [_ask(d, "map", d.source, d.sink, d.load) for d in designs]
    names = tuple(key.replace(".", "_") for key in axes)
    return _sweep(designs, asks, names, tuple(_unit(key, designs[0]) for key in axes), x)


def _ask(
    design: Design, name: str, source: AnyBoundary, sink: AnyBoundary, load: AnyLoad, required: bool = True
) -> Ask:
    return Ask(name, source, sink, load, design.losses, required)


def _directed(source: AnyBoundary, sink: AnyBoundary) -> None:
    from tegdesign.design.brief import check_direction

    try:
        check_direction(source, sink)
    except ValueError as error:
        raise InputError(str(error)) from error


def _sweep(
    designs: Sequence[Design],
    asks: Sequence[Ask],
    names: tuple[str, ...],
    units: tuple[str, ...],
    x: Sequence[tuple[float, ...]],
    refuse: bool = True,
) -> Sweep:
    """Solve; refuse states that leave the data of the materials farther than the design allows, or only tell."""
    count = len(asks)
    opened = [replace(ask, load=OPEN) for ask in asks]
    modules, point = solve_all([*designs, *designs], [*asks, *opened])
    outside, room = np.zeros(count), np.full(count, np.inf)
    open_hot = point.hot_junction[count:]
    for leg in modules.materials:
        below, above = leg.outside(point.cold_junction[:count], point.hot_junction[:count])
        outside = np.maximum(outside, np.maximum(below, above))
        room = np.minimum(room, leg.service_limit.value - np.maximum(point.hot_junction[:count], open_hot))
    allowed = np.array([d.materials.hold_outside_data for d in designs])
    if refuse and np.any(outside > allowed + 1e-9):
        k = int(np.argmax(outside - allowed))
        raise DataRangeError(
            f"{asks[k].name} at {', '.join(f'{n} {v:.6g} {u}' for n, v, u in zip(names, x[k], units, strict=True))}: "
            f"junctions at {point.hot_junction[k]:.1f} K and {point.cold_junction[k]:.1f} K leave the measured data by "
            f'{outside[k]:.1f} K; narrow the table or set materials.hold_outside_data = "{np.ceil(outside[k]):.0f} K"'
        )
    # only states that need not exist can be missing here
    found = [int(k) for k in np.flatnonzero(point.converged[:count])]
    return Sweep(
        names,
        units,
        tuple(tuple(x[k]) for k in found),
        tuple(state_of(designs[k], asks[k], modules, point, k) for k in found),
        tuple(float(outside[k]) for k in found),
        tuple(float(open_hot[k]) for k in found),
        tuple(float(room[k]) for k in found),
    )


def _put(data: dict[str, Any], key: str, value: str | float) -> None:
    *tables, last = key.split(".")
    for table in tables:
        if not isinstance(data.get(table), dict):
            raise InputError(f"map: unknown key '{key}' of a design")
        data = data[table]
    data[last] = value


def _field(design: Design, key: str) -> tuple[Any, Any]:
    *tables, last = key.split(".")
    part: Any = design
    for table in tables:
        part = getattr(part, table)
    return getattr(part, last), type(part).model_fields[last]


def _number(design: Design, key: str) -> float:
    value, _ = _field(design, key)
    if not isinstance(value, (int, float)) or isinstance(value, bool):
        raise InputError(f"map: '{key}' is not a number; vary one that is")
    return float(value)


def _unit(key: str, design: Design) -> str:
    from tegdesign.quantity import Measure

    _, field = _field(design, key)
    units = [m.unit for m in field.metadata if isinstance(m, Measure)]
    return units[0].replace("/", "_per_").replace("^", "").replace("*", "_") if units else ""
