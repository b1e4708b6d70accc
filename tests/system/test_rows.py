from dataclasses import fields

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.errors import InputError
from tegdesign.system.boundary import Film, Stream, Surface
from tegdesign.system.growth import growth
from tegdesign.system.load import GivenCurrent, Matched, Resistance
from tegdesign.system.operating_point import OperatingPoint, operating_point
from tegdesign.system.rows import rows_point

GAS = Stream(
    inlet_temperature="560 K", mass_flow="20 g/s", heat_capacity="1050 J/kg/K", coefficient="150 W/m^2/K",
    area_enlargement=8, fin_efficiency=0.9,
)  # fmt: skip
WATER = Stream(
    inlet_temperature="300 K", mass_flow="9 g/s", heat_capacity="4180 J/kg/K", coefficient="2500 W/m^2/K"
)  # little of it: the coolant counts
SINKS = {
    "surface": Surface(temperature="310 K"),
    "film": Film(temperature="305 K", coefficient="2000 W/m^2/K"),
    "film of given area": Film(temperature="305 K", coefficient="2000 W/m^2/K", area="600 cm^2"),
    "stream": WATER,
}


def matched(size):
    return Matched().law(np.ones(size), np.ones(size))


@pytest.fixture(scope="module")
def designs(random_modules, change):
    """Three different bismuth telluride modules with every loss on, of 127 couples."""
    many = random_modules(60, seed=4)
    few = many.take(np.flatnonzero(many.n == 0)[:3])
    scale = 127 / few.couples
    return change(few, couples=np.full(3, 127.0), footprint=few.footprint * scale, leg_length=np.full(3, 1.6e-3))


def balanced(point, modules):
    """First law for every row, from heats and from what the streams tell."""
    lead = np.reshape(modules.lead_resistance, (-1, 1)) * point.module.current**2 * point.modules_per_row[:, None]
    whole = point.heat_in.sum(axis=1, keepdims=True)
    assert np.all(np.abs(point.heat_in - point.heat_out - point.power - lead) <= 1e-9 * whole)
    assert np.all(np.abs(point.balance_residual) <= 1e-9 * whole)
    told = (point.source_before - point.source_after) * GAS.capacity_rate
    assert np.all(np.abs(told - point.heat_in) <= 1e-9 * whole)
    assert_allclose(told.sum(axis=1), point.heat_in.sum(axis=1), rtol=1e-9)


@pytest.mark.parametrize("sink", SINKS)
@pytest.mark.parametrize("one_current", [False, True])
@pytest.mark.parametrize("counter", [False, True])
def test_one_row_is_the_stream_with_its_modules(designs, sink, one_current, counter):
    count = np.array([4.0, 8.0, 20.0])
    laws = (side.law(designs.footprint, count) for side in (GAS, SINKS[sink]))
    alone = operating_point(designs, *laws, matched(3))
    row = rows_point(
        designs, GAS, SINKS[sink], matched(3), rows=1, modules_per_row=count, one_current=one_current,
        counter_current=counter,
    )  # fmt: skip
    for name in ("hot_junction", "cold_junction", "hot_face", "cold_face", "current", "voltage", "heat_in", "heat_out"):
        assert_allclose(getattr(row.module, name)[:, 0], getattr(alone, name), rtol=1e-9)
    assert_allclose(row.source_after[:, 0], GAS.outlet_temperature(alone.heat_in * count), rtol=1e-11)
    assert_allclose(row.total_power, alone.power * count, rtol=1e-11)
    balanced(row, designs)


