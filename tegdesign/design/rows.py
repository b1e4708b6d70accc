"""The module of a design in rows along its source stream: what each row does, and what further rows would bring."""

from __future__ import annotations

import os
from collections.abc import Iterator
from dataclasses import asdict, dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from tegdesign.design import members
from tegdesign.design.along import Along, RowGrowth, growth_of
from tegdesign.design.condition import OPEN
from tegdesign.design.design import Design, as_design
from tegdesign.design.rate import insist_on_data
from tegdesign.design.rating import Caution, Check
from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.system.boundary import Stream
from tegdesign.system.rows import RowsPoint

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True)
class Row:
    """One row in the order in which the source passes it; heat and power of the row, current and voltage of a module.

    Stream temperatures are None on a side that is no stream; ``exact`` is false where mean properties had to do.
    """

    row: int
    T_source_before_K: float
    T_source_after_K: float
    T_sink_before_K: float | None
    T_sink_after_K: float | None
    T_hot_junction_K: float
    T_cold_junction_K: float
    T_hot_junction_open_K: float
    heat_in_W: float
    heat_out_W: float
    power_W: float
    module_current_A: float
    module_voltage_V: float
    room_to_service_limit_K: float
    outside_data_K: float
    driven_backwards: bool
    exact: bool


@dataclass(frozen=True)
class RowsRating:
    """A design in rows: each row, totals, growth, limits and cautions; steady, SI units.

    Voltage and current of all are None where each row has a load of its own. ``power_as_one_plate_W`` is that of
    ``rate``, where the modules share one plate; ``next_row_adds_W`` what one row more would bring.
    """

    design: Design
    rows: tuple[Row, ...]
    modules_per_row: int
    counter_current: bool
    one_current: bool
    series: int
    parallel: int
    power_W: float
    voltage_V: float | None
    current_A: float | None
    heat_in_W: float
    heat_out_W: float
    efficiency: float
    T_source_outlet_K: float
    T_sink_outlet_K: float | None
    power_as_one_plate_W: float
    next_row_adds_W: float
    growth: RowGrowth | None
    checks: tuple[Check, ...]
    cautions: tuple[Caution, ...]
    notes: tuple[str, ...]

    @property
    def failed(self) -> tuple[Check, ...]:
        """Checks that are not passed."""
        return tuple(c for c in self.checks if not c.passed)

    @property
    def met(self) -> bool:
        """Whether every limit and requirement holds."""
        return not self.failed

    def to_frame(self) -> pd.DataFrame:
        """Return the rows as a table, column names with units."""
        import pandas as pd

        return pd.DataFrame([asdict(row) for row in self.rows]).set_index("row")

    def growth_frame(self) -> pd.DataFrame:
        """Return the growth as a table; empty where it could not be told."""
        import pandas as pd

        g = self.growth
        columns = {} if g is None else {name: getattr(g, name) for name in ("rows", "area_m2", "power_W")}
        return pd.DataFrame(columns)

    def to_dict(self) -> dict[str, Any]:
        """Return everything as plain values for JSON; keys end in their unit."""
        data = {name: value for name, value in self.__dict__.items() if name != "design"}
        for name in ("rows", "checks", "cautions"):
            data[name] = [asdict(item) for item in data[name]]
        data["growth"] = None if self.growth is None else asdict(self.growth)
        return {"met": self.met, "title": self.design.title, **data}


def rows(
    design: Design | str | os.PathLike[str],
    *,
    rows: int | None = None,
    modules_per_row: int | None = None,
    counter_current: bool = False,
    one_current: bool = False,
    most: int | None = None,
) -> RowsRating:
    """Return what each of the rows does in which the module of a design stands along its source stream.

    Each row is a plate behind its share of the exchangers (``system.rows``). It has its share of the load by itself,
    or, with ``one_current``, one current passes all rows. Numbers that are not given follow from the modules of the
    design: as many rows as modules.

    Parameters
    ----------
    rows, modules_per_row : int, optional
        Rows one after the other, and modules side by side in each.
    counter_current : bool
        The sink, a stream as well, comes in at the last row.
    most : int, optional
        Rows up to which the growth is looked at; far enough to tell its end if not given.

    Raises
    ------
    InputError
        The source is no stream, a number is impossible, or the growth cannot be told from ``most`` rows.
    DataRangeError
        A leg would be used farther outside its data than the design allows, loaded or open.
    ConvergenceError
        The rows have no steady state.
    """
    design = as_design(design)
    job = Along(design, *_numbers(design, rows, modules_per_row), counter_current, one_current)
    _possible(job, most)
    point, opened = job.solve(design.load), job.solve(OPEN)
    pair = (job.modules.materials[0], job.modules.materials[1])
    junctions = {
        name: (p.module.hot_junction[0], p.module.cold_junction[0])
        for name, p in (("loaded", point), ("open circuit", opened))
    }
    told = _rows(point, opened, members.service_room(pair, junctions), members.outside_data(pair, junctions))
    total, heat_in, heat_out = (float(v.sum()) for v in (point.power, point.heat_in, point.heat_out))
    sink_end = told[0 if counter_current else -1].T_sink_after_K
    checks = [*members.junction_checks("row", pair, design.materials.hold_outside_data, design.require, junctions)]
    insist_on_data(checks, pair, design.materials.hold_outside_data)
    checks += _requirements(design, total, heat_in, heat_out)
    current = float(point.module.current[0, 0])
    voltage = float(point.module.voltage[0].mean())
    backwards = [k for k, row in enumerate(told) if row.driven_backwards]
    grown, notes = growth_of(job, point, most)
    if job.rows * job.abreast != design.module.modules:
        notes.append(f"{job.rows * job.abreast} modules here, {design.module.modules} in the design")
    if not design.load.adapts and one_current:
        notes.append("with more or fewer rows the load is taken to change in the same ratio")
    elif not design.load.adapts:
        notes.append(f"every module has its share of the load of the design, {design.load.words()}, in every row")
    return RowsRating(
        design=design,
        rows=tuple(told),
        modules_per_row=job.abreast,
        counter_current=counter_current,
        one_current=one_current,
        series=job.series,
        parallel=job.parallel,
        power_W=total,
        voltage_V=voltage * job.series if one_current else None,
        current_A=current * job.parallel if one_current else None,
        heat_in_W=heat_in,
        heat_out_W=heat_out,
        efficiency=total / heat_in,
        T_source_outlet_K=told[-1].T_source_after_K,
        T_sink_outlet_K=sink_end,
        power_as_one_plate_W=float(job.solve(design.load, rows=1, abreast=job.rows * job.abreast).total_power[0]),
        next_row_adds_W=float(job.solve(design.load, rows=job.rows + 1).total_power[0]) - total,
        growth=grown,
        checks=tuple(checks),
        cautions=(
            *members.overheated("row", pair, np.array([row.room_to_service_limit_K for row in told])),
            *members.driven_backwards("row", backwards, point.power[0]),
            *members.by_mean_properties("row", point.exact[0]),
        ),
        notes=(*notes, *members.left_out(design)),
    )


