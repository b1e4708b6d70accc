"""What loads have in common that feed a bus with storage on it."""

from __future__ import annotations

from typing import Annotated

from pydantic import Field

from tegdesign.quantity import Measure
from tegdesign.system.load.base import Load, LoadLimit
from tegdesign.system.storage import Duty


class Charger(Load):
    """A load that hands power on; it may know a greatest current and the user behind the storage."""

    current_limit: Annotated[float, Measure("A"), Field(gt=0)] | None = None
    duty: Duty | None = None

    @property
    def both_ways(self) -> bool:
        """It blocks a voltage of the other sign."""
        return False

    def limits(self) -> tuple[LoadLimit, ...]:
        """Return the greatest current, where one is given."""
        if self.current_limit is None:
            return ()
        return (LoadLimit("current into the load", "rated", "current", "most", self.current_limit),)

    def behind(self) -> str:
        """Return the user behind the storage in words, nothing where none is given."""
        return "" if self.duty is None else f", {self.duty.words()}"