@pytest.mark.parametrize("sink", SINKS)
@pytest.mark.parametrize("counter", [False, True])
@pytest.mark.parametrize("one_current", [False, True])
def test_every_row_is_what_it_is_alone_between_its_fluids(designs, sink, counter, one_current):
    """Each row solved again by itself, as a single module between streams that come in at its temperatures."""
    n, count = 6, np.array([2.0, 4.0, 7.0])
    load = matched(3 if one_current else 3 * n)
    side = SINKS[sink]
    p = rows_point(
        designs, GAS, side, load, rows=n, modules_per_row=count, counter_current=counter, one_current=one_current
    )
    balanced(p, designs)
    assert p.exact.all()
    assert_allclose(p.source_before[:, 1:], p.source_after[:, :-1], rtol=1e-14)
    assert_allclose(p.source_before[:, 0], 560, rtol=1e-14)
    if side is WATER:
        inlet = p.sink_before[:, -1 if counter else 0]
        assert_allclose(inlet, 300, rtol=1e-14)
        joined = p.sink_before[:, :-1], p.sink_after[:, 1:]
        assert_allclose(*(joined if counter else (p.sink_before[:, 1:], p.sink_after[:, :-1])), rtol=1e-14)
    else:
        assert np.isnan(p.sink_before).all()
    for d in range(3):
        one, area = designs.take([d]), 15e-2  # any area: h is what fits the share of the row
        for k in range(n):
            share = one.footprint * count[d] / area
            source = Stream(
                inlet_temperature=f"{p.source_before[d, k]!r} K".replace("np.float64(", "").replace(")", ""),
                mass_flow="20 g/s", heat_capacity="1050 J/kg/K", area=f"{area} m^2", area_enlargement=8,
                fin_efficiency=0.9, coefficient=f"{float(150 * share[0])!r} W/m^2/K",
            )  # fmt: skip
            cold = side.at(float(p.sink_before[d, k])) if side is WATER else side
            everyone = count[d] if side is WATER else count[d] * n
            laws = source.law(one.footprint, count[d : d + 1]), cold.law(one.footprint, np.array([everyone]))
            i = p.module.current[d, k]
            own = GivenCurrent(current=f"{float(i)!r} A").law(np.ones(1), np.ones(1)) if one_current else matched(1)
            alone = operating_point(one, *laws, own)
            for name in ("hot_junction", "cold_junction", "current", "voltage", "heat_in"):
                assert_allclose(getattr(p.module, name)[d, k], getattr(alone, name)[0], rtol=1e-8)


@pytest.mark.parametrize("counter", [False, True])
@pytest.mark.parametrize("one_current", [False, True])
def test_many_rows_converge_with_the_square_of_their_number(designs, counter, one_current):
    """Of power and heat. Rows of their own carry a given resistance: tracking itself depends on how many track."""
    points = []
    for n in (8, 16, 32, 64):
        ones = np.ones(3 * n)
        load = matched(3) if one_current else Resistance(resistance="4 ohm").law(ones, ones)
        points.append(
            rows_point(
                designs, GAS, WATER, load, rows=n, modules_per_row=32 / n, counter_current=counter,
                one_current=one_current,
            )
        )  # fmt: skip
    for values in ([p.total_power for p in points], [p.heat_in.sum(axis=1) for p in points]):
        step = np.diff(values, axis=0)
        # error a/N^2 + ...: each doubling takes away three quarters of it
        assert_allclose(step[1] / step[2], 4, rtol=0.06)
        assert np.all(np.abs(step[2]) < 2e-3 * values[3])


def test_series_string_draws_the_most_that_one_current_can(designs):
    options = {"rows": 5, "modules_per_row": 10.0, "counter_current": True, "one_current": True}
    best = rows_point(designs, GAS, WATER, matched(3), **options)
    i = best.module.current
    assert_allclose(i, i[:, :1] * np.ones((1, 5)), rtol=1e-14)
    given = [
        rows_point(designs, GAS, WATER, GivenCurrent.model_construct(current=1.0).law(np.ones(3), 1 / (x * i[:, 0])),
                   **options).total_power
        for x in (0.99, 1.0, 1.01)
    ]  # fmt: skip
    assert_allclose(given[1], best.total_power, rtol=1e-9)
    # summit of the parabola through three currents
    offset = 0.5 * (given[0] - given[2]) / (given[0] - 2 * given[1] + given[2]) * 0.01
    assert np.all(np.abs(offset) < 1e-5)
    # tracking in every row is about as good: no row asks what it leaves to those after it
    each = rows_point(designs, GAS, WATER, matched(15), rows=5, modules_per_row=10.0, counter_current=True)
    assert_allclose(each.total_power, best.total_power, rtol=0.02)
    assert np.all(each.power > 0)


