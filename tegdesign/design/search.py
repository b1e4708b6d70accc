"""Search for the best geometry of many problems at once: a coarse scan, then shrinking steps round the best.

A problem is a pair of materials with a number of modules in series and parallel; its unknowns are leg length, area
ratio, leg side and number of couples. Everything of one round is one batch, so that comparing two hundred pairs costs
a few large calls, and sizing one pair a few small ones.
"""

from __future__ import annotations

from collections.abc import Callable
from copy import copy
from dataclasses import replace
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.brief import Brief
from tegdesign.design.condition import OPEN
from tegdesign.design.evaluate import HARD, SOFT, Guess, Job, evaluate
from tegdesign.design.space import Problems, Space, buildable, score
from tegdesign.material.curve import Array

_SCAN = [
    (length, 0.5, side, couples)
    for length in (0.05, 0.22, 0.39, 0.56, 0.73, 0.9)
    for side, couples in ((0.35, 0.45), (0.35, 0.8), (0.85, 0.45), (0.85, 0.8), (1.0, 1.0))
]
_BRIEF = [(length, 0.5, side, 0.6) for length in (0.05, 0.22, 0.39, 0.56, 0.73, 0.9) for side in (0.0, 0.85)]
_DONORS = 3  # problems whose best place is tried in all others
_FEW = 6  # rivals that a full scan is spent on
_ROUNDS = 10  # at most
_WIDEST, _FINEST = 0.2, 0.01  # steps, of the unit box
_RIVALS, _LEAST_RIVALS = 0.6, 3  # share of rivals that go on after a round, and how many at least
_GAIN = 2e-3  # of a round, of the logarithm of the aim; less lets the step shrink to its half


class Found(NamedTuple):
    """What a search found: the problems kept, their space, best positions (P, 4), scores (P,), where to start there.

    ``slopes`` is what was learned of the surroundings of the positions.
    """

    problems: Problems
    space: Space
    u: Array
    scores: Array
    guess: Guess
    slopes: Array


def search(
    brief: Brief,
    job: Job,
    problems: Problems,
    keep: Callable[[Problems, Array], NDArray[np.intp]],
    rivals: bool,
    progress: Callable[[float], None],
) -> Found:
    """Return the best geometry of the problems that are kept.

    ``keep`` picks the problems that go on by their scores after a scan of the box. Of ``rivals`` only the best is
    wanted: many get a brief scan, and those who fall behind are given up.
    """
    best = _Incumbent(problems.n.size, len(job.states))
    _scan(brief, Space(brief, job, problems), best, np.array(_BRIEF if rivals and problems.n.size > _FEW else _SCAN))
    if rivals and problems.n.size > 1:
        _share(brief, Space(brief, job, problems), best)
    chosen = keep(problems, best.score)
    problems, best = problems.take(chosen), best.take(chosen)
    return _improve(brief, Space(brief, job, problems), best, _WIDEST, rivals, progress)


def on_grids(brief: Brief, found: Found, parent: NDArray[np.intp], grid: Array) -> Found:
    """Return the best geometry on given grids of legs (P, 2), each from the answer ``parent`` (P,) of a search."""
    free, count = found.space, parent.size
    space = Space(brief, free.job, replace(found.problems.take(parent), grid=grid))
    u, each = found.u[parent], np.arange(count)
    u[:, 0] = np.clip(u[:, 0] + space.leg_area(each, u) - free.leg_area(parent, u), 0.0, 1.0)
    best = _Incumbent(count, len(free.job.states))
    best.slopes = found.slopes[parent]
    _, guess = _shorten(space, u, each, found.guess.take(parent))
    _keep(best, u, each, _measure(brief, space, u, each, guess))
    return _improve(brief, space, best, _WIDEST / 2, True, lambda _: None)


