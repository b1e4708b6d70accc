"""How far from failing: every number that is told is put back into the design and rated, or evaluated, anew."""

import copy
from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.design.design import Design
from tegdesign.design.evaluate import evaluate
from tegdesign.design.rate import rate
from tegdesign.design.size import size
from tegdesign.sheet.margin import mending, window_words
from tegdesign.sheet.sizing import sizing_report

BUILT = {
    "source": {"kind": "film", "temperature": "260 degC", "coefficient": "250 W/m2/K", "area_enlargement": 6},
    "sink": {"kind": "film", "temperature": "30 degC", "coefficient": "2500 W/m2/K"},
    "materials": {"n": "bismuth-telluride-n-se0.3", "p": "bismuth-telluride-p-sb1.58", "hold_outside_data": "40 K"},
    "module": {
        "columns": 12, "rows": 12, "leg_length": "1.4 mm", "leg_side_n": "2.4 mm", "leg_side_p": "2.9 mm",
        "pitch": "3.15 mm", "modules_in_series": 2,
    },
}  # fmt: skip
BURNER = {
    "source": {"kind": "heat", "heat": "200 W", "leak_conductance": "0.04 W/K", "ambient_temperature": "10 degC"},
    "sink": {"kind": "film", "temperature": "10 degC", "coefficient": "40 W/m2/K", "area": "900 cm2",
             "area_enlargement": 9, "fin_efficiency": 0.8},
    "materials": {"n": "lead-telluride-n", "p": "lead-telluride-p", "hold_outside_data": "20 K"},
    "module": {"columns": 10, "rows": 10, "leg_length": "6 mm", "leg_side_n": "3.4 mm", "leg_side_p": "3 mm",
               "pitch": "4.2 mm"},
    "require": {"power": "6 W"},
    "states": [{"name": "low flame", "source": {"heat": "170 W"}, "holds": []}],
}  # fmt: skip
STREAM = {
    "kind": "stream",
    "inlet_temperature": "250 degC",
    "mass_flow": "15 g/s",
    "heat_capacity": "1080 J/kg/K",
    "coefficient": "90 W/m2/K",
    "area_enlargement": 12,
    "fin_efficiency": 0.8,
}
STATES = [
    {"name": "fouled", "source": {"fouling_resistance": "1e-3 m2*K/W"}},
    {"name": "pump lost", "duration": "5 min", "holds": [], "sink": {"coefficient": "300 W/m2/K"}},
    {"name": "warm water", "sink": {"temperature": "45 degC"}},
]
KEYS = {
    "source_mass_flow_kg_per_s": ("source", "mass_flow"),
    "sink_coefficient_W_per_m2_K": ("sink", "coefficient"),
    "source_heat_W": ("source", "heat"),
}
UNITS = {"mass_flow": "kg/s", "coefficient": "W/m2/K", "heat": "W"}


def changed(data, changes):
    """Return a copy with dotted keys set."""
    out = copy.deepcopy(data)
    for key, value in changes.items():
        *tables, last = key.split(".")
        place = out
        for table in tables:
            place = place.setdefault(table, {})
        place[last] = value
    return out


STATED = BUILT | {"source": STREAM, "require": {"power": "5 W", "hot_junction": "215 degC"}, "states": STATES}

def rated(data):
    return rate(Design.model_validate(data), refuse_outside_data=False)


@pytest.fixture(scope="module")
def stated():
    return rated(STATED)


@pytest.fixture(scope="module")
def burner():
    return rated(BURNER)


def put(rating, b):
    """Return the design as text tables with the break-even put in, in the state that it is of."""
    data = rating.design.model_dump(exclude_none=True)
    if b.source_temperature_K is not None:
        name = "inlet_temperature" if rating.design.source.kind == "stream" else "temperature"
        side, name, value = "source", name, f"{b.source_temperature_K!r} K"
    else:
        side, name = KEYS[b.key]
        value = f"{b.value!r} {UNITS[name]}"
    if b.state == "rated":
        return changed(data, {f"{side}.{name}": value})
    for state in data["states"]:
        if state["name"] == b.state:
            state.setdefault(side, {})[name] = value
    return data


def check(rating, limit, state):
    return next(c for c in rating.checks if (c.name, c.state) == (limit, state))


