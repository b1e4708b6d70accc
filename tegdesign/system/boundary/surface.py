"""A surface held at a temperature."""

from __future__ import annotations

from typing import Literal

from tegdesign.material.curve import Array
from tegdesign.system.boundary.base import Boundary, Temperature, spread
from tegdesign.system.law import Law, law


class Surface(Boundary):
    """A thick wall or plate whose temperature does not move when heat is drawn."""

    kind: Literal["surface"] = "surface"
    temperature: Temperature

    def law(self, footprint: Array, modules: Array) -> Law:
        """Return T_face = temperature."""
        return law(1.0, 0.0, self.temperature, footprint)

    @property
    def reference_temperature(self) -> float:
        """Temperature of the surface [K]."""
        return self.temperature

    def at(self, temperature: float) -> Surface:
        """Return the surface at another temperature [K]."""
        return self.model_copy(update={"temperature": temperature})

    def stations(self, face: Array, heat: Array) -> list[tuple[str, Array]]:
        """Return the surface itself."""
        return [("surface", spread(self.temperature, face))]
