"""The batch of candidates and states that the search works on."""

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.design.assemble import material
from tegdesign.design.condition import OPEN, Condition
from tegdesign.design.evaluate import Candidates, evaluate
from tegdesign.design.rounding import build
from tegdesign.design.search import on_grids, search
from tegdesign.design.size import job_of, size
from tegdesign.design.space import Problems
from tegdesign.system.load import BestEfficiency, Resistance


def job_for(brief):
    return job_of(brief, [material(getattr(brief.materials, side)[0], side, None) for side in "np"])


def some_candidates(count=7):
    length, side = np.linspace(0.8e-3, 2.4e-3, count), np.linspace(1.2e-3, 1.6e-3, count)
    n, ones = np.zeros(count, dtype=np.intp), np.ones(count)
    return Candidates(n, n + 1, length, side, 1.1 * side, 2.2e-3 * ones, 128 * ones, 1.6e-3 * ones, ones, ones)


def test_all_states_of_a_job_are_solved_as_if_each_were_alone(power_brief):
    """Eight states, each with its own boundaries and load, in one batch: same numbers as one job a state."""
    job = job_for(power_brief())
    first, open_circuit = job.states
    loads = [BestEfficiency(), Resistance.model_construct(resistance=3.0), OPEN]
    more = [
        Condition(f"{t} K, {load.kind}", first.source.at(t), first.sink.at(293.0), load)
        for t, load in zip((430.0, 470.0, 500.0, 520.0, 480.0, 440.0), loads * 2, strict=True)
    ]
    together = evaluate(replace(job, states=(first, open_circuit, *more)), some_candidates(), tolerance=1e-11)
    assert list(together.points) == ["rated", "open circuit", *(state.name for state in more)]
    for state in more:
        alone = evaluate(replace(job, states=(state, open_circuit)), some_candidates(), tolerance=1e-11)
        for name in ("hot_junction", "cold_junction", "current", "voltage", "heat_in"):
            one, other = (getattr(e.points[state.name], name) for e in (together, alone))
            assert_allclose(one, other, rtol=1e-9, atol=1e-12)
    worst = max(limit.value.max() for limit in together.limits if limit.key == "service limit of the n leg")
    assert_allclose(worst, max(p.hot_junction.max() for p in together.points.values()), rtol=0)


@pytest.mark.parametrize("name", ["power_brief", "heat_brief"])
def test_rough_is_good_enough_to_search(name, request):
    """To about 1e-4 of the junction difference from a cold start, and from a start a few per cent away."""
    job, candidates = job_for(request.getfixturevalue(name)()), some_candidates()
    exact = evaluate(job, candidates, tolerance=1e-11)
    near = exact.guess._replace(hot=exact.guess.hot + 4.0, scaled_current=0.97 * exact.guess.scaled_current)
    for guess in (None, near):
        rough = evaluate(job, candidates, rough=True, guess=guess)
        for state, point in exact.points.items():
            span = point.hot_junction - point.cold_junction
            assert np.all(np.abs(rough.points[state].hot_junction - point.hot_junction) < 2e-4 * span)
            assert_allclose(rough.points[state].voltage, point.voltage, rtol=1e-3)
        assert_allclose(rough.objective, exact.objective, rtol=2e-4)
        assert rough.rated.iterations.max() < exact.rated.iterations.max()


def test_grids_of_legs_are_kept_and_start_from_the_free_answer(power_brief):
    brief = power_brief()
    job, none = job_for(brief), np.zeros(1, dtype=np.intp)
    one = Problems(none, none + 1, np.ones(1), np.ones(1))
    found = search(brief, job, one, lambda problems, scores: none, True, lambda share: None)
    grid = np.array([[12.0, 12.0], [14.0, 14.0], [10.0, 12.0]])
    on = on_grids(brief, found, np.zeros(3, dtype=np.intp), grid)
    c = on.space.candidates(np.arange(3), on.u)
    assert_allclose(c.couples, grid.prod(axis=1) / 2, rtol=0)
    assert_allclose(c.pitch, 38e-3 / grid.max(axis=1), rtol=1e-12)  # 40 mm less twice the edge of 1 mm
    assert np.all(c.pitch - (c.side_n + c.side_p) / 2 >= brief.limits.gap - 1e-9)
    assert np.all(on.scores < found.scores + 1e-4)  # the free answer may take any number of couples
    assert on.scores.max() > found.scores[0] - 0.01
    built = build(brief, found)
    assert built.columns[0] * built.rows[0] / 2 == built.candidates.couples[0]


def test_connections_share_what_they_found(power_brief):
    """A window of voltage for up to 12 modules: one number in series is as good as another but for the gaps.

    Without sharing the search ends at 0.954 of what it finds where any voltage will do.
    """
    some = size(power_brief(keys={"limits.modules": 12, "require.voltage": ["47 V", "49 V"]}))
    free = size(power_brief(keys={"limits.modules": 12}))
    assert some.met
    assert some.objective_before_rounding > 0.98 * free.objective_before_rounding
    assert some.objective > 0.96 * free.objective  # whole rows and steps cost more where a voltage is to be kept
