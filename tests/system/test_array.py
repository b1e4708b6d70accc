from dataclasses import fields, replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.errors import InputError
from tegdesign.system.array import array_point, independent_power, linear_array, mismatch_loss
from tegdesign.system.driven import _mean_properties
from tegdesign.system.law import law
from tegdesign.system.load import Battery, BestEfficiency, GivenCurrent, Matched, Resistance
from tegdesign.system.load.base import LoadLaw
from tegdesign.system.load.given import as_given
from tegdesign.system.operating_point import OperatingPoint, operating_point
from tegdesign.system.strings import Diode, connections, strings

ONE = np.ones(1)
TWO = strings([0, 0, 0, 1, 1, 1])
DIODE = Diode(0.3, 0.01)
UNEQUAL = (540.0, 520.0, 500.0, 480.0, 460.0, 440.0)


def films(modules, hot, cold=310.0):
    """Return film laws with fluids of their own for every module, 2000 and 3000 W/m2/K."""
    area = np.broadcast_to(np.asarray(modules.footprint), (modules.size,))
    laws = []
    for temperature, coefficient in ((hot, 2000.0), (cold, 3000.0)):
        g = coefficient * area
        laws.append(law(g, 1.0, g * np.asarray(temperature), area))
    return tuple(laws)


def given(current):
    return LoadLaw(as_given, current, fixed=True)


@pytest.fixture(scope="module")
def module(random_modules):
    """One bismuth telluride module with every loss on."""
    many = random_modules(60, seed=4)
    one = many.take(np.flatnonzero(many.n == 0)[:1])
    return replace(
        one, couples=np.array([127.0]), footprint=one.footprint * 127 / one.couples, leg_length=np.array([1.6e-3])
    )


@pytest.fixture(scope="module")
def solve(module):
    def run(hot, joined, load, modules=None):
        modules = module.take(np.zeros(len(hot), dtype=int)) if modules is None else modules
        size = np.ones(joined.arrays)
        return array_point(modules, *films(modules, hot), joined, load.law(size, size))

    return run


def independent(module, hot, joined):
    many = module.take(np.zeros(len(hot), dtype=int))
    return independent_power(many, *films(many, hot), joined)


def kirchhoff(p, joined, module):
    """Currents and voltages add up, whatever the load, and the first law holds for every module."""
    assert_allclose(joined.of_arrays(p.string_current), p.current, rtol=1e-9, atol=1e-12)
    ends = joined.of_strings(p.module_voltage)
    carries = np.abs(p.string_current) > 0
    drop = 0.0 if joined.blocking is None else joined.blocking.drop + joined.blocking.resistance * p.string_current
    assert_allclose((ends - drop)[carries], p.voltage[joined.array][carries], rtol=1e-9)
    legs = p.module.current + p.bypass_current
    free = ~joined.shorted
    assert_allclose(legs[free], p.string_current[joined.string][free], rtol=1e-9, atol=1e-9)
    heat = np.abs(p.module.heat_in).max()
    missing = p.module.heat_in - p.module.heat_out - p.module.power
    assert np.all(np.abs(missing - p.module.current**2 * module.lead_resistance) < 1e-9 * heat)


@pytest.mark.parametrize("joined", [strings([0] * 6), TWO, strings([0, 0, 1, 1, 2, 2]), strings(range(6))])
def test_equal_modules_lose_nothing(module, solve, joined):
    p = solve([500.0] * 6, joined, Matched())
    alone = operating_point(module, *films(module, [500.0]), Matched().law(ONE, ONE))
    assert_allclose(p.module.current, alone.current[0], rtol=1e-7)  # a flat summit
    assert_allclose(p.power, 6 * alone.power, rtol=1e-12)
    assert_allclose(mismatch_loss(p.power, independent(module, [500.0] * 6, joined)), 0, atol=1e-11)
    kirchhoff(p, joined, module)


LOADS = [
    Matched(), BestEfficiency(), Resistance(resistance="6 ohm"), GivenCurrent(current="0 A"),
    GivenCurrent(current="0.5 A"), Battery(voltage="6 V"), Battery(voltage="60 V"),
]  # fmt: skip


@pytest.mark.parametrize("load", LOADS, ids=lambda v: v.words())
@pytest.mark.parametrize("blocking", [None, DIODE])
def test_every_load_on_two_unequal_strings(module, solve, load, blocking):
    joined = replace(TWO, blocking=blocking)
    p = solve(UNEQUAL, joined, load)
    kirchhoff(p, joined, module)
    assert p.exact.all()
    six = module.take(np.zeros(6, dtype=int))
    again = operating_point(six, *films(six, UNEQUAL), given(p.module.current))
    assert_allclose(again.voltage, p.module.voltage, rtol=1e-9)  # so each module is solved with its own junctions
    if blocking is not None:
        assert np.all(p.string_current >= 0)
    match load.kind:
        case "resistance":
            assert_allclose(p.voltage, 6 * p.current, rtol=1e-9)
        case "current":
            assert_allclose(p.current, load.current, rtol=1e-9, atol=1e-12)
        case "battery" if load.voltage == 6:
            assert_allclose(p.voltage, 6, rtol=1e-9)
            assert p.current > 0
        case "battery":
            assert abs(p.current) < 1e-12


