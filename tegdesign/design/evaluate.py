"""Candidate designs of one job, evaluated all at once in all its states: operating points, limits, aim."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, fields
from functools import cached_property
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.assemble import stack_values
from tegdesign.design.condition import Condition
from tegdesign.design.limits import Limit, hot_allowance, limits
from tegdesign.design.parts import Aim, Losses, Require, Stack
from tegdesign.material.curve import Array
from tegdesign.material.material import Material
from tegdesign.module.module import EXACT, Accuracy, Modules
from tegdesign.system.law import join
from tegdesign.system.load import mixed
from tegdesign.system.operating_point import OperatingPoint, operating_point

# Weights of the score: broken temperature limits, then missed requirements, then the aim.
HARD, SOFT = -1e8, -1e4
# For searches, together about 1e-4 of the junction difference; those that need more rounds are no candidates.
_ROUGH_STEP, _ROUGH_ROUNDS, _ROUGH_LEGS = 5e-3, 6, Accuracy(points=3, tolerance=1e-6, max_iterations=8)


@dataclass(frozen=True)
class Job:
    """What all candidates share; of the states the first is the rated one, the second its open circuit."""

    states: tuple[Condition, ...]
    stack: Stack
    losses: Losses
    require: Require
    aim: Aim
    hold: float
    materials: Sequence[Material]

    @property
    def rated(self) -> Condition:
        """The conditions of the rated state."""
        return self.states[0]

    @cached_property
    def ranges(self) -> Array:
        """First and last data point and service limit of every material [K], (3, materials)."""
        return np.array([(*m.range, m.service_limit.value) for m in self.materials]).T

    def hottest(self, n: NDArray[np.intp], p: NDArray[np.intp]) -> Array:
        """Return the temperature [K] that the hot junction of pairs (B,) may reach, (states, B)."""
        _, last, service = self.ranges
        rows = []
        for state in self.states:
            over, asked = hot_allowance(self.require, state)
            own = np.minimum(last + self.hold, service + over)
            rows.append(np.minimum(np.minimum(own[n], own[p]), np.inf if asked is None else asked))
        return np.stack(rows)


@dataclass(frozen=True)
class Candidates:
    """Geometries as arrays (B,): material indices, m, couples, plate area [m^2], modules in series and parallel."""

    n: NDArray[np.intp]
    p: NDArray[np.intp]
    leg_length: Array
    side_n: Array
    side_p: Array
    pitch: Array
    couples: Array
    footprint: Array
    series: Array
    parallel: Array

    def take(self, which: Any) -> Candidates:
        """Return the candidates ``which``."""
        return Candidates(**{f.name: getattr(self, f.name)[which] for f in fields(self)})

    @property
    def modules(self) -> Array:
        """Number of modules."""
        return self.series * self.parallel

    def batch(self, job: Job) -> Modules:
        """Return the modules as a batch for the solver, (states x B,)."""
        geometry = {f.name: getattr(self, f.name) for f in fields(self) if f.name not in ("series", "parallel")}
        values: dict[str, Any] = dict(stack_values(job.stack, job.losses))
        whole = Modules(job.materials, **geometry, **values).tile(len(job.states))
        if not any(state.reversed for state in job.states):
            return whole
        turned = np.repeat([state.reversed for state in job.states], self.n.size)
        swapped = stack_values(job.stack, job.losses, turned=True)
        both = {k: np.where(turned, swapped[k], v) for k, v in values.items() if swapped[k] != v}
        return Modules(
            job.materials, **{k: np.tile(v, len(job.states)) for k, v in geometry.items()}, **(values | both)
        )


class Guess(NamedTuple):
    """Where to start: junctions [K] and scaled current I L / A_n [A/m], which hardly moves with size; (states, B)."""

    hot: Array
    cold: Array
    scaled_current: Array

    def take(self, which: Any) -> Guess:
        """Return the guess for the candidates ``which``."""
        return Guess(*(v[:, which] for v in self))


@dataclass(frozen=True)
class Evaluation:
    """Candidates with their operating points in every state of the job, by its name."""

    job: Job
    candidates: Candidates
    points: dict[str, OperatingPoint]

    @property
    def rated(self) -> OperatingPoint:
        """The rated state, the first of the job."""
        return self.points[self.job.states[0].name]

    @property
    def opened(self) -> OperatingPoint:
        """The open circuit of the rated state, the second of the job."""
        return self.points[self.job.states[1].name]

    @cached_property
    def guess(self) -> Guess:
        """Where to start with candidates of much the same thermal resistance."""
        points, c = self.points.values(), self.candidates
        hot, cold, current = (
            np.stack([getattr(p, name) for p in points]) for name in ("hot_junction", "cold_junction", "current")
        )
        return Guess(hot, cold, current * c.leg_length / c.side_n**2)

    @cached_property
    def limits(self) -> list[Limit]:
        """All limits that the job sets, in every state they apply to."""
        return list(limits(self))

    @cached_property
    def violations(self) -> Array:
        """Violation of every limit, (limits, B)."""
        return np.stack([limit.violation for limit in self.limits])

    @cached_property
    def hard(self) -> NDArray[np.bool_]:
        """Which of the limits are of temperature, (limits,)."""
        return np.array([limit.hard for limit in self.limits])

    @cached_property
    def violation(self) -> Array:
        """Largest violation of each candidate, infinite where a state has no operating point."""
        solved = np.all([point.converged for point in self.points.values()], axis=0)
        return np.where(solved, self.violations.max(axis=0), np.inf)

    @cached_property
    def shortfall(self) -> Array:
        """Sum of the missed requirements: one that is missed is no licence to miss others as well."""
        return self._missed(hard=False)

    @cached_property
    def overheat(self) -> Array:
        """Sum of the broken temperature limits: no requirement may buy them off."""
        return self._missed(hard=True)

    def _missed(self, hard: bool) -> Array:
        violations = self.violations[self.hard == hard]
        return np.asarray(np.clip(np.where(np.isnan(violations), 1e3, violations), 0.0, 1e3).sum(axis=0))

    @cached_property
    def material_mass(self) -> Array:
        """Mass of leg material in all modules [kg]."""
        c = self.candidates
        density = np.array([m.density.value for m in self.job.materials])
        legs = density[c.n] * c.side_n**2 + density[c.p] * c.side_p**2
        return np.asarray(c.modules * c.couples * c.leg_length * legs)

    def delivered(self, state: Condition) -> Array:
        """Return the power that reaches the user in a loaded state [W]."""
        c, point = self.candidates, self.points[state.name]
        before = self.points.get(state.start) or self.points.get(state.opened) or point
        total = (point.voltage * c.series, point.current * c.parallel, before.voltage * c.series)
        return state.load.delivery(*total).power  # type: ignore[no-any-return]

    def efficiency_in(self, state: Condition) -> Array:
        """Return that power over the heat of the source: all of it where it is given, else what is drawn."""
        given = state.source.given_heat
        heat = self.points[state.name].heat_in * self.candidates.modules if given is None else given
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.asarray(np.where(heat != 0, self.delivered(state) / heat, 0.0))

    @cached_property
    def efficiency(self) -> Array:
        """Efficiency of the rated state."""
        return self.efficiency_in(self.job.rated)

    @cached_property
    def power(self) -> Array:
        """Power that reaches the user in the rated state [W]."""
        return self.delivered(self.job.rated)

    @cached_property
    def objective(self) -> Array:
        """The quantity aimed at: W, 1, W/m^2 or W/kg."""
        power = self.power
        aims: dict[Aim, Callable[[], Array]] = {
            "power": lambda: power,
            "efficiency": lambda: self.efficiency,
            "power per footprint": lambda: power / (self.candidates.footprint * self.candidates.modules),
            "power per material mass": lambda: power / self.material_mass,
        }
        return aims[self.job.aim]()

    @cached_property
    def score(self) -> Array:
        """Logarithm of the objective, far below where a requirement is missed, deep below where a limit is broken."""
        with np.errstate(divide="ignore", invalid="ignore"):
            good = np.log(np.maximum(self.objective, 1e-300))
        score = np.where(self.shortfall > 1e-9, SOFT * (1 + self.shortfall) + 1e-3 * good, good)
        score = np.where(self.overheat > 1e-9, HARD * (1 + self.overheat) + SOFT * self.shortfall, score)
        return np.where(np.isfinite(self.violation), score, -np.inf)


def evaluate(
    job: Job,
    candidates: Candidates,
    *,
    tolerance: float = 1e-7,
    rough: bool = False,
    guess: Guess | None = None,
) -> Evaluation:
    """Solve all states of all candidates in one batch.

    Parameters
    ----------
    tolerance : float
        Of the operating points, see ``operating_point``.
    rough : bool
        Solve to about 1e-4 of the junction difference only, whatever ``tolerance``: good enough to search.
    guess : Guess, optional
        Where to start.
    """
    count, states = candidates.modules, job.states
    start = None
    if guess is not None:
        if_unknown = zip(guess, (400.0, 320.0, 0.0), strict=True)
        hot, cold, scaled = (np.where(np.isfinite(v), v, other) for v, other in if_unknown)
        start = hot.ravel(), cold.ravel(), (scaled * candidates.side_n**2 / candidates.leg_length).ravel()
    point = operating_point(
        candidates.batch(job),
        join([state.source.law(candidates.footprint, count) for state in states]),
        join([state.sink.law(candidates.footprint, count) for state in states]),
        mixed([state.load.law(candidates.series, candidates.parallel) for state in states]),
        tolerance=_ROUGH_STEP if rough else tolerance,
        max_iterations=_ROUGH_ROUNDS if rough else 60,
        check=False,
        guess=start,
        legs=_ROUGH_LEGS if rough else EXACT,
        extrapolate=rough,
    )
    blocks = (slice(k * count.size, (k + 1) * count.size) for k in range(len(states)))
    return Evaluation(
        job, candidates, {state.name: point.take(block) for state, block in zip(states, blocks, strict=True)}
    )
