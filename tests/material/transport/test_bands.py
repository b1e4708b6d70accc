import mpmath
import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal
from scipy.integrate import quad, quad_vec

from tegdesign.errors import ConvergenceError, DataRangeError, InputError
from tegdesign.material.curve import Curve
from tegdesign.material.transport.band import Band
from tegdesign.material.transport.bands import Bands
from tegdesign.material.transport.constants import BOLTZMANN, CHARGE, ELECTRON_MASS, HBAR
from tegdesign.material.transport.fermi import fermi_integral
from tegdesign.material.transport.law import Linear, Power
from tegdesign.material.transport.neutrality import solve
from tegdesign.material.transport.scattering.acoustic import Acoustic
from tegdesign.material.transport.scattering.ionised import IonisedImpurity
from tegdesign.material.transport.scattering.mobility import Mobility
from tegdesign.material.transport.window import fermi_window

MOBILE = (Mobility(0.1),)


def window(energy, mu, kt):
    t = np.exp(-abs((energy - mu) / kt))
    return t / (1 + t) ** 2 / kt


# Outside reference: scipy.integrate.quad_vec of the transport distribution over energy, every band and every L_j.
@pytest.mark.parametrize(("temperature", "mu"), [(300.0, 0.31), (300.0, 0.05), (700.0, 0.2), (500.0, -0.15)])
def test_transport_integrals_equal_adaptive_quadrature(narrow_gap, temperature, mu):
    kt, mu = BOLTZMANN * temperature, mu * CHARGE
    found = narrow_gap.at(temperature, mu)
    total = np.zeros(3)
    for b, edge in enumerate(narrow_gap.edges(temperature)):
        sign = narrow_gap.bands[b].sign

        def integrand(z, b=b, edge=edge, sign=sign):
            e = float(edge + sign * z * kt)
            xi = narrow_gap.transport_distribution(np.array([e]), temperature, mu)[b, 0]
            return xi * window(e, mu, kt) * kt * ((e - mu) / kt) ** np.arange(3)

        level = max(sign * (mu - edge) / kt, 0.5)
        for part in ((0, level), (level, level + 12), (level + 12, level + 40)):
            total += quad_vec(integrand, *part, epsrel=1e-11)[0] * (kt / CHARGE) ** np.arange(3)
    assert_allclose(found.transport_integrals, total, rtol=1e-9)


def test_thousands_of_points_equal_single_ones(narrow_gap):
    rng = np.random.default_rng(5)
    t, mu = rng.uniform(250, 900, (3, 700)), rng.uniform(-0.3, 0.6, (3, 700)) * CHARGE
    found = narrow_gap.at(t, mu, 1e-6)
    for k in [(0, 0), (1, 511), (2, 699), (0, 0)]:
        one = narrow_gap.at(t[k], mu[k])  # the grain size given above is that of the mechanism
        assert one.conductivity.shape == ()
        assert_allclose(found.conductivity[k], one.conductivity, rtol=1e-12)
        assert_allclose(found.seebeck_coefficient[k], one.seebeck_coefficient, rtol=1e-12, atol=1e-15)
        assert_allclose(found.density[(slice(None), *k)], one.density, rtol=1e-12)


def test_quadrature_table_is_not_changed_by_use():
    before = [fermi_window(level) for level in (0.1, 55.0)]
    again = [fermi_window(level) for level in (0.1, 55.0)]  # single levels must not be views into the table
    for one, other in zip(before, again, strict=True):
        assert_array_equal(one.weight, other.weight)
        assert_array_equal(one.energy, other.energy)


# Outside reference: mpmath; n = N 2 (2 pi m k T / h^2)^1.5 F_1/2 normalised, textbook form.
def test_carriers_of_parabolic_bands():
    bands = Bands((Band("electron", 0.3, MOBILE, degeneracy=6), Band("hole", 0.5, MOBILE)), gap=0.4 * CHARGE)
    kt = BOLTZMANN * 500.0
    n, p = bands.carriers(500.0, 0.37 * CHARGE)
    for value, mass, many, level in ((n, 0.3, 6, -0.03 * CHARGE / kt), (p, 0.5, 1, -0.37 * CHARGE / kt)):
        states = 2 * many * (mass * ELECTRON_MASS * kt / (2 * np.pi * HBAR**2)) ** 1.5
        expected = states * float(-mpmath.polylog(1.5, -mpmath.exp(level)).real)
        assert_allclose(value, expected, rtol=1e-10)


