"""Limits, conservation, symmetry and convergence of the exact leg."""

import re
from itertools import pairwise

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal
from scipy.integrate import quad

from tegdesign.errors import ConvergenceError
from tegdesign.leg.closed_form import couple
from tegdesign.leg.exact import solve_leg
from tegdesign.leg.nodes import integration
from tegdesign.leg.panels import gauss_rule
from tegdesign.material import library
from tegdesign.material.curve import Curve
from tegdesign.material.material import Material

RESULTS = ("cold_heat", "hot_heat", "power", "voltage", "resistance", "seebeck_hot", "seebeck_cold")


def random_legs(material, size, seed=1, most=0.6):
    """Return hot and cold ends inside the range and currents up to ``most`` of short circuit."""
    rng = np.random.default_rng(seed)
    first, last = material.range
    difference = (last - first) * (0.05 + 0.95 * rng.random(size))
    cold = first + (last - first - difference) * rng.random(size)
    rest = solve_leg(material, cold + difference, cold, 0.0)
    return cold + difference, cold, most * rng.random(size) * rest.voltage / rest.resistance


@pytest.fixture(scope="module")
def constant(make):
    t = np.linspace(200.0, 1000.0, 33)
    return make((t, [200e-6] * 33), (t, [1e-5] * 33), (t, [1.5] * 33))


@pytest.fixture(scope="module")
def curved(make):
    t = [300.0, 500.0, 700.0, 900.0]
    return make((t, [120e-6, 190e-6, 230e-6, 210e-6]), (t, [0.8e-5, 1.3e-5, 1.8e-5, 2.2e-5]), (t, [3.0, 2.2, 1.9, 2.1]))


def test_constant_properties_are_the_closed_form(constant):
    # q L = kappa dT + j S T -+ j^2 rho / 2, r = rho: parabola of temperature, any textbook
    j = np.linspace(-3000.0, 4000.0, 15)  # 4000 A/m is short circuit
    hot, cold = 500.0, 300.0
    leg = solve_leg(constant, hot, cold, j)
    assert_allclose(leg.resistance, 1e-5, rtol=1e-12)
    assert_allclose(leg.voltage, 0.04, rtol=1e-13)
    assert_allclose(leg.cold_heat, 1.5 * 200 + j * 200e-6 * cold + j**2 * 1e-5 / 2, rtol=1e-11)
    assert_allclose(leg.hot_heat, 1.5 * 200 + j * 200e-6 * hot - j**2 * 1e-5 / 2, rtol=1e-11)


def test_couple_of_constant_properties_is_the_closed_form(constant, make):
    t = np.linspace(200.0, 1000.0, 33)
    other = make((t, [-150e-6] * 33), (t, [2e-5] * 33), (t, [2.0] * 33))
    length_n, length_p, area_n, area_p, hot, cold = 1.5e-3, 2e-3, 2e-6, 1.4e-6, 480.0, 310.0
    closed = couple(350e-6, 2e-5, 1e-5, 2.0, 1.5, area_n, area_p, length_n, length_p)
    current, power, heat = closed.at_load(hot, cold, 1.3)
    p = solve_leg(constant, hot, cold, current * length_p / area_p)
    n = solve_leg(other, hot, cold, -current * length_n / area_n)
    assert_allclose(p.power * area_p / length_p + n.power * area_n / length_n, power, rtol=1e-12)
    assert_allclose(p.hot_heat * area_p / length_p + n.hot_heat * area_n / length_n, heat, rtol=1e-12)


@pytest.mark.parametrize("name", ["lead-telluride-n", "silicon-germanium-p", "tin-selenide-p"])
def test_without_current_it_conducts(name):
    material = library.find(name)
    cold, hot = material.range
    leg = solve_leg(material, hot, cold, 0.0)

    def integral(f):
        points = material.resistivity.temperature
        pieces = pairwise(points)
        return sum(quad(f, a, b, epsabs=0, epsrel=1e-10)[0] for a, b in pieces)

    conducted = integral(material.thermal_conductivity)
    joule = integral(lambda t: material.resistivity(t) * material.thermal_conductivity(t))
    assert_allclose(leg.cold_heat, conducted, rtol=1e-12)
    assert_array_equal(leg.hot_heat, leg.cold_heat)
    assert_allclose(leg.resistance, joule / conducted, rtol=1e-11)
    assert_allclose(leg.voltage, integral(material.seebeck_coefficient), rtol=1e-12)
    assert leg.power == 0


