"""Cautions in every state that is asked for: junctions and loads; each with what triggers it and what does not."""

import importlib.util
from dataclasses import replace
from pathlib import Path

import pytest

from tegdesign.design.parts import Require
from tegdesign.design.rate import rate
from tegdesign.material.material import Stated
from tegdesign.quantity import SI

_SPEC = importlib.util.spec_from_file_location("oven", Path(__file__).with_name("oven.py"))
assert _SPEC
assert _SPEC.loader
oven = importlib.util.module_from_spec(_SPEC)
_SPEC.loader.exec_module(oven)
design = oven.design
found = oven.found
with_states = oven.with_states
with_materials = oven.with_materials


STATES = [
    {"name": "summer", "sink": {"temperature": "60 degC"}},
    {"name": "overfired", "source": {}, "sink": {"temperature": "45 degC"}, "duration": "20 min", "holds": []},
    {"name": "unplugged", "load": "open"},
]
REQUIRE = {
    "hot_junction": "490 K", "short_time_hot_junction": "560 K", "cold_junction": "360 K",
    "short_time_cold_junction": "380 K", "short_time_over_service": "20 K",
}  # fmt: skip


@pytest.fixture(scope="module")
def base():
    return rate(design())


@pytest.fixture(scope="module")
def several():
    return rate(design(states=STATES, require=REQUIRE))


@pytest.mark.parametrize("state", ["rated", "open circuit", "summer", "summer, open", "overfired", "overfired, open"])
@pytest.mark.parametrize("leg", ["n", "p"])
def test_over_service_limit(several, leg, state):
    limit = Stated(500.0, "(memory)")
    pair = tuple(replace(m, service_limit=limit) if m.polarity == leg else m for m in several.materials)
    rating = with_states(replace(several, materials=pair), T_hot_junction_K=450.0)
    identity = f"over-service-limit-{leg}"
    bound = 520.0 if state.startswith("overfired") else 500.0  # 20 K more are allowed for a short time
    assert identity not in found(with_states(rating, state, T_hot_junction_K=bound - 0.1))
    hits = found(with_states(rating, state, T_hot_junction_K=bound + 3.0))
    assert [name for name in hits if name.startswith("over-service")] == [identity]
    assert "3.0 K too hot:" in hits[identity].text
    assert hits[identity].title.endswith(f"{leg} leg, {state}")
    more = ", and 20.0 K for a short time" if bound > 500 else ""
    assert hits[identity].limit == f"226.9 degC (500.0 K), basis: (memory){more}"
    assert hits[identity].value == f"{bound + 3 - 273.15:.1f} degC ({bound + 3:.1f} K) ({state})"


def test_over_service_limit_names_all_states_but_not_those_nobody_asked_for(several):
    rating = with_states(with_materials(several, service_limit=Stated(500.0)), T_hot_junction_K=450.0)
    hot = with_states(rating, "most power", "best efficiency", "short circuit", T_hot_junction_K=700.0)
    assert "over-service-limit-n" not in found(hot)
    hits = found(with_states(with_states(rating, "summer", T_hot_junction_K=510.0), "rated", T_hot_junction_K=504.0))
    assert "10.0 K too hot (also rated by 4.0 K):" in hits["over-service-limit-p"].text


def test_near_service_limit_looks_at_every_state_with_its_own_limit(several):
    rating = with_states(with_materials(several, service_limit=Stated(500.0)), T_hot_junction_K=450.0)
    assert "near-service-limit-n" not in found(with_states(rating, "overfired", T_hot_junction_K=505.0))
    hits = found(with_states(rating, "overfired", T_hot_junction_K=513.0))  # 520 K for a short time
    assert hits["near-service-limit-n"].value == "239.9 degC (513.0 K) (overfired), 7.0 K left"
    assert "(summer, open)" in found(with_states(rating, "summer, open", T_hot_junction_K=495.0))[
        "near-service-limit-p"
    ].value  # fmt: skip


def test_short_time_limits(several):
    rating = with_states(with_materials(several, service_limit=Stated(500.0)), T_hot_junction_K=450.0)
    cold = with_states(rating, T_cold_junction_K=330.0)
    assert "short-time-limits" not in found(cold)
    assert "short-time-limits" not in found(with_states(cold, "summer", T_hot_junction_K=505.0))  # lasts
    hot = with_states(cold, "overfired, open", T_hot_junction_K=512.0, T_cold_junction_K=362.0)
    assert found(hot)["short-time-limits"].value == (
        "overfired, 20 min: service limit of the n leg by 12.0 K, service limit of the p leg by 12.0 K, required hot "
        "junction by 22.0 K, required cold junction by 2.0 K"
    )


def test_inlet_end(base):
    def ends(**rises):
        states = [replace(base.state("open circuit"), T_hot_junction_K=400.0 + rise) for rise in rises.values()]
        return with_states(replace(base, inlet_ends=tuple(states)), "open circuit", T_hot_junction_K=400.0)

    assert "inlet-end" not in found(replace(base, inlet_ends=()))
    assert "inlet-end" not in found(ends(a=4.9))
    assert found(ends(a=5.1))["inlet-end"].value == "132.0 degC (405.1 K) open circuit, 5.1 K above the mean plate"


