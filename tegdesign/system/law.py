"""What a boundary tells the solver: a x face temperature + b x heat = c, per module, arrays of the batch."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, NamedTuple

import numpy as np

from tegdesign.material.curve import Array


class Law(NamedTuple):
    """A linear boundary law a T + b Q = c, with Q [W] the heat that one module draws from the boundary.

    A surface held at T_s is (1, 0, T_s); a film of conductance g [W/K] at T_f is (g, 1, g T_f); a fixed heat is
    (leak, 1, Q + leak T_ambient).
    """

    a: Array
    b: Array
    c: Array

    def take(self, which: Any) -> Law:
        """Return the law of the designs ``which``."""
        return Law(self.a[which], self.b[which], self.c[which])

    def misfit(self, face: Array, heat: Array) -> Array:
        """Return a T + b Q - c."""
        return self.a * face + self.b * heat - self.c

    @property
    def open_temperature(self) -> Array:
        """Face temperature without heat flow [K]; infinite for a fixed heat without leak."""
        with np.errstate(divide="ignore"):
            return np.where(self.a > 0, self.c / np.where(self.a > 0, self.a, 1.0), np.inf)

    @property
    def resistance(self) -> Array:
        """Thermal resistance of the boundary per module [K/W]; infinite for a fixed heat without leak."""
        return np.where(self.a > 0, self.b / np.where(self.a > 0, self.a, 1.0), np.inf)


def law(a: Any, b: Any, c: Any, shape: Any) -> Law:
    """Return a law with its numbers spread over the batch."""
    full = [np.broadcast_to(np.asarray(v, dtype=float), np.shape(shape)).copy() for v in (a, b, c)]
    return Law(full[0], full[1], full[2])


def join(laws: Sequence[Law]) -> Law:
    """Return one law for the batch made of several batches, in their order."""
    return Law(*(np.concatenate([getattr(item, name) for item in laws]) for name in Law._fields))