def test_small_difference_has_local_properties(curved):
    # error of the mean is second order in the difference: 0.1 K of 600 K leave less than 1e-7
    middle, difference = 600.0, 0.1
    s, rho, kappa = (
        float(c(middle)) for c in (curved.seebeck_coefficient, curved.resistivity, curved.thermal_conductivity)
    )
    j = s * difference / (2 * rho)
    leg = solve_leg(curved, middle + difference / 2, middle - difference / 2, j)
    assert_allclose(leg.resistance, rho, rtol=1e-6)
    assert_allclose(leg.power, s**2 * difference**2 / (4 * rho), rtol=1e-6)
    assert_allclose(leg.hot_heat + leg.cold_heat, 2 * (kappa * difference + j * s * middle), rtol=1e-6)


def test_heat_balance_to_rounding():
    material = library.find("skutterudite-n")
    hot, cold, j = random_legs(material, 3000, most=1.0)
    leg = solve_leg(material, hot, cold, j, check=False)
    assert leg.converged.mean() > 0.99
    assert_allclose((leg.hot_heat - leg.cold_heat - leg.power) / leg.hot_heat, 0, rtol=0, atol=1e-15)
    assert_allclose(leg.power, j * (leg.voltage - j * leg.resistance), rtol=1e-15)


@pytest.mark.parametrize("name", ["lead-telluride-p", "half-heusler-n"])
def test_mirror_image(name):
    material = library.find(name)
    hot, cold, j = random_legs(material, 200)
    own = solve_leg(material, hot, cold, j, slopes=True)
    image = solve_leg(material, cold, hot, -j, slopes=True)
    assert_allclose(image.hot_heat, -own.cold_heat, rtol=1e-13)
    assert_allclose(image.cold_heat, -own.hot_heat, rtol=1e-13)
    assert_allclose(image.power, own.power, rtol=1e-12)
    assert_allclose(image.voltage, -own.voltage, rtol=1e-13)
    assert_allclose(image.resistance, own.resistance, rtol=1e-13)
    assert_allclose(image.seebeck_hot, own.seebeck_cold, rtol=1e-13)


def test_negative_seebeck_coefficient_is_current_the_other_way():
    material = library.find("germanium-telluride-p")
    s = material.seebeck_coefficient
    flipped = Material(**{**_fields(material), "seebeck_coefficient": Curve(s.temperature, -s.value), "polarity": "n"})
    hot, cold, j = random_legs(material, 200)
    one, two = solve_leg(material, hot, cold, j), solve_leg(flipped, hot, cold, -j)
    for name in ("cold_heat", "hot_heat", "power", "resistance"):
        assert_allclose(getattr(two, name), getattr(one, name), rtol=1e-13)
    assert_allclose(two.voltage, -one.voltage, rtol=1e-13)


def _fields(material):
    return {k: v for k, v in vars(material).items() if not k.startswith("_")}


@pytest.mark.parametrize("name", ["magnesium-silicide-n", "neodymium-telluride-n", "zinc-antimonide-p"])
def test_entropy_is_never_destroyed(name):
    # leaving at the cold end less entering at the hot end; pumping heat (negative current) included
    material = library.find(name)
    hot, cold, j = random_legs(material, 2000, most=1.2)
    j[::3] *= -0.7
    leg = solve_leg(material, hot, cold, j, check=False)
    produced = leg.cold_heat / cold - leg.hot_heat / hot
    assert leg.converged.mean() > 0.9
    assert np.all(produced[leg.converged] > 0)


def test_entropy_production_is_the_integral_of_its_sources(constant):
    # integral of rho J^2 / T + kappa (T'/T)^2 along the leg, on the parabola of constant properties
    hot, cold, j = 500.0, 300.0, 2500.0
    leg = solve_leg(constant, hot, cold, j)

    def source(x):
        t = hot - (hot - cold) * x + j**2 * 1e-5 / (2 * 1.5) * x * (1 - x)
        fall = -(hot - cold) + j**2 * 1e-5 / (2 * 1.5) * (1 - 2 * x)
        return j**2 * 1e-5 / t + 1.5 * (fall / t) ** 2

    assert_allclose(leg.cold_heat / cold - leg.hot_heat / hot, quad(source, 0, 1, epsrel=1e-12)[0], rtol=1e-10)


