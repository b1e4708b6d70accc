"""Named states: changes to the nominal case, what must hold in each, and a sizing that holds in all of them."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from pydantic import ValidationError

from tegdesign.design.brief import Brief
from tegdesign.design.design import Design
from tegdesign.design.rate import rate
from tegdesign.design.size import size

# Flue gas against water, our own invention.
JOB = {
    "source": {
        "kind": "stream", "inlet_temperature": "420 degC", "mass_flow": "20 g/s", "heat_capacity": "1090 J/kg/K",
        "coefficient": "75 W/m2/K", "area_enlargement": 14, "fin_efficiency": 0.75,
    },
    "sink": {"kind": "film", "temperature": "40 degC", "coefficient": "1500 W/m2/K"},
    "materials": {"n": "skutterudite-n", "p": "skutterudite-p", "hold_outside_data": "5 K"},
    "limits": {"footprint": ["50 mm", "50 mm"], "modules": 4},
}  # fmt: skip
LOST = {"name": "coolant lost", "sink": {"coefficient": "250 W/m2/K"}, "holds": []}


def brief(*states, **more):
    return Brief.model_validate(JOB | {"states": list(states)} | more)


def test_open_circuit_is_added_to_every_state():
    names = [c.name for c in brief(LOST, {"name": "load lost", "load": "open"}).conditions]
    assert names == ["rated", "open circuit", "coolant lost", "coolant lost, open", "load lost"]


def test_state_is_the_nominal_case_with_its_changes():
    design = size(brief(LOST)).design
    alone = rate(design.model_copy(update={"sink": design.conditions[2].sink, "states": ()})).rated
    state = rate(design).state("coolant lost")
    for name in ("power_W", "T_hot_junction_K", "T_cold_junction_K", "heat_in_W"):
        assert_allclose(getattr(state, name), getattr(alone, name), rtol=1e-9)


def test_lost_coolant_decides_the_design():
    free, held = size(brief()), size(brief(LOST, require={"hot_junction": "330 degC"}))
    assert held.met
    states = held.rating
    hottest = max(states.state(name).T_hot_junction_K for name in ("coolant lost", "coolant lost, open"))
    assert hottest <= 330 + 273.15 + 1e-6
    assert held.objective < free.objective
    assert any("coolant lost" in b.name for b in held.binding)
    # the free design would have been too hot in that state
    bare = free.design.model_copy(update={"states": held.design.states, "require": held.design.require})
    assert any("coolant lost" in c.state for c in rate(bare, refuse_outside_data=False).failed)


def test_short_time_limits_stand_in_place_of_the_others():
    require = {"hot_junction": "250 degC", "short_time_hot_junction": "330 degC"}
    peak = {"name": "peak", "source": {"inlet_temperature": "520 degC"}, "holds": []}
    continuous, short = (
        size(brief(peak | extra, require=require)) for extra in ({}, {"duration": "30 min"})
    )
    limits = {c.state: c.limit for c in short.rating.checks if c.name == "required hot junction"}
    assert_allclose(limits["rated"], 523.15)
    assert_allclose(limits["peak, open"], 603.15)
    assert short.objective > continuous.objective * 1.05


def test_power_is_held_in_all_states_but_the_lost_ones():
    weak = {"name": "part load", "source": {"mass_flow": "5 g/s"}}
    lost = {"name": "load lost", "load": "open"}
    rating = size(brief(weak, lost, require={"power": "10 W"})).rating
    assert {c.state for c in rating.checks if c.name == "required power"} == {"rated", "part load"}
    not_held = size(brief(weak | {"holds": ["voltage"]}, require={"power": "10 W"})).rating
    assert {c.state for c in not_held.checks if c.name == "required power"} == {"rated"}


def test_states_left_aside_in_the_search_hold_as_well():
    many = [
        {"name": f"state {k}", "source": {"mass_flow": f"{flow} g/s"}, "sink": {"temperature": f"{t} degC"}}
        for k, (flow, t) in enumerate(((14, 20), (9, 60), (25, 10), (30, 70), (18, 45), (11, 30)))
    ]
    answer = size(brief(*many, require={"power": "12 W"}))
    assert answer.met
    assert answer.rating.state("state 1").power_W >= 12 - 1e-6
    assert np.isfinite([s.power_W for s in answer.rating.states]).all()


def test_outlet_temperature_and_heat_flux_are_limits():
    plain = size(brief()).rating.rated
    source = JOB["source"] | {"least_outlet_temperature": "390 degC"}
    cool = size(brief(source=source)).rating
    outlet = next(c for c in cool.checks if c.name == "outlet temperature of the source" and c.state == "rated")
    assert outlet.passed
    assert cool.rated.heat_in_W < plain.heat_in_W
    flux = size(brief(require={"heat_flux": "3 W/cm^2"})).rating
    assert flux.rated.heat_flux_hot_W_per_m2 <= 3e4 * (1 + 1e-9) < plain.heat_flux_hot_W_per_m2


def test_converter_sees_the_open_circuit_of_every_state():
    load = {"kind": "converter", "running_voltage": ["6 V", "20 V"], "input_voltage_limit": "24 V", "efficiency": 0.9}
    peak = {"name": "peak", "source": {"inlet_temperature": "500 degC"}}
    answer = size(brief(peak, load=load))
    worst = answer.rating.state("peak, open")
    assert answer.met
    assert worst.voltage_V <= 24
    assert any(c.state == "peak, open" and c.unit == "V" for c in answer.rating.checks)
    assert_allclose(answer.rating.rated.delivered_power_W, 0.9 * answer.rating.rated.power_W, rtol=1e-9)


def test_design_file_carries_the_states(tmp_path):
    design = size(brief(LOST | {"duration": "10 min"})).design
    design.save(tmp_path / "d.toml")
    assert rate(tmp_path / "d.toml").state("coolant lost") == rate(design).state("coolant lost")
    assert Design.model_validate(design.model_dump(exclude_none=True)) == design


def test_reversed_state_turns_the_voltage_round():
    stack = {"hot": {"interface": "6e-5 m2*K/W"}, "cold": {"interface": "2e-5 m2*K/W"}}
    summer = {"name": "hot noon", "source": {"inlet_temperature": "10 degC"}, "sink": {"temperature": "60 degC"}}
    require = {"power": "1 mW"}
    job = {"materials": JOB["materials"] | {"hold_outside_data": "40 K"}, "stack": stack, "require": require}
    design = size(brief(summer | {"holds": []}, **job, load={"kind": "resistance", "resistance": "2 ohm"})).design
    state = rate(design).state("hot noon")
    assert state.voltage_V < 0
    assert state.current_A < 0
    assert state.power_W > 0
    # the same module turned round by hand: plates swapped, sides exchanged
    turned = design.model_copy(
        update={
            "source": design.conditions[2].source, "sink": design.conditions[2].sink, "states": (),
            "stack": design.stack.model_copy(update={"hot": design.stack.cold, "cold": design.stack.hot}),
        }
    )  # fmt: skip
    alone = rate(turned).rated
    assert_allclose((state.power_W, -state.voltage_V), (alone.power_W, alone.voltage_V), rtol=1e-9)
    assert "sink is the hotter side" in state.conditions


def test_battery_blocks_a_reversed_voltage():
    summer = {"name": "hot noon", "source": {"inlet_temperature": "10 degC"}, "sink": {"temperature": "60 degC"}}
    materials = JOB["materials"] | {"hold_outside_data": "40 K"}
    rating = size(brief(summer | {"holds": []}, materials=materials, load={"kind": "battery", "voltage": "3 V"})).rating
    state = rating.state("hot noon")
    assert (state.current_A, state.delivered_power_W) == (0, 0)
    assert state.voltage_V < 0


WRONG = {
    "name taken": ([LOST, LOST], "state 'coolant lost': the name is taken"),
    "name of ours": ([{"name": "rated"}], "state 'rated': the name is taken"),
    "unknown key": ([{"name": "x", "sink": {"coeficient": "12 W/m2/K"}}], "state 'x': unknown key: sink.coeficient"),
    "missing unit": ([{"name": "x", "sink": {"coefficient": 12}}], "state 'x': sink.coefficient: 12 has no unit"),
    "no difference": ([{"name": "x", "source": {"inlet_temperature": "40 degC"}}], "state 'x': source at 313.15 K"),
    "lost load that holds": ([{"name": "x", "load": "open", "holds": ["power"]}], "the load is open, so power cannot"),
    "name of two lines": ([{"name": "a\nb"}], "name"),
    "other load": ([{"name": "x", "load": "closed"}], "load"),
    "other kind": ([{"name": "x", "sink": {"kind": "surface"}}], "state 'x': missing key: sink.temperature"),
}


@pytest.mark.parametrize("name", WRONG)
def test_refuses(name):
    states, words = WRONG[name]
    with pytest.raises(ValidationError) as caught:
        brief(*states)
    assert words in str(caught.value)


def test_start_of_a_motor_is_held_in_a_state_that_only_its_open_circuit_brings_in():
    # four states, so that some are left aside in the search; the motor must start in the weakest
    load = {"kind": "motor", "resistance": "6 ohm", "stalled_resistance": "2 ohm", "start_voltage": "1.5 V"}
    weak = {"name": "kindling", "source": {"inlet_temperature": "180 degC", "mass_flow": "8 g/s"}, "holds": []}
    others = [
        {"name": f"state {k}", "source": {"inlet_temperature": f"{t} degC"}, "holds": []}
        for k, t in enumerate((300, 350, 450))
    ]
    rating = size(brief(weak, *others, load=load, require={"power": "5 W"})).rating
    start = [c for c in rating.checks if c.state == "kindling, start"]
    assert any(c.unit == "V" for c in start)
    assert all(c.passed for c in start)
