"""The states that are asked for: in words what differs in each, and one line of results a state."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from typing import Any

from tegdesign.design.condition import EVERYTHING, OPEN, SHORT, Condition
from tegdesign.design.rating import Check, Rating
from tegdesign.design.wording import ZERO_CELSIUS, number
from tegdesign.quantity import write
from tegdesign.sheet.section import Section, facts, section, table, words

HOT = ("service limit", "last data point", "required hot junction")
COLD = ("first data point", "required cold junction")
Column = tuple[str, Callable[[Condition], str]]


def named(rating: Rating) -> bool:
    """Whether states were named beside the nominal case."""
    return len(rating.loaded) > 1


def section_of_states(rating: Rating) -> Section | None:
    """Say what differs in each state and what it comes to; None where only the nominal case is asked for."""
    if not named(rating):
        return None
    nominal, *others = rating.loaded
    columns = list(_columns(rating))
    rows = [[tell(c) for _, tell in columns] for c in rating.loaded]
    return section(
        "States",
        facts(*((c.name, differences(rating, nominal, c)) for c in others)),
        table([head for head, _ in columns], rows, (0, len(columns) - 1)),
        words(
            "Room: how far the junction stays from its nearest limit, in the state and in its open circuit. Data held: "
            "by how many kelvins end values of material data are kept outside their range. The last column counts "
            "every limit of a state and of its open circuit."
        ),
    )


def differences(rating: Rating, nominal: Condition, c: Condition) -> str:
    """Say what differs in a state from the nominal case, for how long, and what it is held to."""
    source, sink = (c.sink, c.source) if c.reversed else (c.source, c.sink)
    told = [*_side("source", nominal.source, source), *_side("sink", nominal.sink, sink)]
    lost = next(s.lost for s in rating.design.states if s.name == c.name)
    if lost:
        told.append("load lost, open circuit" if c.load is OPEN else "load shorted")
    elif c.load is not OPEN:
        told += _side("load", nominal.load, c.load)
    if c.reversed:
        blocks = ", which the load blocks" if c.load is OPEN and not lost else ""
        told.append(f"so the sink is the hotter side, heat and voltage are reversed{blocks}")
    parts = [", ".join(told) or "as the rated state"]
    duration = rating.duration_s(c)
    if duration is not None:
        parts.append(f"for {write(duration, 's', 'min')}, so held to the limits for a short time")
    if c.held != EVERYTHING:
        kept = ", ".join(sorted(c.held))
        parts.append(f"of the requirements only {kept}" if kept else "limits only, no required power or voltage")
    return "; ".join(parts)


def _side(side: str, nominal: Any, changed: Any) -> list[str]:
    """Return the keys of a source, sink or load that differ, with their values; another kind in full."""
    if nominal.kind != changed.kind:
        return [f"{side} {changed.words()}"]
    before, after = (dict(_flat(part.model_dump(exclude_none=True))) for part in (nominal, changed))
    return [f"{side} {key} {value}" for key, value in after.items() if before.get(key) != value]


def _flat(values: Mapping[str, Any], front: str = "") -> Iterator[tuple[str, str]]:
    for key, value in values.items():
        name = f"{front}{key.replace('_', ' ')}"
        if isinstance(value, Mapping):
            yield from _flat(value, f"{name} ")
        else:
            yield name, " | ".join(map(str, value)) if isinstance(value, (list, tuple)) else str(value)


def checks_of(rating: Rating, loaded: Condition, names: tuple[str, ...] = ("",)) -> list[Check]:
    """Return the checks of a state with its open circuit and start whose names begin with one of ``names``."""
    states = {s.name for s in rating.around(loaded)}
    return [c for c in rating.checks if c.state in states and c.name.startswith(names)]


def _columns(rating: Rating) -> Iterator[Column]:
    """Yield heads and how the cell of a state is told; delivered power only where a load keeps some for itself."""
    states = {s.name: s for s in rating.states}

    def celsius(value: float) -> str:
        return f"{value - ZERO_CELSIUS:.1f}"

    def room(names: tuple[str, ...]) -> Callable[[Condition], str]:
        return lambda c: f"{min(k.margin for k in checks_of(rating, c, names)):.1f}"

    yield "state", lambda c: c.name
    yield "hot junction [degC]", lambda c: celsius(states[c.name].T_hot_junction_K)
    yield "room [K]", room(HOT)
    yield "cold junction [degC]", lambda c: celsius(states[c.name].T_cold_junction_K)
    yield "room [K]", room(COLD)
    yield "open [V]", lambda c: number(states[c.name if c.load is OPEN else c.opened].voltage_V)
    for head, key in (("load [V]", "voltage_V"), ("current [A]", "current_A"), ("power [W]", "power_W")):
        yield head, lambda c, key=key: _electrical(c, getattr(states[c.name], key), key)  # type: ignore[misc]
    if any(_hands_on(rating, c) for c in rating.loaded):
        yield "power to user [W]", lambda c: _electrical(c, states[c.name].delivered_power_W, "power_W")
    yield "data held [K]", lambda c: _held(rating, c)
    yield "", lambda c: "holds" if all(k.passed for k in checks_of(rating, c)) else "MISSED"


def _electrical(c: Condition, value: float, key: str) -> str:
    """Return a number; a dash for the voltage with load where there is none, 0 for what is 0 by the load."""
    if c.load is OPEN:
        return "-" if key == "voltage_V" else "0"
    return "0" if c.load is SHORT and key != "current_A" else number(value)


def _hands_on(rating: Rating, c: Condition) -> bool:
    s = rating.state(c.name)
    return abs(s.delivered_power_W - s.power_W) > 1e-9 * abs(s.power_W)


def _held(rating: Rating, c: Condition) -> str:
    around = {s.name for s in rating.around(c)}
    return f"{max(max(d.below_K, d.above_K) for d in rating.data if d.state in around):.1f}"