# Outside reference: scipy.integrate.quad of the Kane density of states, Ravich et al. 1970 (memory).
def test_carriers_of_a_kane_band():
    bands = Bands((Band("electron", 0.2, MOBILE, kane_gap=0.3 * CHARGE),))
    kt = BOLTZMANN * 600.0
    a, eta = kt / (0.3 * CHARGE), 2.5

    def states(z):
        return np.sqrt(z * (1 + a * z)) * (1 + 2 * a * z) / (1 + np.exp(z - eta))

    integral = quad(states, 0, 3, epsrel=1e-12)[0] + quad(states, 3, 60, epsrel=1e-12, limit=200)[0]
    expected = (2 * 0.2 * ELECTRON_MASS * kt) ** 1.5 / (2 * np.pi**2 * HBAR**3) * integral
    assert_allclose(bands.carriers(600.0, eta * kt)[0], expected, rtol=1e-10)


def test_chemical_potential_gives_the_doping_back(narrow_gap):
    t = np.array([150.0, 300, 600, 1000])
    doping = np.array([-3e26, -1e25, -1e22, 1e15, 1e23, 1e25, 8e26])[:, None]
    found = narrow_gap.doped(t, doping)
    # With few dopants n - p is a small difference; the scale is then that of the carriers.
    scale = found.electron_density + found.hole_density
    assert np.max(np.abs(found.net_doping - doping) / scale) < 1e-10
    assert np.all(np.diff(found.chemical_potential, axis=0) > 0)


def test_intrinsic_level_of_equal_masses_lies_in_the_middle_of_the_gap():
    bands = Bands((Band("electron", 0.3, MOBILE), Band("hole", 0.3, MOBILE)), gap=1.1 * CHARGE)
    found = bands.doped([50.0, 300.0, 1000.0], 0.0)
    assert_allclose(found.chemical_potential, 0.55 * CHARGE, rtol=1e-12)
    assert_allclose(found.electron_density, found.hole_density, rtol=1e-12)
    assert_allclose(found.seebeck_coefficient, 0, atol=1e-15)


# Closed form: both carriers classical, n p = n_i^2, n = N/2 + sqrt(N^2/4 + n_i^2).
def test_mass_action_of_a_wide_gap():
    bands = Bands((Band("electron", 0.3, MOBILE), Band("hole", 0.6, MOBILE)), gap=0.7 * CHARGE)
    pure, found = bands.doped(600.0, 0.0), bands.doped(600.0, 1e20)
    squared = pure.electron_density * pure.hole_density
    assert_allclose(found.electron_density, 0.5e20 + np.sqrt(0.25e40 + squared), rtol=1e-4)


def test_one_kind_of_carrier_up_to_a_metal():
    bands = Bands((Band("hole", 1.0, MOBILE),))
    found = bands.doped(300.0, [-1e20, -1e24, -1e30])
    assert_allclose(found.hole_density, [1e20, 1e24, 1e30], rtol=1e-11)
    metal = HBAR**2 * (3 * np.pi**2 * 1e30) ** (2 / 3) / (2 * ELECTRON_MASS)  # free-electron Fermi energy
    assert_allclose(found.chemical_potential[2], -metal, rtol=1e-5)


def test_edges_and_gap_follow_temperature(narrow_gap):
    edge = narrow_gap.edges([300.0, 500.0]) / CHARGE
    assert_allclose(edge, [[0.30, 0.38], [0, 0], [-0.09, -0.05]], rtol=1e-12, atol=1e-18)


def test_laws_of_temperature():
    gap = Curve(np.array([300.0, 700.0]), np.array([0.3, 0.2]) * CHARGE)
    bands = Bands((Band("electron", Power(0.2, 0.5), MOBILE), Band("hole", 0.2, MOBILE)), gap=gap)
    assert_allclose(bands.edges([500.0])[0], 0.25 * CHARGE, rtol=1e-12)
    ratio = (
        bands.carriers(600.0, 0.0)[0]
        / Bands((Band("electron", 0.2 * 2**0.5, MOBILE),)).carriers(600.0, -0.225 * CHARGE)[0]
    )
    assert_allclose(ratio, 1, rtol=1e-12)
    with pytest.raises(DataRangeError, match=r"gap \[J\] at 800 K: its table goes from 300 K to 700 K"):
        bands.edges(800.0)


