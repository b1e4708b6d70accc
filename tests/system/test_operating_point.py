from itertools import product

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.errors import ConvergenceError
from tegdesign.system.boundary import Film, Stream, Surface
from tegdesign.system.law import law
from tegdesign.system.load import BestEfficiency, GivenCurrent, Matched, Resistance
from tegdesign.system.operating_point import operating_point

STREAM = {"mass_flow": "50 g/s", "heat_capacity": "1050 J/kg/K", "coefficient": "90 W/m^2/K", "area_enlargement": 9}
SOURCES = {
    "surface": Surface(temperature="500 K"),
    "film": Film(temperature="560 K", coefficient="900 W/m^2/K"),
    "stream": Stream(inlet_temperature="620 K", fin_efficiency=0.8, **STREAM),
    "heat": None,  # sized by the footprint below
}
SINKS = {
    "surface": Surface(temperature="300 K"),
    "film": Film(temperature="295 K", coefficient="700 W/m^2/K"),
    "stream": Stream(
        inlet_temperature="290 K", mass_flow="80 g/s", heat_capacity="4180 J/kg/K", coefficient="2500 W/m^2/K"
    ),
}
LOADS = {
    "matched": Matched(),
    "efficiency": BestEfficiency(),
    "resistance": Resistance(resistance="2 ohm"),
    "current": GivenCurrent(current="0.1 A"),
}


def source_law(kind, modules):
    ones = np.ones(modules.size)
    if kind == "heat":  # 15 kW/m2 and a leak of 5 W/m2/K to 300 K
        area = np.asarray(modules.footprint)
        return law(5 * area, 1.0, 15e3 * area + 5 * area * 300, area)
    return SOURCES[kind].law(modules.footprint, ones)


def solve(modules, source, sink, load, **more):
    ones = np.ones(modules.size)
    boundaries = source_law(source, modules), SINKS[sink].law(modules.footprint, ones)
    return operating_point(modules, *boundaries, LOADS[load].law(ones, ones), **more)


@pytest.fixture(scope="module")
def batch(random_modules):
    return random_modules(500, seed=11)


@pytest.mark.parametrize(("source", "sink", "load"), [*product(SOURCES, SINKS, LOADS)])
def test_first_and_second_law_for_every_boundary_and_load(batch, source, sink, load):
    p = solve(batch, source, sink, load)
    assert p.converged.all()
    assert np.all(np.abs(p.balance_residual) <= 1e-9 * p.heat_in)
    # the same from the heats at the junctions: what is missing is power and lead loss
    missing = p.heat_in - p.heat_out - p.power - p.current**2 * batch.lead_resistance
    assert np.all(np.abs(missing) <= 1e-9 * p.heat_in)
    # the boundary laws hold at the faces
    own = source_law(source, batch)
    drawn = own.c - own.b * p.heat_in
    assert_allclose(own.a * p.hot_face, drawn, rtol=0, atol=1e-9 * np.abs(own.c).max())
    assert_allclose(p.voltage, p.open_voltage - p.current * p.internal_resistance, rtol=1e-10, atol=1e-12)
    # entropy leaves at least as fast as it enters, from face to face and from junction to junction
    assert np.all(p.heat_out / p.cold_face > p.heat_in / p.hot_face)
    assert np.all(p.heat_out / p.cold_junction >= p.heat_in / p.hot_junction)
    assert np.all(p.efficiency < 1 - p.cold_face / p.hot_face)
    assert np.all(p.hot_face >= p.hot_junction)
    assert np.all(p.cold_face <= p.cold_junction)


def test_a_batch_is_what_its_designs_are_alone(batch):
    few = batch.take(np.arange(12))
    together = solve(few, "film", "film", "matched")
    for k in range(12):
        alone = solve(few.take([k]), "film", "film", "matched")
        for name in ("hot_junction", "cold_junction", "current", "voltage", "heat_in"):
            assert_allclose(getattr(together, name)[k], getattr(alone, name)[0], rtol=1e-9, err_msg=name)


@pytest.mark.parametrize("load", LOADS)
def test_the_guess_does_not_matter(batch, load):
    """Also far from the answer: cold, hot, nearly no difference, no current, a large one."""
    few = batch.take(np.arange(60))
    known = solve(few, "film", "film", load)
    guesses = [(350.0, 340.0, 0.0), (900.0, 200.0, 2.0), (700.0, 600.0, 0.1), (301.0, 300.0, 1.0)]
    if load == "current":
        guesses.pop()  # legs cannot carry a given current over 1 K
    for hot, cold, factor in guesses:
        start = (np.full(60, hot), np.full(60, cold), factor * known.current)
        again = solve(few, "film", "film", load, guess=start)
        for name in ("hot_junction", "cold_junction", "current"):
            assert_allclose(getattr(again, name), getattr(known, name), rtol=1e-8, err_msg=name)


@pytest.mark.parametrize("tolerance", [1e-4, 1e-6, 1e-8])
def test_a_loose_tolerance_loses_no_design(batch, tolerance):
    """What a search asks for: nearly the same answers sooner, none dropped."""
    fine = solve(batch, "film", "film", "matched")
    loose = solve(batch, "film", "film", "matched", tolerance=tolerance)
    assert loose.converged.all()
    assert loose.iterations.sum() < fine.iterations.sum()
    assert_allclose(loose.power, fine.power, rtol=10 * tolerance)


