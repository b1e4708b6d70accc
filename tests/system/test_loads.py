import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.system.boundary import Film, FixedHeat, Surface
from tegdesign.system.load import BestEfficiency, GivenCurrent, Matched, Resistance, mixed
from tegdesign.system.operating_point import operating_point

ONE = np.ones(1)
SINK = Film(temperature="300 K", coefficient="1500 W/m^2/K")
SOURCES = {
    "surface": Surface(temperature="480 K"),
    "film": Film(temperature="560 K", coefficient="800 W/m^2/K"),
    "heat": FixedHeat(heat="60 W", leak_conductance="0.05 W/K", ambient_temperature="300 K"),
}


def spread(source, modules, load):
    ones = np.ones(modules.size)
    laws = (side.law(modules.footprint, ones) for side in (source, SINK))
    return operating_point(modules, *laws, load)


def currents(modules, around, width=0.02, points=41):
    """Return powers and efficiencies of one module on an even grid of currents."""
    x = around * (1 + np.linspace(-width, width, points))
    many = modules.take(np.zeros(points, dtype=int))
    return x, many, GivenCurrent.model_construct(current=1.0).law(np.ones(points), 1 / x)


@pytest.fixture(params=SOURCES.values(), ids=SOURCES)
def source(request):
    return request.param


@pytest.fixture
def module(random_modules):
    modules = random_modules(20, seed=4)
    return modules.take(np.flatnonzero(modules.n == 0)[:1])


@pytest.mark.parametrize(("load", "aim"), [(Matched(), "power"), (BestEfficiency(), "efficiency")])
def test_chosen_load_is_the_top(module, source, load, aim):
    best = spread(source, module, load.law(ONE, ONE))
    x, many, given = currents(module, best.current[0])
    curve = getattr(spread(source, many, given), aim)
    assert np.all(curve[:-1][x[:-1] < best.current[0]] < getattr(best, aim)[0])
    assert np.argmax(curve) == 20
    # top of the curve by a polynomial of degree 6 through all points; its derivative vanishes at the answer
    u = (x - best.current) / (0.02 * best.current)
    top = np.polynomial.Polynomial.fit(u, curve, 6).deriv().roots()
    top = top[np.argmin(np.abs(top))].real
    assert abs(0.02 * top) < 1e-6  # of the current


def test_most_power_is_not_at_the_internal_resistance(module):
    """Behind films the junctions follow the current, so the best load is larger (Apertet et al. 2012)."""
    best = spread(SOURCES["film"], module, Matched().law(ONE, ONE))
    assert best.voltage[0] / best.current[0] > 1.05 * best.internal_resistance[0]


def test_resistance_across_series_and_parallel(module, source):
    # 12 modules, 6 in series, 2 in parallel: a module sees R 2 / 6
    own = spread(source, module, Resistance(resistance="4.5 ohm").law(6 * ONE, 2 * ONE))
    assert_allclose(own.voltage / own.current, 1.5, rtol=1e-10)
    assert_allclose(6 * own.voltage / (2 * own.current), 4.5, rtol=1e-10)


def test_given_current_is_shared_by_strings_in_parallel(module, source):
    own = spread(source, module, GivenCurrent(current="1.2 A").law(6 * ONE, 3 * ONE))
    assert_allclose(own.current, 0.4, rtol=1e-15)


def test_open_circuit(module, source):
    own = spread(source, module, GivenCurrent(current="0 A").law(ONE, ONE))
    assert own.current[0] == own.power[0] == own.efficiency[0] == 0
    assert_allclose(own.voltage, own.open_voltage, rtol=0)
    assert_allclose(own.heat_in, own.heat_out, rtol=1e-9)


def test_hot_junction_is_hotter_at_open_circuit(module):
    """No Peltier cooling: the very reason why limits are looked at in the open state."""
    for source in (SOURCES["film"], SOURCES["heat"]):
        loaded = spread(source, module, Matched().law(ONE, ONE))
        opened = spread(source, module, GivenCurrent(current="0 A").law(ONE, ONE))
        assert opened.hot_junction[0] > loaded.hot_junction[0] + 1


def test_loads_of_several_kinds_in_one_batch(module):
    kinds = [Matched(), BestEfficiency(), Resistance(resistance="2 ohm"), GivenCurrent(current="0.3 A")]
    many = module.take(np.zeros(4, dtype=int))
    together = spread(SOURCES["film"], many, mixed([k.law(ONE, ONE) for k in kinds]))
    for k, kind in enumerate(kinds):
        alone = spread(SOURCES["film"], module, kind.law(ONE, ONE))
        assert_allclose(together.current[k], alone.current[0], rtol=1e-9)
        assert_allclose(together.power[k], alone.power[0], rtol=1e-9)


def test_taking_from_mixed_loads_keeps_each_with_its_design():
    law = mixed([GivenCurrent(current="2 A").law(np.ones(2), np.ones(2)), Matched().law(ONE, ONE)])
    assert_allclose(law.given, [2, 2, np.nan])
    assert_allclose(law.take(np.array([2, 0])).given, [np.nan, 2])
