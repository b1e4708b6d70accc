"""Battery, converter and motor on modules whose junctions follow the current."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.optimize import brentq

from tegdesign.quantity import SI
from tegdesign.system.boundary import Film, FixedHeat, Surface
from tegdesign.system.load import (
    Battery,
    BestEfficiency,
    Converter,
    GivenCurrent,
    Matched,
    Motor,
    Resistance,
    mixed,
)
from tegdesign.system.operating_point import operating_point

ONE = np.ones(1)
SINK = Film(temperature="300 K", coefficient="1500 W/m^2/K")
SOURCES = {
    "surface": Surface(temperature="480 K"),
    "film": Film(temperature="560 K", coefficient="800 W/m^2/K"),
    "heat": FixedHeat(heat="60 W", leak_conductance="0.05 W/K", ambient_temperature="300 K"),
}
OPEN = GivenCurrent(current="0 A")


def spread(source, modules, load, sink=SINK):
    ones = np.ones(modules.size)
    return operating_point(modules, source.law(modules.footprint, ones), sink.law(modules.footprint, ones), load)


def battery(volts, drop=0.0, ohms=0.0):
    return Battery(voltage=SI(volts), blocking_drop=SI(drop), series_resistance=SI(ohms))


def converter(least, greatest):
    return Converter(running_voltage=(SI(least), SI(greatest)), input_voltage_limit=SI(1e4), efficiency=0.9)


@pytest.fixture(params=SOURCES.values(), ids=SOURCES)
def source(request):
    return request.param


@pytest.fixture
def module(random_modules):
    modules = random_modules(20, seed=4)
    return modules.take(np.flatnonzero(modules.n == 0)[:1])


def test_constant_properties_between_held_surfaces(equal_legs):
    """No film, no loss: V_oc = 2 S dT and R = 2 rho L / A of a couple (exact), whatever the current."""
    couple = equal_legs(2e-4, 1e-5, 1.5, 2e-3)
    e, r = 2 * 2e-4 * 180, 2 * 1e-5 * 2e-3 / 1e-6
    hot, cold = Surface(temperature="480 K"), Surface(temperature="300 K")
    stand, run = 0.5 * r, 3 * r
    expected = {
        battery(e / 4, e / 8, r / 2): (e - 3 * e / 8) / (1.5 * r),
        battery(1.01 * e): 0.0,
        converter(0.1 * e, 0.9 * e): e / (2 * r),
        converter(0.7 * e, 0.9 * e): 0.3 * e / r,
        converter(0.1 * e, 0.2 * e): 0.8 * e / r,
        converter(1.01 * e, 2 * e): 0.0,
        Motor(resistance=SI(run), stalled_resistance=SI(stand), start_voltage=SI(e / 4)): e / (4 * r),
    }
    for load, current in expected.items():
        point = spread(hot, couple, load.law(ONE, ONE), cold)
        assert_allclose(point.current, current, rtol=1e-9)
        assert_allclose(point.voltage, e - current * r, rtol=1e-9)
        assert_allclose(point.heat_in - point.heat_out, point.power, rtol=1e-9, atol=1e-9 * point.heat_in[0])
    stalled = spread(hot, couple, load.start_law(ONE, ONE), cold)
    assert_allclose(stalled.voltage, e / 3, rtol=1e-9)
    assert load.starts(stalled.voltage).all()


def test_battery_against_a_root_along_given_currents(module, source):
    """scipy's brentq on the voltage at given current, blind to the battery; 4 in series, 2 in parallel."""
    opened = spread(source, module, OPEN.law(ONE, ONE))
    volts, drop, ohms = 4 * 0.5 * opened.voltage[0], 0.35, 0.4
    load = battery(volts, drop, ohms)
    point = spread(source, module, load.law(4 * ONE, 2 * ONE))

    def excess(current):
        at = spread(source, module, GivenCurrent(current=SI(current)).law(ONE, ONE))
        return 4 * at.voltage[0] - volts - drop - ohms * 2 * current

    assert_allclose(point.current, brentq(excess, 0, 1.5 * point.current[0], xtol=1e-14, rtol=1e-13), rtol=1e-9)
    v, i = 4 * point.voltage, 2 * point.current
    got = load.delivery(v, i, 4 * opened.voltage)
    assert_allclose(got.power + drop * i + ohms * i**2, 8 * point.power, rtol=1e-9)
    assert_allclose(got.power, volts * i, rtol=1e-12)


def test_battery_above_the_open_circuit_is_the_open_circuit(module, source):
    opened = spread(source, module, OPEN.law(ONE, ONE))
    point = spread(source, module, battery(1.001 * opened.voltage[0]).law(ONE, ONE))
    assert point.current[0] == 0
    assert_allclose(point.voltage, opened.voltage, rtol=1e-10)
    assert_allclose(point.hot_junction, opened.hot_junction, rtol=1e-11)


def test_battery_over_a_source_that_warms_up(module):
    """Current never falls, and starts where the open circuit reaches the battery."""
    kelvin = np.linspace(305, 560, 60)
    many = module.take(np.zeros(60, dtype=int))
    laws = [
        Film(temperature=SI(t), coefficient="800 W/m^2/K").law(module.footprint, ONE) for t in kelvin
    ]
    source = type(laws[0])(*(np.concatenate([getattr(law, k) for law in laws]) for k in "abc"))
    sink, ones = SINK.law(many.footprint, np.ones(60)), np.ones(60)
    opened = operating_point(many, source, sink, OPEN.law(ones, ones))
    load = battery(float(np.interp(420, kelvin, opened.voltage)))
    point = operating_point(many, source, sink, load.law(ones, ones))
    assert np.all(np.diff(point.current) >= 0)
    assert_allclose(point.current > 0, opened.voltage > load.voltage)
    assert 5 < np.count_nonzero(point.current) < 55


