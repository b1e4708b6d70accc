"""Search for the best geometry of many problems at once: a coarse scan, then shrinking steps round the best.

A problem is a pair of materials with a number of modules in series and parallel; its unknowns are leg length, area
ratio, leg side and number of couples. Everything of one round is one batch, so that comparing two hundred pairs costs
a few large calls, and sizing one pair a few small ones.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.brief import Brief
from tegdesign.design.evaluate import HARD, SOFT, Candidates, Evaluation, Job, evaluate
from tegdesign.leg.closed_form import area_ratio_of_best_efficiency
from tegdesign.material.curve import Array

_RATIO_SPAN = np.log(4.0)  # the area ratio is sought within a factor four of its closed form
_STEPS = (0.2, 0.2, 0.1, 0.1, 0.05, 0.05, 0.025, 0.025, 0.0125)  # of the unit box, one batch each


@dataclass(frozen=True)
class Problems:
    """Material indices and connection of each problem, arrays (P,)."""

    n: NDArray[np.intp]
    p: NDArray[np.intp]
    series: Array
    parallel: Array

    def take(self, which: NDArray[np.intp]) -> Problems:
        """Return the problems ``which``, repeated where asked."""
        return Problems(self.n[which], self.p[which], self.series[which], self.parallel[which])


class Space:
    """Unit box of the unknowns of each problem: ln leg length, ln area ratio, leg side, ln couples."""

    def __init__(self, brief: Brief, job: Job, problems: Problems) -> None:
        """Work out what stays the same: room for legs, area ratios to seek around, bounds of the couples."""
        limits = brief.limits
        self.job, self.problems = job, problems
        self.hard = np.zeros(0, dtype=bool)  # which limits are of temperature or of the workshop, known once measured
        self.limits = limits
        self.width, self.depth = (side - 2 * limits.edge_margin for side in limits.footprint)
        self.footprint = limits.footprint[0] * limits.footprint[1]
        mean = _mean_temperature(job)
        properties = np.array(
            [
                (m.resistivity(t), m.thermal_conductivity(t))
                for m in job.materials
                for t in [np.clip(mean, *m.range)]
            ],
            dtype=float,
        )
        (rn, kn), (rp, kp) = properties[problems.n].T, properties[problems.p].T
        self.ratio = area_ratio_of_best_efficiency(rn, rp, kn, kp)
        most = self.width * self.depth / (2 * (limits.leg_side[0] + limits.gap) ** 2)
        self.most_couples = max(min(float(limits.couples[1]), most), 1.0)
        self.least_couples = min(float(max(limits.couples[0], 1)), self.most_couples)

    def candidates(self, which: NDArray[np.intp], u: Array, couples: Array | None = None) -> Candidates:
        """Return geometries at positions u (B, 4) of the boxes of problems ``which`` (B,)."""
        low, high = np.log(self.limits.leg_length)
        length = np.exp(low + u[:, 0] * (high - low))
        root = np.sqrt(self.ratio[which] * np.exp((2 * u[:, 1] - 1) * _RATIO_SPAN))
        thin, thick = self.limits.leg_side
        root = np.clip(root, thin / thick, thick / thin)
        if couples is None:
            span = np.log(self.most_couples / self.least_couples)
            couples = self.least_couples * np.exp(u[:, 3] * span)
        pitch = np.sqrt(self.width * self.depth / (2 * couples))
        # mean side between the thinnest and the thickest legs that can be cut and fit, the smaller leg decides below
        smallest = self.limits.leg_side[0] * (1 + root) / (2 * np.minimum(root, 1.0))
        largest = np.minimum(
            pitch - self.limits.gap, self.limits.leg_side[1] * (1 + root) / (2 * np.maximum(root, 1.0))
        )
        largest = np.minimum(
            largest, (pitch - self.limits.corner) * (1 + root) / (2 * np.maximum(root, 1.0))
        )
        smallest = np.minimum(smallest, largest)
        side = np.exp(np.log(smallest) + u[:, 2] * np.log(largest / smallest))
        side_p = 2 * side / (1 + root)
        part = self.problems.take(which)
        footprint = np.full(which.size, self.footprint)
        return Candidates(
            part.n,
            part.p,
            length,
            root * side_p,
            side_p,
            pitch,
            couples,
            footprint,
            part.series,
            part.parallel,
        )

    def leg_area(self, which: NDArray[np.intp], u: Array) -> Array:
        """Return the logarithm of all leg area at positions u (B, 4), in units of the first axis (leg length)."""
        c = self.candidates(which, u)
        low, high = np.log(self.limits.leg_length)
        return np.asarray(np.log(c.couples * (c.side_n**2 + c.side_p**2)) / max(high - low, 1e-9))

    def place(self, which: NDArray[np.intp], centre: Array, offsets: Array) -> Array:
        """Return positions (B, 4) at offsets from centres; leg length follows leg area, so that conductance stays.

        The thermal conductance of all legs is what most limits hang on. Moving sides and couples at constant
        conductance lets the search slide along them.
        """
        u = np.clip(centre + offsets, 0.0, 1.0)
        u[:, 0] = np.clip(
            centre[:, 0] + offsets[:, 0] + self.leg_area(which, u) - self.leg_area(which, centre), 0.0, 1.0
        )
        return u

    def frame(self, which: NDArray[np.intp], centre: Array, u: Array) -> Array:
        """Return the offsets that ``place`` takes to reach u."""
        offsets = u - centre
        offsets[:, 0] -= self.leg_area(which, u) - self.leg_area(which, centre)
        return np.asarray(offsets)

    def couples_of(self, u: Array) -> Array:
        """Return the number of couples at positions u."""
        return np.asarray(self.least_couples * (self.most_couples / self.least_couples) ** u[:, 3])

    def position_of_couples(self, couples: Array) -> Array:
        """Return the position in the box of a number of couples."""
        span = np.log(self.most_couples / self.least_couples)
        return (
            np.clip(np.log(couples / self.least_couples) / span, 0.0, 1.0)
            if span > 0
            else np.zeros(couples.size)
        )


def buildable(brief: Brief, e: Evaluation) -> Array:
    """Return by how much limits of the workshop are broken (0 when none): thin or slender legs, crowded pitch."""
    c, limits = e.candidates, brief.limits
    thin = np.minimum(c.side_n, c.side_p)
    over = np.maximum(limits.leg_side[0] / thin - 1, c.leg_length / thin / limits.slenderness - 1)
    return np.maximum(over, 0.0)


def score(brief: Brief, e: Evaluation) -> Array:
    """Return the score of the candidates, workshop limits included."""
    broken = buildable(brief, e)
    return np.where(broken > 1e-9, np.minimum(e.score, 0.0) + HARD * (1 + broken), e.score)


def search(
    brief: Brief,
    job: Job,
    problems: Problems,
    keep: Callable[[Array], NDArray[np.intp]],
    progress: Callable[[float], None],
) -> tuple[Problems, Space, Array, Array]:
    """Return the problems kept after the scan, their space, best positions (P, 4) and scores (P,).

    ``keep`` picks the problems that go on from the scores after the scan.
    """
    space = Space(brief, job, problems)
    count = problems.n.size
    grid = np.array(
        [
            (length, 0.5, side, couples)
            for length in (0.05, 0.22, 0.39, 0.56, 0.73, 0.9)
            for side, couples in ((0.35, 0.45), (0.35, 0.8), (0.85, 0.45), (0.85, 0.8), (1.0, 1.0))
        ]
    )
    best = _Incumbent(count)
    u, which = np.tile(grid, (count, 1)), np.repeat(np.arange(count), len(grid))
    first = _round(brief, space, best, u, which)
    if brief.require.voltage is not None:  # once more, each with the couples that its own voltage asks for
        u[:, 3] = _in_window(brief, space, u, first.voltage_per_couple * problems.series[which])
        _round(brief, space, best, u, which, moved=True)
    chosen = keep(best.score)
    problems = problems.take(chosen)
    space = Space(brief, job, problems)
    best = best.take(chosen)
    count = problems.n.size
    rng = np.random.default_rng(20260101)  # fixed: same brief, same answer
    jump = np.zeros((count, 2, 4))
    for number, step in enumerate(_STEPS):
        axis = np.concatenate([np.eye(4), -np.eye(4)]) * step
        cloud = rng.uniform(-step, step, (7, 4))
        near = np.broadcast_to(np.concatenate([axis, cloud]), (count, 15, 4))
        offsets = np.concatenate([near, jump], axis=1).reshape(-1, 4)
        which = np.repeat(np.arange(count), 17)
        centre = best.u[which]
        u = space.place(which, centre, offsets)
        outcome = _round(brief, space, best, u, which).by_problem(count)
        moved = space.frame(which, best.u[which], u).reshape(count, -1, 4)
        best.learn(moved, outcome)
        jump = _jump(moved, outcome, space.hard, step, rng)
        progress((number + 1) / len(_STEPS))
    return problems, space, best.u, best.score


class _Incumbent:
    """Best position so far of each problem and its voltage."""

    def __init__(self, count: int) -> None:
        self.u = np.full((count, 4), 0.5)
        self.score = np.full(count, -np.inf)
        self.voltage_per_couple = np.full(count, np.nan)
        self.voltage_slope = np.zeros((count, 4))  # of its logarithm, by position

    def take(self, which: NDArray[np.intp]) -> _Incumbent:
        other = _Incumbent(which.size)
        for name in vars(other):
            setattr(other, name, getattr(self, name)[which].copy())
        return other

    def learn(self, offsets: Array, outcome: _Outcome) -> None:
        """Fit how the voltage of a couple moves with the position, so that the couples can make up for it."""
        with np.errstate(divide="ignore", invalid="ignore"):
            value = np.log(outcome.voltage_per_couple)[:, :, None]
        self.voltage_slope = _fit(offsets, value)[:, 1:5, 0]


class _Outcome(NamedTuple):
    """What a round found, arrays (B, ...): score, logarithm of the aim, violations of limits, V a couple, leg cut."""

    score: Array
    aim: Array
    violations: Array
    voltage_per_couple: Array
    shorten: Array

    def by_problem(self, count: int) -> _Outcome:
        """Return the arrays with the problems first."""
        return _Outcome(*(v.reshape(count, -1, *v.shape[1:]) for v in self))


def _round(
    brief: Brief, space: Space, best: _Incumbent, u: Array, which: NDArray[np.intp], moved: bool = False
) -> _Outcome:
    """Evaluate positions of several problems and keep what is better.

    With a voltage window the couples are first moved (in place) by what is known of the voltage, unless ``moved``.
    """
    if brief.require.voltage is not None and not moved:
        area = space.leg_area(which, u)
        shift = np.einsum("bi,bi->b", best.voltage_slope[which], space.frame(which, best.u[which], u))
        per_couple = best.voltage_per_couple[which] * np.exp(np.clip(shift, -1.0, 1.0))
        u[:, 3] = _in_window(brief, space, u, per_couple * space.problems.series[which])
        u[:, 0] = np.clip(u[:, 0] + space.leg_area(which, u) - area, 0.0, 1.0)
    outcome = _measure(brief, space, u, which)
    hot = np.flatnonzero((outcome.shorten < 1) & (u[:, 0] > 0))
    if hot.size:  # legs too long for a temperature limit are cut to it, so that the search goes along it
        low, high = np.log(space.limits.leg_length)
        u[hot, 0] = np.clip(u[hot, 0] + np.log(outcome.shorten[hot]) / max(high - low, 1e-9), 0.0, 1.0)
        for whole, part in zip(outcome, _measure(brief, space, u[hot], which[hot]), strict=True):
            whole[hot] = part
    values = outcome.score
    order = np.argsort(values, kind="stable")
    top = np.full(best.score.size, -1)
    top[which[order]] = order  # the last one written is the best of its problem
    found = np.flatnonzero((top >= 0) & (values[top] > best.score))
    k = top[found]
    best.u[found], best.score[found] = u[k], values[k]
    best.voltage_per_couple[found] = outcome.voltage_per_couple[k]
    return outcome


def _measure(brief: Brief, space: Space, u: Array, which: NDArray[np.intp]) -> _Outcome:
    """Evaluate positions (B, 4) of problems ``which``."""
    candidates = space.candidates(which, u)
    e = evaluate(space.job, candidates, tolerance=1e-4)  # of the last step; what is left is its square
    with np.errstate(divide="ignore", invalid="ignore"):
        aim = np.log(e.objective)
    space.hard = np.array([*(limit.hard for limit in e.limits), True])
    violations = np.stack([*(limit.violation for limit in e.limits), buildable(brief, e)], axis=1)
    return _Outcome(score(brief, e), aim, violations, e.rated.voltage / candidates.couples, _shorten(e))


def _shorten(e: Evaluation) -> Array:
    """Return the factor on leg length that brings the hottest junction to its limit, 1 where it is below.

    Right for a given heat, where the difference goes as the length; too little elsewhere, and done again next time.
    """
    cold = {"rated": e.rated.cold_junction, "open circuit": e.opened.cold_junction}
    factor = np.ones(e.candidates.n.size)
    for limit in e.limits:
        if limit.unit == "K" and limit.sense == "most" and "cold" not in limit.key:
            base = cold[limit.state]
            with np.errstate(divide="ignore", invalid="ignore"):
                ratio = (limit.bound - 0.05 - base) / (limit.value - base)
            factor = np.where((limit.violation > 0) & (ratio > 0.02), np.minimum(factor, ratio), factor)
    return factor


def _in_window(brief: Brief, space: Space, u: Array, per_couple: Array) -> Array:
    """Return the place of the number of couples that brings the voltage into the window; it goes as their number."""
    low, high = brief.require.voltage or (0.0, np.inf)
    known = np.isfinite(per_couple) & (per_couple > 0)
    safe = np.where(known, per_couple, 1.0)
    wanted = np.clip(space.couples_of(u), 1.002 * low / safe, 0.998 * high / safe)
    return np.where(known, space.position_of_couples(wanted), u[:, 3])


def _fit(offsets: Array, values: Array) -> Array:
    """Return coefficients (P, 9, M) of 1, d and d^2 through values (P, K, M) at offsets d (P, K, 4)."""
    usable = np.isfinite(values).all(axis=2, keepdims=True)
    x = np.concatenate([np.ones((*offsets.shape[:2], 1)), offsets, offsets**2], axis=2) * usable
    normal = np.einsum("pki,pkj->pij", x, x)
    scale = np.sqrt(np.einsum("pii->pi", normal)) + 1e-12
    normal = normal / (scale[:, :, None] * scale[:, None, :]) + 1e-9 * np.eye(9)
    right = np.einsum("pki,pkm->pim", x, np.where(usable, values, 0.0)) / scale[:, :, None]
    return np.asarray(np.linalg.solve(normal, right) / scale[:, :, None])


def _jump(
    offsets: Array, outcome: _Outcome, hard: NDArray[np.bool_], step: float, rng: np.random.Generator
) -> Array:
    """Return offsets of two promising places a problem, (P, 2, 4): the best of a model of the aim and of every limit.

    Aim and limits are fitted by parabolas without cross terms, so that the search can slide along a limit that binds;
    the second keeps a little room to the limits.
    """
    count = len(offsets)
    near = np.nanmax(outcome.violations, axis=(0, 1), initial=-np.inf) > -0.5  # the others cannot matter in a step
    model = _fit(offsets, np.concatenate([outcome.aim[:, :, None], outcome.violations[:, :, near]], axis=2))
    samples = int(np.clip(60_000 // count, 250, 3000))
    d = rng.uniform(-1.6 * step, 1.6 * step, (samples, 4)) * rng.uniform(0.05, 1.0, (samples, 1))
    predicted = np.concatenate([np.ones((samples, 1)), d, d**2], axis=1) @ model
    found = []
    for room in (1e-4, 0.3 * step):
        missed = np.maximum(predicted[:, :, 1:] + room, 0.0)
        broken, short = missed @ hard[near], missed @ ~hard[near]
        value = np.where(short > 0, SOFT * (1 + short), predicted[:, :, 0])
        value = np.where(broken > 0, HARD * (1 + broken) + SOFT * short, value)
        found.append(d[np.argmax(value, axis=1)])
    return np.stack(found, axis=1)


def _mean_temperature(job: Job) -> float:
    hot, cold = job.source.reference_temperature, job.sink.reference_temperature
    return float((max(hot, cold + 50.0) + cold) / 2)