def test_series_string_on_a_resistor(designs):
    load = Resistance(resistance="30 ohm")
    p = rows_point(
        designs, GAS, WATER, load.law(np.full(3, 40.0), np.ones(3)), rows=4, modules_per_row=10, one_current=True
    )
    voltage = (p.module.voltage * 10).sum(axis=1)  # of 40 modules in series
    assert_allclose(voltage, 30 * p.module.current[:, 0], rtol=1e-10)
    assert_allclose(p.total_power, voltage**2 / 30, rtol=1e-10)


def test_rows_with_loads_of_their_own(designs):
    ohms = np.linspace(1, 6, 12)  # three designs of four rows
    load = Resistance(resistance="1 ohm").law(np.ones(12), ohms)
    p = rows_point(designs, GAS, WATER, load, rows=4, modules_per_row=3.0, counter_current=True)
    assert_allclose(p.module.voltage / p.module.current, ohms.reshape(3, 4), rtol=1e-9)
    balanced(p, designs)


@pytest.mark.parametrize("one_current", [False, True])
def test_designs_of_a_batch_do_not_see_each_other(designs, one_current):
    count = np.array([2.0, 5.0, 9.0])
    options = {"rows": 4, "counter_current": True, "one_current": one_current}
    size = 1 if one_current else 4
    together = rows_point(designs, GAS, WATER, matched(3 * size), modules_per_row=count, **options)
    for d in range(3):
        alone = rows_point(designs.take([d]), GAS, WATER, matched(size), modules_per_row=count[d], **options)
        for f in fields(OperatingPoint):
            if f.name not in ("balance_residual", "iterations", "leg_resistance_n", "leg_resistance_p"):
                a, b = getattr(together.module, f.name)[d], getattr(alone.module, f.name)[0]
                assert_allclose(a, b, rtol=1e-7, atol=1e-7)


def test_heat_source_side_may_be_no_stream(designs):
    """A hot plate with coolant along it: the first row of the coolant is the coldest."""
    p = rows_point(designs, Surface(temperature="520 K"), WATER, matched(15), rows=5, modules_per_row=6.0)
    assert np.all(np.diff(p.sink_before, axis=1) > 0)
    assert np.all(np.diff(p.power, axis=1) < 0)
    assert_allclose(p.heat_out, (p.sink_after - p.sink_before) * WATER.capacity_rate, rtol=1e-8)


def test_without_any_stream_all_rows_are_alike(designs):
    sides = Surface(temperature="520 K"), SINKS["film"]
    p = rows_point(designs, *sides, matched(9), rows=3, modules_per_row=2.0)
    assert_allclose(p.power, p.power[:, :1] * np.ones((1, 3)), rtol=1e-12)
    alone = operating_point(designs, *(s.law(designs.footprint, np.full(3, 6.0)) for s in sides), matched(3))
    assert_allclose(p.total_power, 6 * alone.power, rtol=1e-12)


def test_rows_that_a_long_string_drives_backwards(designs):
    """Cold rows at the end take power; where the legs are far beyond their short circuit mean properties do."""
    p = rows_point(designs, GAS, WATER, matched(3), rows=40, modules_per_row=20.0, one_current=True)
    balanced(p, designs)
    assert np.all(p.power[:, 0] > 0)
    assert np.all(p.power[:, -1] < 0)
    assert not p.exact.all()
    assert np.all(p.exact[:, :3])
    # heat flows against the fluid temperatures where Peltier pumping overcomes conduction, never out of the first rows
    assert np.all(p.heat_in[:, 0] > 0)


