"""Rows of the module of a design along its streams, as they are solved, and how their power grows with their number."""

from __future__ import annotations

from dataclasses import dataclass
from math import ceil
from typing import Any

import numpy as np

from tegdesign.design.assemble import modules_of
from tegdesign.design.design import Design
from tegdesign.errors import InputError
from tegdesign.system import growth as system_growth
from tegdesign.system.boundary import AnyBoundary
from tegdesign.system.load import AnyLoad
from tegdesign.system.load.base import LoadLaw
from tegdesign.system.rows import RowsPoint, rows_point

SHARE = 0.9
BLOCKS = 24  # numbers of rows looked at, rows between taken as one plate: 2e-3 of the power at a twelfth of a unit
_DEEP = 2.0  # transfer units looked at by default: 98 % of the power, and past the best length of one string
_EXTENSIVE = {"area": 1, "heat": 1, "resistance": -1, "wall_resistance": -1}  # what grows or falls with the exchanger


@dataclass(frozen=True)
class RowGrowth:
    """Power of more and more rows, each with its own share of exchanger, up to the most that can ever be had.

    ``rows_for_90_percent`` and its ``area_for_90_percent_m2`` (footprint of all modules) are None where the rows looked
    at do not reach 90 % of ``limit_W``.
    """

    rows: tuple[int, ...]
    area_m2: tuple[float, ...]
    power_W: tuple[float, ...]
    limit_W: float
    rows_for_90_percent: int | None
    area_for_90_percent_m2: float | None


class Along:
    """Rows that are asked for, and how they are solved; more rows bring their own share of the exchangers."""

    def __init__(self, design: Design, rows: int, abreast: int, counter: bool, one_current: bool) -> None:
        """Take a number of rows with so many modules ``abreast`` in each."""
        self.design, self.rows, self.abreast = design, rows, abreast
        self.modules = modules_of([design])
        self.options: dict[str, Any] = {"counter_current": counter, "one_current": one_current}
        g = design.module
        # strings of the design, if each of them can pass all rows evenly; else one row after the other
        of_design = not one_current or (g.modules_in_series % rows == 0 and g.modules == rows * abreast)
        self.series, self.parallel = (g.modules_in_series, g.modules_in_parallel) if of_design else (rows, abreast)

    def shares(self, count: int) -> tuple[AnyBoundary, AnyBoundary]:
        """Return source and sink so that each of ``count`` modules has the share of exchanger that it has now."""
        ratio = count / (self.rows * self.abreast)
        return _grown(self.design.source, ratio), _grown(self.design.sink, ratio)

    def law(self, load: AnyLoad, size: int) -> LoadLaw:
        """Return the law of a module that has its share of a load, ``size`` times."""
        return load.law(np.full(size, float(self.series)), np.full(size, float(self.parallel)))

    def solve(self, load: AnyLoad, rows: int | None = None, abreast: int | None = None) -> RowsPoint:
        """Solve a number of rows, that of the job if not given."""
        rows, abreast = rows or self.rows, abreast or self.abreast
        law = self.law(load, 1 if self.options["one_current"] else rows)
        return rows_point(
            self.modules, *self.shares(rows * abreast), law, rows=rows, modules_per_row=abreast, **self.options
        )

    def growth(self, blocks: int, step: int) -> system_growth.Growth:
        """Return the growth in ``blocks`` of so many rows, each block taken as one row."""
        abreast = self.abreast * step
        law = self.law(self.design.load, 1)
        return system_growth.growth(
            self.modules, *self.shares(blocks * abreast), law, most=blocks, modules_per_row=abreast, **self.options
        )


def _grown(boundary: AnyBoundary, ratio: float) -> AnyBoundary:
    """Return a boundary for ``ratio`` times the modules: what one of them has stays the same."""
    given = {name: getattr(boundary, name, None) for name in _EXTENSIVE}
    update: dict[str, Any] = {}
    for name, value in given.items():
        factor = ratio ** _EXTENSIVE[name]
        if value is not None:
            update[name] = tuple(v * factor for v in value) if isinstance(value, tuple) else value * factor
    return boundary.model_copy(update=update)


def growth_of(job: Along, point: RowsPoint, most: int | None) -> tuple[RowGrowth | None, list[str]]:
    """Return the growth up to ``most`` rows, or as far as it takes, with what is to be said of it."""
    if most is not None:
        step = ceil(most / BLOCKS)
        try:
            return _told(job, job.growth(max(3, ceil(most / step)), step), step), []
        except InputError as error:
            raise InputError(f"most = {most} rows: {_without_blocks(error)}") from error
    if point.total_power[0] <= 0:
        return None, ["growth with the number of rows not told: these rows give no power"]
    inlet, outlet = point.source_before[0, 0], point.source_after[0, -1]
    sink = job.design.sink.reference_temperature
    units = -np.log(max((outlet - sink) / (inlet - sink), 1e-6)) / job.rows  # transfer units of a row
    rows = ceil(_DEEP / max(units, 1e-9))
    last = ""
    for _ in range(4):
        step = ceil(rows / BLOCKS)
        try:
            found = _told(job, job.growth(max(4, ceil(rows / step)), step), step)
        except InputError as error:
            last = _without_blocks(error)
        else:
            if found.rows_for_90_percent is not None:
                return found, []
            last = f"{found.rows[-1]} rows do not reach 90 % of the power that can ever be had"
        rows *= 2
    return None, [f"growth with the number of rows not told: {last}"]


def _without_blocks(error: InputError) -> str:
    """Return the message without the number of blocks, which nobody asked for."""
    head, _, tail = str(error).partition(" after ")
    return f"{head} at the last of them, {tail.partition(', ')[2]}" if tail else head


def _told(job: Along, grown: system_growth.Growth, step: int) -> RowGrowth:
    counts = step * np.arange(1, grown.power.shape[1] + 1)
    power, area, limit = grown.power[0], grown.area[0], float(grown.limit[0])
    asked = SHARE * limit
    rows = None
    if (power >= asked).any():
        k = int(grown.rows_for(SHARE)[0]) - 1
        before = (0.0, 0.0) if k == 0 else (power[k - 1], counts[k - 1])
        rows = ceil(np.interp(asked, (before[0], power[k]), (before[1], counts[k])) - 1e-9)
    return RowGrowth(
        rows=tuple(int(n) for n in counts),
        area_m2=tuple(float(v) for v in area),
        power_W=tuple(float(v) for v in power),
        limit_W=limit,
        rows_for_90_percent=rows,
        area_for_90_percent_m2=None if rows is None else float(area[0] / step * rows),
    )
