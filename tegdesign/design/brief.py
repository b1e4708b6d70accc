"""The brief: what is asked of the generator."""

from __future__ import annotations

import math
import os
from collections.abc import Sequence
from typing import Annotated, Literal

import numpy as np
from pydantic import Field, field_validator, model_validator

from tegdesign.design.condition import RATED, Condition
from tegdesign.design.parts import (
    Aim,
    Count,
    Doping,
    Gap,
    GrainSize,
    Length,
    Losses,
    Made,
    MaterialUse,
    Require,
    Stack,
    Thickness,
)
from tegdesign.design.states import StateEntry, conditions
from tegdesign.document import given, load
from tegdesign.quantity import write
from tegdesign.system.boundary import AnyBoundary
from tegdesign.system.load import AnyLoad, Matched
from tegdesign.system.model import Part

DESIGN_FILE = "a design, not a brief: tegdesign rate and tegdesign sheet take it"
MATERIAL_FILE = "a material file: tegdesign materials check takes it, and a brief or design names it"


class Making(Part):
    """What of a leg's material may be chosen for this brief, where its properties are computed from bands.

    ``free`` names what is chosen: its doping, a linear grade of it from the cold to the hot end, its grain size. What
    is not free is as given here, or as in the file of the material.
    """

    free: tuple[Literal["doping", "grade", "grain size"], ...] = ()
    doping: Doping | None = None
    doping_bounds: tuple[Doping, Doping] | None = None
    grain_size: GrainSize | None = None

    @property
    def as_filed(self) -> bool:
        """Whether nothing is to differ from the file of the material."""
        return not self.free and self.given.as_filed

    @property
    def given(self) -> Made:
        """What is settled from the start."""
        return Made.model_construct(doping=self.doping, grain_size=self.grain_size)

    @model_validator(mode="after")
    def _sense(self) -> Making:
        if self.doping_bounds and self.doping_bounds[0] >= self.doping_bounds[1]:
            raise ValueError("doping_bounds must rise; exchange them")
        if self.doping_bounds and "doping" not in self.free:
            raise ValueError("doping_bounds bound a free doping; add free = [\"doping\"] or leave them out")
        if self.doping is not None and "doping" in self.free:
            raise ValueError("doping is both given and free; leave one out")
        if self.grain_size is not None and "grain size" in self.free:
            raise ValueError("grain_size is both given and free; leave one out")
        return self


class Pair(MaterialUse):
    """Materials that may be used: a name, a list of names, or nothing for every one of the library."""

    n: tuple[str, ...] = ()
    p: tuple[str, ...] = ()
    make_n: Making | None = None
    make_p: Making | None = None

    @field_validator("n", "p", mode="before")
    @classmethod
    def _one_or_many(cls, value: object) -> object:
        return [value] if isinstance(value, str) else value

    def making(self, side: str) -> Making:
        """Return what is asked of the material of a side."""
        making: Making | None = getattr(self, f"make_{side}")
        return Making() if making is None else making


class Limits(Part):
    """What can be built and where it must fit."""

    footprint: tuple[Length, Length]
    modules: Count = 1
    leg_length: tuple[Length, Length] = (0.5e-3, 10e-3)
    leg_side: tuple[Length, Length] = (0.6e-3, 8e-3)
    gap: Gap = 0.5e-3
    edge_margin: Thickness = 1e-3
    couples: tuple[Count, Count] = (2, 2000)
    slenderness: Annotated[float, Field(strict=True, gt=0, allow_inf_nan=False)] = 8.0

    @property
    def corner(self) -> float:
        """Least pitch less leg side [m]: legs of one kind face each other corner to corner, the gap apart."""
        return self.gap / math.sqrt(2)

    @model_validator(mode="after")
    def _possible(self) -> Limits:
        for name in ("leg_length", "leg_side", "couples"):
            low, high = getattr(self, name)
            if low > high:
                words = [str(v) if name == "couples" else write(v, "m", "mm") for v in (low, high)]
                raise ValueError(f"{name} is upside down: {words[0]} is above {words[1]}")
        room = [side - 2 * self.edge_margin for side in self.footprint]
        cell = self.leg_side[0] + self.gap
        if min(room) < cell or max(room) < 2 * cell:
            raise ValueError(
                f"footprint {write(self.footprint[0], 'm', 'mm')} x {write(self.footprint[1], 'm', 'mm')} has no "
                f"room for one couple: two legs of {write(self.leg_side[0], 'm', 'mm')} with gaps of "
                f"{write(self.gap, 'm', 'mm')} and an edge of {write(self.edge_margin, 'm', 'mm')}; "
                f"enlarge the footprint or allow thinner legs"
            )
        return self


class Workshop(Part):
    """Steps to which dimensions are rounded."""

    leg_length_step: Length = 0.05e-3
    leg_side_step: Length = 0.05e-3
    gap_step: Length = 0.05e-3


class Brief(Part):
    """A job for ``size`` or ``compare``: source, sink, load, materials, limits, requirements and the aim."""

    title: str = "untitled"
    revision: str = "A"
    aim: Aim = "power"
    source: AnyBoundary
    sink: AnyBoundary
    load: AnyLoad = Matched()
    materials: Pair = Pair()
    limits: Limits
    require: Require = Require()
    stack: Stack = Stack()
    losses: Losses = Losses()
    workshop: Workshop = Workshop()
    states: tuple[StateEntry, ...] = ()

    @model_validator(mode="after")
    def _sound(self) -> Brief:
        check_states(self.conditions)
        return self

    @property
    def conditions(self) -> tuple[Condition, ...]:
        """Every state to be solved: the rated one first, then its open circuit, then the named ones."""
        return conditions(self.source, self.sink, self.load, self.states)


def check_states(states: Sequence[Condition]) -> None:
    """Refuse states whose source is not hotter than their sink."""
    for state in states:
        try:
            check_direction(state.source, state.sink)
        except ValueError as error:
            raise ValueError(f"state '{state.name}': {error}" if state.name != RATED else str(error)) from error


def check_direction(source: AnyBoundary, sink: AnyBoundary) -> None:
    """Refuse a source that is not hotter than the sink, and a sink of given heat."""
    if sink.given_heat is not None:
        raise ValueError(f"sink of kind '{sink.kind}' has no temperature to settle at; use a surface, film or stream")
    hot, cold = source.reference_temperature, sink.reference_temperature
    if source.given_heat is not None:
        reached = float(source.law(np.ones(1), np.ones(1)).open_temperature[0])
        if reached <= cold:
            raise ValueError(
                f"source of {source.given_heat:.6g} W loses so much that it reaches only {reached:.2f} K, not "
                f"above the sink at {cold:.2f} K; mend its heat or what it loses"
            )
    elif hot <= cold:
        raise ValueError(
            f"source at {hot:.2f} K is not hotter than the sink at {cold:.2f} K; exchange them or mend a temperature"
        )


def read_brief(path: str | os.PathLike[str]) -> Brief:
    """Return the brief in a TOML file.

    Raises
    ------
    InputError
        The file cannot be used; the message names file, line, value, limit and the mend.
    """
    return load(path, Brief, {"module": DESIGN_FILE, "points": MATERIAL_FILE})


def as_brief(brief: Brief | str | os.PathLike[str]) -> Brief:
    """Return a brief given as one or as a path."""
    return given(brief, Brief, read_brief)
