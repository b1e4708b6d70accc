"""What every load can do."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Callable, Sequence
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tegdesign.material.curve import Array
from tegdesign.system.model import Part


class Terminal(NamedTuple):
    """State of one module at its leads, with total derivatives by its current: junction temperatures follow."""

    current: Array
    voltage: Array
    voltage_slope: Array
    heat: Array
    heat_slope: Array


class LoadLaw(NamedTuple):
    """A condition that is zero at the operating point, its slope by current, and the number it depends on."""

    condition: Callable[[Terminal, Array], tuple[Array, Array]]
    number: Array
    fixed: bool = False  # the current is given by ``number``, so it needs no guess and no bounds

    def take(self, which: Any) -> LoadLaw:
        """Return the law of the designs ``which``."""
        return self._replace(number=self.number[which])

    def evaluate(self, at: Terminal) -> tuple[Array, Array]:
        """Return the condition and its slope by current."""
        return self.condition(at, self.number)

    @property
    def given(self) -> Array:
        """Given current [A], nan where the load decides."""
        return self.number if self.fixed else np.full(self.number.shape, np.nan)


class MixedLoads(NamedTuple):
    """Loads of several kinds in one batch: each design has its own."""

    laws: tuple[LoadLaw, ...]
    which: NDArray[np.intp]

    def take(self, chosen: Any) -> MixedLoads:
        """Return the laws of the designs ``chosen``."""
        return MixedLoads(tuple(law.take(chosen) for law in self.laws), self.which[chosen])

    def evaluate(self, at: Terminal) -> tuple[Array, Array]:
        """Return the condition and its slope by current."""
        both = [law.evaluate(at) for law in self.laws]
        return tuple(np.choose(self.which, [pair[k] for pair in both]) for k in (0, 1))  # type: ignore[return-value]

    @property
    def given(self) -> Array:
        """Given current [A], nan where the load decides."""
        return np.asarray(np.choose(self.which, [law.given for law in self.laws]))


def mixed(laws: Sequence[LoadLaw]) -> MixedLoads:
    """Return one batch made of several, in their order."""
    kinds = list(dict.fromkeys(law.condition for law in laws))  # a few, however many laws
    first = [next(law for law in laws if law.condition is kind) for kind in kinds]
    numbers_ = np.concatenate([law.number for law in laws])
    which = np.concatenate([np.full(law.number.size, kinds.index(law.condition), dtype=np.intp) for law in laws])
    return MixedLoads(
        tuple(law._replace(number=np.where(which == k, numbers_, 1.0)) for k, law in enumerate(first)), which
    )


class Load(Part):
    """What the generator feeds."""

    kind: str

    @property
    def adapts(self) -> bool:
        """Whether the load finds its own current, so that it does not matter how modules are joined."""
        return False

    @property
    def passive(self) -> bool:
        """Whether the load can only take power, never drive current through the generator."""
        return True

    @abstractmethod
    def law(self, series: Array, parallel: Array) -> LoadLaw:
        """Return the law per module for modules in ``series`` and ``parallel``."""

    @abstractmethod
    def words(self) -> str:
        """Return the load in words, for condition lines."""


def numbers(value: ArrayLike, like: Array) -> Array:
    """Return a value spread over the batch."""
    return np.broadcast_to(np.asarray(value, dtype=float), np.shape(like)).copy()
