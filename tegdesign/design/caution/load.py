"""What the load needs and bears: does it start, does power reach the user, does its input stand the open circuit."""

from __future__ import annotations

from collections.abc import Iterator

from tegdesign.design.caution.common import caution
from tegdesign.design.condition import OPEN, Condition
from tegdesign.design.rating import Caution, Rating, State
from tegdesign.design.wording import amount
from tegdesign.system.load import AnyLoad, LoadLimit

NOTHING = 1e-9  # of the most power


def _value(state: State, limit: LoadLimit) -> float:
    return {"voltage": state.voltage_V, "current": state.current_A, "power": state.power_W}[limit.quantity]


def _listed(found: list[tuple[State, float, LoadLimit]], sense: str) -> tuple[str, str]:
    """Return values with their states, and the limits they break."""
    values = "; ".join(f"{amount(value, limit.unit)} ({state.name})" for state, value, limit in found)
    bounds = dict.fromkeys(f"{limit.name} at {sense} {amount(limit.bound, limit.unit)}" for _, _, limit in found)
    return values, "; ".join(bounds)


def does_not_start(rating: Rating) -> Iterator[Caution]:
    """Warn of states in which the load does not start, or draws nothing."""
    found = []
    for c in rating.loaded:
        for limit in c.load.limits():
            if limit.state == "rated" or limit.sense != "least":
                continue
            state = rating.state(c.start if limit.state == "start" else c.opened)
            if (value := _value(state, limit)) < limit.bound:
                found.append((state, value, limit))
    if found:
        values, bounds = _listed(found, "least")
        yield caution(
            "load-does-not-start",
            "The load does not start",
            values,
            bounds,
            "Before it starts the generator does not bring what the load asks for, so that no power reaches the user "
            "in these states and the hot junction settles as without load. Join more couples or modules in series, "
            "take a load that starts lower, or start it from storage.",
            "load of this design",
        )


def no_power(rating: Rating) -> Iterator[Caution]:
    """Warn of states that are to give power and give none, or take it from the user."""
    least = NOTHING * abs(rating.state("most power").power_W)
    held = [(rating.state(c.name), c) for c in rating.loaded if "power" in c.held]
    found = [s for s, _ in held if s.delivered_power_W <= least]
    if found:
        back = [s.name for s in found if s.delivered_power_W < -least]
        words = f"Power flows the wrong way: {', '.join(back)}. " if back else ""
        yield caution(
            "no-power",
            "No power in a state that is to give some",
            "; ".join(f"{amount(s.delivered_power_W if s.name in back else 0.0, 'W')} ({s.name})" for s in found),
            "above 0 W",
            f"{words}The state is held to the requirements of the brief and nothing reaches the user in it, after "
            "what a converter or battery takes. Change the load or the connection of modules, or take power out of "
            "what the state must hold.",
            "operating points of this rating",
        )


def input_voltage(rating: Rating) -> Iterator[Caution]:
    """Warn of an open circuit above the voltage that the input of the load bears, in any state."""
    found = [
        (state, state.voltage_V, limit)
        for c in rating.opened
        for limit in _feeding(rating, c).limits()
        if limit.state == "open circuit" and limit.sense == "most"
        and (state := rating.state(c.name)).voltage_V > limit.bound
    ]  # fmt: skip
    if found:
        values, bounds = _listed(found, "most")
        yield caution(
            "load-input-voltage",
            "Open circuit above what the input of the load bears",
            values,
            bounds,
            "Whenever the load stops drawing, the generator rises to its open-circuit voltage and destroys the input. "
            "Join fewer couples or modules in series, take another load, or clamp the voltage by a device that bears "
            "the short-circuit current.",
            "load of this design",
        )


def reversed_voltage(rating: Rating) -> Iterator[Caution]:
    """Warn of states in which the sink is the hotter side, so that the leads change their sign."""
    found = [rating.state(c.name if c.load is OPEN else c.opened) for c in rating.loaded if c.reversed]
    if found:
        yield caution(
            "reversed-voltage",
            "Voltage the wrong way round",
            "; ".join(f"{amount(s.voltage_V, 'V')} ({s.name})" for s in found),
            "above 0 V",
            "The sink is the hotter side in these states and the leads change their sign. What is joined to them must "
            "bear it or be kept off by a diode: inputs of converters, capacitors and batteries take harm.",
            "operating points of this rating",
        )


def _feeding(rating: Rating, opened: Condition) -> AnyLoad:
    """Return the load that an open circuit was taken from; that of the nominal case where the load is lost."""
    return next((c.load for c in rating.loaded if c.name == opened.of and c.load is not OPEN), rating.design.load)
