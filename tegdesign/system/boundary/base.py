"""What every boundary can do."""

from __future__ import annotations

from abc import abstractmethod
from typing import Annotated, Any

import numpy as np
from pydantic import Field

from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.law import Law
from tegdesign.system.model import Part

Temperature = Annotated[float, Measure("K", "degC"), Field(gt=0, lt=4000)]
Positive = Field(gt=0)


class Boundary(Part):
    """One side of the generator: the source of heat or its sink."""

    kind: str

    @abstractmethod
    def law(self, footprint: Array, modules: Array) -> Law:
        """Return the law per module for modules of a footprint [m^2] of which ``modules`` share the boundary."""

    @property
    @abstractmethod
    def reference_temperature(self) -> float:
        """Temperature that names the state [K]: of the surface, the fluid, the inlet or the ambient."""

    @property
    def given_heat(self) -> float | None:
        """Heat that is all there is [W], None where the heat follows from temperatures."""
        return None

    def inlet_end(self) -> Any:
        """Return the boundary as the module at its hot end sees it, None where all modules see the same."""
        return None

    @abstractmethod
    def at(self, temperature: float) -> Boundary:
        """Return the same boundary with another reference temperature [K]."""

    @abstractmethod
    def stations(self, face: Array, heat: Array) -> list[tuple[str, Array]]:
        """Return named temperatures [K] from far away to the module face; ``heat`` [W] leaves the boundary, in all."""

    def words(self) -> str:
        """Return the boundary in words, with units, for condition lines."""
        written = self.model_dump(exclude_defaults=True, exclude={"kind"})
        return ", ".join([self.kind, *(f"{name.replace('_', ' ')} {value}" for name, value in written.items())])


def fin_factor(area_enlargement: float, fin_efficiency: float) -> float:
    """Return wetted area that counts over base area: 1 + efficiency (enlargement - 1).

    The fins add (enlargement - 1) base areas, each worth ``fin_efficiency``; the base area itself counts in full.
    """
    return 1 + fin_efficiency * (area_enlargement - 1)


def spread(value: float, like: Array) -> Array:
    """Return an array of the batch filled with one value."""
    return np.full(np.shape(like), value, dtype=float)