@pytest.mark.parametrize("case", ["stated", "burner"])
def test_at_the_break_even_the_limit_is_just_met(case, request):
    rating = request.getfixturevalue(case)
    reached = [b for b in rating.margins.break_even if b.reached]
    assert len(reached) >= (10 if case == "stated" else 5)
    for b in reached:
        again = rated(put(rating, b))
        c = check(again, b.limit, b.limit_state)
        scale = 0.1 if c.unit == "K" else 5e-4 * c.limit  # the promised tenth of a kelvin
        assert_allclose(c.value, c.limit, rtol=0, atol=scale, err_msg=str(b))
        # and it is the first: nothing else of its purpose is broken at the same place by more than that
        hard = [o for o in again.checks if o.unit == "K" and o.state.split(",")[0] == b.limit_state.split(",")[0]]
        if b.purpose == "temperature limits" and b.limit_state != "open circuit":
            assert min(o.margin for o in hard) > -0.1


def test_every_state_that_must_give_power_has_its_break_even(stated):
    told = {(b.state, b.key) for b in stated.margins.break_even if b.purpose == "required power"}
    names = ("rated", "fouled", "warm water")
    assert told == {(n, k) for n in names for k in ("temperature_difference_K", "source_mass_flow_kg_per_s")}
    hottest = {b.state for b in stated.margins.break_even if b.key == "source_temperature_K"}
    assert hottest == {"rated", "fouled", "pump lost", "warm water"}


def test_given_heat_is_varied_as_heat(burner):
    by = {(b.state, b.key, b.sense): b for b in burner.margins.break_even}
    least, most = by["rated", "source_heat_W", "least"], by["rated", "source_heat_W", "most"]
    assert least.purpose == "required power"
    assert least.value < least.now == 200.0
    assert most.purpose == "temperature limits"
    assert ("low flame", "source_heat_W", "least") not in by  # holds nothing


def test_a_search_that_ends_says_so():
    """A cold sink takes the cold junction out of the data before the power is missed; it is not extrapolated."""
    cold = changed(STATED, {"sink.temperature": "25 degC", "states": [], "require": {"power": "0.2 W"},
                            "materials.hold_outside_data": "1 K"})  # fmt: skip
    data = next(b for b in rated(cold).margins.break_even if b.key == "temperature_difference_K")
    assert not data.reached
    assert "data point" in data.limit
    again = rated(put(rated(cold), data))
    c = check(again, data.limit, data.limit_state)
    assert_allclose(c.value, c.limit, rtol=0, atol=0.1)
    outside = next(b for b in rated(changed(cold, {"sink.temperature": "10 degC"})).margins.break_even)
    assert not outside.reached  # it stands outside the data already
    assert outside.value == outside.now
    assert "data point" in outside.limit
    film = next(b for b in rated(changed(BUILT, {})).margins.break_even if b.key == "sink_coefficient_W_per_m2_K")
    if not film.reached:  # the search ends at a hundredth of what it is now
        assert_allclose(film.value, 0.01 * film.now, rtol=1e-9)


def test_a_converter_that_stops_is_found_at_its_jump():
    """The delivered power falls to nothing where the open circuit no longer starts the converter."""
    load = {"kind": "converter", "running_voltage": ["1 V", "30 V"], "start_voltage": "8 V",
            "input_voltage_limit": "60 V", "efficiency": 0.9}  # fmt: skip
    rating = rated(changed(BUILT, {"load": load, "require": {"power": "0.5 W"}}))
    least = next(b for b in rating.margins.break_even if b.key == "temperature_difference_K")
    assert least.limit == "required power"
    beside = [replace(least, source_temperature_K=least.source_temperature_K + d) for d in (-0.1, 0.1)]
    around = [rated(put(rating, b)) for b in beside]
    assert [r.rated.delivered_power_W > 0 for r in around] == [False, True]
    assert_allclose([r.state("open circuit").voltage_V for r in around], 8.0, rtol=2e-3)


def shaped(c, key, ratio):
    """Return the candidate with another dimension, written down anew here."""
    if key == "leg_length_m":
        return replace(c, leg_length=c.leg_length * ratio)
    if key == "leg_side_n_at_same_fill_m":
        wider = {name: getattr(c, name) * ratio for name in ("side_n", "side_p", "pitch")}
        return replace(c, couples=c.couples / ratio**2, **wider)
    if key == "couples":
        return replace(c, couples=c.couples * ratio, pitch=c.pitch * ratio**-0.5)
    return replace(c, **{"series" if "series" in key else "parallel": np.array([float(round(ratio))])})


