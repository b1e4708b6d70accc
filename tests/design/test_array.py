"""Arrays of a design: held against the rated plate, straight lines by hand, and the design itself."""

import json
from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

import tegdesign
from tegdesign.cli.output import json_text
from tegdesign.errors import DataRangeError, InputError
from tegdesign.sheet.array import array_report, draw_array

SHAPE = {"module.modules_in_series": 3, "module.modules_in_parallel": 2}
GAS = {
    "kind": "stream", "inlet_temperature": "250 degC", "mass_flow": "20 g/s", "heat_capacity": "1050 J/kg/K",
    "coefficient": "120 W/m2/K", "area_enlargement": 8, "fin_efficiency": 0.8,
}  # fmt: skip
UNEQUAL = [540.0, 520.0, 500.0, 480.0, 460.0, 440.0]


@pytest.fixture(scope="session")
def made(design):
    return lambda **keys: design(keys={**SHAPE, **keys})


@pytest.fixture(scope="session")
def faulty(made):
    return tegdesign.array(made(), hot=UNEQUAL, faults=True)


def test_equal_modules_are_the_rated_generator(made):
    rating = tegdesign.rate(made())
    a = tegdesign.array(made())
    for name in ("power_W", "voltage_V", "current_A", "heat_in_W", "efficiency"):
        assert_allclose(getattr(a, name), getattr(rating.rated, name), rtol=1e-7)
    assert_allclose(a.open_circuit_voltage_V, rating.state("open circuit").voltage_V, rtol=1e-8)
    opened = rating.state("open circuit").T_hot_junction_K
    assert_allclose([m.T_hot_junction_open_K for m in a.modules], opened, rtol=1e-9)
    assert_allclose(a.mismatch_loss, 0, atol=1e-9)
    assert a.temperatures == "source of the design, sink of the design"
    assert a.met


@pytest.mark.parametrize("load", [{"kind": "resistance", "resistance": "6 ohm"}, {"kind": "battery", "voltage": "6 V"}])
def test_loads_of_the_whole_array(made, load):
    a = tegdesign.array(made(load=load), hot=UNEQUAL)
    assert_allclose(a.voltage_V, 6 * a.current_A if load["kind"] == "resistance" else 6.0, rtol=1e-8)
    assert_allclose(sum(a.string_current_A), a.current_A, rtol=1e-9)
    for s in (1, 2):
        assert_allclose(sum(m.voltage_V for m in a.modules if m.string == s), a.voltage_V, rtol=1e-9)
    assert a.power_W < a.most_power_W < a.independent_power_W


def test_mismatch(made, faulty):
    """Loss of joining; every module alone is the design with one module at its temperature."""
    one = made(**{"module.modules_in_series": 1, "module.modules_in_parallel": 1})
    alone = [tegdesign.rate(one.model_copy(update={"source": one.source.at(t)})).rated.power_W for t in UNEQUAL]
    assert_allclose([m.own_power_W for m in faulty.modules], alone, rtol=1e-9)
    assert_allclose(faulty.independent_power_W, sum(alone), rtol=1e-9)
    assert_allclose(faulty.mismatch_loss, 1 - faulty.power_W / sum(alone), rtol=1e-9)
    assert_allclose(sum(m.power_W for m in faulty.modules), faulty.power_W, rtol=1e-9)
    turned = tegdesign.array(made(), hot=UNEQUAL, in_turn=True)
    assert [m.string for m in turned.modules] == [1, 2, 1, 2, 1, 2]
    swapped = tegdesign.array(made(), hot=[UNEQUAL[k] for k in (0, 2, 4, 1, 3, 5)])
    assert_allclose(turned.power_W, swapped.power_W, rtol=1e-9)