@pytest.mark.parametrize("size", [2, 3, 511, 513, 1700])
def test_batch_equals_single_legs(size):
    material = library.find("silicon-germanium-n")
    hot, cold, j = random_legs(material, size, most=1.1)
    batch = solve_leg(material, hot, cold, j, slopes=True, check=False)
    for k in np.linspace(0, size - 1, min(size, 40)).astype(int):
        one = solve_leg(material, hot[k], cold[k], j[k], slopes=True, check=False)
        assert one.converged == batch.converged[k]
        for name in RESULTS:
            assert_allclose(getattr(batch, name)[k], getattr(one, name), rtol=1e-11, err_msg=name)
        for name in ("cold_heat_slopes", "resistance_slopes"):
            assert_allclose([s[k] for s in getattr(batch, name)], getattr(one, name), rtol=1e-8, err_msg=name)


def test_same_input_same_digits():
    material = library.find("silicon-germanium-n")
    hot, cold, j = random_legs(material, 1500)
    one, two = solve_leg(material, hot, cold, j), solve_leg(material, hot, cold, j)
    for name in RESULTS:
        assert_array_equal(getattr(one, name), getattr(two, name))


def test_shapes_broadcast(curved):
    hot, cold, j = np.array([[800.0], [700.0]]), 350.0, np.array([0.0, 1000.0, 2000.0])
    leg = solve_leg(curved, hot, cold, j, slopes=True)
    assert leg.power.shape == leg.converged.shape == leg.cold_heat_slopes.hot.shape == (2, 3)
    assert_allclose(leg.power[1, 2], solve_leg(curved, 700.0, 350.0, 2000.0).power, rtol=1e-12)
    assert solve_leg(curved, 800.0, 350.0, 0.0).cold_heat.shape == ()
    assert solve_leg(curved, np.empty(0), np.empty(0), np.empty(0)).power.shape == (0,)


@pytest.mark.parametrize(("points", "order"), [(2, 4), (3, 6), (4, 8)])
def test_order_of_convergence(curved, points, order):
    # Gauss collocation with m points a panel: order 2 m at the ends
    hot, cold = 880.0, 320.0
    rest = solve_leg(curved, hot, cold, 0.0)
    j = 0.5 * rest.voltage / rest.resistance
    fine = solve_leg(curved, hot, cold, j, points=8, subdivide=8, tolerance=1e-14)
    halvings = (4, 8) if points == 2 else (1, 2)  # 2 points on whole panels are too coarse to be accepted
    errors = []
    for subdivide in halvings:
        leg = solve_leg(curved, hot, cold, j, points=points, subdivide=subdivide, tolerance=1e-13)
        errors.append([abs(leg.power / fine.power - 1), abs(leg.cold_heat / fine.cold_heat - 1)])
    coarse, half = np.array(errors)
    assert np.all(coarse < {2: 2e-7, 3: 1e-6, 4: 1e-8}[points])
    assert np.all(np.log2(coarse / half) > order - 0.7)


def test_steep_table_intervals_are_split():
    # resistivity of tin selenide rises threefold within one interval: 1e-6 in power without the split, 4e-8 with it
    material = library.find("tin-selenide-p")
    hot, cold, j = random_legs(material, 500)
    fine = solve_leg(material, hot, cold, j, points=8, subdivide=2)
    assert_allclose(solve_leg(material, hot, cold, j).power, fine.power, rtol=2e-7)


