"""Modules that are not alike: the limits of each, told by the one that is nearest to them."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping, Sequence

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.caution.common import caution
from tegdesign.design.condition import has_start
from tegdesign.design.design import Design
from tegdesign.design.parts import Require
from tegdesign.design.rating import Caution, Check
from tegdesign.design.wording import both, kelvin
from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.material import Material

Pair = tuple[Material, Material]
Junctions = Mapping[str, tuple[Array, Array]]  # state -> hot and cold junctions [K] (M,)
ROUNDING = 1e-9


def checked(name: str, state: str, unit: str, sense: str, value: float, limit: float) -> Check:
    """Return a check of one number."""
    over = value - limit if sense == "most" else limit - value
    return Check(name, state, float(value), float(limit), unit, sense, bool(over <= ROUNDING * max(1.0, abs(limit))))


def junction_checks(what: str, pair: Pair, hold: float, require: Require, junctions: Junctions) -> Iterator[Check]:
    """Yield every temperature limit in every state, for the member (a row, a module) that is worst off.

    Parameters
    ----------
    what : str
        What a member is called.
    hold : float
        How far the end values of material data may be held [K].
    """
    for state, (hot, cold) in junctions.items():
        asked: list[tuple[str, str, Array, float | None]] = []
        for leg, m in zip("np", pair, strict=True):
            asked += [
                (f"service limit of the {leg} leg", "most", hot, m.service_limit.value),
                (f"last data point of the {leg} leg", "most", hot, m.range[1] + hold),
                (f"first data point of the {leg} leg", "least", cold, m.range[0] - hold),
            ]
        asked.append(("required hot junction", "most", hot, require.hot_junction))
        asked.append(("required cold junction", "most", cold, require.cold_junction))
        for name, sense, values, limit in asked:
            if limit is not None:
                k = int(np.argmax(values) if sense == "most" else np.argmin(values))
                yield checked(name, f"{state}, {what} {k + 1}", "K", sense, values[k], limit)


def service_room(pair: Pair, junctions: Junctions) -> Array:
    """Return the kelvins that the hottest state of each member leaves to the lower service limit (M,)."""
    hottest = np.max([hot for hot, _ in junctions.values()], axis=0)
    return np.asarray(min(m.service_limit.value for m in pair) - hottest)


def outside_data(pair: Pair, junctions: Junctions) -> Array:
    """Return by how many kelvins the end values of material data are held for each member, in its worst state (M,)."""
    each = [np.maximum(*m.outside(cold, hot)) for hot, cold in junctions.values() for m in pair]
    return np.asarray(np.max(each, axis=0))


def overheated(what: str, pair: Pair, room: Array) -> Iterator[Caution]:
    """Warn of members above the lower service limit, loaded or open."""
    over = np.flatnonzero(room < 0)
    if over.size:
        m = min(pair, key=lambda m: m.service_limit.value)
        worst = int(np.argmin(room))
        yield caution(
            "over-service-limit",
            f"Hot junctions above the service limit in {over.size} of {room.size} {what}s",
            f"{what} {worst + 1}: {both(m.service_limit.value - room[worst])}",
            f"{m.name}: {both(m.service_limit.value)}",
            f"{what.capitalize()}s {listed(over)} run too hot, loaded or open; the worst by {kelvin(-room[worst])}. "
            "Legs and joints will not last. Lower the source, cool better, or shield the first ones.",
            f"material file of {m.name}",
        )


def driven_backwards(what: str, backwards: Sequence[int], power: Array) -> Iterator[Caution]:
    """Warn of members (counted from 0) that take power [W] from the others."""
    if len(backwards):
        taken = -sum(float(power[k]) for k in backwards)
        yield caution(
            "driven-backwards",
            f"{len(backwards)} of {len(power)} {what}s are driven backwards",
            f"{what}s {listed(backwards)} take {taken:.4g} W",
            "0 W",
            "The current of the others is above what these can give: they take power and pump more heat to the sink. "
            "Leave them out, join them to others like them, or bypass them.",
            "operating points of this result",
        )


def by_mean_properties(what: str, exact: NDArray[np.bool_]) -> Iterator[Caution]:
    """Warn of members that were not solved with exact legs."""
    rough = np.flatnonzero(~exact)
    if rough.size:
        yield caution(
            "mean-properties",
            f"{rough.size} of {exact.size} {what}s were solved with mean properties",
            f"{what}s {listed(rough)}",
            "temperature falling all along the legs",
            "They are driven so far beyond their short circuit that the legs have a temperature maximum inside; their "
            "figures are less exact than the others.",
            "operating points of this result",
        )


def listed(members: Iterable[int]) -> str:
    """Return numbers counted from 1 with runs drawn together: ``1, 4 to 7``."""
    runs: list[list[int]] = []
    for k in members:
        if runs and k == runs[-1][1] + 1:
            runs[-1][1] = int(k)
        else:
            runs.append([int(k), int(k)])
    return ", ".join(f"{a + 1}" if a == b else f"{a + 1} to {b + 1}" for a, b in runs)


def left_out(design: Design) -> list[str]:
    """Return what of a design is not looked at where its modules are told apart.

    Raises
    ------
    InputError
        The load must start first, which is a state of its own.
    """
    if has_start(design.load):
        raise InputError(
            f"load of kind '{design.load.kind}' must start before it runs, which is not looked at here; give a "
            "resistance, and see tegdesign rate for the start"
        )
    notes = ["cautions here are of unequal modules; those of the design itself stand in tegdesign rate and the sheet"]
    if design.states:
        notes.append(f"its {len(design.states)} named states are not looked at here; tegdesign rate holds them")
    return notes
