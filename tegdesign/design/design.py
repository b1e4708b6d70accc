"""The design: one buildable generator; its file alone reproduces every number."""

from __future__ import annotations

import os
from collections.abc import Iterator, Mapping
from typing import Any

from pydantic import BaseModel, model_validator

from tegdesign.design.brief import MATERIAL_FILE, check_states
from tegdesign.design.condition import Condition
from tegdesign.design.parts import Aim, Count, Length, Losses, Made, MaterialUse, Require, Stack, Thickness
from tegdesign.design.states import StateEntry, conditions
from tegdesign.document import given, load, to_toml, write_whole
from tegdesign.quantity import write
from tegdesign.system.boundary import AnyBoundary
from tegdesign.system.load import AnyLoad, Matched
from tegdesign.system.model import Part

BRIEF_FILE = "a brief, not a design: tegdesign size makes a design of it"


class Chosen(MaterialUse):
    """The materials of the legs, by name."""

    n: str
    p: str
    make_n: Made | None = None
    make_p: Made | None = None

    @property
    def legs(self) -> tuple[tuple[tuple[str, str], Made | None], ...]:
        """Name and polarity of the material of each leg, and how it is made."""
        return ((self.n, "n"), self.make_n), ((self.p, "p"), self.make_p)

    @property
    def pair(self) -> tuple[object, ...]:
        """What makes two designs of the same materials."""
        return self.n, self.p, self.make_n, self.make_p


class Geometry(Part):
    """Legs of one module on a square grid, n and p in turn, and how many modules are joined."""

    columns: Count
    rows: Count
    leg_length: Length
    leg_side_n: Length
    leg_side_p: Length
    pitch: Length
    edge_margin: Thickness = 1e-3
    modules_in_series: Count = 1
    modules_in_parallel: Count = 1

    @model_validator(mode="after")
    def _possible(self) -> Geometry:
        if self.columns * self.rows % 2:
            raise ValueError(
                f"columns x rows = {self.columns} x {self.rows} is odd, couples need an even number of legs; change one"
            )
        if self.gap <= 0 or max(self.leg_side_n, self.leg_side_p) >= self.pitch:
            raise ValueError(
                f"legs of {write(self.leg_side_n, 'm', 'mm')} and {write(self.leg_side_p, 'm', 'mm')} do not fit a "
                f"pitch of {write(self.pitch, 'm', 'mm')}; widen the pitch"
            )
        return self

    @property
    def couples(self) -> int:
        """Couples of one module."""
        return self.columns * self.rows // 2

    @property
    def modules(self) -> int:
        """Modules in all."""
        return self.modules_in_series * self.modules_in_parallel

    @property
    def width(self) -> float:
        """Plate size along the columns [m]."""
        return self.columns * self.pitch + 2 * self.edge_margin

    @property
    def depth(self) -> float:
        """Plate size along the rows [m]."""
        return self.rows * self.pitch + 2 * self.edge_margin

    @property
    def gap(self) -> float:
        """Gap between neighbouring legs [m]."""
        return self.pitch - (self.leg_side_n + self.leg_side_p) / 2

    @property
    def leg_area(self) -> float:
        """Area of all legs of one module [m^2]."""
        return self.couples * (self.leg_side_n**2 + self.leg_side_p**2)

    @property
    def fill_factor(self) -> float:
        """Leg area over plate area."""
        return self.leg_area / (self.width * self.depth)


class Design(Part):
    """A generator that can be rated and built."""

    title: str = "untitled"
    revision: str = "A"
    aim: Aim = "power"
    source: AnyBoundary
    sink: AnyBoundary
    load: AnyLoad = Matched()
    materials: Chosen
    module: Geometry
    require: Require = Require()
    stack: Stack = Stack()
    losses: Losses = Losses()
    states: tuple[StateEntry, ...] = ()
    assumed: tuple[str, ...] = ()

    @model_validator(mode="before")
    @classmethod
    def _remember_defaults(cls, data: Any) -> Any:
        """Note which keys nobody wrote, once: a saved design carries the list on."""
        if isinstance(data, dict) and "assumed" not in data:
            return {**data, "assumed": list(defaults(data, cls))}
        return data

    @model_validator(mode="after")
    def _sound(self) -> Design:
        check_states(self.conditions)
        return self

    @property
    def conditions(self) -> tuple[Condition, ...]:
        """Every state to be solved: the rated one first, then its open circuit, then the named ones."""
        return conditions(self.source, self.sink, self.load, self.states)

    def text(self) -> str:
        """Return the design as the TOML text of its file."""
        head = "# tegdesign design; alone it reproduces every number: tegdesign rate FILE, tegdesign sheet FILE\n"
        return head + to_toml(self.model_dump(exclude_none=True))

    def save(self, path: str | os.PathLike[str]) -> None:
        """Write the design file whole or not at all."""
        write_whole(path, self.text())


def defaults(data: Mapping[str, Any], model: type[BaseModel], prefix: str = "") -> Iterator[str]:
    """Yield the dotted keys of number-like fields that are not written in ``data`` and so take their default."""
    for name, field in model.model_fields.items():
        inner = field.annotation
        if isinstance(inner, type) and issubclass(inner, BaseModel):
            if inner.__name__ in ("Losses", "Require"):
                continue
            part = data.get(name, {})
            yield from defaults(part if isinstance(part, Mapping) else {}, inner, f"{prefix}{name}.")
        elif name not in data and field.default is not None and prefix:
            yield f"{prefix}{name}"


def read_design(path: str | os.PathLike[str]) -> Design:
    """Return the design in a TOML file.

    Raises
    ------
    InputError
        The file cannot be used; the message names file, line, value, limit and the mend.
    """
    return load(path, Design, {"limits": BRIEF_FILE, "points": MATERIAL_FILE})


def as_design(design: Design | str | os.PathLike[str]) -> Design:
    """Return a design given as one or as a path."""
    return given(design, Design, read_design)