@pytest.mark.parametrize("name", ["bismuth-telluride-p-sb1.58", "lead-telluride-n", "tags-85-p"])
@pytest.mark.parametrize("way", [1, -1])
def test_slopes_against_central_differences(name, way):
    material = library.find(name)
    hot, cold, j = random_legs(material, 60, most=0.9)
    table = material.seebeck_coefficient.temperature
    off = np.min(np.abs(table[:, None] - np.concatenate([hot, cold])), axis=0).reshape(2, -1).min(axis=0) > 0.1
    hot, cold, j = hot[off], cold[off], way * j[off]
    if way < 0:
        hot, cold = cold, hot  # mirrored legs

    def at(h, c, i):
        return solve_leg(material, h, c, i, points=6, tolerance=1e-13)

    leg = solve_leg(material, hot, cold, j, points=6, tolerance=1e-13, slopes=True)
    dt, dj = 2e-3, 1e-5 * np.abs(j) + 1e-3
    for name_, slopes in (("cold_heat", leg.cold_heat_slopes), ("resistance", leg.resistance_slopes)):
        by_hot = (getattr(at(hot + dt, cold, j), name_) - getattr(at(hot - dt, cold, j), name_)) / (2 * dt)
        by_cold = (getattr(at(hot, cold + dt, j), name_) - getattr(at(hot, cold - dt, j), name_)) / (2 * dt)
        by_current = (getattr(at(hot, cold, j + dj), name_) - getattr(at(hot, cold, j - dj), name_)) / (2 * dj)
        for found, expected in ((slopes.hot, by_hot), (slopes.cold, by_cold), (slopes.current, by_current)):
            assert_allclose(found, expected, rtol=2e-6, atol=2e-6 * np.abs(expected).max(), err_msg=name_)


def test_seebeck_at_the_ends_is_the_slope_of_the_voltage():
    material = library.find("tags-85-p")
    leg = solve_leg(material, 700.0, 350.0, 1000.0)
    assert_allclose(leg.seebeck_hot, material.seebeck_coefficient(700.0), rtol=1e-13)
    assert_allclose(leg.seebeck_cold, material.seebeck_coefficient(350.0), rtol=1e-13)


def test_current_too_large_is_told():
    material = library.find("lead-telluride-n")
    with pytest.raises(ConvergenceError) as caught:
        solve_leg(material, [800.0, 800.0], 310.0, [-2000.0, -90000.0])
    message = str(caught.value)
    for part in ("lead-telluride-n", "800 K", "310 K", "-90000 A/m", "1 of 2 legs", "choose a smaller one"):
        assert part in message
    assert "\n" not in message
    legs = solve_leg(material, [800.0, 800.0], 310.0, [-2000.0, -90000.0], check=False)
    assert_array_equal(legs.converged, [True, False])


@pytest.mark.parametrize("j", [0.0, 500.0, -500.0])
def test_no_difference_is_refused(curved, j):
    with pytest.raises(ConvergenceError, match=re.escape("two ends have the same temperature")):
        solve_leg(curved, 500.0, 500.0, j)
    assert not solve_leg(curved, 500.0, 500.0, j, check=False).converged


def test_hardly_any_difference_is_right(curved):
    # 1e-6 K: conduction against Peltier heat, temperature still falls all the way
    j = 1e-3
    leg = solve_leg(curved, 500.0 + 1e-6, 500.0, j)
    assert_allclose(leg.resistance, 1.3e-5, rtol=1e-6)
    assert_allclose(leg.cold_heat, 2.2e-6 + j * 190e-6 * 500.0, rtol=1e-6)


def test_an_open_iteration_is_not_called_converged(curved):
    leg = solve_leg(curved, 880.0, 320.0, 3000.0, max_iterations=1, tolerance=1e-13, check=False)
    assert not leg.converged


@pytest.mark.parametrize("size", [3, 400])
def test_integrals_over_panels_are_those_of_the_matrix(size):
    """Small batches go through one matrix, large ones panel by panel; polynomials of degree 3 are exact in both."""
    panels, points = 14, 4
    rule = integration(points, panels)
    x = (np.arange(panels)[:, None] + gauss_rule(points)[0]).ravel()  # panels of width one
    powers = np.linspace(0, 3, size).round()
    got = rule.running(x[:, None] ** powers)
    assert (rule.matrix.size * size > 200_000) == (size == 400)
    assert_allclose(got[:-1], x[:, None] ** (powers + 1) / (powers + 1), rtol=1e-12)
    assert_allclose(got[-1], panels ** (powers + 1) / (powers + 1), rtol=1e-12)
    assert_allclose(rule.whole(x[:, None] ** powers), got[-1], rtol=1e-12)
