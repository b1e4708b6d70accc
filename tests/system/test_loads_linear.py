"""Every kind of load on a source of given open-circuit voltage and resistance: closed forms, both signs of voltage.

Expected values: V = V_oc - I R_int, solved by hand for each load (exact).
"""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.system.load import Battery, BestEfficiency, Converter, GivenCurrent, Matched, Motor, Resistance
from tegdesign.system.load.base import Terminal

ONE = np.ones(1)
TABLE = {"voltage": ["1 V", "3 V"], "power": ["1 W", "5 W"], "efficiency": [0.6, 0.8, 0.7, 0.9]}


def battery(**more):
    return Battery(**{"voltage": "12 V", "blocking_drop": "0.4 V", "series_resistance": "0.1 ohm", **more})


def converter(**more):
    basis = {"running_voltage": ["1 V", "3 V"], "input_voltage_limit": "8 V", "efficiency": 0.9}
    return Converter(**{**basis, "standby_power": "0.05 W", **more})


def motor(**more):
    return Motor(**{"resistance": "8 ohm", "stalled_resistance": "2 ohm", "start_voltage": "1 V", **more})


def settle(law, open_voltage, resistance):
    """Return voltage and current of linear sources that a load law settles at by Newton's method from both ends."""
    both = []
    for start in (0.0, 3.0):
        current = np.full(np.shape(open_voltage), start)
        for _ in range(30):
            voltage = open_voltage - current * resistance
            slope = np.full(current.shape, -1.0) * resistance
            value, by_current = law.evaluate(Terminal(current, voltage, slope, ONE, ONE))
            current = current - value / by_current
        both.append(current)
    assert_allclose(both[0], both[1], rtol=1e-12, atol=1e-15 * np.max(np.abs(open_voltage / resistance)))
    return open_voltage - both[0] * resistance, both[0]


def across(load, open_voltage, resistance, series=1.0, parallel=1.0):
    """Return voltage and current of the whole generator; open-circuit voltage and resistance are of one module."""
    v = np.atleast_1d(np.asarray(open_voltage, dtype=float))
    ones = np.ones_like(v)
    v, i = settle(load.law(series * ones, parallel * ones), v, resistance)
    return series * v, parallel * i


def test_battery():
    # (20 - 12.4) / (1.5 + 0.1) = 4.75 A
    v, i = across(battery(), 20.0, 1.5)
    assert_allclose(i, 4.75, rtol=1e-13)
    assert_allclose(v, 12.4 + 0.1 * 4.75, rtol=1e-13)
    got = battery().delivery(v, i, [20.0])
    assert_allclose(got.power, 12 * 4.75, rtol=1e-13)
    assert_allclose(got.loss, 0.4 * 4.75 + 0.1 * 4.75**2, rtol=1e-12)
    assert (got.running.all(), got.started.all(), got.outside_table.any()) == (True, True, False)


def test_battery_on_modules_in_series_and_parallel():
    # 4 in series, 3 in parallel: 20 V and 1.5 * 4 / 3 = 2 ohm in all
    v, i = across(battery(), 5.0, 1.5, series=4, parallel=3)
    assert_allclose(i, (20 - 12.4) / 2.1, rtol=1e-13)
    assert_allclose(v, 12.4 + 0.1 * i, rtol=1e-13)


def test_battery_blocks_below_its_voltage_and_when_reversed():
    v, i = across(battery(), [12.39, 0.0, -20.0], 1.5)
    assert_allclose(i, 0, atol=0)
    assert_allclose(v, [12.39, 0, -20], rtol=0)
    got = battery().delivery(v, i, v)
    assert not got.running.any()
    assert_allclose(got.power, 0, atol=0)
    assert_allclose(got.loss, 0, atol=0)


def test_battery_current_rises_with_the_open_circuit_voltage():
    _, i = across(battery(), np.linspace(-5, 30, 701), 1.5)
    assert np.all(np.diff(i) >= 0)
    assert_allclose(i[-1], (30 - 12.4) / 1.6, rtol=1e-13)