def test_bipolar_part_is_what_the_bands_alone_do_not_give(narrow_gap):
    mu = np.linspace(0, 0.4, 9) * CHARGE
    both = narrow_gap.at(600.0, mu)
    integrals = np.zeros((3, 9))
    alone = np.zeros(9)
    for channel in both.channels:
        unit = BOLTZMANN * 600.0 / CHARGE
        l0 = channel.conductance
        l1 = l0 * channel.distance * unit
        l2 = (channel.spread + channel.conductance * channel.distance**2) * unit**2
        integrals += [l0, l1, l2]
        alone += (l2 - l1**2 / l0) / 600.0
    # L_j of bands add; S and kappa_e come out once, at the end.
    assert_allclose(both.transport_integrals, integrals, rtol=1e-12, atol=1e-9)
    assert_allclose(both.seebeck_coefficient, -integrals[1] / integrals[0] / 600.0, rtol=1e-9, atol=1e-12)
    total = (integrals[2] - integrals[1] ** 2 / integrals[0]) / 600.0
    assert_allclose(both.electronic_thermal_conductivity, total, rtol=1e-9)
    assert_allclose(both.bipolar_thermal_conductivity, total - alone, rtol=1e-7)
    assert both.bipolar_share.max() > 0.3


# Classical two-band limit: sigma_n sigma_p / sigma T (S_p - S_n)^2, Price 1956 (memory).
def test_bipolar_part_of_two_bands():
    bands = Bands((Band("electron", 0.3, MOBILE), Band("hole", 0.3, MOBILE)), gap=0.6 * CHARGE)
    found = bands.doped(900.0, 0.0)
    n, p = found.channels
    difference = (n.distance - p.distance) * BOLTZMANN / CHARGE
    expected = n.conductance * p.conductance / found.conductivity * difference**2 * 900.0
    assert_allclose(found.bipolar_thermal_conductivity, expected, rtol=1e-12)
    assert_allclose(difference * CHARGE / BOLTZMANN, 0.6 * CHARGE / (BOLTZMANN * 900) + 4, rtol=1e-2)


def test_equal_bands_add_like_valleys():
    one = Bands((Band("electron", 0.3, MOBILE, degeneracy=2),)).at(300.0, 1e-21)
    two = Bands((Band("electron", 0.3, MOBILE), Band("electron", 0.3, MOBILE))).at(300.0, 1e-21)
    assert_allclose(two.conductivity, one.conductivity, rtol=1e-13)
    assert_allclose(two.electronic_thermal_conductivity, one.electronic_thermal_conductivity, rtol=1e-12)
    assert two.bipolar_thermal_conductivity == 0


def test_smaller_grains_conduct_less(narrow_gap):
    found = narrow_gap.at(300.0, 0.31 * CHARGE, np.array([1e-8, 1e-7, 1e-6, 1e-3])).conductivity
    assert np.all(np.diff(found) > 0)
    assert found[0] < 0.5 * found[-1]


# Mott's formula S = -(pi^2/3) (k/e) kT d ln Xi / dE, by a numerical derivative of the distribution.
def test_mott_limit(narrow_gap):
    for mu, t in ((0.7, 20.0), (-0.6, 20.0)):
        step = 1e-4 * CHARGE
        xi = [narrow_gap.transport_distribution(mu * CHARGE + d, t, mu * CHARGE).sum() for d in (-step, step)]
        slope = np.log(xi[1] / xi[0]) / (2 * step)
        mott = -(np.pi**2) / 3 * BOLTZMANN**2 * t / CHARGE * slope
        assert_allclose(narrow_gap.at(t, mu * CHARGE).seebeck_coefficient, mott, rtol=1e-3)


# Non-degenerate limit: |S| = (k/e) (r + 5/2 - eta), L = (r + 5/2) (k/e)^2.
@pytest.mark.parametrize("exponent", [-0.5, 0.0, 0.37, 1.5])
def test_non_degenerate_limit(exponent):
    found = Bands((Band("electron", 0.3, (Mobility(0.1, energy_exponent=exponent),)),)).at(300.0, -25 * BOLTZMANN * 300)
    assert_allclose(found.reduced_seebeck, -(exponent + 2.5 + 25), rtol=1e-10)
    assert_allclose(found.lorenz_number / (BOLTZMANN / CHARGE) ** 2, exponent + 2.5, rtol=1e-9)


def test_conductivity_of_a_given_mobility():
    # sigma = n e mu_0 (4/3) F_0... : for tau ~ E^0 the mobility is that of every carrier, so sigma = n e mu exactly.
    found = Bands((Band("electron", 0.3, (Mobility(0.05, -1.5, 0.0),)),)).doped(450.0, 1e25)
    assert_allclose(found.conductivity, 1e25 * CHARGE * 0.05 * 1.5**-1.5, rtol=1e-10)