def refine(brief: Brief, job: Job, problems: Problems, u: Array, guess: Guess, widest: float) -> Found:
    """Return the best geometry of problems (P,), each sought from its position u (P, 4) by steps from ``widest`` on."""
    space, each = Space(brief, job, problems), np.arange(problems.n.size)
    best = _Incumbent(each.size, len(job.states))
    u = u.copy()
    _, guess = _shorten(space, u, each, guess)
    _keep(best, u, each, _measure(brief, space, u, each, guess))
    return _improve(brief, space, best, widest, False, lambda _: None)


def _improve(
    brief: Brief, space: Space, best: _Incumbent, widest: float, rivals: bool, progress: Callable[[float], None]
) -> Found:
    """Return the problems with their best positions, sought round those known by steps that shrink from ``widest``.

    Of ``rivals`` only the best is wanted, so that those who fall behind are left as they are.
    """
    count = space.problems.n.size
    rng = np.random.default_rng(20260101)  # fixed: same brief, same answer
    jump, step = np.zeros((count, 2, 4)), np.full(count, widest)  # of the unit box
    for number in range(_ROUNDS):
        live = np.flatnonzero(step > _FINEST)
        if not live.size:
            break
        before, reach = best.score[live], step[live, None, None]
        near = np.concatenate([np.eye(4), -np.eye(4), rng.uniform(-1, 1, (7, 4))])
        offsets = reach * np.concatenate([np.broadcast_to(near, (live.size, *near.shape)), jump[live]], axis=1)
        which = np.repeat(live, offsets.shape[1])
        u = space.place(which, best.u[which], offsets.reshape(-1, 4))
        outcome = _round(brief, space, best, u, which).by_problem(live.size)
        moved = space.frame(which, best.u[which], u).reshape(offsets.shape)
        best.learn(live, moved, outcome.found)
        jump[live] = _jump(moved / reach, outcome, rng)
        step[live[~(best.score[live] > before + _GAIN)]] /= 2
        if rivals:
            order = live[np.argsort(-best.score[live], kind="stable")]
            step[order[max(_LEAST_RIVALS, round(_RIVALS * order.size)) :]] = 0.0
        progress((number + 1) / _ROUNDS)
    return Found(space.problems, space, best.u, best.score, _guess(best.found), best.slopes)


def _scan(brief: Brief, space: Space, best: _Incumbent, grid: Array) -> None:
    """Evaluate the same positions (K, 4) of all problems, with couples that suit the voltage and legs the limits."""
    count = space.problems.n.size
    u, which = np.tile(grid, (count, 1)), np.repeat(np.arange(count), len(grid))
    guess = None
    if brief.require.voltage is not None:  # first see which couples the voltage asks for
        p = space.problems
        free = all(state.load.adapts or state.load == OPEN for state in space.job.states)
        circuit = np.zeros(count) if free else p.series  # else a module knows how it is joined with others
        _, first, back = np.unique(
            np.stack([p.n, p.p, p.series * p.parallel, circuit]), axis=1, return_index=True, return_inverse=True
        )
        some = (first[:, None] * len(grid) + np.arange(len(grid))).ravel()
        there = _measure(brief, space, u[some], which[some]).found.reshape(first.size, len(grid), -1)[back]
        there = there.reshape(len(u), -1)
        guess = _guess(there)
        u[:, 3] = _in_window(brief, space, u, np.exp(there[:, 0]) * p.series[which])
    outcome = _measure(brief, space, u, which, guess)
    _keep(best, u, which, outcome)
    guess = _guess(outcome.found)
    cut, guess = _shorten(space, u, which, guess)
    if cut.size:
        _keep(best, u[cut], which[cut], _measure(brief, space, u[cut], which[cut], guess.take(cut)))