def test_a_current_of_less_than_a_millionth_of_the_short_circuit_is_none():
    free = battery(series_resistance="0 ohm")
    _, i = across(free, 12.4 / (1 - np.array([0.9e-6, 1.1e-6])), 1.5)
    assert i[0] == 0
    assert_allclose(i[1], 1.1e-6 * 12.4 / 1.5, rtol=1e-5)  # of a difference of voltages


def test_converter_tracks_half_the_open_circuit_voltage_within_its_window():
    v, i = across(converter(), [4.0], 0.8)
    assert_allclose(v, 2.0, rtol=1e-13)
    assert_allclose(i, 2.5, rtol=1e-13)
    got = converter().delivery(v, i, [4.0])
    assert_allclose(got.power, 0.9 * 5 - 0.05, rtol=1e-13)
    assert_allclose(got.power + got.loss, v * i, rtol=1e-13)


@pytest.mark.parametrize(
    ("open_voltage", "voltage"),
    [(7.0, 3.0), (6.0, 3.0), (2.0, 1.0), (1.5, 1.0), (1.001, 1.0), (0.999, 0.999), (-4.0, -4.0), (-9.0, -9.0)],
)
def test_converter_at_the_edges_of_its_window(open_voltage, voltage):
    v, i = across(converter(), [open_voltage], 0.8)
    assert_allclose(v, voltage, rtol=1e-13)
    assert_allclose(i, (open_voltage - voltage) / 0.8, rtol=1e-11, atol=0)


def test_converter_on_modules_in_series_and_parallel():
    v, i = across(converter(), [3.0], 0.8, series=4, parallel=2)  # 12 V, 1.6 ohm; most power at 6 V, held at 3 V
    assert_allclose(v, 3.0, rtol=1e-13)
    assert_allclose(i, 9 / 1.6, rtol=1e-13)


def test_converter_needs_its_start_voltage_to_start_and_less_to_run():
    own = converter(start_voltage="2.5 V")
    before = np.array([0.9, 2.4, 2.5, 6.0])
    v, i = across(own, before, 0.8)
    got = own.delivery(v, i, before)
    assert got.started.tolist() == got.running.tolist() == [False, False, True, True]
    assert_allclose(got.power[:2], 0, atol=0)
    assert converter().starts([0.999, 1.0]).tolist() == [False, True]  # the least running voltage if none is given
    warm = own.delivery(v, i, np.full(4, 2.5))  # started when it was warmer
    assert warm.running.tolist() == [False, True, True, True]
    assert_allclose(warm.power[1], 0.9 * 1.2**2 / 0.8 - 0.05, rtol=1e-12)


def test_standby_above_what_comes_in_is_drawn_from_the_user():
    got = converter().delivery(1.2, 0.01, 1.5)
    assert_allclose(got.power, 0.9 * 0.012 - 0.05, rtol=1e-13)


def test_efficiency_table_by_hand():
    # at 2 V and 2 W: half way in voltage, a quarter in power: (0.65 + 0.75) / 2
    own = converter(efficiency=None, efficiency_table=TABLE)
    got = own.delivery([2.0, 1.0, 3.0], [1.0, 1.0, 5 / 3], np.full(3, 6.0))
    assert_allclose(got.power + 0.05, [0.7 * 2, 0.6, 0.9 * 5], rtol=1e-13)
    assert not got.outside_table.any()


def test_outside_the_efficiency_table_the_end_is_held_and_told():
    own = converter(efficiency=None, efficiency_table=TABLE)
    got = own.delivery([1.0, 3.0, 0.5], [0.5, 2.0, 0.0], np.full(3, 6.0))
    assert_allclose(got.power[:2] + 0.05, [0.6 * 0.5, 0.9 * 6], rtol=1e-13)
    assert got.outside_table.tolist() == [True, True, False]  # what does not run is nowhere in the table