def test_each_fault_is_the_array_with_that_fault(made, faulty):
    told = {(f.module, f.fault): f for f in faulty.faults}
    assert len(told) == 18
    cold = list(UNEQUAL)
    cold[3] = 303.15  # the sink
    cases = {"open": {"broken": [4]}, "shorted": {"shorted": [4]}, "cold": {"hot": cold}}
    for kind, options in cases.items():
        again = tegdesign.array(made(), **{"hot": UNEQUAL, **options})
        assert_allclose(told[4, kind].power_W, again.power_W, rtol=1e-8)
        assert_allclose(told[4, kind].change, again.power_W / faulty.power_W - 1, rtol=1e-7)
        assert told[4, kind].driven_backwards == sum(m.driven_backwards for m in again.modules)
    # without its string, the other one gives what it gives by itself
    left = tegdesign.array(made(), series=3, parallel=1, hot=UNEQUAL[:3])
    assert_allclose(told[4, "open"].power_W, left.power_W, rtol=1e-8)


def test_faults_that_leave_nothing_and_those_that_add(made):
    string = tegdesign.array(made(), series=6, parallel=1, hot=UNEQUAL, faults=True)
    opens = [f for f in string.faults if f.fault == "open"]
    assert [f.power_W for f in opens] == [0.0] * 6
    assert "no current can flow" in opens[0].words
    assert "no current can flow" in array_report(string)
    beside = tegdesign.array(made(), series=1, parallel=6, hot=UNEQUAL, faults=True)
    assert {f.words for f in beside.faults if f.fault == "shorted"} == {
        "a string of shorted modules alone shorts the array"
    }
    # with one broken already, a bypass keeps the string alive
    rescued = tegdesign.array(made(), series=6, parallel=1, hot=UNEQUAL, broken=[2], bypass_drop=0.3, faults=True)
    assert all(f.module != 2 for f in rescued.faults)
    assert min(f.power_W for f in rescued.faults) > 0.3 * rescued.power_W
    assert rescued.modules[1].state == "open"
    assert_allclose(rescued.modules[1].voltage_V, -0.3 - 0.01 * rescued.current_A, rtol=1e-9)


def test_backwards_module_and_its_bypass(made):
    hot = [540.0, 540.0, 320.0, 540.0, 540.0, 540.0]
    bare = tegdesign.array(made(), hot=hot)
    assert [m.module for m in bare.modules if m.driven_backwards] == [3]
    assert [c.id for c in bare.cautions] == ["driven-backwards"]
    assert "modules 3 take" in bare.cautions[0].value
    saved = tegdesign.array(made(), hot=hot, bypass_drop=0.0)
    assert saved.power_W > bare.power_W
    assert saved.modules[2].bypass_current_A > 0


def test_connections(made):
    a = tegdesign.array(
        made(**{"require.voltage": ["4 V", "12 V"], "require.open_circuit_voltage": "20 V"}), hot=UNEQUAL
    )
    assert [(c.series, c.parallel) for c in a.connections] == [(1, 6), (2, 3), (3, 2), (6, 1)]
    assert_allclose(a.connections[2].power_W, a.power_W, rtol=1e-9)
    for c in a.connections:
        again = tegdesign.array(a.design, series=c.series, parallel=c.parallel, hot=UNEQUAL)
        assert_allclose(
            [c.voltage_V, c.open_circuit_voltage_V], [again.voltage_V, again.open_circuit_voltage_V], rtol=1e-7
        )
        inside = 4 <= c.voltage_V <= 12 and c.open_circuit_voltage_V <= 20
        assert c.keeps_window == inside == again.met
    assert {c.keeps_window for c in a.connections} == {True, False}
    assert {c.keeps_window for c in tegdesign.array(made(), hot=UNEQUAL).connections} == {None}


def test_on_a_stream_each_module_stands_where_its_row_does(made):
    design = made(source=GAS)
    rows = tegdesign.rows(design, most=3)
    a = tegdesign.array(design)
    assert_allclose([m.T_source_K for m in a.modules], [r.T_source_before_K for r in rows.rows], rtol=1e-9)
    assert_allclose([m.own_power_W for m in a.modules], [r.power_W for r in rows.rows], rtol=1e-8)
    assert_allclose(a.modules[0].T_hot_junction_open_K, rows.rows[0].T_hot_junction_open_K, rtol=1e-9)
    assert "source along its stream" in a.temperatures
    assert 0 < a.mismatch_loss < 0.1