@pytest.mark.parametrize(
    "joined",
    [strings([0] * 6), TWO, replace(TWO, blocking=DIODE), strings([0, 0, 0, 1, 1, 1], broken=[1], bypass=DIODE)],
)
def test_matched_load_is_the_summit(solve, joined):
    best = solve(UNEQUAL, joined, Matched())
    near = [
        solve(UNEQUAL, joined, GivenCurrent.model_construct(current=float(best.current[0]) * x)).power[0]
        for x in (0.99, 1.0, 1.01)
    ]
    offset = 0.5 * (near[0] - near[2]) / (near[0] - 2 * near[1] + near[2]) * 0.01
    assert abs(offset) < 1e-5
    assert near[1] > max(near[0], near[2])
    assert_allclose(near[1], best.power[0], rtol=1e-9)


@pytest.mark.parametrize("joined", [TWO, strings([0, 0, 0, 1, 1, 1], broken=[1], bypass=DIODE)])
def test_best_efficiency_of_the_whole_array(solve, joined):
    def efficiency(p):
        return p.power[0] / p.module.heat_in.sum()

    best = solve(UNEQUAL, joined, BestEfficiency())
    near = [
        efficiency(solve(UNEQUAL, joined, GivenCurrent.model_construct(current=float(best.current[0]) * x)))
        for x in (0.99, 1.0, 1.01)
    ]
    assert near[1] > max(near[0], near[2])
    assert abs(0.5 * (near[0] - near[2]) / (near[0] - 2 * near[1] + near[2]) * 0.01) < 1e-5


def test_blocking_diodes_hold_reversed_sources():
    """Straight lines of negative voltage under a matched load: nothing flows, whatever the load could draw."""
    joined = strings([0, 1], blocking=DIODE)
    found = linear_array([-2.0, -1.0], [1.0, 1.0], joined, Matched().law(ONE, ONE))
    assert_allclose(found.string, 0, atol=0)


@pytest.mark.parametrize("bypass", [None, DIODE])
def test_strings_are_blocked_only_where_they_must_be(bypass):
    """Complementarity in 300 random arrays of straight lines: current just where the voltage at rest suffices."""
    r = np.random.default_rng(7)
    string = np.repeat(np.arange(1200), r.integers(1, 5, 1200))
    joined = strings(string, np.repeat(np.arange(300), 4), bypass=bypass, blocking=DIODE)
    voltage, resistance = r.uniform(-2, 6, string.size), r.uniform(0.5, 4, string.size)
    ones = np.ones(300)
    for load in (Matched(), Resistance(resistance="2 ohm"), GivenCurrent(current="0.3 A"), Battery(voltage="3 V")):
        held = voltage if load.passive else np.abs(voltage)  # a given current needs a source that can drive it
        found = linear_array(held, resistance, joined, load.law(ones, ones))
        rest = joined.of_strings(held if bypass is None else np.maximum(held, -0.3))
        end = found.voltage[joined.array]
        on = found.string > 0
        drives = found.current[joined.array] > 0
        assert np.all(found.string >= 0)
        assert np.all(rest[on] - 0.3 > end[on] - 1e-9)
        assert np.all(rest[~on & drives] - 0.3 <= end[~on & drives] + 1e-9)


def test_unequal_strings_drive_the_weak_one_backwards_at_open_circuit(solve):
    p = solve(UNEQUAL, TWO, GivenCurrent(current="0 A"))
    assert p.string_current[0] > 0 > p.string_current[1]
    assert_allclose(p.backwards, [False] * 3 + [True] * 3)
    held = solve(UNEQUAL, replace(TWO, blocking=DIODE), GivenCurrent(current="0 A"))
    assert_allclose(held.string_current, 0, atol=1e-12)
    assert not held.backwards.any()


def test_feedback_softens_the_frozen_lines(module, solve):
    """With the lines of the open circuit as they are, the array promises more: the junctions follow the current."""
    many = module.take(np.zeros(6, dtype=int))
    still = operating_point(many, *films(many, UNEQUAL), GivenCurrent(current="0 A").law(np.ones(6), np.ones(6)))
    frozen = linear_array(still.open_voltage, still.internal_resistance, TWO, Matched().law(ONE, ONE))
    p = solve(UNEQUAL, TWO, Matched())
    assert frozen.voltage * frozen.current > 1.05 * p.power
    # lines of the state itself meet there, for a load that does not ask for slopes
    ohms = Resistance(resistance=f"{float(p.voltage[0] / p.current[0])!r} ohm")
    own = linear_array(p.module.open_voltage, p.module.internal_resistance, TWO, ohms.law(ONE, ONE))
    assert_allclose(own.module, p.module.current, rtol=1e-8)


