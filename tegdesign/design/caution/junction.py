"""Junction temperatures against what the materials bear, in every state that is asked for and without coolant."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from tegdesign.design.caution.common import PRACTICE, caution
from tegdesign.design.condition import OPEN, RATED, SHORT, Condition
from tegdesign.design.limits import hot_allowance
from tegdesign.design.rating import Caution, Rating
from tegdesign.design.wording import both, celsius, kelvin
from tegdesign.material.material import Material, Stated
from tegdesign.quantity import write

CLOSE = 10.0
RISE = 5.0
HOPELESS = 2000.0


def stated(limit: Stated) -> str:
    """Return a limit with the words on where it comes from."""
    return both(limit.value) + (f", basis: {limit.basis}" if limit.basis else ", basis not stated")


def _bound(rating: Rating, condition: Condition, m: Material) -> float:
    """Return the service limit [K] of a material in a state, with what the design allows for a short time."""
    return m.service_limit.value + hot_allowance(rating.design.require, condition)[0]


def _bound_words(rating: Rating, condition: Condition, m: Material) -> str:
    over = hot_allowance(rating.design.require, condition)[0]
    return stated(m.service_limit) + (f", and {kelvin(over)} for a short time" if over else "")


def over_service_limit(rating: Rating) -> Iterator[Caution]:
    """Warn of a hot junction above the service limit, for each leg, naming every state."""
    for leg, m in zip("np", rating.materials, strict=True):
        hot = {c.name: rating.state(c.name).T_hot_junction_K for c in rating.conditions}
        over = sorted(((hot[c.name] - _bound(rating, c, m), c) for c in rating.conditions), key=lambda o: -o[0])
        over = [(excess, c) for excess, c in over if excess > 0]
        if over:
            excess, worst = over[0]
            others = ", ".join(f"{c.name} by {kelvin(more)}" for more, c in over[1:])
            yield caution(
                f"over-service-limit-{leg}",
                f"Hot junction above the service limit of the {leg} leg, {worst.name}",
                f"{both(hot[worst.name])} ({worst.name})",
                _bound_words(rating, worst, m),
                f"{m.name} is {kelvin(excess)} too hot{f' (also {others})' if others else ''}: it will lose its "
                "properties, its joints or its shape. Lower the source, cool better, take shorter legs or another "
                "material.",
                f"material file of {m.name}",
            )


def near_service_limit(rating: Rating) -> Iterator[Caution]:
    """Warn of a hot junction that keeps less than 10 K from the service limit in the state of least room."""
    for leg, m in zip("np", rating.materials, strict=True):
        rooms = [(_bound(rating, c, m) - rating.state(c.name).T_hot_junction_K, c) for c in rating.conditions]
        room, nearest = min(rooms, key=lambda pair: pair[0])
        if 0 <= room < CLOSE:
            yield caution(
                f"near-service-limit-{leg}",
                f"Hot junction close to the service limit of the {leg} leg",
                f"{both(rating.state(nearest.name).T_hot_junction_K)} ({nearest.name}), {kelvin(room)} left",
                f"{kelvin(CLOSE)} below {_bound_words(rating, nearest, m)}",
                f"{m.name} has {kelvin(room)} left; the source, the films and the joints are not known that "
                "well.",
                f"material file of {m.name}; the {CLOSE:.0f} K: {PRACTICE}",
            )


def short_time(rating: Rating) -> Iterator[Caution]:
    """Warn of states that pass the limits of continuous use and stand on those for a short time."""
    require = rating.design.require
    found = []
    for c in rating.loaded:
        if not c.short_time:
            continue
        around = rating.around(c)
        hot, cold = max(s.T_hot_junction_K for s in around), max(s.T_cold_junction_K for s in around)
        asked = [(f"service limit of the {leg} leg", m.service_limit.value, hot)
                 for leg, m in zip("np", rating.materials, strict=True)]  # fmt: skip
        if require.hot_junction is not None:
            asked.append(("required hot junction", require.hot_junction, hot))
        if require.cold_junction is not None:
            asked.append(("required cold junction", require.cold_junction, cold))
        passed = [f"{name} by {kelvin(value - limit)}" for name, limit, value in asked if value > limit]
        if passed:
            found.append(f"{c.name}, {write(rating.duration_s(c) or 0.0, 's', 'min')}: {', '.join(passed)}")
    if found:
        yield caution(
            "short-time-limits",
            "Limits of continuous use are passed for a short time",
            "; ".join(found),
            "limits of continuous use",
            "The limits for a short time are those that the design itself allows; no material file vouches for them. "
            "Hours at such temperatures add up: count them, test joints and legs for their sum, and cut the source "
            "off when the time is over.",
            "states and requirements of this design",
        )


def inlet_end(rating: Rating) -> Iterator[Caution]:
    """Warn that the module at the inlet of a stream is hotter than the mean plate, in the hottest open circuit."""
    ends = [(s.T_hot_junction_K, rating.state(s.name).T_hot_junction_K, s.name) for s in rating.inlet_ends]
    rising = [end for end in ends if end[0] - end[1] > RISE]
    if rising:
        hot, mean, state = max(rising)
        service = min((m.service_limit for m in rating.materials), key=lambda limit: limit.value)
        over = hot - service.value
        yield caution(
            "inlet-end",
            "The module at the stream's inlet is the hottest",
            f"{both(hot)} {state}, {kelvin(hot - mean)} above the mean plate",
            stated(service),
            f"The stream counts as one plate here. Its first module sees the inlet temperature: it "
            f"is {kelvin(abs(over))} {'above' if over > 0 else 'below'} the lower service limit. Protect it for that.",
            "open-circuit state of this design with the film at the inlet temperature",
        )


def loss_of_load(rating: Rating) -> Iterator[Caution]:
    """Warn of a hot junction that rises when the load is lost, in the state in which it rises most."""
    rises = []
    for c in rating.loaded:
        if c.load is not OPEN and c.load is not SHORT:
            loaded, opened = (rating.state(name).T_hot_junction_K for name in (c.name, c.opened))
            rises.append((opened - loaded, loaded, opened, c))
    rise, loaded, opened, c = max(rises, key=lambda r: r[0])
    if rise > RISE:
        yield caution(
            "loss-of-load",
            "Losing the load heats the hot junction",
            f"{kelvin(rise)} hotter: {celsius(loaded)} {c.name}, {celsius(opened)} {c.opened}",
            f"{kelvin(RISE)} of rise",
            "Current carries heat away from the hot junction; when it stops, the junction settles at the "
            "higher temperature. Judge limits by the open circuit, or keep a dump load that takes over.",
            f"steady states of this rating; the {RISE:.0f} K: {PRACTICE}",
        )


def coolant_loss(rating: Rating) -> Iterator[Caution]:
    """Warn when the source alone, of any state, could bring the legs above a service limit once the coolant fails."""
    g = rating.design.module
    footprint, modules = np.array([g.width * g.depth]), np.array([float(g.modules)])
    laws = [(c.source.law(footprint, modules), c.name) for c in rating.loaded if not c.reversed]
    alone = [(float(law.open_temperature[0]), name) for law, name in laws]
    reached, state = max(alone, key=lambda pair: pair[0])  # the first of equals, so rated where nothing is hotter
    m = min(rating.materials, key=lambda m: m.service_limit.value)
    if reached > m.service_limit.value:
        words = both(reached) if reached < HOPELESS else "no bound that any material stands: the heat is given"
        yield caution(
            "coolant-loss",
            "Loss of coolant overheats the module",
            words + (f" ({state})" if state != RATED else ""),
            f"{m.name}: {stated(m.service_limit)}",
            "Without coolant the hot and the cold side drift to the temperature that the source alone can "
            "bring. The cold side and its solder bear still less: provide a cut-off of the source or a "
            "coolant that cannot fail.",
            "boundary law of the source of this design",
        )


def air(rating: Rating) -> Iterator[Caution]:
    """Warn of a hot junction above the temperature at which air or vacuum attacks the bare material."""
    state = max(rating.asked, key=lambda s: s.T_hot_junction_K)
    for leg, m in zip("np", rating.materials, strict=True):
        if m.air_limit is not None and state.T_hot_junction_K > m.air_limit.value:
            yield caution(
                f"air-limit-{leg}",
                f"Oxidation or sublimation of the {leg} leg",
                f"{both(state.T_hot_junction_K)} ({state.name})",
                stated(m.air_limit),
                f"{m.name} is {kelvin(state.T_hot_junction_K - m.air_limit.value)} above the temperature at "
                "which it oxidises or evaporates unprotected: coat the legs or seal the module with inert "
                "gas.",
                f"material file of {m.name}",
            )