def test_source_of_given_heat(made):
    design = made(source={"kind": "heat", "heat": "300 W"})
    a = tegdesign.array(design, cold=[300.0, 300, 300, 320, 320, 320], faults=True)
    assert_allclose(a.heat_in_W, 300, rtol=1e-9)
    assert a.modules[0].T_source_K is None
    cold = next(f for f in a.faults if f.fault == "cold")
    assert 0 < cold.power_W < a.power_W
    assert "-" in array_report(a)
    with pytest.raises(InputError, match="hot: a source of kind 'heat' gives its heat"):
        tegdesign.array(design, hot=[500.0])


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"hot": [500.0, 510.0]}, "hot: 2 temperatures for 6 modules; give 6, or one for all"),
        ({"hot": [290.0]}, "module 1: source of 290 K is colder than its sink"),
        ({"broken": [7]}, "broken: there is no module 7, they are 1 to 6"),
        ({"shorted": [0]}, "shorted: there is no module 0"),
        ({"broken": [2], "shorted": [2]}, r"modules \[2\] are both broken and shorted"),
        ({"broken": [1, 6]}, "every string has an open joint"),
        ({"shorted": [1, 2, 3]}, "string of shorted modules alone"),
        ({"series": 4}, "series = 4 does not divide the 6 modules"),
        ({"parallel": 0}, "parallel = 0"),
        ({"bypass_drop": -0.1}, "bypass diode: drop -0.1 V"),
    ],
)
def test_bad_input(made, options, words):
    with pytest.raises(InputError, match=words):
        tegdesign.array(made(), **options)


def test_data_range_and_service_limit(made):
    with pytest.raises(DataRangeError, match="without current, module 2: junction"):
        tegdesign.array(made(**{"materials.hold_outside_data": "0 K"}), hot=[500.0, 820.0, 500, 500, 500, 500])
    a = tegdesign.array(made(**{"materials.hold_outside_data": "250 K"}), hot=[500.0, 820.0, 500, 500, 500, 500])
    assert not a.met
    assert "over-service-limit" in [c.id for c in a.cautions]


def test_result_leaves_in_every_form(faulty, tmp_path):
    assert_allclose(faulty.to_frame()["power_W"].sum(), faulty.power_W, rtol=1e-9)
    assert len(faulty.faults_frame()) == 18
    assert replace(faulty, faults=()).faults_frame().empty
    data = json.loads(json_text(faulty.to_dict()))
    assert_allclose(data["modules"][5]["T_source_K"], 440, rtol=1e-12)
    report = array_report(faulty)
    assert max(map(len, report.splitlines())) <= 100
    for words in ("MODULE BY MODULE", "FAULTS", "OTHER CONNECTIONS"):
        assert words in report
    draw_array(faulty, tmp_path / "array.svg")
    assert "no further fault" in (tmp_path / "array.svg").read_text()


def test_batch_of_faults_falls_back_to_one_by_one(made, monkeypatch):
    from tegdesign.design import wiring
    from tegdesign.errors import ConvergenceError

    real = wiring.Wiring.solve

    def stubborn(self, cases):
        if any(case.failed.cold == (1,) for case in cases):
            raise ConvergenceError("no state")
        return real(self, cases)

    monkeypatch.setattr(wiring.Wiring, "solve", stubborn)
    a = tegdesign.array(made(), hot=UNEQUAL, faults=True)
    lost = [f for f in a.faults if f.power_W is None]
    assert [(f.module, f.fault, f.words) for f in lost] == [(2, "cold", "no operating point found")]
    assert "no operating point found" in array_report(a)
    assert np.isfinite([f.power_W for f in a.faults if f not in lost]).all()


def test_motor_is_refused_since_it_must_start(made):
    load = {"kind": "motor", "resistance": "6 ohm", "stalled_resistance": "2 ohm", "start_voltage": "1 V"}
    with pytest.raises(InputError, match="must start before it runs"):
        tegdesign.array(made(load=load))