def test_rows_without_temperature_difference_still_close(designs):
    """Thirty transfer units and more: the last rows see a millionth of a kelvin."""
    p = rows_point(designs, GAS, SINKS["film"], matched(3 * 100), rows=100, modules_per_row=80.0)
    balanced(p, designs)
    assert np.all(p.module.hot_junction[:, -1] - p.module.cold_junction[:, -1] < 1e-3)
    assert np.all(p.power[:, :5] > 0)
    assert np.all(np.abs(p.power[:, -20:]) < 1e-20)


def test_empty_places_change_nothing_for_the_rows_before(designs):
    """Co-current: four rows in an exchanger for nine are the first four of nine."""
    sinks = (SINKS["film of given area"], WATER.model_copy(update={"area": 0.2}))
    for sink in sinks:
        nine = rows_point(designs, GAS, sink, matched(27), rows=9, modules_per_row=2.0)
        four = rows_point(designs, GAS, sink, matched(12), rows=4, modules_per_row=2.0, places=9)
        assert_allclose(four.power, nine.power[:, :4], rtol=1e-9)


@pytest.mark.parametrize("sink", ["film", "stream"])
@pytest.mark.parametrize("one_current", [False, True])
def test_growth_is_the_power_of_one_to_n_rows(designs, sink, one_current):
    abreast = 20.0 if one_current else 8.0
    options = {"modules_per_row": abreast, "counter_current": True, "one_current": one_current}
    g = growth(designs, GAS, SINKS[sink], matched(3), most=8 if one_current else 16, **options)
    for n in (1, 7):
        load = matched(3 if one_current else 3 * n)
        p = rows_point(designs, GAS, SINKS[sink], load, rows=n, **options)
        assert_allclose(g.power[:, n - 1], p.total_power, rtol=1e-9)
        assert_allclose(g.area[:, n - 1], abreast * n * designs.footprint, rtol=1e-14)
    assert_allclose(np.cumsum(g.added, axis=1), g.power, rtol=1e-12)
    brings = g.added[:, 1:] > 0
    assert np.all(np.diff(g.added, axis=1)[brings] < 0)  # diminishing return
    if sink == "film":
        assert brings.all() == (not one_current)  # a string longer than its source is good for loses power
    n = g.rows_for(0.9)
    for d in range(3):
        assert g.power[d, n[d] - 1] >= 0.9 * g.limit[d] > g.power[d, n[d] - 2]


def test_limit_of_growth_is_met_by_many_rows(designs):
    g = growth(designs, GAS, SINKS["film"], matched(3), most=25, modules_per_row=2.0)
    far = rows_point(designs, GAS, SINKS["film"], matched(3 * 90), rows=90, modules_per_row=2.0).total_power
    seen = g.power[:, -1]
    assert np.all(far > 1.001 * seen)  # so the series has something to tell
    # what is missing still falls by a little faster than the last two rows tell, since properties change
    assert np.all(np.abs(g.limit - far) < 0.25 * (far - seen))


@pytest.mark.parametrize("count", [{"rows": 0}, {"rows": 5, "places": 4}])
def test_impossible_numbers_of_rows(designs, count):
    with pytest.raises(InputError, match="choose another number of rows"):
        rows_point(designs, GAS, WATER, matched(3), **count)


def test_growth_says_when_it_cannot_tell(designs):
    with pytest.raises(InputError, match="look at 3 or more"):
        growth(designs, GAS, WATER, matched(3), most=2)
    with pytest.raises(InputError, match=r"power still grows after 3 rows.*look at more rows"):
        growth(designs, GAS, WATER, matched(3), most=3, one_current=True)
    g = growth(designs, GAS, SINKS["film"], matched(3), most=3)
    with pytest.raises(InputError, match=r"3 rows reach .*look at more rows"):
        g.rows_for(0.9)
    with pytest.raises(InputError, match="not between 0 and 1"):
        g.rows_for(1.0)


def test_a_coolant_as_hot_as_the_gas_is_told(designs):
    hot = Film(temperature="560 K", coefficient="2000 W/m^2/K")
    with pytest.raises(InputError, match=r"560 K is not warmer than the sink of 560 K"):
        rows_point(designs, GAS, hot, matched(6), rows=2)