def _share(brief: Brief, space: Space, best: _Incumbent) -> None:
    """Try the best places of a few problems in all of them, with as many couples as each needs."""
    count = space.problems.n.size
    donor = np.tile(np.argsort(-best.score, kind="stable")[:_DONORS], count)
    which = np.repeat(np.arange(count), donor.size // count)
    u, known = best.u[donor], best.found[donor]
    if brief.require.voltage is not None:
        _suit_window(brief, space, u, which, known[:, 0])
    _keep(best, u, which, _measure(brief, space, u, which, _guess(known)))


class _Incumbent:
    """Best position so far of each problem, what was found there, and how that moves with the position."""

    def __init__(self, count: int, states: int) -> None:
        self.u = np.full((count, 4), 0.5)
        self.score = np.full(count, -np.inf)
        self.found = np.full((count, 1 + 3 * states), np.nan)  # ln V of a couple, hot, cold, scaled current by state
        self.slopes = np.zeros((count, 8, 1 + 3 * states))  # by offsets and their squares

    def take(self, which: NDArray[np.intp]) -> _Incumbent:
        """Return the problems ``which``."""
        other = copy(self)
        for name, value in vars(self).items():
            setattr(other, name, value[which])
        return other

    def learn(self, which: NDArray[np.intp], offsets: Array, found: Array) -> None:
        """Fit what was found (P, K, M) at offsets (P, K, 4) from the best positions of problems ``which`` (P,)."""
        self.slopes[which] = _fit(offsets, found)[:, 1:]

    def expect(self, which: NDArray[np.intp], offsets: Array) -> Array:
        """Return what is to be expected (B, M) at offsets (B, 4) from the best positions of problems (B,)."""
        moves = np.concatenate([offsets, offsets**2], axis=1)
        change = np.einsum("bi,bim->bm", moves, self.slopes[which])
        found = self.found[which]
        hot, cold, current = found[:, 1:].reshape(len(found), 3, -1).transpose(1, 0, 2)
        most = np.concatenate([np.ones((len(found), 1)), *[0.4 * (hot - cold)] * 2, 0.6 * current], axis=1)
        return np.asarray(found + np.clip(change, -most, most))  # a parabola may not be trusted far out


class _Outcome(NamedTuple):
    """What a round found, arrays (B, ...): score, logarithm of the aim, violations of limits, what to expect near.

    ``hard`` tells which limits are of temperature or of the workshop.
    """

    score: Array
    aim: Array
    violations: Array
    found: Array
    hard: NDArray[np.bool_]

    def by_problem(self, count: int) -> _Outcome:
        """Return the arrays with the problems first."""
        score, aim, violations, found = (v.reshape(count, -1, *v.shape[1:]) for v in self[:-1])
        return _Outcome(score, aim, violations, found, self.hard)


def _round(brief: Brief, space: Space, best: _Incumbent, u: Array, which: NDArray[np.intp]) -> _Outcome:
    """Evaluate positions of several problems, keep what is better.

    First the positions are moved (in place) by what is known of their surroundings: couples to bring the voltage into
    its window, and shorter legs where a junction would pass its limit, so that the search goes along both.
    """
    centre = best.u[which]
    if brief.require.voltage is not None and space.problems.grid is None:
        _suit_window(brief, space, u, which, best.expect(which, space.frame(which, centre, u))[:, 0])
    guess = _guess(best.expect(which, space.frame(which, centre, u)))
    cut, _ = _shorten(space, u, which, guess)
    if cut.size:
        guess = _guess(best.expect(which, space.frame(which, centre, u)))
    outcome = _measure(brief, space, u, which, guess)
    _keep(best, u, which, outcome)
    return outcome


def _guess(expected: Array) -> Guess:
    return Guess(*expected[:, 1:].T.reshape(3, -1, len(expected)))


def _keep(best: _Incumbent, u: Array, which: NDArray[np.intp], outcome: _Outcome) -> None:
    """Take over what is better than the best so far."""
    values = outcome.score
    order = np.argsort(values, kind="stable")
    top = np.full(best.score.size, -1)
    top[which[order]] = order  # the last one written is the best of its problem
    found = np.flatnonzero((top >= 0) & (values[top] > best.score))
    k = top[found]
    best.u[found], best.score[found], best.found[found] = u[k], values[k], outcome.found[k]


def _measure(
    brief: Brief, space: Space, u: Array, which: NDArray[np.intp], guess: Guess | None = None
) -> _Outcome:
    """Evaluate positions (B, 4) of problems ``which``."""
    candidates = space.candidates(which, u)
    e = evaluate(space.job, candidates, rough=True, guess=guess)
    with np.errstate(divide="ignore", invalid="ignore"):
        aim, per_couple = np.log(e.objective), np.log(e.rated.voltage / candidates.couples)
    violations = np.concatenate([e.violations, buildable(brief, e)[None]]).T
    found = np.concatenate([per_couple[None], *e.guess]).T
    return _Outcome(score(brief, e), aim, violations, found, np.append(e.hard, True))


def _shorten(space: Space, u: Array, which: NDArray[np.intp], at: Guess) -> tuple[NDArray[np.intp], Guess]:
    """Cut legs (in place) so that the hottest junction comes to its limit; return which were cut, and the new guess.

    Right for a given heat, where the difference goes as the length; too little elsewhere, and done again next time.
    """
    part = space.problems
    limit = space.job.hottest(part.n, part.p)[:, which] - 0.05
    with np.errstate(divide="ignore", invalid="ignore"):
        ratio = (limit - at.cold) / (at.hot - at.cold)
    factor = np.where((ratio > 0.02) & (ratio < 1), ratio, 1.0).min(axis=0)
    low, high = np.log(space.limits.leg_length)
    cut = np.flatnonzero((factor < 1) & (u[:, 0] > 0))
    u[cut, 0] = np.clip(u[cut, 0] + np.log(factor[cut]) / max(high - low, 1e-9), 0.0, 1.0)
    return cut, at._replace(hot=at.cold + (at.hot - at.cold) * factor)


def _suit_window(brief: Brief, space: Space, u: Array, which: NDArray[np.intp], per_couple: Array) -> None:
    """Move couples (in place) so that the voltage comes into its window, given its logarithm a couple; legs follow."""
    area = space.leg_area(which, u)
    u[:, 3] = _in_window(brief, space, u, np.exp(per_couple) * space.problems.series[which])
    u[:, 0] = np.clip(u[:, 0] + space.leg_area(which, u) - area, 0.0, 1.0)


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


def _jump(offsets: Array, outcome: _Outcome, rng: np.random.Generator) -> Array:
    """Return offsets of two promising places a problem, (P, 2, 4): the best of a model of the aim and of every limit.

    Aim and limits are fitted by parabolas without cross terms, so that the search can slide along a limit that binds;
    the second keeps a little room to the limits. Offsets are in units of the step.
    """
    count = len(offsets)
    near = np.nanmax(outcome.violations, axis=(0, 1), initial=-np.inf) > -0.5  # the others cannot matter in a step
    model = _fit(offsets, np.concatenate([outcome.aim[:, :, None], outcome.violations[:, :, near]], axis=2))
    samples = int(np.clip(20_000 // count, 250, 1000))
    d = rng.uniform(-1.6, 1.6, (samples, 4)) * rng.uniform(0.05, 1.0, (samples, 1))
    predicted = np.concatenate([np.ones((samples, 1)), d, d**2], axis=1) @ model
    found = []
    for room in (1e-4, 0.02):
        missed = np.maximum(predicted[:, :, 1:] + room, 0.0)
        broken, short = missed @ outcome.hard[near], missed @ ~outcome.hard[near]
        value = np.where(short > 0, SOFT * (1 + short), predicted[:, :, 0])
        value = np.where(broken > 0, HARD * (1 + broken) + SOFT * short, value)
        found.append(d[np.argmax(value, axis=1)])
    return np.stack(found, axis=1)
