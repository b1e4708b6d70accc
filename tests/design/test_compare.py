import json

import pytest
from numpy.testing import assert_allclose

from tegdesign.design.compare import compare
from tegdesign.design.size import size
from tegdesign.errors import InputError

PAIRS = {
    "materials.n": ["bismuth-telluride-n-se0.3", "magnesium-antimonide-n", "lead-telluride-n", "clathrate-n"],
    "materials.p": ["bismuth-telluride-p-sb1.58", "magnesium-silver-antimonide-p"],
}


@pytest.fixture(scope="module")
def comparison(power_brief):
    return compare(power_brief(keys=PAIRS))


def test_every_pair_is_ranked_or_dropped(comparison):
    names = {(r.n, r.p) for r in (*comparison.ranks, *comparison.dropped)}
    assert len(names) == len(comparison.ranks) + len(comparison.dropped) == 8
    assert comparison.met


def test_ranks_fall_by_the_aim_and_those_that_meet_the_brief_come_first(comparison):
    met = [r.met for r in comparison.ranks]
    assert met == sorted(met, reverse=True)
    power = [r.power_W for r in comparison.ranks if r.met]
    assert power == sorted(power, reverse=True)
    frame = comparison.to_frame()
    assert list(frame.index[:2]) == [1, 2]
    assert_allclose(frame["power_W"].iloc[0], power[0], rtol=0)


def test_what_no_geometry_can_hold_is_dropped_with_its_reason(comparison):
    dropped = {d.n: d.reason for d in comparison.dropped}
    # data of the clathrate begin at 417 K; water at 30 degC keeps the cold junction far below that
    assert "first data point of the n leg" in dropped["clathrate-n"]
    assert " K below " in dropped["clathrate-n"]
    assert "clathrate-n" not in {r.n for r in comparison.ranks}


def test_equal_areas_never_win_by_more_than_the_search_leaves_open(comparison):
    assert all(-1e-3 <= r.penalty_of_equal_areas < 0.5 for r in comparison.ranks)


def test_a_rank_is_what_size_finds(comparison, power_brief):
    first = comparison.ranks[0]
    own = size(power_brief(keys={"materials.n": first.n, "materials.p": first.p}))
    assert_allclose(first.power_W, own.objective_before_rounding, rtol=0.003)


def test_a_voltage_window_is_kept_by_all_that_meet_the_brief(power_brief):
    found = compare(power_brief(keys={**PAIRS, "require.voltage": ["11 V", "13 V"], "limits.modules": 3}))
    assert any(r.met for r in found.ranks)
    assert all(11 <= r.voltage_V <= 13 for r in found.ranks if r.met)
    assert all(r.modules_in_series * r.modules_in_parallel <= 3 for r in found.ranks)


def test_requirement_that_is_missed_leaves_the_pair_ranked_with_the_limit(power_brief):
    found = compare(power_brief(keys={**PAIRS, "require.power": "9 W"}))
    assert not found.met
    assert all(not r.met and "required power" in r.limit for r in found.ranks)


def test_plain_values(comparison):
    values = json.loads(json.dumps(comparison.to_dict()))
    assert values["met"] is True
    assert values["pairs"][0]["power_W"] == comparison.ranks[0].power_W
    assert {d["n"] for d in values["dropped"]} == {d.n for d in comparison.dropped}


def test_an_unknown_material_is_refused(power_brief):
    with pytest.raises(InputError, match="closest: lead-telluride-n"):
        compare(power_brief(keys={"materials.n": ["lead-teluride-n"]}))