def _numbers(design: Design, rows: int | None, abreast: int | None) -> tuple[int, int]:
    """Return rows and modules side by side; what is not given follows from the modules of the design."""
    for name, value in (("rows", rows), ("modules_per_row", abreast)):
        if value is not None and value < 1:
            raise InputError(f"{name} = {value}, but at least 1 is needed; mend it")
    count = design.module.modules
    if rows is not None and abreast is not None:
        return rows, abreast
    given = rows or abreast or 1
    if count % given:
        name, other = ("rows", "modules_per_row") if rows else ("modules_per_row", "rows")
        raise InputError(
            f"{name} = {given}, but the {count} modules of the design cannot be parted evenly so; choose a divisor of "
            f"{count}, or give {other} as well"
        )
    return (rows, count // given) if rows else (count // given, given)


def _possible(job: Along, most: int | None) -> None:
    design = job.design
    if not isinstance(design.source, Stream):
        raise InputError(
            f"the source is of kind '{design.source.kind}', but rows stand along a stream; give a [source] of kind "
            "'stream', or use tegdesign rate for modules that all see the same"
        )
    if job.options["counter_current"] and not isinstance(design.sink, Stream):
        raise InputError(
            f"counter-current asks for a sink that is a stream, this one is of kind '{design.sink.kind}'; leave it out"
        )
    if most is not None and most < 3:
        raise InputError(f"most = {most} rows tell nothing of a trend; look at 3 or more")


def _rows(point: RowsPoint, opened: RowsPoint, room: Array, outside: Array) -> list[Row]:
    least = -members.ROUNDING * np.abs(point.power).max()
    m = point.module

    def told(value: float) -> float | None:
        return None if np.isnan(value) else float(value)

    return [
        Row(
            row=k + 1,
            T_source_before_K=float(point.source_before[0, k]),
            T_source_after_K=float(point.source_after[0, k]),
            T_sink_before_K=told(point.sink_before[0, k]),
            T_sink_after_K=told(point.sink_after[0, k]),
            T_hot_junction_K=float(m.hot_junction[0, k]),
            T_cold_junction_K=float(m.cold_junction[0, k]),
            T_hot_junction_open_K=float(opened.module.hot_junction[0, k]),
            heat_in_W=float(point.heat_in[0, k]),
            heat_out_W=float(point.heat_out[0, k]),
            power_W=float(point.power[0, k]),
            module_current_A=float(m.current[0, k]),
            module_voltage_V=float(m.voltage[0, k]),
            room_to_service_limit_K=float(room[k]),
            outside_data_K=float(outside[k]),
            driven_backwards=bool(point.power[0, k] < least),
            exact=bool(point.exact[0, k]),
        )
        for k in range(point.power.shape[1])
    ]


def _requirements(design: Design, power: float, heat_in: float, heat_out: float) -> Iterator[Check]:
    """Yield what the design asks of the whole: power, efficiency, outlet temperatures."""
    if design.require.power is not None:
        yield members.checked("required power", "loaded", "W", "least", power, design.require.power)
    if design.require.efficiency is not None:
        yield members.checked("required efficiency", "loaded", "1", "least", power / heat_in, design.require.efficiency)
    for side, boundary, heat in (("source", design.source, heat_in), ("sink", design.sink, -heat_out)):
        outcomes = boundary.outcomes(np.array(heat))
        for name, sense, bound in boundary.bounds():
            words = name.removesuffix("_K").replace("_", " ")
            yield members.checked(f"{words} of the {side}", "loaded", "K", sense, float(outcomes[name]), bound)
