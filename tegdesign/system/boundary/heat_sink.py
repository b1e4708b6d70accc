"""A heat sink known by a table: its resistance depends on the heat it passes."""

from __future__ import annotations

from itertools import pairwise
from typing import Annotated, Literal

import numpy as np
from pydantic import Field, model_validator

from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.boundary.base import Boundary, Temperature
from tegdesign.system.boundary.shape import TabledDrop
from tegdesign.system.law import Law, bent, law

Heats = tuple[Annotated[float, Measure("W"), Field(gt=0)], ...]
Drops = tuple[Annotated[float, Measure("K", "K", True), Field(gt=0)], ...]
Resistances = tuple[Annotated[float, Measure("K/W"), Field(gt=0)], ...]


class HeatSink(Boundary):
    """Sink, cold plate or heat pipe that all modules share, by measured points: two of heat, difference, resistance.

    difference = heat x resistance, between ``temperature`` and the face. No heat makes no difference; from there and
    between the points the difference is a monotone cubic of the heat. Beyond the last heat nothing is known.
    """

    kind: Literal["heat-sink"] = "heat-sink"
    temperature: Temperature
    heat: Heats | None = None
    difference: Drops | None = None
    resistance: Resistances | None = None

    @model_validator(mode="after")
    def _a_table(self) -> HeatSink:
        columns = {name: getattr(self, name) for name in ("heat", "difference", "resistance")}
        given = {name: len(values) for name, values in columns.items() if values is not None}
        if len(given) != 2:
            raise ValueError(
                f"the table has {' and '.join(given) or 'no column'}; give two of heat, difference, resistance"
            )
        if len(set(given.values())) > 1:
            (one, n), (two, m) = given.items()
            raise ValueError(f"{one} has {n} values, {two} has {m}; give one for each point")
        if max(given.values()) < 2:
            raise ValueError("a table needs two or more points; with one number use a surface and wall_resistance")
        for name, values, unit in zip(("heat", "difference"), self.points, ("W", "K"), strict=True):
            for before, after in pairwise(values):
                if after <= before:
                    raise ValueError(
                        f"{name} must rise from point to point: {before:.6g} {unit} is followed by {after:.6g} {unit}"
                    )
        return self

    @property
    def points(self) -> tuple[tuple[float, ...], tuple[float, ...]]:
        """Heats [W] and differences [K] of the points."""
        if self.heat is None:
            q = np.array(self.difference) / np.array(self.resistance)
            return tuple(q.tolist()), tuple(self.difference or ())
        if self.difference is None:
            return self.heat, tuple((np.array(self.heat) * np.array(self.resistance)).tolist())
        return self.heat, self.difference

    def bare_law(self, footprint: Array, modules: Array) -> Law:
        """Return T_face + difference(heat of all modules) = temperature."""
        heats, drops = self.points
        shape = TabledDrop((0.0, *heats), (0.0, *drops))
        return bent(law(1.0, 0.0, self.temperature, footprint), shape, modules)

    @property
    def reference_temperature(self) -> float:
        """Temperature far from the sink [K]."""
        return self.temperature

    def at(self, temperature: float) -> HeatSink:
        """Return the sink in a fluid of another temperature [K]."""
        return self.model_copy(update={"temperature": temperature})

    def places(self, heat: Array) -> list[tuple[str, float | Array]]:
        """Return the fluid."""
        return [("fluid", self.temperature)]
