"""The conditions of one state of a generator: what it stands between, what it feeds, and what must hold in it."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any, NamedTuple

from tegdesign.material.curve import Array
from tegdesign.system.boundary import AnyBoundary
from tegdesign.system.load import AnyLoad, GivenCurrent, Load, LoadLaw, Resistance

OPEN = GivenCurrent.model_construct(current=0.0)
SHORT = Resistance.model_construct(resistance=0.0)
RATED, OPENED = "rated", "open circuit"
EVERYTHING = frozenset(("power", "efficiency", "voltage"))


class Starting(NamedTuple):
    """A load before it has started."""

    load: Load

    def law(self, series: Array, parallel: Array) -> LoadLaw:
        """Return the law before the start."""
        law = self.load.start_law(series, parallel)
        assert law is not None
        return law

    def words(self) -> str:
        """Return the load in words."""
        return f"{self.load.words()}, before it starts"


@dataclass(frozen=True)
class Condition:
    """A state that is asked for.

    Attributes
    ----------
    load : AnyLoad or Starting
        What it feeds in this state.
    held : frozenset of str
        Which of power, efficiency and voltage must hold in it.
    short_time : bool
        Whether the short-time limits apply.
    of : str
        Name of the loaded state of which this is the open circuit or the start; empty otherwise.
    reversed : bool
        The sink of the brief is the hotter side, and stands here as the source: heat goes the other way through the
        module, and voltage and current have the other sign.
    """

    name: str
    source: AnyBoundary
    sink: AnyBoundary
    load: Any
    held: frozenset[str] = frozenset()
    short_time: bool = False
    of: str = ""
    reversed: bool = False

    @property
    def opened(self) -> str:
        """Name of the open circuit of this state."""
        return OPENED if self.name == RATED else f"{self.name}, open"

    @property
    def start(self) -> str:
        """Name of the start of this state."""
        return "start" if self.name == RATED else f"{self.name}, start"


def with_open_circuit(loaded: Condition) -> tuple[Condition, ...]:
    """Return a loaded state, its open circuit, and its start where the load has one."""
    source, sink, short_time = loaded.source, loaded.sink, loaded.short_time
    back = loaded.reversed
    opened = Condition(loaded.opened, source, sink, OPEN, frozenset(), short_time, loaded.name, back)
    if not has_start(loaded.load):
        return loaded, opened
    start = Condition(loaded.start, source, sink, Starting(loaded.load), frozenset(), short_time, loaded.name, back)
    return loaded, opened, start


def has_start(load: AnyLoad) -> bool:
    """Tell whether a load takes another current before it has started."""
    return type(load).start_law is not Load.start_law


def rated_and_open(source: AnyBoundary, sink: AnyBoundary, load: AnyLoad) -> tuple[Condition, ...]:
    """Return the rated state and its open circuit, the first two of every job, and its start where there is one."""
    return with_open_circuit(Condition(RATED, source, sink, load, EVERYTHING))