def test_open_joint_stops_its_string(module, solve):
    joined = strings([0, 0, 0, 1, 1, 1], broken=[1])
    p = solve(UNEQUAL, joined, Matched())
    kirchhoff(p, joined, module)
    assert_allclose(p.string_current[0], 0, atol=0)
    lone = solve(UNEQUAL[3:], strings([0, 0, 0]), Matched())
    assert_allclose(p.power, lone.power, rtol=1e-10)
    assert_allclose(p.module.current[:3], 0, atol=0)
    assert not p.backwards.any()


def test_bypass_carries_the_string_past_an_open_joint(module, solve):
    joined = strings([0, 0, 0, 1, 1, 1], broken=[1], bypass=DIODE)
    p = solve(UNEQUAL, joined, Matched())
    kirchhoff(p, joined, module)
    assert_allclose(p.bypass_current[1], p.string_current[0], rtol=1e-12)
    assert_allclose(p.module_voltage[1], -0.3 - 0.01 * p.string_current[0], rtol=1e-12)
    assert_allclose(np.delete(p.bypass_current, 1), 0, atol=1e-12)
    assert p.power > solve(UNEQUAL, strings([0, 0, 0, 1, 1, 1], broken=[1]), Matched()).power


def test_short_costs_one_module(module, solve):
    joined = strings([0, 0, 0, 1, 1, 1], shorted=[1])
    p = solve(UNEQUAL, joined, Matched())
    kirchhoff(p, joined, module)
    assert p.module_voltage[1] == 0
    short = operating_point(module, *films(module, UNEQUAL[1:2]), given(p.module.current[1:2]))
    assert abs(short.voltage[0]) < 1e-8 * short.open_voltage[0]
    rest = [540.0, 500.0, 480.0, 460.0, 440.0]
    five = solve(rest, strings([0, 0, 1, 1, 1]), Matched())
    assert_allclose(p.power, five.power, rtol=1e-10)
    left = independent(module, rest, strings([0] * 5))
    assert_allclose(independent(module, UNEQUAL, joined), left, rtol=1e-12)


def test_a_cold_module_is_driven_backwards_and_a_bypass_saves_the_string(module, solve):
    """The source of one module fails: its fluid is as cold as the sink."""
    hot = [540.0] * 5 + [310.0]
    plain, saved = strings([0] * 6), strings([0] * 6, bypass=DIODE)
    p, q = solve(hot, plain, Matched()), solve(hot, saved, Matched())
    kirchhoff(p, plain, module)
    kirchhoff(q, saved, module)
    assert_allclose(p.backwards, [False] * 5 + [True])
    assert_allclose(p.exact, [True] * 5 + [False])  # much current, no temperature difference
    assert p.module.hot_junction[5] < p.module.cold_junction[5]  # it pumps heat the other way
    assert q.bypass_current[5] > 0.5 * q.string_current[0]
    five = solve([540.0] * 5, strings([0] * 5), Matched())
    assert p.power < q.power < five.power
    assert_allclose(independent(module, hot, plain), independent(module, hot[:5], strings([0] * 5)), rtol=1e-12)
    assert_allclose(independent(module, [305.0, 300.0], strings([0, 0])), 0, atol=0)


def test_a_module_without_source_is_exact_once_current_flows(solve):
    """At rest it has no temperature difference, so mean properties begin; the current of the other string makes one."""
    p = solve([540.0] * 5 + [310.0], TWO, GivenCurrent(current="0 A"))
    assert p.string_current[1] < 0
    assert p.exact.all()


def test_driven_module_goes_over_into_the_exact_one(module):
    """Properties at the mean temperature against the exact leg where both can do it; they differ by the spread."""
    off = []
    for difference in (12.0, 6.0, 3.0):
        laws = films(module, [310.0 + difference])
        i = np.array([0.05 * difference / 6])
        exact = operating_point(module, *laws, given(i))
        mean = _mean_properties(module, *laws, i)
        for name in ("hot_junction", "cold_junction", "heat_in", "heat_out", "voltage", "open_voltage",
                     "internal_resistance", "voltage_slope", "heat_slope", "hot_face", "cold_face"):  # fmt: skip
            assert_allclose(getattr(mean, name), getattr(exact, name), rtol=1e-3)
        off.append(abs(mean.open_voltage[0] / exact.open_voltage[0] - 1))
    assert_allclose(np.array(off[:2]) / off[1:], 4, rtol=0.3)  # falls with the square of the spread