def test_inlet_ends_of_every_open_circuit():
    stream = {
        "kind": "stream", "inlet_temperature": "200 degC", "mass_flow": "0.3 g/s", "heat_capacity": "1.1 kJ/kg/K",
        "coefficient": "900 W/m2/K",
    }  # fmt: skip
    rating = rate(design(source=stream, states=STATES))
    assert [s.name for s in rating.inlet_ends] == ["open circuit", "summer, open", "overfired, open", "unplugged"]
    assert all(s.T_hot_junction_K > rating.state(s.name).T_hot_junction_K for s in rating.inlet_ends)
    assert "summer, open, " in found(rating)["inlet-end"].value  # its sink is the hottest


CONVERTER = {
    "kind": "converter", "running_voltage": ["0.4 V", "1.5 V"], "start_voltage": "0.5 V", "input_voltage_limit": "3 V",
    "efficiency": 0.9,
}  # fmt: skip
MOTOR = {"kind": "motor", "resistance": "2 ohm", "stalled_resistance": "0.5 ohm", "start_current": "0.2 A"}
BATTERY = {"kind": "battery", "voltage": "0.4 V", "blocking_drop": "0.1 V"}


@pytest.fixture(scope="module")
def fed():
    return {
        load["kind"]: rate(design(load=load, states=STATES)) for load in (CONVERTER, MOTOR, BATTERY)
    }


@pytest.mark.parametrize(
    ("kind", "state", "enough", "less", "words"),
    [
        ("converter", "summer, open", {"voltage_V": 0.501}, {"voltage_V": 0.499}, "voltage to start the converter"),
        ("converter", "open circuit", {"voltage_V": 0.501}, {"voltage_V": 0.499}, "voltage to start the converter"),
        ("motor", "summer, start", {"current_A": 0.201}, {"current_A": 0.199}, "current to start the motor"),
        ("battery", "overfired, open", {"voltage_V": 0.501}, {"voltage_V": 0.499}, "voltage to charge"),
    ],
)
def test_load_does_not_start(fed, kind, state, enough, less, words):
    assert "load-does-not-start" not in found(with_states(fed[kind], state, **enough))
    hit = found(with_states(fed[kind], state, **less))["load-does-not-start"]
    assert hit.value.endswith(f"({state})")
    assert hit.value.startswith("499.0 mV" if "voltage_V" in less else "199.0 mA")
    assert hit.limit.startswith(f"{words} at least")


def test_matched_load_always_starts(several):
    assert "load-does-not-start" not in found(with_states(several, voltage_V=0.0))


def test_no_power(several):
    assert "no-power" not in found(several)
    assert "no-power" not in found(with_states(several, "overfired", "unplugged", delivered_power_W=-1.0))  # not held
    none = found(with_states(several, "summer", delivered_power_W=0.0))["no-power"]
    assert none.value == "0 W (summer)"
    assert "wrong way" not in none.text
    back = found(with_states(several, "summer", delivered_power_W=-0.25))["no-power"]
    assert back.value == "-250.0 mW (summer)"
    assert back.text.startswith("Power flows the wrong way: summer.")


@pytest.mark.parametrize("load", [CONVERTER, {"kind": "matched"}])
def test_reversed_voltage(several, load):
    assert "reversed-voltage" not in found(several)
    thaw = {"name": "thaw", "source": {"temperature": "10 degC"}, "sink": {"temperature": "30 degC"}}
    wide = oven.MATERIALS | {"hold_outside_data": "50 K"}
    rating = rate(design(load=load, states=[*STATES, thaw], materials=wide))
    state = "thaw, open" if load["kind"] == "matched" else "thaw"  # blocked, so open itself
    value = found(rating)["reversed-voltage"].value
    assert value.startswith("-")
    assert value.endswith(f" V ({state})") or value.endswith(f" mV ({state})")
    assert ("no-power" in found(rating)) == (load is CONVERTER)  # a resistor is heated either way


@pytest.mark.parametrize("state", ["open circuit", "summer, open", "unplugged"])
def test_load_input_voltage(fed, state):
    assert "load-input-voltage" not in found(with_states(fed["converter"], state, voltage_V=2.99))
    hit = found(with_states(fed["converter"], state, voltage_V=3.01))["load-input-voltage"]
    assert hit.value == f"3.010 V ({state})"
    assert hit.limit == "input voltage of the converter at most 3.000 V"
    assert "load-input-voltage" not in found(with_states(fed["converter"], "rated", voltage_V=9.0))
    assert "load-input-voltage" not in found(with_states(fed["battery"], state, voltage_V=99.0))


def test_loss_of_load_in_the_state_in_which_it_heats_most(several):
    rating = with_states(several, T_hot_junction_K=430.0)
    assert "loss-of-load" not in found(with_states(rating, "unplugged", T_hot_junction_K=470.0))  # no load to lose
    hit = found(with_states(rating, "summer, open", T_hot_junction_K=440.0))["loss-of-load"]
    assert hit.value == "10.0 K hotter: 156.9 degC summer, 166.9 degC summer, open"


def test_coolant_loss_names_the_state_of_the_hottest_source():
    hot = {"name": "overfired", "source": {"temperature": "260 degC"}}
    assert found(rate(design(states=[hot])))["coolant-loss"].value == "260.0 degC (533.1 K) (overfired)"


def test_measured_spread_in_the_state_of_least_room(several):
    made = several.design.model_copy(update={"require": Require(power=SI(8.0))})
    rating = with_states(replace(several, design=made), delivered_power_W=12.0)
    assert "measured-spread" not in found(with_states(rating, "overfired", delivered_power_W=8.1))  # not held to it
    hit = found(with_states(rating, "summer", delivered_power_W=8.1))["measured-spread"]
    assert hit.value == "power 1.2 % above the required 8.000 W (summer)"
