"""What may be varied about a design: source and sink of each state, and its shape; many variations in one batch."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, fields, replace
from functools import cached_property
from typing import Any, Literal

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.condition import Condition
from tegdesign.design.evaluate import Candidates, Evaluation, Guess, evaluate
from tegdesign.material.curve import Array
from tegdesign.system.law import Law, join

HOTTEST = 3999.0  # [K], just below what a file may say
_TOLERANCE = 1e-5  # of operating points
_TOUCH = 0.999  # share of the couples at which neighbouring legs would touch


@dataclass(frozen=True)
class Variable:
    """A quantity that is varied as a ratio to what it is now.

    ``value`` gives it in a state, None where the state does not have it. ``side`` is what changes: a boundary by
    ``changed``, or the shape by ``shaped``. ``key`` names the quantity with its unit.
    """

    name: str
    key: str
    unit: str
    side: Literal["source", "sink", "shape"]
    value: Callable[[Condition, Candidates], float | None]
    down: tuple[float, ...]
    up: tuple[float, ...]
    changed: Callable[[Any, Condition, float], Any] = lambda boundary, state, ratio: boundary
    shaped: Callable[[Candidates, Array], dict[str, Any]] = lambda c, ratio: {}
    whole: bool = False  # counts: only whole numbers are looked at
    end: str = ""  # what ends the search below ``up`` where the variable has a natural end
    most: Callable[[Candidates], float] = lambda c: np.inf  # ratio of that end

    def ratios(self, c: Candidates, which: Literal["down", "up"]) -> Array:
        """Return the ratios to look at on one side, outwards."""
        if self.whole:
            now = round(float(self.value(None, c) or 1.0))  # type: ignore[arg-type]
            counts = range(now - 1, max(0, now - 4), -1) if which == "down" else range(now + 1, now + 4)
            return np.array([n / now for n in counts])
        ratios = np.array(getattr(self, which))
        if which == "down" or np.isinf(end := self.most(c)):
            return ratios
        return np.array([*ratios[ratios < end], end]) if end > 1 else np.empty(0)


def _difference(state: Condition, c: Candidates) -> float | None:
    if state.source.given_heat is not None:
        return None
    return float(state.source.reference_temperature - state.sink.reference_temperature)


def _moved(source: Any, state: Condition, ratio: float) -> Any:
    sink = state.sink.reference_temperature
    return source.at(sink + ratio * (source.reference_temperature - sink))


def _number(key: str, boundary: Any) -> float | None:
    value = getattr(boundary, key, None)
    return float(value) if value else None


def _scaled(key: str) -> Callable[[Any, Condition, float], Any]:
    return lambda boundary, state, ratio: boundary.model_copy(update={key: getattr(boundary, key) * ratio})


_DOWN, _UP = (0.88, 0.75, 0.6, 0.45, 0.3, 0.15, 0.05), (1.1, 1.25, 1.5, 1.9, 2.5, 3.2)
_FAR_DOWN, _FAR_UP = (0.75, 0.5, 0.3, 0.15, 0.07, 0.03, 0.01), (1.3, 2.0, 4.0, 10.0)
_LEG_DOWN, _LEG_UP = (0.88, 0.7, 0.5, 0.3, 0.12), (1.14, 1.45, 2.0, 3.5, 8.0)
_SIDE_DOWN, _SIDE_UP = (0.88, 0.7, 0.5, 0.3), (1.14, 1.45, 2.0, 3.3)
_COUPLES_DOWN, _COUPLES_UP = (0.88, 0.7, 0.45, 0.2), (1.14, 1.45, 2.2, 5.0)

DIFFERENCE = Variable(
    "temperature difference", "temperature_difference_K", "K", "source", _difference, _DOWN, _UP, _moved
)
HEAT = Variable(
    "source heat", "source_heat_W", "W", "source", lambda state, c: state.source.given_heat, _DOWN, _UP,
    lambda source, state, ratio: source.scaled(ratio),
)  # fmt: skip
FLOW = Variable(
    "source flow", "source_mass_flow_kg_per_s", "kg/s", "source",
    lambda state, c: _number("mass_flow", state.source), _FAR_DOWN, _FAR_UP, _scaled("mass_flow"),
)  # fmt: skip
FILM = Variable(
    "sink film", "sink_coefficient_W_per_m2_K", "W/m^2/K", "sink",
    lambda state, c: _number("coefficient", state.sink), _FAR_DOWN, _FAR_UP, _scaled("coefficient"),
)  # fmt: skip
SIDES = (DIFFERENCE, HEAT, FLOW, FILM)

LENGTH = Variable(
    "leg length", "leg_length_m", "m", "shape", lambda state, c: float(c.leg_length[0]), _LEG_DOWN, _LEG_UP,
    shaped=lambda c, r: {"leg_length": c.leg_length * r},
)  # fmt: skip
SIDE = Variable(
    "leg side at the same fill (n leg)", "leg_side_n_at_same_fill_m", "m", "shape", lambda state, c: float(c.side_n[0]),
    _SIDE_DOWN, _SIDE_UP,
    shaped=lambda c, r: {
        "side_n": c.side_n * r, "side_p": c.side_p * r, "pitch": c.pitch * r, "couples": c.couples / r**2
    },
)  # fmt: skip
COUPLES = Variable(
    "couples of a module, legs and plate the same", "couples", "1", "shape", lambda state, c: float(c.couples[0]),
    _COUPLES_DOWN, _COUPLES_UP,
    shaped=lambda c, r: {"couples": c.couples * r, "pitch": c.pitch / np.sqrt(r)},
    end="legs touch",
    most=lambda c: _TOUCH * float((c.pitch / np.maximum(c.side_n, c.side_p))[0]) ** 2,
)  # fmt: skip
SERIES = Variable(
    "modules in series", "modules_in_series", "1", "shape", lambda state, c: float(c.series[0]), (), (),
    shaped=lambda c, r: {"series": np.round(c.series * r)}, whole=True,
)  # fmt: skip
PARALLEL = Variable(
    "modules in parallel", "modules_in_parallel", "1", "shape", lambda state, c: float(c.parallel[0]), (), (),
    shaped=lambda c, r: {"parallel": np.round(c.parallel * r)}, whole=True,
)  # fmt: skip
SHAPES = (LENGTH, SIDE, COUPLES, SERIES, PARALLEL)


class _Varied:
    """A source or sink that differs from candidate to candidate of one batch."""

    def __init__(self, parts: Sequence[tuple[Any, slice]], c: Candidates) -> None:
        self.parts = parts
        self._law = join([boundary.law(c.footprint[part], c.modules[part]) for boundary, part in parts])

    def law(self, footprint: Array, modules: Array) -> Law:
        """Return the law of the batch that this was made for."""
        return self._law

    def outcomes(self, heat: Array) -> dict[str, Array]:
        """Return what follows from the heat, each part by its own boundary."""
        found = [boundary.outcomes(heat[part]) for boundary, part in self.parts]
        return {name: np.concatenate([own[name] for own in found]) for name in found[0]}

    def bounds(self) -> list[tuple[str, str, float]]:
        """Return the limits of the boundary, which all parts share."""
        bounds: list[tuple[str, str, float]] = self.parts[0][0].bounds()
        return bounds

    @property
    def given_heat(self) -> Array | None:
        """Heat that is all there is, None where it follows from temperatures."""
        if self.parts[0][0].given_heat is None:
            return None
        return np.concatenate([np.full(part.stop - part.start, boundary.given_heat) for boundary, part in self.parts])


@dataclass(frozen=True)
class Look:
    """Variations of one variable: ratios (groups, columns), each group with its own; a shape has one for all."""

    variable: Variable
    ratios: Array


@dataclass(frozen=True)
class Varying:
    """A design (a batch of one, solved) whose variations can be solved.

    A group is a loaded state with its open circuit and its start: they share source and sink.
    """

    base: Evaluation

    @cached_property
    def groups(self) -> tuple[Condition, ...]:
        """The loaded state of each group."""
        return tuple(state for state in self.base.job.states if not state.of)

    @cached_property
    def group_of(self) -> dict[str, int]:
        """Group of each state by its name."""
        place = {state.name: k for k, state in enumerate(self.groups)}
        return {state.name: place[state.of or state.name] for state in self.base.job.states}

    def now(self, variable: Variable, group: int = 0) -> float | None:
        """Return the value of a variable now, None where the state does not have it."""
        return variable.value(self.groups[group], self.base.candidates)

    def solve(self, looks: Sequence[Look], guess: Guess | None = None, rough: bool = False) -> Evaluation:
        """Return all variations, solved in every state in one batch, in the order of the looks and their columns.

        To 1e-5 of the junction difference, or as a search does it where ``rough``.
        """
        own = self.base.candidates
        shapes, parts, start = [], {"source": [], "sink": []}, 0  # type: ignore[var-annotated]
        for look in looks:
            count = look.ratios.shape[1]
            here = own.take(np.zeros(count, dtype=np.intp))
            if look.variable.side == "shape":
                here = replace(here, **look.variable.shaped(here, look.ratios[0]))
            else:
                parts[look.variable.side].append((look, start))
            shapes.append(here)
            start += count
        c = Candidates(**{f.name: np.concatenate([getattr(s, f.name) for s in shapes]) for f in fields(Candidates)})
        sides = [
            {side: _Varied(self._parts(side, parts[side], k, start), c) for side in parts}
            for k in range(len(self.groups))
        ]
        states = tuple(
            replace(state, **sides[self.group_of[state.name]])  # type: ignore[arg-type]
            for state in self.base.job.states
        )
        return evaluate(replace(self.base.job, states=states), c, guess=guess, rough=rough, tolerance=_TOLERANCE)

    def _parts(
        self, side: str, looks: Sequence[tuple[Look, int]], group: int, size: int
    ) -> list[tuple[Any, slice]]:
        """Return the boundaries of one side of a group for all columns, those that stay as they are in one piece."""
        state = self.groups[group]
        boundary, found, done = getattr(state, side), [], 0
        for look, start in looks:
            if self.now(look.variable, group) is None or np.all(look.ratios[group] == 1):
                continue
            if start > done:
                found.append((boundary, slice(done, start)))
            for k, ratio in enumerate(look.ratios[group]):
                changed = boundary if ratio == 1 else look.variable.changed(boundary, state, float(ratio))
                found.append((changed, slice(start + k, start + k + 1)))
            done = start + look.ratios.shape[1]
        if done < size:
            found.append((boundary, slice(done, size)))
        return found


def violations(e: Evaluation) -> tuple[Array, NDArray[np.bool_]]:
    """Return the violation of every limit (limits, B), nan where its state was not solved, and which are solved."""
    solved = np.stack([e.points[limit.state].converged for limit in e.limits])
    return np.where(solved, e.violations, np.nan), solved
