"""Named states of a generator: changes to the nominal case, and what must hold in each."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from typing import Annotated, Any, Literal

from pydantic import Field, model_validator

from tegdesign.design.condition import (
    EVERYTHING,
    OPEN,
    OPENED,
    RATED,
    SHORT,
    Condition,
    rated_and_open,
    with_open_circuit,
)
from tegdesign.document import validate
from tegdesign.quantity import Measure
from tegdesign.system.boundary import AnyBoundary
from tegdesign.system.load import AnyLoad
from tegdesign.system.model import Part

Held = Literal["power", "efficiency", "voltage"]
Change = dict[str, Any]
LOADS_LOST = {"open": OPEN, "short": SHORT}
TAKEN = (RATED, OPENED, "start", "most power", "best efficiency", "short circuit", "open circuit, inlet end")


class StateEntry(Part):
    """One state: what differs from the nominal case, for how long, and which requirements must hold in it.

    ``source``, ``sink`` and ``load`` are tables of the keys that change; with another ``kind`` the table stands for
    itself. ``load`` may also be the word ``open`` or ``short``. Limits (temperatures, heat flux, outlet, voltage at
    open circuit) hold in every state; power, efficiency and voltage in ``holds``, which is all of them by default and
    none where the load is open or short. A state with a ``duration`` is held to the short-time limits. Where the sink
    is the hotter side the state is reversed: the voltage has the other sign, and loads that block it stay open.
    """

    name: Annotated[str, Field(min_length=1, max_length=40, pattern=r"^[^\n\r|]+$")]
    source: Change = Field(default_factory=dict)
    sink: Change = Field(default_factory=dict)
    load: Change | Literal["open", "short"] = Field(default_factory=dict)
    duration: Annotated[float, Measure("s", "min"), Field(gt=0)] | None = None
    holds: tuple[Held, ...] | None = None

    @model_validator(mode="after")
    def _sense(self) -> StateEntry:
        if self.lost and self.holds:
            raise ValueError(
                f"state '{self.name}': the load is {self.load}, so {', '.join(self.holds)} cannot hold; leave out "
                "holds or the load"
            )
        return self

    @property
    def lost(self) -> bool:
        """Whether the load takes no power in this state."""
        return isinstance(self.load, str)

    @property
    def held(self) -> frozenset[str]:
        """Requirements that must hold in this state."""
        default = frozenset[str]() if self.lost else EVERYTHING
        return default if self.holds is None else frozenset(self.holds)


class _Sides(Part):
    """The nominal case with the changes of one state."""

    source: AnyBoundary
    sink: AnyBoundary
    load: AnyLoad


def conditions(
    source: AnyBoundary, sink: AnyBoundary, load: AnyLoad, states: Sequence[StateEntry]
) -> tuple[Condition, ...]:
    """Return every state as conditions to be solved: the rated one, the named ones, and the open circuit of each.

    Raises
    ------
    ValueError
        A name is taken, or the changes of a state do not make a source, sink or load.
    """
    return tuple(_conditions(source, sink, load, states))


def _conditions(
    source: AnyBoundary, sink: AnyBoundary, load: AnyLoad, states: Sequence[StateEntry]
) -> Iterator[Condition]:
    yield from rated_and_open(source, sink, load)
    names = set(TAKEN)
    for state in states:
        sides = _changed(source, sink, load, state)
        fed: Any = LOADS_LOST[state.load] if isinstance(state.load, str) else sides.load
        hot, cold, back = sides.source, sides.sink, _is_reversed(sides)
        if back:
            hot, cold = cold, hot
            fed = fed if fed.both_ways else OPEN
        loaded = Condition(state.name, hot, cold, fed, state.held, state.duration is not None, "", back)
        if {loaded.name, loaded.opened, loaded.start} & names:
            raise ValueError(f"state '{state.name}': the name is taken; choose another")
        names |= {loaded.name, loaded.opened, loaded.start}
        yield from (loaded,) if state.load == "open" else with_open_circuit(loaded)


def _is_reversed(sides: _Sides) -> bool:
    """Tell whether the sink is the hotter side, so that heat goes the other way and the voltage turns round."""
    if sides.source.given_heat is not None or sides.sink.given_heat is not None:
        return False
    return sides.source.reference_temperature < sides.sink.reference_temperature


def _changed(source: AnyBoundary, sink: AnyBoundary, load: AnyLoad, state: StateEntry) -> _Sides:
    """Return the nominal case with the changes of a state."""
    changes = {"source": state.source, "sink": state.sink, "load": {} if isinstance(state.load, str) else state.load}
    nominal: dict[str, Any] = {"source": source, "sink": sink, "load": load}
    merged = {side: _merged(nominal[side].model_dump(exclude_none=True), changes[side]) for side in nominal}
    sides, findings = validate(merged, "", _Sides)
    if sides is None:
        raise ValueError(f"state '{state.name}': {findings[0].text}")
    return sides


def _merged(nominal: Mapping[str, Any], change: Change) -> Mapping[str, Any]:
    """Return the nominal table with the keys of a change; another kind stands for itself."""
    if "kind" in change and change["kind"] != nominal["kind"]:
        return change
    return {**nominal, **change}
