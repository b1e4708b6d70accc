"""Efficiency of a converter against its input voltage, its input power, or both."""

from __future__ import annotations

from itertools import pairwise
from typing import Annotated

import numpy as np
from numpy.typing import NDArray
from pydantic import Field, model_validator

from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.model import Part

_ROUNDING = 1e-9  # of the range: a voltage clamped at the last point is not outside of it


class EfficiencyTable(Part):
    """Measured efficiencies, straight between points; with both lists row after row, one row a voltage."""

    voltage: tuple[Annotated[float, Measure("V"), Field(gt=0)], ...] | None = None
    power: tuple[Annotated[float, Measure("W"), Field(gt=0)], ...] | None = None
    efficiency: tuple[Annotated[float, Measure(""), Field(gt=0, le=1)], ...]

    @model_validator(mode="after")
    def _rising_and_full(self) -> EfficiencyTable:
        points = 1
        for name, unit, axis in (("voltage", "V", self.voltage), ("power", "W", self.power)):
            if axis is None:
                continue
            if len(axis) < 2:
                raise ValueError(f"{name} needs two points at least, got {len(axis)}; add points or leave {name} out")
            for low, high in pairwise(axis):
                if low >= high:
                    raise ValueError(
                        f"{name} must rise from point to point, {high:g} {unit} follows {low:g} {unit}; sort the table"
                    )
            points *= len(axis)
        if points == 1:
            raise ValueError("a table needs voltage, power or both; else give one number as efficiency")
        if len(self.efficiency) != points:
            shape = " x ".join(str(len(axis)) for axis in (self.voltage, self.power) if axis)
            raise ValueError(f"efficiency has {len(self.efficiency)} values, the table has {shape}; give one each")
        return self

    def at(self, voltage: Array, power: Array) -> tuple[Array, NDArray[np.bool_]]:
        """Return the efficiency at input voltage [V] and power [W], and where a point lies outside the table.

        Outside, the value at the edge is held. Bilinear: straight along each of both axes.
        """
        values = np.asarray(self.efficiency).reshape([len(axis) if axis else 1 for axis in (self.voltage, self.power)])
        v, of_v, out_v = _place(self.voltage, voltage)
        p, of_p, out_p = _place(self.power, power)
        up_v, up_p = v + (self.voltage is not None), p + (self.power is not None)
        low = (1 - of_p) * values[v, p] + of_p * values[v, up_p]
        high = (1 - of_p) * values[up_v, p] + of_p * values[up_v, up_p]
        return (1 - of_v) * low + of_v * high, out_v | out_p


def _place(axis: tuple[float, ...] | None, x: Array) -> tuple[NDArray[np.intp], Array, NDArray[np.bool_]]:
    """Return interval, share of it, and whether x lies outside, for each x; the one point where there is no axis."""
    if axis is None:
        return np.zeros(x.shape, dtype=np.intp), np.zeros(x.shape), np.zeros(x.shape, dtype=bool)
    points = np.asarray(axis)
    k = np.clip(np.searchsorted(points, x, side="right") - 1, 0, points.size - 2)
    share = (x - points[k]) / (points[k + 1] - points[k])
    slack = _ROUNDING * (points[-1] - points[0])
    return k, np.clip(share, 0.0, 1.0), (x < points[0] - slack) | (x > points[-1] + slack)
