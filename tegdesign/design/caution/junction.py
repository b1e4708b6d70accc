"""Junction temperatures against what the materials bear, loaded, open and without coolant."""

from __future__ import annotations

from collections.abc import Iterator

import numpy as np

from tegdesign.design.caution.common import PRACTICE, caution
from tegdesign.design.rating import Caution, Rating
from tegdesign.design.wording import both, celsius, kelvin
from tegdesign.material.material import Stated

CLOSE = 10.0
RISE = 5.0
HOPELESS = 2000.0
STATES = ("rated", "open circuit")


def stated(limit: Stated) -> str:
    """Return a limit with the words on where it comes from."""
    return both(limit.value) + (f", basis: {limit.basis}" if limit.basis else ", basis not stated")


def over_service_limit(rating: Rating) -> Iterator[Caution]:
    """Warn of a hot junction above the service limit, for each leg, loaded and open."""
    for leg, m in zip("np", rating.materials, strict=True):
        for name in STATES:
            hot = rating.state(name).T_hot_junction_K
            over = hot - m.service_limit.value
            if over > 0:
                yield caution(
                    f"over-service-limit-{leg}-{name.replace(' ', '-')}",
                    f"Hot junction above the service limit of the {leg} leg, {name}",
                    both(hot),
                    stated(m.service_limit),
                    f"{m.name} is {kelvin(over)} too hot: it will lose its properties, its joints or its "
                    "shape. Lower the source, cool better, take shorter legs or another material.",
                    f"material file of {m.name}",
                )


def near_service_limit(rating: Rating) -> Iterator[Caution]:
    """Warn of a hot junction that keeps less than 10 K from the service limit, loaded or open."""
    for leg, m in zip("np", rating.materials, strict=True):
        state = max((rating.state(name) for name in STATES), key=lambda s: s.T_hot_junction_K)
        room = m.service_limit.value - state.T_hot_junction_K
        if 0 <= room < CLOSE:
            yield caution(
                f"near-service-limit-{leg}",
                f"Hot junction close to the service limit of the {leg} leg",
                f"{both(state.T_hot_junction_K)} ({state.name}), {kelvin(room)} left",
                f"{kelvin(CLOSE)} below {stated(m.service_limit)}",
                f"{m.name} has {kelvin(room)} left; the source, the films and the joints are not known that "
                "well.",
                f"material file of {m.name}; the {CLOSE:.0f} K: {PRACTICE}",
            )


def inlet_end(rating: Rating) -> Iterator[Caution]:
    """Warn that the module at the inlet of a stream is hotter than the mean plate that the rating stands for."""
    state = rating.inlet_end
    if state is None:
        return
    hot, mean = state.T_hot_junction_K, rating.state("open circuit").T_hot_junction_K
    service = min((m.service_limit for m in rating.materials), key=lambda limit: limit.value)
    if hot - mean > RISE:
        over = hot - service.value
        yield caution(
            "inlet-end",
            "The module at the stream's inlet is the hottest",
            f"{both(hot)} open circuit, {kelvin(hot - mean)} above the mean plate",
            stated(service),
            f"The stream counts as one plate here. Its first module sees the inlet temperature: it "
            f"is {kelvin(abs(over))} {'above' if over > 0 else 'below'} the lower service limit. Protect it for that.",
            "open-circuit state of this design with the film at the inlet temperature",
        )


def loss_of_load(rating: Rating) -> Iterator[Caution]:
    """Warn of a hot junction that rises when the load is lost."""
    loaded, opened = rating.rated.T_hot_junction_K, rating.state("open circuit").T_hot_junction_K
    if opened - loaded > RISE:
        yield caution(
            "loss-of-load",
            "Losing the load heats the hot junction",
            f"{kelvin(opened - loaded)} hotter: {celsius(loaded)} rated, {celsius(opened)} open circuit",
            f"{kelvin(RISE)} of rise",
            "Current carries heat away from the hot junction; when it stops, the junction settles at the "
            "higher temperature. Judge limits by the open circuit, or keep a dump load that takes over.",
            f"steady states of this rating; the {RISE:.0f} K: {PRACTICE}",
        )


def coolant_loss(rating: Rating) -> Iterator[Caution]:
    """Warn when the source alone could bring the legs above a service limit once the coolant fails."""
    design = rating.design
    g = design.module
    law = design.source.law(np.array([g.width * g.depth]), np.array([float(g.modules)]))
    reached = float(law.open_temperature[0])
    m = min(rating.materials, key=lambda m: m.service_limit.value)
    if reached > m.service_limit.value:
        words = both(reached) if reached < HOPELESS else "no bound that any material stands: the heat is given"
        yield caution(
            "coolant-loss",
            "Loss of coolant overheats the module",
            words,
            f"{m.name}: {stated(m.service_limit)}",
            "Without coolant the hot and the cold side drift to the temperature that the source alone can "
            "bring. The cold side and its solder bear still less: provide a cut-off of the source or a "
            "coolant that cannot fail.",
            "boundary law of the source of this design",
        )


def air(rating: Rating) -> Iterator[Caution]:
    """Warn of a hot junction above the temperature at which air or vacuum attacks the bare material."""
    state = max(rating.states, key=lambda s: s.T_hot_junction_K)
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
