"""What every load can do."""

from __future__ import annotations

from abc import abstractmethod
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import Any, Literal, NamedTuple

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
    """A condition that is zero at the operating point, its slope by current, and the number it depends on.

    ``number`` has shape (B,), or (K, B) where a condition depends on K numbers.
    """

    condition: Callable[[Terminal, Array], tuple[Array, Array]]
    number: Array
    fixed: bool = False  # the current is given by ``number``, so it needs no guess and no bounds

    def take(self, which: Any) -> LoadLaw:
        """Return the law of the designs ``which``."""
        return self._replace(number=self.number[..., which])

    def evaluate(self, at: Terminal) -> tuple[Array, Array]:
        """Return the condition and its slope by current."""
        return self.condition(at, self.number)

    @property
    def given(self) -> Array:
        """Given current [A], nan where the load decides."""
        return self.number if self.fixed else np.full(self.number.shape[-1:], np.nan)


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
    sizes = [law.number.shape[-1] for law in laws]
    which = np.repeat([kinds.index(law.condition) for law in laws], sizes).astype(np.intp)
    joined = []
    for k, kind in enumerate(kinds):
        own = [law for law in laws if law.condition is kind]
        numbers_ = np.ones((*own[0].number.shape[:-1], which.size))  # ones where another kind counts
        numbers_[..., which == k] = np.concatenate([law.number for law in own], axis=-1)
        joined.append(own[0]._replace(number=numbers_))
    return MixedLoads(tuple(joined), which)


@dataclass(frozen=True)
class LoadLimit:
    """A limit that the load sets: a quantity of the whole generator that must not pass a bound, in one state.

    State "start" is that of ``Load.start_law``.
    """

    name: str
    state: Literal["rated", "open circuit", "start"]
    quantity: Literal["voltage", "current", "power"]
    sense: Literal["least", "most"]
    bound: float

    @property
    def unit(self) -> str:
        """Unit of the bound."""
        return {"voltage": "V", "current": "A", "power": "W"}[self.quantity]


class Delivery(NamedTuple):
    """What reaches the user, arrays (B,): power and loss [W] sum to the power at the leads of the generator.

    ``running`` tells that the load has started and current flows; ``outside_table`` that an efficiency is the end
    value of its table, since the input power lies outside of it.
    """

    power: Array
    loss: Array
    running: NDArray[np.bool_]
    started: NDArray[np.bool_]
    outside_table: NDArray[np.bool_]


class Load(Part):
    """What the generator feeds."""

    kind: str

    @property
    def adapts(self) -> bool:
        """Whether the load finds its own current, so that it does not matter how modules are joined."""
        return False

    @property
    def both_ways(self) -> bool:
        """Whether the load takes current of either sign, as when the temperature difference reverses."""
        return True

    @property
    def passive(self) -> bool:
        """Whether the load can only take power, never drive current through the generator."""
        return True

    @abstractmethod
    def law(self, series: Array, parallel: Array) -> LoadLaw:
        """Return the law per module for modules in ``series`` and ``parallel``."""

    def start_law(self, series: Array, parallel: Array) -> LoadLaw | None:
        """Return the law per module before the load has started; None where the generator is then open."""
        return None

    def starts(self, start_voltage: ArrayLike) -> NDArray[np.bool_]:
        """Tell whether the load starts from a terminal voltage [V] in the state before the start."""
        return np.ones(np.shape(start_voltage), dtype=bool)

    def limits(self) -> tuple[LoadLimit, ...]:
        """Return the limits that the load sets."""
        return ()

    def delivery(self, voltage: ArrayLike, current: ArrayLike, start_voltage: ArrayLike) -> Delivery:
        """Return what reaches the user from terminal voltage [V] and current [A] of the whole generator.

        ``start_voltage`` [V] is the steady terminal voltage before the start: of the state of ``start_law``, of the
        open circuit where there is none. A load that does not start delivers nothing.
        """
        v, i, before = np.broadcast_arrays(*(np.asarray(x, dtype=float) for x in (voltage, current, start_voltage)))
        started = self.starts(before)
        running = started & (i != 0)
        power, outside = self.supply(v, i)
        power = np.where(running, power, 0.0)
        return Delivery(power, v * i - power, running, started, running & outside)

    def supply(self, voltage: Array, current: Array) -> tuple[Array, NDArray[np.bool_]]:
        """Return the power to the user [W] while the load runs, and whether it is outside the load's own table."""
        return voltage * current, np.zeros(voltage.shape, dtype=bool)

    @abstractmethod
    def words(self) -> str:
        """Return the load in words, for condition lines."""


def numbers(value: ArrayLike, like: Array) -> Array:
    """Return a value spread over the batch."""
    return np.broadcast_to(np.asarray(value, dtype=float), np.shape(like)).copy()
