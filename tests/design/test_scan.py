import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.design.rate import rate
from tegdesign.design.scan import against_hot, map_over, operating_table
from tegdesign.design.scan import curve as curve_of
from tegdesign.errors import DataRangeError, InputError
from tegdesign.system.load import Matched, Resistance


def test_table_is_every_hot_with_every_cold_and_every_load(design):
    loads = [Matched(), Resistance(resistance="20 ohm")]
    table = operating_table(design(), hot=[480.0, 520.0], cold=[290.0, 310.0], loads=loads)
    assert table.x == tuple((h, c) for h in (480.0, 520.0) for c in (290.0, 310.0) for _ in loads)
    one = rate(design(keys={"source.temperature": "520 K", "sink.temperature": "310 K"})).rated
    assert_allclose(table.states[6].power_W, one.power_W, rtol=1e-10)
    assert_allclose(table.states[7].voltage_V / table.states[7].current_A, 20, rtol=1e-9)
    frame = table.to_frame()
    assert list(frame.columns[:2]) == ["T_source_K", "T_sink_K"]
    assert_allclose(frame["power_W"], table.column("power_W"), rtol=0)


def test_table_refuses_a_source_colder_than_the_sink(design):
    with pytest.raises(InputError, match="not hotter than the sink"):
        operating_table(design(), hot=[290.0])


def test_table_refuses_states_outside_the_data(design):
    with pytest.raises(DataRangeError, match="hold_outside_data"):
        operating_table(design(), hot=[900.0])


def test_voltage_current_runs_from_open_to_short_circuit(design):
    curve = curve_of(design(), points=9).states
    rating = rate(design())
    assert_allclose(curve[0].voltage_V, rating.state("open circuit").voltage_V, rtol=1e-10)
    assert_allclose(curve[-1].current_A, rating.state("short circuit").current_A, rtol=1e-10)
    current, voltage = (np.array([getattr(s, name) for s in curve]) for name in ("current_A", "voltage_V"))
    assert_allclose(np.diff(current), current[1], rtol=1e-9)
    assert np.all(np.diff(voltage) < 0)
    assert max(s.power_W for s in curve) <= rating.state("most power").power_W


def test_power_rises_with_the_hot_temperature(design):
    sweep = against_hot(design(), points=5)
    assert sweep.x[-1] == (533.15,)
    assert np.all(np.diff(sweep.column("power_W")) > 0)
    assert_allclose(sweep.states[-1].power_W, rate(design()).state("most power").power_W, rtol=1e-10)


def test_fixed_heat_is_varied_itself(design):
    source = {"kind": "heat", "heat": "150 W"}
    sweep = against_hot(design(keys={"source": source}), points=4)
    assert_allclose([x[0] for x in sweep.x], [37.5, 75, 112.5, 150])
    assert_allclose([s.heat_in_W for s in sweep.states], [37.5, 75, 112.5, 150], rtol=1e-9)


def test_map_over_two_keys_is_the_designs_themselves(design):
    lengths = ["1 mm", "2 mm"]
    sweep = map_over(design(), {"source.coefficient": ["200 W/m2/K", "300 W/m2/K"], "module.leg_length": lengths})
    assert sweep.x == ((200.0, 1e-3), (200.0, 2e-3), (300.0, 1e-3), (300.0, 2e-3))
    own = rate(design(keys={"source.coefficient": "300 W/m2/K", "module.leg_length": "2 mm"}))
    assert_allclose(sweep.states[3].power_W, own.rated.power_W, rtol=1e-10)


@pytest.mark.parametrize(
    ("axes", "message"),
    [
        ({"module.leg_lenght": ["1 mm"]}, "leg_lenght"),
        ({"nothing.there": ["1 mm"]}, "unknown key"),
        ({"module.leg_length": ["1 kg"]}, "kg"),
        ({"materials.n": ["lead-telluride-n"]}, "not a number"),
        ({}, "one or two keys"),
    ],
)
def test_map_over_words_what_is_wrong(design, axes, message):
    with pytest.raises(InputError, match=message):
        map_over(design(), axes)


def test_unknown_quantity_is_refused(design):
    with pytest.raises(InputError, match="closest: power_W"):
        operating_table(design()).column("power_w")