HARD = {
    "1 K in all": (Surface(temperature="301 K"), SINKS["surface"]),
    "1 K and poor cooling": (Surface(temperature="301 K"), Film(temperature="300 K", coefficient="10 W/m^2/K")),
    "tiny film": (Film(temperature="800 K", coefficient="2 W/m^2/K"), SINKS["film"]),
    "huge film": (
        Film(temperature="500 K", coefficient="1e12 W/m^2/K"),
        Film(temperature="300 K", coefficient="1e12 W/m^2/K"),
    ),
    "huge stream": (Stream(inlet_temperature="500 K", **{**STREAM, "mass_flow": "1e9 kg/s"}), SINKS["surface"]),
    "air on both sides": (
        Film(temperature="900 K", coefficient="30 W/m^2/K", area_enlargement=5),
        Film(temperature="300 K", coefficient="10 W/m^2/K", area_enlargement=10),
    ),
}


@pytest.mark.parametrize("case", HARD)
@pytest.mark.parametrize("load", [*LOADS.values(), Resistance(resistance="1e-9 ohm"), Resistance(resistance="1e8 ohm")])
def test_hard_cases_are_found(batch, case, load):
    few = batch.take(np.arange(250))
    ones = np.ones(250)
    if load is LOADS["current"]:
        load = GivenCurrent(current="1e-6 A")
    sides = (side.law(few.footprint, ones) for side in HARD[case])
    p = operating_point(few, *sides, load.law(ones, ones))
    assert np.all(np.abs(p.balance_residual) <= 1e-9 * np.abs(p.heat_in))
    assert p.iterations.max() <= 20


def test_fixed_heat_without_leak_decides_the_temperature(batch):
    few = batch.take(batch.leg_length < 3e-3)
    ones = np.ones(few.size)
    sink = SINKS["film"].law(few.footprint, ones)
    for load in LOADS.values():
        heat = law(0.0, 1.0, 12e3 * few.footprint, ones)
        p = operating_point(few, heat, sink, load.law(ones, ones))
        assert_allclose(p.heat_in, 12e3 * few.footprint, rtol=1e-9)


def test_a_difference_of_1000_kelvin(equal_legs):
    m = equal_legs(100e-6, 1e-5, 1.5, np.full(5, 5e-3))
    ones = np.ones(5)
    sides = law(1.0, 0.0, 1300.0, ones), law(1.0, 0.0, 300.0, ones)
    for load in (Matched(), BestEfficiency(), Resistance(resistance="1e-6 ohm")):
        assert operating_point(m, *sides, load.law(ones, ones)).converged.all()


def test_very_short_and_very_long_legs(random_modules, change):
    m = random_modules(60, seed=2)
    m = change(m, leg_length=np.where(np.arange(60) % 2, 1e-5, 0.5))
    for source, sink in product(SOURCES, SINKS):
        if source != "heat":  # half a metre of legs would need thousands of kelvin
            for load in ("matched", "efficiency", "resistance"):
                assert solve(m, source, sink, load).converged.all()


def test_what_cannot_be_is_said(batch):
    few = batch.take(np.arange(3))
    ones = np.ones(3)
    sides = source_law("film", few), SINKS["film"].law(few.footprint, ones)
    load = GivenCurrent(current="1000 A").law(ones, ones)
    with pytest.raises(ConvergenceError, match=r"not found for 3 of 3 designs.*current too large"):
        operating_point(few, *sides, load)
    assert not operating_point(few, *sides, load, check=False).converged.any()


def test_too_few_iterations_are_not_an_answer(batch):
    with pytest.raises(ConvergenceError, match="operating point not found"):
        solve(batch, "film", "film", "matched", max_iterations=2)


def test_slopes_at_the_answer_follow_the_whole_system(batch):
    """dV/dI and dQ/dI with the junctions following, against two neighbouring given currents."""
    few = batch.take(np.arange(40))
    ones = np.ones(40)
    p = solve(few, "film", "film", "matched")
    sides = source_law("film", few), SINKS["film"].law(few.footprint, ones)
    d = 1e-4 * p.current
    up, down = (
        operating_point(few, *sides, GivenCurrent.model_construct(current=1.0).law(ones, 1 / (p.current + s)))
        for s in (d, -d)
    )
    assert_allclose(p.voltage_slope, (up.voltage - down.voltage) / (2 * d), rtol=1e-5)
    assert_allclose(p.heat_slope, (up.heat_in - down.heat_in) / (2 * d), rtol=1e-5)


def test_take_picks_designs(batch):
    p = solve(batch, "film", "film", "matched")
    assert_allclose(p.take([5, 2]).power, p.power[[5, 2]], rtol=0)


def test_a_path_of_nearly_no_resistance(equal_legs, change):
    """There the rounding of temperatures alone makes heats; without any resistance the answer is the same."""
    r = np.random.default_rng(5)
    size = 400
    bare = equal_legs(200e-6, 1e-5, 1.5, r.uniform(1e-3, 5e-3, size))
    ones, hot, cold = np.ones(size), r.uniform(400, 550, size), r.uniform(290, 330, size)
    load = Matched().law(ones, ones)
    held = operating_point(bare, law(ones, 0.0, hot, ones), law(ones, 0.0, cold, ones), load)
    tight = change(bare, contact_thermal=10 ** r.uniform(-16, -13, size))
    films = (law(1e8, 1.0, 1e8 * t, ones) for t in (hot, cold))  # W/K
    assert_allclose(operating_point(tight, *films, load).power, held.power, rtol=1e-8)
