"""Which of the states of a job can decide its design, so that a search need not solve them all."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from tegdesign.design.brief import Brief
from tegdesign.design.evaluate import Evaluation, Job, evaluate
from tegdesign.design.space import Problems, Space

_LOOKS = np.array([(length, 0.5, side, 0.7) for length in (0.05, 0.3, 0.6, 0.9) for side in (0.3, 0.9)])
_FEW = 4  # states with their open circuits that are not worth the choice
_SAMPLE = 6  # problems that are looked at
_FAR = -0.5  # units of violation; limits that stay farther away at every look do not count


def deciding(brief: Brief, job: Job, problems: Problems) -> set[str]:
    """Return the names of the states that come nearest to some limit at one of a few places of the search.

    The first two states of a job are always among them. A state left out is always less severe there; whether it is
    at the answer as well, ``missed`` tells.
    """
    if len(job.states) <= _FEW:
        return {state.name for state in job.states}
    sample = np.unique(np.linspace(0, problems.n.size - 1, _SAMPLE).astype(np.intp))
    which, looks = np.repeat(sample, len(_LOOKS)), np.tile(_LOOKS, (sample.size, 1))
    e = evaluate(job, Space(brief, job, problems).candidates(which, looks), rough=True)
    kinds: dict[tuple[str, str], list[int]] = {}
    for k, limit in enumerate(e.limits):
        kinds.setdefault((limit.key, limit.sense), []).append(k)
    chosen = {state.name for state in job.states[:2]}
    for own in kinds.values():
        violations = np.where(np.isnan(e.violations[own]), 1e3, e.violations[own])
        near = violations.max(axis=0) > _FAR
        chosen |= {e.limits[own[k]].state for k in np.argmax(violations[:, near], axis=0)}
    return with_their_own(job, chosen)


def missed(e: Evaluation) -> set[str]:
    """Return the names of the states in which the first candidate breaks a limit."""
    job = e.job
    broken = {limit.state for limit in e.limits if not limit.violation[0] <= 1e-6}
    return with_their_own(job, broken | {name for name, point in e.points.items() if not point.converged[0]})


def only(job: Job, names: set[str]) -> Job:
    """Return the job with these states alone."""
    return replace(job, states=tuple(state for state in job.states if state.name in names))


def with_their_own(job: Job, names: set[str]) -> set[str]:
    """Return the names with what loads look at: those with limits of their own bring open circuit and start along.

    And the other way round: their limits are found from the loaded state.
    """
    asking = {state.name for state in job.states if not state.of and state.load.limits()}
    asking &= names | {state.of for state in job.states if state.name in names}
    return names | asking | {state.name for state in job.states if state.of in asking}