def test_conductivity_of_acoustic_scattering():
    # sigma = 2 N hbar C_l e^2 F_0 / (3 pi m_I Xi^2), e.g. Pei, Wang, Snyder 2012, Adv. Mater. 24, 6125 (memory).
    potential, elastic = 15 * CHARGE, 7e10
    bands = Bands((Band("hole", 0.3, (Acoustic(potential, elastic),), 0.12, 4),))
    found = bands.at(400.0, -0.7 * BOLTZMANN * 400.0).conductivity
    unit = 2 * 4 * HBAR * elastic * CHARGE**2 / (3 * np.pi * 0.12 * ELECTRON_MASS * potential**2)
    assert_allclose(found, unit * fermi_integral(0, 0.7), rtol=1e-10)


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (
            lambda: Band("electron", -0.1, MOBILE, name="L"),
            r"mass of band L is -0\.1 but must be finite and above 0; give",
        ),
        (lambda: Band("hole", 0.1, MOBILE, inertial_mass=0.0), "inertial_mass of the hole band is 0 but"),
        (lambda: Band("hole", 0.1, MOBILE, kane_gap=-1.0), "kane_gap of the hole band is -1 but"),
        (lambda: Band("hole", 0.1, MOBILE, degeneracy=0), "degeneracy of the hole band is 0 but"),
        (lambda: Band("ion", 0.1, MOBILE), "carrier of the ion band is 'ion'; write"),
        (lambda: Band("hole", 0.1, ()), "scattering of the hole band is empty; give"),
        (lambda: Bands(()), "bands is empty; give"),
        (
            lambda: Bands((Band("hole", 1, MOBILE), Band("electron", 1, MOBILE))),
            "gap is missing .* give the gap",
        ),
        (lambda: Bands((Band("hole", 1, MOBILE),), gap=-0.1), r"gap \[J\] is -0\.1 but must be .* above 0"),
        (lambda: Power(1.0, 1.0, 0.0), "reference temperature of a power law"),
    ],
)
def test_impossible_parameters(make, words):
    with pytest.raises(InputError, match=words):
        make()


ONE = Bands((Band("electron", 0.3, MOBILE),))
CLOSING = Bands((Band("electron", 1, MOBILE), Band("hole", 1, MOBILE)), gap=Linear(0.2 * CHARGE, -4e-4 * CHARGE))
TOUCHING = Bands((Band("electron", 1, MOBILE), Band("hole", 1, MOBILE, offset=-0.3 * CHARGE)), gap=0.2 * CHARGE)
WIDE = Bands((Band("electron", 1, MOBILE), Band("hole", 1, MOBILE)), gap=3 * CHARGE)


@pytest.mark.parametrize(
    ("ask", "words"),
    [
        (lambda: ONE.at(-5.0, 0.0), r"temperature \[K\] is -5 but"),
        (
            lambda: ONE.at(300.0, -1.0 * CHARGE * 20),
            "no carriers at 300 K: .* 773.6 kT outside of every band .* raise",
        ),
        (lambda: ONE.at(300.0, 0.0, 0.0), r"grain_size \[m\] is 0 but"),
        (
            lambda: ONE.doped([300.0, 400.0], [1e24, -1e24]),
            r"no carriers: net doping -1e\+24 .* above 0 \(donors\); mend",
        ),
        (lambda: ONE.doped(300.0, 0.0), "no carriers: net doping 0 1/m"),
        (
            lambda: CLOSING.edges([300.0, 600.0]),
            r"gap \[J\] is -6.40871e-21 at 600 K but must be .* above 0; mend",
        ),
        (lambda: TOUCHING.edges(300.0), r"gap left by the offsets of the bands \[J\] is -1.6"),
        (lambda: WIDE.doped(20.0, 0.0), "no carriers at 20 K without doping: the gap is too wide; give"),
        (
            lambda: Bands((Band("electron", Linear(0.5, -1e-3), MOBILE, name="X"),)).at([300.0, 700.0], 0.0),
            "mass of band X is -0.2 at 700 K but must be",
        ),
        (
            lambda: Bands(
                (Band("electron", 1, (IonisedImpurity(10.0),)), Band("hole", 1, (IonisedImpurity(10.0),))),
                0.2 * CHARGE,
            ).at(300.0, 0.1 * CHARGE),
            "scattering of the electron band is 0 1/s but must be above 0",
        ),
    ],
)
def test_questions_without_an_answer(ask, words):
    with pytest.raises(InputError, match=words):
        ask()


def test_neutrality_says_when_it_does_not_converge():
    def count(mu, chosen):
        return np.exp(mu / 1e-21)[None, :], np.full((1, chosen.size), 1e25)

    with pytest.raises(
        ConvergenceError, match=r"charge neutrality not reached in 3 steps at 300 K and net doping 1e\+24"
    ):
        solve(count, np.array([300.0]), np.array([1e24]), np.zeros((1, 1)), np.array([1.0]), iterations=3)
