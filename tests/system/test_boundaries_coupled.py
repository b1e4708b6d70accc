"""Operating points between boundaries that are no straight lines, and between several kinds in one batch."""

from itertools import product

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.errors import ConvergenceError
from tegdesign.system.boundary import Film, HeatSink, Irradiance, NaturalConvection, Radiation, Surface
from tegdesign.system.law import join
from tegdesign.system.load import BestEfficiency, GivenCurrent, Matched, Resistance
from tegdesign.system.operating_point import operating_point

SIGMA = 5.670374419e-8  # W/m^2/K^4, CODATA 2018
SOURCES = {
    "glow": Radiation(temperature="1100 K", emittance=0.8),
    "glow and gas": Radiation(temperature="900 K", emittance=0.7, coefficient="25 W/m2/K", air_temperature="750 K"),
    "light": Irradiance(
        irradiance="900 W/m2", aperture="1.5 m2", concentration=40, transmittance=0.92, absorptance=0.95,
        emittance=0.12, coefficient="3 W/m2/K",
    ),
    "light behind a plate": Irradiance(
        irradiance="900 W/m2", aperture="1.5 m2", concentration=40, absorptance=0.95, emittance=0.9,
        wall_resistance="0.05 K/W", wall_areal_resistance="2e-4 m2 K/W",
    ),
    "gas": Film(temperature="560 K", coefficient="900 W/m^2/K"),
    "wall": Surface(temperature="600 K", wall_areal_resistance="3e-3 m2 K/W"),
}  # fmt: skip
SINKS = {
    "space": Radiation(temperature="4 K", emittance=0.9, area="2 m2"),
    "still air": NaturalConvection(
        temperature="295 K", coefficient="5 W/m2/K", reference_difference="20 K", area_enlargement=12,
        fin_efficiency=0.9, emittance=0.8, area="1.5 m2",
    ),
    "turbulent": NaturalConvection(
        temperature="300 K", coefficient="6 W/m2/K", reference_difference="30 K", exponent=0.3333, area="4 m2"
    ),
    "tabled": HeatSink(
        temperature="295 K", heat=["50 W", "200 W", "1 kW", "20 kW"], difference=["9 K", "26 K", "90 K", "800 K"]
    ),
    "water": Film(temperature="290 K", coefficient="1500 W/m2/K"),
}  # fmt: skip
LOADS = {
    "matched": Matched(),
    "efficiency": BestEfficiency(),
    "resistance": Resistance(resistance="2 ohm"),
    "open": GivenCurrent(current="0 A"),
}
SIZE = 40


@pytest.fixture(scope="module")
def batch(random_modules):
    return random_modules(SIZE, seed=23)


def laws(batch, source, sink):
    ones = np.ones(batch.size)
    return SOURCES[source].law(batch.footprint, ones), SINKS[sink].law(batch.footprint, ones)


@pytest.mark.parametrize("load", LOADS)
def test_first_and_second_law_for_every_pair(random_modules, load):
    pairs, each = list(product(SOURCES, SINKS)), 10
    many = random_modules(each * len(pairs), seed=31)
    parts = [laws(many.take(np.arange(each) + each * k), *pair) for k, pair in enumerate(pairs)]
    sides, ones = [join([part[k] for part in parts]) for k in (0, 1)], np.ones(many.size)
    p = operating_point(many, *sides, LOADS[load].law(ones, ones))
    missing = p.heat_in - p.heat_out - p.power - p.current**2 * many.lead_resistance
    assert np.all(np.abs(missing) <= 1e-9 * p.heat_in)
    assert np.all(np.abs(p.balance_residual) <= 1e-9 * p.heat_in)
    for law, face, heat in ((sides[0], p.hot_face, p.heat_in), (sides[1], p.cold_face, -p.heat_out)):
        misfit, by_face, by_heat = law.evaluate(face, heat)
        assert np.all(np.abs(misfit) <= 1e-9 * (np.abs(by_face * face) + np.abs(by_heat * heat)))
    assert np.all(p.heat_out / p.cold_face > p.heat_in / p.hot_face)
    assert p.iterations.max() <= 15


@pytest.mark.parametrize("load", LOADS)
def test_kinds_mixed_in_one_batch_are_what_they_are_alone(batch, load):
    few = [batch.take(np.arange(5) + 5 * k) for k in range(len(SOURCES))]
    ones = np.ones(5)
    sinks = list(SINKS.values())
    sides = [
        (hot.law(m.footprint, ones), sinks[k % len(sinks)].law(m.footprint, ones))
        for k, (m, hot) in enumerate(zip(few, SOURCES.values(), strict=True))
    ]
    whole, many = batch.take(np.arange(5 * len(few))), np.ones(5 * len(few))
    own = LOADS[load].law(many, many)
    together = operating_point(whole, join([s[0] for s in sides]), join([s[1] for s in sides]), own)
    for k, (m, pair) in enumerate(zip(few, sides, strict=True)):
        alone = operating_point(m, *pair, LOADS[load].law(ones, ones))
        for name in ("hot_junction", "cold_junction", "current", "heat_in", "heat_out"):
            assert_allclose(getattr(together, name)[5 * k : 5 * k + 5], getattr(alone, name), rtol=1e-9, atol=1e-12)