def test_arrays_of_a_batch_do_not_see_each_other(module, solve):
    hot = [*UNEQUAL, 530.0, 430.0]
    joined = strings([0, 0, 0, 1, 1, 1, 2, 3], [0, 0, 1, 1])
    p = solve(hot, joined, Matched())
    for a, (part, of) in enumerate(((slice(0, 6), TWO), (slice(6, 8), strings([0, 1])))):
        alone = solve(hot[part], of, Matched())
        assert_allclose(p.power[a], alone.power[0], rtol=1e-10)
        for f in fields(OperatingPoint):
            if f.name not in ("balance_residual", "iterations"):
                assert_allclose(getattr(p.module, f.name)[part], getattr(alone.module, f.name), rtol=1e-6, atol=1e-9)


def test_mismatch_is_never_a_gain(module, solve):
    for joined in (strings([0] * 6), TWO, strings(range(6)), strings([0, 1, 0, 1, 0, 1])):
        loss = mismatch_loss(solve(UNEQUAL, joined, Matched()).power, independent(module, UNEQUAL, joined))
        assert 0 < loss < 0.05


def test_random_arrays_always_find_their_currents(module):
    """Random temperatures, joints and diodes, 40 arrays in one batch, matched and on resistors."""
    r = np.random.default_rng(2)
    per_string = r.integers(1, 6, 90)
    string = np.repeat(np.arange(90), per_string)
    array = np.sort(np.concatenate([np.arange(40), r.integers(0, 40, 50)]))
    many = module.take(np.zeros(string.size, dtype=int))
    hot = r.uniform(312, 560, string.size)
    ones = np.ones(40)
    first = np.cumsum(per_string) - per_string
    alone = first[(per_string > 2) & (np.bincount(array)[array] > 1)]
    for bypass in (None, DIODE):
        for blocking in (None, DIODE):
            joined = strings(
                string, array, broken=alone[::2][:1], shorted=alone[1::2], bypass=bypass, blocking=blocking
            )
            for load in (Matched(), Resistance(resistance="5 ohm")):
                laws = films(many, hot)
                p = array_point(many, *laws, joined, load.law(ones, ones))
                other = np.flatnonzero(~p.exact)
                if other.size:  # exact wherever that can be
                    laws = (side.take(other) for side in laws)
                    own = given(p.module.current[other])
                    tried = operating_point(many.take(other), *laws, own, check=False)
                    assert not tried.converged.any()
                kirchhoff(p, joined, module)
                assert np.all(p.power > 0)
                if blocking:
                    assert np.all(p.string_current >= 0)
                if bypass:
                    assert np.all(p.module_voltage > -0.3 - 0.01 * p.string_current[string].max() - 1e-9)


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"string": [0, 2]}, "count without gaps"),
        ({"string": []}, "count without gaps"),
        ({"string": [0, 1], "array": [0, 2]}, "count without gaps"),
        ({"string": [0, 0], "broken": [2]}, "there are 0 to 1"),
        ({"string": [0, 0], "broken": [1], "shorted": [1]}, "both broken and shorted"),
        ({"string": [0, 1, 1], "shorted": [0]}, "string 0 has shorted modules only"),
        ({"string": [0], "bypass": Diode(-0.1, 0.01)}, "bypass diode: drop -0.1 V"),
        ({"string": [0], "blocking": Diode(0.3, 0.0)}, "blocking diode: .* resistance must be positive"),
    ],
)
def test_impossible_strings(options, words):
    with pytest.raises(InputError, match=words):
        strings(**options)


def test_an_array_with_an_open_joint_in_every_string():
    joined = strings([0, 0, 1], broken=[0, 2])
    with pytest.raises(InputError, match="every string has an open joint"):
        linear_array(np.full(3, 2.0), np.ones(3), joined, Matched().law(ONE, ONE))


def test_connections_for_a_window():
    """By hand: 24 modules, 2.0 V loaded in the weak state, 5.5 V open in the strong one, window 10 V to 50 V."""
    found = connections(24, [2.0, 3.1], [3.9, 5.5], least=10.0, greatest=50.0)
    assert found == [(6, 4), (8, 3)]  # 5 are needed, 9 are allowed
    assert connections(24, [2.0], [5.5], least=20.0, greatest=50.0) == []  # 10 needed, 9 allowed
    assert connections(5, [2.0], [5.5], least=0.0, greatest=6.0) == [(1, 5)]


@pytest.mark.parametrize(
    ("arguments", "window"),
    [((0, [1.0], [2.0]), (1.0, 2.0)), ((4, [1.0], [2.0]), (3.0, 2.0)), ((4, [-1.0], [2.0]), (1.0, 2.0))],
)
def test_impossible_windows(arguments, window):
    with pytest.raises(InputError, match=r"lower limit first|positive voltage"):
        connections(*arguments, least=window[0], greatest=window[1])