def test_battery_near_the_threshold_converges(module):
    """The current is then the difference of two voltages that agree to 1 part in 10^3 to 10^15."""
    opened = spread(SOURCES["film"], module, OPEN.law(ONE, ONE))
    size = 40
    many = module.take(np.zeros(size, dtype=int))
    below = 10.0 ** -np.linspace(3, 15, size)
    law = battery(1.0).law(np.ones(size), np.ones(size))
    point = spread(SOURCES["film"], many, law._replace(number=np.stack([opened.voltage * (1 - below), np.zeros(size)])))
    assert point.converged.all()
    # the steady internal resistance is larger than the electrical one, junctions follow; here by less than a quarter
    share = point.current[:10] / (opened.voltage / opened.internal_resistance)
    assert_allclose(np.log10(share), np.log10(below[:10]), atol=0.1)
    assert_allclose(point.current[-20:], 0, atol=0)


def test_converter_in_a_wide_window_is_the_matched_load(module, source):
    best = spread(source, module, Matched().law(ONE, ONE))
    point = spread(source, module, converter(0.01 * best.voltage[0], 100 * best.voltage[0]).law(3 * ONE, ONE))
    assert_allclose(point.power, best.power, rtol=1e-12)


@pytest.mark.parametrize(("least", "greatest", "held"), [(0.2, 0.7, 0.7), (1.2, 1.5, 1.2), (1.0, 1.0, 1.0)])
def test_converter_is_held_at_the_edge_nearest_to_the_best(module, source, least, greatest, held):
    best = spread(source, module, Matched().law(ONE, ONE))
    v = best.voltage[0]
    point = spread(source, module, converter(3 * least * v, 3 * greatest * v).law(3 * ONE, 2 * ONE))
    assert_allclose(point.voltage, held * v, rtol=1e-10)
    assert point.power[0] <= best.power[0] * (1 + 1e-12)


def test_converter_gives_up_below_its_window(module, source):
    opened = spread(source, module, OPEN.law(ONE, ONE))
    v = opened.voltage[0]
    load = converter(1.001 * v, 2 * v)
    point = spread(source, module, load.law(ONE, ONE))
    assert point.current[0] == 0
    assert not load.delivery(point.voltage, point.current, opened.voltage).running
    almost = spread(source, module, converter(0.999 * v, 2 * v).law(ONE, ONE))
    assert_allclose(almost.voltage, 0.999 * v, rtol=1e-10)
    assert almost.current[0] > 0


def test_loads_of_every_kind_in_one_batch(module):
    source = SOURCES["film"]
    best = spread(source, module, Matched().law(ONE, ONE))
    v, r = best.voltage[0], best.internal_resistance[0]
    kinds = [
        converter(0.1 * v, 0.8 * v),
        Matched(),
        battery(1.5 * v, 0.01 * v, 0.1 * r),
        BestEfficiency(),
        OPEN,
        battery(5 * v),
        Resistance(resistance=SI(2 * r)),
        Motor(resistance=SI(2 * r), stalled_resistance=SI(r), start_current="1 A"),
        converter(0.1 * v, 8 * v),
    ]
    many = module.take(np.zeros(len(kinds), dtype=int))
    law = mixed([k.law(ONE, ONE) for k in kinds])
    assert len(law.laws) == 6  # resistor and motor share one
    together = spread(source, many, law)
    for k, kind in enumerate(kinds):
        alone = spread(source, module, kind.law(ONE, ONE))
        assert_allclose(together.current[k], alone.current[0], rtol=1e-9)
        assert_allclose(together.voltage[k], alone.voltage[0], rtol=1e-9)
    assert_allclose(together.power[6], together.power[7], rtol=1e-9)


def test_random_modules_settle_everywhere(random_modules):
    """Balance, and the conditions that tell a blocked or clamped load: all of them in every module."""
    size = 120
    modules = random_modules(size, seed=8)
    r = np.random.default_rng(3)
    source = Film(temperature="520 K", coefficient="700 W/m^2/K")
    opened = spread(source, modules, OPEN.law(np.ones(size), np.ones(size)))
    held = opened.voltage * r.uniform(0.05, 1.3, size)
    resistance = opened.internal_resistance * r.uniform(0, 1, size)
    law = battery(1.0).law(np.ones(size), np.ones(size))
    point = spread(source, modules, law._replace(number=np.stack([held, resistance])))
    flows = point.current > 0
    assert 30 < np.count_nonzero(flows) < size
    assert_allclose(point.voltage[flows], (held + point.current * resistance)[flows], rtol=1e-9)
    assert np.all(point.voltage[~flows] <= held[~flows] * (1 + 2e-6))
    assert_allclose(point.heat_in - point.heat_out, point.power + point.current**2 * modules.lead_resistance,
                    rtol=1e-7, atol=1e-9 * np.max(point.heat_in))  # fmt: skip

    greatest = held * r.uniform(1, 1.5, size)
    law = converter(1.0, 2.0).law(np.ones(size), np.ones(size))
    point = spread(source, modules, law._replace(number=np.stack([held, greatest])))
    best = spread(source, modules, Matched().law(np.ones(size), np.ones(size)))
    wanted = np.minimum(np.clip(best.voltage, held, greatest), opened.voltage)
    assert_allclose(point.voltage, wanted, rtol=1e-8)
    counts = [np.count_nonzero(c) for c in (wanted == held, wanted == greatest, wanted == opened.voltage)]
    assert min(counts) > 10