@pytest.mark.parametrize(("source", "sink"), [("glow", "space"), ("light", "still air"), ("gas", "tabled")])
def test_convergence_is_quadratic(batch, source, sink):
    """The error of each round is a multiple of the square of the one before (open circuit: slopes are exact)."""
    sides, load = laws(batch, source, sink), LOADS["open"].law(np.ones(SIZE), np.ones(SIZE))
    answer = operating_point(batch, *sides, load)
    start = (answer.hot_junction + 25.0, answer.cold_junction + 9.0, np.zeros(SIZE))
    errors = []
    for rounds in range(1, 6):
        p = operating_point(batch, *sides, load, guess=start, max_iterations=rounds, check=False)
        error = np.hypot(p.hot_junction - answer.hot_junction, p.cold_junction - answer.cold_junction)
        errors.append(np.median(error))
    order = [np.log(c / b) / np.log(b / a) for a, b, c in zip(errors, errors[1:], errors[2:], strict=False) if c > 1e-9]
    assert errors[-1] < 1e-9
    assert max(order) > 1.8
    assert errors[2] < 1e-2 * errors[1] < 1e-3 * errors[0]


@pytest.mark.parametrize(("source", "sink"), [("glow", "space"), ("glow and gas", "still air"), ("light", "tabled")])
def test_the_guess_does_not_matter(batch, source, sink):
    sides = laws(batch, source, sink)
    for load in ("matched", "open"):
        own = LOADS[load].law(np.ones(SIZE), np.ones(SIZE))
        known = operating_point(batch, *sides, own)
        for hot, cold, factor in ((350.0, 340.0, 0.0), (900.0, 200.0, 2.0), (700.0, 600.0, 0.1)):
            guess = (np.full(SIZE, hot), np.full(SIZE, cold), factor * known.current)
            again = operating_point(batch, *sides, own, guess=guess)
            for name in ("hot_junction", "cold_junction", "current"):
                assert_allclose(getattr(again, name), getattr(known, name), rtol=1e-8, atol=1e-12, err_msg=name)


def test_constant_legs_between_radiation_and_still_air_against_scipy(equal_legs):
    """Closed form of the leg and the balances of both sides written out here, solved by scipy.optimize.root."""
    from scipy.optimize import root

    seebeck, rho, kappa, length = 190e-6, 1.1e-5, 1.6, np.array([0.8e-3, 2e-3, 6e-3])
    m, ones = equal_legs(seebeck, rho, kappa, length), np.ones(3)
    area, footprint, ohms = 1e-6, 2 * 1.2e-3**2, 0.02
    hot = Radiation(temperature="1000 K", emittance=0.9, area="2 cm2")
    cold = NaturalConvection(
        temperature="300 K", coefficient="8 W/m2/K", reference_difference="25 K", emittance=0.7, area="30 cm2",
        wall_areal_resistance="1e-4 m2 K/W",
    )  # fmt: skip
    p = operating_point(
        m, hot.law(m.footprint, ones), cold.law(m.footprint, ones), Resistance(resistance="20 mohm").law(ones, ones)
    )
    for k in range(3):
        conductance, resistance = 2 * kappa * area / length[k], 2 * rho * length[k] / area

        def balances(x, conductance=conductance, resistance=resistance):
            th, tc, i = x[0] * 500, x[1] * 400, x[2]
            pumped, joule, through = 2 * seebeck * i, i**2 * resistance / 2, conductance * (th - tc)
            taken = 0.9 * SIGMA * 2e-4 * (1000.0**4 - th**4)
            out = through + pumped * tc + joule
            base = tc - 1e-4 / footprint * out
            given = 30e-4 * (8 * ((base - 300) / 25) ** 0.25 * (base - 300) + 0.7 * SIGMA * (base**4 - 300.0**4))
            return taken - through - pumped * th + joule, given - out, 2 * seebeck * (th - tc) - i * (resistance + ohms)

        own = root(balances, [p.hot_junction[k] / 500 * 1.02, p.cold_junction[k] / 400 * 0.99, 1.0], tol=1e-14)
        assert np.abs(balances(own.x)).max() < 1e-12
        assert_allclose(
            [p.hot_junction[k], p.cold_junction[k], p.current[k]], own.x * [500, 400, 1], rtol=1e-9
        )


def test_what_a_table_does_not_reach_is_refused(batch):
    small = HeatSink(temperature="295 K", heat=["0.5 W", "1 W"], resistance=["2 K/W", "1.8 K/W"])
    ones = np.ones(SIZE)
    sides = SOURCES["gas"].law(batch.footprint, ones), small.law(batch.footprint, ones)
    with pytest.raises(ConvergenceError, match=r"design number \d+ asks for .* W out per module.*table.*more heat"):
        operating_point(batch, *sides, Matched().law(ones, ones))
    p = operating_point(batch, *sides, Matched().law(ones, ones), check=False)
    assert np.all(p.converged == (p.heat_out <= 1.0))


def test_poor_emittance_and_much_flow_are_their_limits(batch):
    ones = np.ones(SIZE)
    load = Matched().law(ones, ones)
    cold = SINKS["water"].law(batch.footprint, ones)

    def power(source):
        return operating_point(batch, source.law(batch.footprint, ones), cold, load).power

    gas = power(Film(temperature="700 K", coefficient="60 W/m2/K"))
    grey = power(Radiation(temperature="700 K", emittance=1e-12, coefficient="60 W/m2/K"))
    assert_allclose(grey, gas, rtol=1e-9)
    thin = power(Film(temperature="700 K", coefficient="60 W/m2/K", wall_areal_resistance="1e-13 m2 K/W"))
    assert_allclose(thin, gas, rtol=1e-9)
    constant = power(
        NaturalConvection(temperature="700 K", coefficient="60 W/m2/K", reference_difference="9 K", exponent=0)
    )
    assert_allclose(constant, gas, rtol=1e-9)
    straight = power(HeatSink(temperature="700 K", heat=["1 W", "2 W", "1e5 W"], resistance=["4 K/W"] * 3))
    assert_allclose(straight, power(Surface(temperature="700 K", wall_resistance="4 K/W")), rtol=1e-9)
