import json

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.design.design import read_design
from tegdesign.design.rate import rate
from tegdesign.errors import DataRangeError


@pytest.fixture(scope="module")
def rating(design):
    return rate(design())


def test_every_state_balances(rating):
    assert [s.name for s in rating.states] == [
        "rated", "open circuit", "most power", "best efficiency", "short circuit"
    ]  # fmt: skip
    for s in rating.states:
        assert abs(s.heat_balance_residual_W) <= 1e-9 * s.heat_in_W
        assert_allclose(s.heat_in_W - s.heat_out_W, s.power_W + s.lead_loss_W, rtol=0, atol=1e-9 * s.heat_in_W)
        assert_allclose(
            s.voltage_V, s.open_circuit_voltage_V - s.current_A * s.internal_resistance_ohm,
            rtol=1e-9, atol=1e-9 * s.open_circuit_voltage_V,
        )  # fmt: skip
        # second law from source to sink face
        assert s.heat_out_W / s.T_cold_face_K > s.heat_in_W / s.T_hot_face_K


def test_states_stand_to_each_other_as_they_must(rating):
    opened, most, best, short = (
        rating.state(n) for n in ("open circuit", "most power", "best efficiency", "short circuit")
    )
    assert opened.current_A == opened.power_W == 0
    assert abs(short.voltage_V) < 1e-9 * opened.voltage_V
    assert most.power_W >= rating.rated.power_W >= best.power_W
    assert best.efficiency > most.efficiency
    assert opened.T_hot_junction_K > best.T_hot_junction_K > most.T_hot_junction_K > short.T_hot_junction_K


def test_ladder_leads_from_source_to_sink_and_adds_up(rating):
    for s in rating.states:
        ladder = s.ladder
        assert_allclose(sum(r.drop_K for r in ladder), ladder[0].T_K - ladder[-1].T_K, rtol=1e-12)
        assert_allclose([ladder[0].T_K, ladder[-1].T_K], [533.15, 303.15], rtol=1e-12)
        at = {r.place: r.T_K for r in ladder}
        assert_allclose(at["hot junction"], s.T_hot_junction_K, rtol=1e-12)
        assert_allclose(at["cold face"], s.T_cold_face_K, rtol=1e-10)
        assert all(r.drop_K >= -1e-9 for r in ladder)


def test_a_loss_is_what_switching_it_off_brings(design, rating):
    for loss in rating.losses:
        if loss.name == "load not matched":
            continue
        without = rate(design(keys={f"losses.{loss.name}": False})).rated.power_W
        assert_allclose(loss.power_without_it_W, without, rtol=1e-9)
        assert_allclose(loss.power_gained_without_it_W, without - rating.rated.power_W, rtol=0, atol=1e-9 * without)
        assert loss.power_gained_without_it_W >= -1e-9 * without


def test_the_ceiling_is_above_and_the_closed_form_is_near(rating):
    assert rating.rated.power_W < rating.ceiling.power_W
    # constant properties at the mean temperature: up to 15 % in power (our own study of real pairs)
    assert abs(rating.sanity.power_deviation) < 0.15
    assert rating.rated.efficiency < rating.sanity.carnot_efficiency


@pytest.mark.parametrize(
    ("key", "easy", "hard", "name"),
    [
        ("require.power", "1 W", "100 W", "required power"),
        ("require.efficiency", 0.01, 0.2, "required efficiency"),
        ("require.open_circuit_voltage", "100 V", "1 V", "open-circuit voltage"),
        ("require.voltage", ["1 V", "90 V"], ["60 V", "90 V"], "lower end of the voltage window"),
        ("require.voltage", ["1 V", "90 V"], ["0.5 V", "1 V"], "upper end of the voltage window"),
        ("require.hot_junction", "500 degC", "100 degC", "required hot junction"),
        ("require.cold_junction", "90 degC", "31 degC", "required cold junction"),
    ],
)
def test_requirements_decide_the_verdict(design, key, easy, hard, name):
    assert rate(design(keys={key: easy})).met
    missed = rate(design(keys={key: hard}))
    assert not missed.met
    assert {c.name for c in missed.failed} == {name}
    for check in missed.failed:
        assert check.margin < 0
        sign = 1 if check.sense == "least" else -1
        assert_allclose(check.margin, sign * (check.value - check.limit), rtol=1e-15)


def test_temperature_limits_are_checked_in_both_states(design):
    opened, rated = (rate(design()).state(n).T_hot_junction_K for n in ("open circuit", "rated"))
    between = rate(design(keys={"require.hot_junction": f"{(opened + rated) / 2} K"}))
    assert [(c.name, c.state) for c in between.failed] == [("required hot junction", "open circuit")]


def test_outside_the_data_is_refused_or_held_and_shown(design):
    hot = {"source.temperature": "420 degC", "materials.hold_outside_data": "0 K"}
    with pytest.raises(
        DataRangeError, match=r"K above 573\.0 K, the last measured point .*hold_outside_data = "
    ) as caught:
        rate(design(keys=hot))
    asked = str(caught.value).split('hold_outside_data = "')[1].split(" K")[0]
    # the message names what is enough, and one kelvin less is not
    held = rate(design(keys={**hot, "materials.hold_outside_data": f"{asked} K"}))
    assert max(d.above_K for d in held.held) <= float(asked)
    with pytest.raises(DataRangeError):
        rate(design(keys={**hot, "materials.hold_outside_data": f"{float(asked) - 1} K"}))
    opened = held.state("open circuit")
    shown = {(d.leg, d.state): d.above_K for d in held.data}
    assert_allclose(shown["n", "open circuit"], opened.T_hot_junction_K - 573, rtol=1e-12)


def test_not_refusing_leaves_a_failed_check(design):
    loose = rate(
        design(keys={"source.temperature": "420 degC", "materials.hold_outside_data": "0 K"}), refuse_outside_data=False
    )
    assert any("last data point" in c.name for c in loose.failed)


def test_saved_design_reproduces_every_digit(design, rating, tmp_path):
    path = tmp_path / "design.toml"
    design().save(path)
    again = rate(read_design(path))
    assert json.dumps(again.to_dict(), sort_keys=True) == json.dumps(rating.to_dict(), sort_keys=True)
    assert again.design == rating.design


def test_modules_in_series_and_parallel_change_voltage_and_current_only(design):
    series = rate(design(keys={"module.modules_in_series": 4})).rated
    mixed = rate(design(keys={"module.modules_in_series": 2, "module.modules_in_parallel": 2})).rated
    assert_allclose(mixed.power_W, series.power_W, rtol=1e-10)
    assert_allclose(mixed.voltage_V, series.voltage_V / 2, rtol=1e-10)
    assert_allclose(mixed.internal_resistance_ohm, series.internal_resistance_ohm / 4, rtol=1e-10)
    assert_allclose(mixed.heat_in_W, series.heat_in_W, rtol=1e-10)


def test_frame_and_dictionary_carry_units(rating):
    frame = rating.to_frame()
    assert_allclose(frame.loc["rated", "power_W"], rating.rated.power_W, rtol=0)
    assert np.isfinite(rating.ladder_frame()["T_K"]).all()
    assert json.loads(json.dumps(rating.to_dict()))["states"][0]["power_W"] == rating.rated.power_W