def test_just_inside_a_window_all_holds_and_just_outside_its_limit_is_broken():
    rating = rated(changed(STATED, {"require.voltage": ["2.7 V", "9 V"], "require.hot_junction": "210 degC"}))
    assert rating.met
    windows = rating.margins.windows
    assert {w.key for w in windows} >= {"leg_length_m", "leg_side_n_at_same_fill_m", "couples", "modules_in_series"}
    e, tried = rating.evaluation, 0
    for w in windows:
        for end, out in ((w.low, -1), (w.high, 1)):
            if not end.state:
                continue
            tried += 1
            whole = w.key.startswith("modules")
            inside, outside = end.value * (1 - 1e-3 * out), end.value * (1 + 1e-3 * out)
            if whole:
                inside, outside = end.value, end.value + out
            scale = 1.0 if whole else w.now
            assert evaluate(e.job, shaped(e.candidates, w.key, inside / scale)).violation[0] <= 1e-9, (w, end)
            broken = evaluate(e.job, shaped(e.candidates, w.key, outside / scale))
            limit = next(x for x in broken.limits if (x.key, x.state) == (end.limit, end.state))
            assert limit.violation[0] > 1e-9, (w, end)
    assert tried >= 6


def test_limits_that_exclude_each_other_are_named_with_their_values():
    """Power wants longer legs, the hot junction shorter ones."""
    require = {"power": "5.2 W", "hot_junction": "160 degC", "short_time_hot_junction": "230 degC"}
    data = changed(STATED, {"require": require, "module.leg_length": "0.7 mm"})
    rating = rated(data)
    assert not rating.met
    assert rating.margins.windows == ()
    m = next(m for m in rating.margins.mends if m.key == "leg_length_m" and m.limit == "required power")
    assert m.sense == "least"
    assert m.against is not None
    assert m.now < m.against.value < m.value
    for value, limit, state in ((m.value, m.limit, m.state), (m.against.value, m.against.limit, m.against.state)):
        c = check(rated(changed(data, {"module.leg_length": f"{value!r} m"})), limit, state)
        assert_allclose(c.value, c.limit, rtol=0, atol=0.05 if c.unit == "K" else 1e-4 * c.limit)
    said = " ".join(mending(rating))
    assert f"{m.limit} ({m.state}) needs leg length at least {m.value * 1e3:.4g} mm" in said
    assert f"{m.against.limit} ({m.against.state}) needs at most {m.against.value * 1e3:.4g} mm" in said


def test_a_variable_that_mends_is_told():
    require = {"power": "5.2 W", "hot_junction": "230 degC"}
    data = changed(STATED, {"require": require, "module.leg_length": "0.7 mm"})
    rating = rated(data)
    assert not rating.met
    m = next(m for m in rating.margins.mends if m.key == "leg_length_m")
    assert m.against is None
    assert m.still_missed == ()
    length = 1.001 * m.value
    assert rated(changed(data, {"module.leg_length": f"{length!r} m"})).met


def test_a_mend_of_one_limit_tells_what_stays_missed():
    """Shorter legs cool the hot junction, and the power that no leg length can give falls further."""
    require = {"power": "9 W", "hot_junction": "150 degC", "short_time_hot_junction": "230 degC"}
    rating = rated(changed(STATED, {"require": require}))
    m = next(m for m in rating.margins.mends if m.key == "leg_length_m")
    assert (m.limit, m.sense, m.against) == ("required hot junction", "most", None)
    assert m.still_missed == ("required power",)
    assert "required power stays missed" in " ".join(mending(rating))


def test_the_verdict_of_a_brief_names_what_excludes_it(power_brief):
    result = size(power_brief(keys={"require.power": "4 W", "require.hot_junction": "160 degC"}))
    assert not result.met
    verdict = " ".join(sizing_report(result).split("Aim:")[0].split())
    assert "required power (rated) needs leg length at least" in verdict
    assert "but required hot junction" in verdict
    assert "exclude each other" in verdict
    assert {"break_even", "windows", "mends"} <= set(result.to_dict()["rating"])


def test_numbers_that_leave_carry_their_unit(stated):
    frame = stated.margins.to_frame()
    assert {"now_temperature_difference_K", "break_even_temperature_difference_K"} <= set(frame.columns)
    assert len(frame) == len(stated.margins.break_even)
    for table in stated.to_dict()["break_even"]:
        numbers = [k for k, v in table.items() if isinstance(v, float)]
        assert all(k.endswith(("_K", "_W", "_kg_per_s")) for k in numbers)


def test_counts_in_words_are_whole_and_lie_inside():
    rating = rated(STATED)
    w = next(w for w in rating.margins.windows if w.key == "couples")
    narrow = replace(w, low=replace(w.low, value=66.2), high=replace(w.high, value=73.9), now=72.0)
    assert "67 to 73 (now 72)" in window_words(narrow)


def test_briefs_without_requirements_have_temperatures_only():
    rating = rated(BUILT)
    assert {b.purpose for b in rating.margins.break_even} == {"temperature limits", "all limits"}
