"""Candidate designs of one job, evaluated all at once: operating point, open circuit, limits, aim."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, fields
from functools import cached_property
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.assemble import stack_values
from tegdesign.design.parts import Aim, Losses, Require, Stack
from tegdesign.material.curve import Array
from tegdesign.material.material import Material
from tegdesign.module.module import Modules
from tegdesign.system.boundary import AnyBoundary
from tegdesign.system.load import AnyLoad, GivenCurrent
from tegdesign.system.operating_point import OperatingPoint, operating_point

# Weights of the score: broken temperature limits, then missed requirements, then the aim.
HARD, SOFT = -1e8, -1e4


@dataclass(frozen=True)
class Job:
    """What all candidates share."""

    source: AnyBoundary
    sink: AnyBoundary
    load: AnyLoad
    stack: Stack
    losses: Losses
    require: Require
    aim: Aim
    hold: float
    materials: Sequence[Material]


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
        """Return the modules as a batch for the solver."""
        geometry = {
            f.name: getattr(self, f.name) for f in fields(self) if f.name not in ("series", "parallel")
        }
        return Modules(job.materials, **geometry, **dict[str, Any](stack_values(job.stack, job.losses)))


class Limit(NamedTuple):
    """One limit in one state over the batch: value and bound in the unit, positive ``violation`` where it is broken."""

    key: str
    state: str
    unit: str
    sense: str  # "most" or "least"
    value: Array
    bound: Array
    scale: Array

    @property
    def hard(self) -> bool:
        """Whether it is a limit of temperature: those come before any requirement."""
        return self.unit == "K"

    @property
    def violation(self) -> Array:
        """By how much the bound is broken, in units of ``scale``; negative is room left."""
        over = self.value - self.bound if self.sense == "most" else self.bound - self.value
        return np.asarray(over / self.scale)


@dataclass(frozen=True)
class Evaluation:
    """Candidates with their rated and open-circuit state."""

    job: Job
    candidates: Candidates
    rated: OperatingPoint
    opened: OperatingPoint

    @cached_property
    def limits(self) -> list[Limit]:
        """All limits that the job sets, in every state they apply to."""
        return list(_limits(self))

    @cached_property
    def violation(self) -> Array:
        """Largest violation of each candidate, infinite where no operating point was found."""
        worst = np.full(self.candidates.n.size, -np.inf)
        for limit in self.limits:
            worst = np.maximum(worst, limit.violation)
        solved = self.rated.converged & self.opened.converged
        return np.where(solved, worst, np.inf)

    @cached_property
    def shortfall(self) -> Array:
        """Sum of the missed requirements: one that is missed is no licence to miss others as well."""
        return self._missed(hard=False)

    @cached_property
    def overheat(self) -> Array:
        """Sum of the broken temperature limits: no requirement may buy them off."""
        return self._missed(hard=True)

    def _missed(self, hard: bool) -> Array:
        total = np.zeros(self.candidates.n.size)
        for limit in self.limits:
            if limit.hard == hard:
                total += np.clip(np.nan_to_num(limit.violation, nan=1e3), 0.0, 1e3)
        return total

    @cached_property
    def material_mass(self) -> Array:
        """Mass of leg material in all modules [kg]."""
        c = self.candidates
        density = np.array([m.density.value for m in self.job.materials])
        legs = density[c.n] * c.side_n**2 + density[c.p] * c.side_p**2
        return np.asarray(c.modules * c.couples * c.leg_length * legs)

    @cached_property
    def efficiency(self) -> Array:
        """Power over the heat of the source: all of it where it is given, else what the generator draws."""
        given = self.job.source.given_heat
        return self.rated.efficiency if given is None else self.rated.power * self.candidates.modules / given

    @cached_property
    def objective(self) -> Array:
        """The quantity aimed at: W, 1, W/m^2 or W/kg."""
        power = self.rated.power * self.candidates.modules
        aims: dict[Aim, Callable[[], Array]] = {
            "power": lambda: power,
            "efficiency": lambda: self.efficiency,
            "power per footprint": lambda: self.rated.power / self.candidates.footprint,
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
    check: bool = False,
    guess: tuple[Array, Array, Array] | None = None,
) -> Evaluation:
    """Solve the rated and the open-circuit state of all candidates in one batch each.

    Raises
    ------
    ConvergenceError
        With ``check``, when any candidate has no operating point.
    """
    modules = candidates.batch(job)
    count = candidates.modules
    source = job.source.law(candidates.footprint, count)
    sink = job.sink.law(candidates.footprint, count)
    law = job.load.law(candidates.series, candidates.parallel)
    rated = operating_point(modules, source, sink, law, tolerance=tolerance, check=check, guess=guess)
    known = np.isfinite(rated.hot_junction) & np.isfinite(rated.cold_junction)
    start = (
        np.where(known, rated.hot_junction, 400.0),
        np.where(known, rated.cold_junction, 320.0),
        np.zeros(count.size),
    )
    nothing = GivenCurrent.model_construct(current=0.0).law(candidates.series, candidates.parallel)
    opened = operating_point(modules, source, sink, nothing, tolerance=tolerance, check=check, guess=start)
    return Evaluation(job, candidates, rated, opened)


def _limits(e: Evaluation) -> Any:
    c, job, require = e.candidates, e.job, e.job.require
    ones = np.ones(c.n.size)
    kelvin = 50.0 * ones  # one unit of violation: 50 K
    first, last, service = (
        np.array(column)
        for column in zip(*((*m.range, m.service_limit.value) for m in job.materials), strict=True)
    )
    for state, point in (("rated", e.rated), ("open circuit", e.opened)):
        hot, cold = point.hot_junction, point.cold_junction
        for leg, index in (("n", c.n), ("p", c.p)):
            yield Limit(f"service limit of the {leg} leg", state, "K", "most", hot, service[index], kelvin)
            yield Limit(
                f"last data point of the {leg} leg", state, "K", "most", hot, last[index] + job.hold, kelvin
            )
            yield Limit(
                f"first data point of the {leg} leg",
                state,
                "K",
                "least",
                cold,
                first[index] - job.hold,
                kelvin,
            )
        if require.hot_junction is not None:
            yield Limit("required hot junction", state, "K", "most", hot, require.hot_junction * ones, kelvin)
        if require.cold_junction is not None:
            yield Limit(
                "required cold junction", state, "K", "most", cold, require.cold_junction * ones, kelvin
            )
    power, voltage = e.rated.power * c.modules, e.rated.voltage * c.series
    open_voltage = e.opened.voltage * c.series
    if not job.load.passive:
        nothing, size = np.zeros(power.size), np.maximum(np.abs(power), 1e-12)
        yield Limit("power at the leads", "rated", "W", "least", power, nothing, size)
    asked: list[tuple[str, str, str, str, Array, float | None]] = [
        ("required power", "rated", "W", "least", power, require.power),
        ("required efficiency", "rated", "1", "least", e.efficiency, require.efficiency),
        (
            "lower end of the voltage window",
            "rated",
            "V",
            "least",
            voltage,
            (require.voltage or (None, None))[0],
        ),
        (
            "upper end of the voltage window",
            "rated",
            "V",
            "most",
            voltage,
            (require.voltage or (None, None))[1],
        ),
        ("open-circuit voltage", "open circuit", "V", "most", open_voltage, require.open_circuit_voltage),
    ]
    for key, state, unit, sense, value, bound in asked:
        if bound is not None:
            yield Limit(key, state, unit, sense, value, bound * ones, bound * ones)
