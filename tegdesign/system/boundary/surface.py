"""A surface held at a temperature."""

from __future__ import annotations

from typing import Literal

from tegdesign.material.curve import Array
from tegdesign.system.boundary.base import Boundary, Temperature
from tegdesign.system.law import Law, law


class Surface(Boundary):
    """A thick wall, plate or body core whose temperature does not move when heat is drawn."""

    kind: Literal["surface"] = "surface"
    temperature: Temperature

    def bare_law(self, footprint: Array, modules: Array) -> Law:
        """Return T_face = temperature."""
        return law(1.0, 0.0, self.temperature, footprint)

    @property
    def reference_temperature(self) -> float:
        """Temperature of the surface [K]."""
        return self.temperature

    def at(self, temperature: float) -> Surface:
        """Return the surface at another temperature [K]."""
        return self.model_copy(update={"temperature": temperature})

    def places(self, heat: Array) -> list[tuple[str, float | Array]]:
        """Return the surface itself."""
        return [("surface", self.temperature)]