def test_tables_of_voltage_or_power_alone():
    of_voltage = {"voltage": ["1 V", "2 V", "4 V"], "efficiency": [0.5, 0.7, 0.9]}
    of_power = {"power": ["1 W", "2 W", "4 W"], "efficiency": [0.5, 0.7, 0.9]}
    for table, v, i in ((of_voltage, 3.0, 0.1), (of_power, 1.5, 2.0)):
        got = converter(efficiency=None, efficiency_table=table).delivery(v, i, 6.0)
        assert_allclose(got.power, 0.8 * v * i - 0.05, rtol=1e-13)
        assert not got.outside_table


def test_motor_runs_on_its_resistance_and_starts_on_its_winding():
    v, i = across(motor(), [6.0, -6.0], 4.0, series=2, parallel=1)
    assert_allclose(v, [6.0, -6.0], rtol=1e-13)  # 12 V, 8 ohm inside, 8 ohm outside
    assert_allclose(i, [0.75, -0.75], rtol=1e-13)
    stalled, through = settle(motor().start_law(2 * ONE, ONE), 6.0 * ONE, 4.0)
    assert_allclose(2 * stalled, 12 * 2 / 10, rtol=1e-13)
    assert_allclose(through, 1.2, rtol=1e-13)


def test_motor_needs_voltage_and_current_across_its_winding():
    own = motor(start_current="0.6 A")  # 0.6 A through 2 ohm: 1.2 V
    assert own.starts([1.1, 1.2]).tolist() == [False, True]
    assert motor().starts([0.9, 1.0]).tolist() == [False, True]
    assert motor(start_voltage=None, start_current="0.6 A").starts([1.19, 1.2]).tolist() == [False, True]
    got = own.delivery([6.0, 1.1], [0.75, 0.55], [2.4, 1.1])
    assert_allclose(got.power, [4.5, 0], atol=0, rtol=1e-13)
    assert_allclose(got.loss, [0, 1.1 * 0.55], atol=0, rtol=1e-13)  # heats the winding that stands
    assert got.started.tolist() == [True, False]


def test_loads_without_a_will_of_their_own_deliver_all():
    for load in (Matched(), BestEfficiency(), Resistance(resistance="2 ohm"), GivenCurrent(current="1 A")):
        got = load.delivery([3.0, -3.0, 0.0], [1.5, -1.5, 0.0], [6.0, -6.0, 0.0])
        assert_allclose(got.power, [4.5, 4.5, 0], rtol=1e-15)
        assert_allclose(got.loss, 0, atol=0)
        assert got.started.all()
        assert got.running.tolist() == [True, True, False]
        assert load.limits() == ()
        assert load.start_law(ONE, ONE) is None


def test_resistor_and_chosen_load_take_power_of_a_reversed_source():
    for load in (Resistance(resistance="2 ohm"), Matched()):
        v, i = across(load, [6.0, -6.0], 2.0)
        assert_allclose(v * i, 4.5, rtol=1e-12)
        assert_allclose(i, [1.5, -1.5], rtol=1e-12)


def test_who_adapts_and_who_only_takes():
    assert [load.adapts for load in (battery(), converter(), motor(), Matched())] == [False, False, False, True]
    assert all(load.passive for load in (battery(), converter(), motor()))


def test_limits_are_those_of_the_keys():
    def told(load):
        return [(limit.state, limit.quantity, limit.sense, limit.bound, limit.unit) for limit in load.limits()]

    assert told(battery(current_limit="5 A")) == [
        ("open circuit", "voltage", "least", 12.4, "V"),
        ("rated", "current", "most", 5.0, "A"),
    ]
    window = [("open circuit", "voltage", "least", 1.0, "V"), ("open circuit", "voltage", "most", 8.0, "V")]
    table = [("rated", "power", "least", 1.0, "W"), ("rated", "power", "most", 5.0, "W")]
    assert told(converter()) == window
    assert told(converter(efficiency=None, efficiency_table=TABLE, current_limit="4 A")) == [
        *window, *table, ("rated", "current", "most", 4.0, "A"),
    ]  # fmt: skip
    assert told(motor(start_current="0.6 A")) == [
        ("start", "voltage", "least", 1.0, "V"),
        ("start", "current", "least", 0.6, "A"),
    ]
