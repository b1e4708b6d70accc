import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad

from tegdesign.errors import InputError
from tegdesign.material.transport.band import Band
from tegdesign.material.transport.constants import BOLTZMANN, CHARGE, ELECTRON_MASS, HBAR, VACUUM_PERMITTIVITY
from tegdesign.material.transport.scattering.acoustic import Acoustic
from tegdesign.material.transport.scattering.alloy import Alloy
from tegdesign.material.transport.scattering.angle import angle_integral
from tegdesign.material.transport.scattering.grain import GrainBoundary
from tegdesign.material.transport.scattering.ionised import IonisedImpurity
from tegdesign.material.transport.scattering.mobility import Mobility
from tegdesign.material.transport.scattering.polar import PolarOptical
from tegdesign.material.transport.scattering.states import Surroundings

T = np.array([400.0])
KT = BOLTZMANN * 400.0
ENERGY = np.array([[1e-4, 0.02, 0.3, 1.0, 4.0, 20.0]])
# 1e24 electrons that screen as a classical gas would, n / kT.
AROUND = Surroundings(np.array([[1e24]]), np.array([[1e24 / KT]]))
EPS = 16 * VACUUM_PERMITTIVITY


def states(kane_gap=None):
    return Band("electron", 0.2, (Mobility(1.0),), 0.15, 3, kane_gap=kane_gap).states(T, ENERGY)


def golden_rule(kane_gap, squared):
    """1/tau by integration over the angle; ``squared(q2)`` is |matrix element|^2 times the volume [J^2 m^3]."""
    mass, result = 0.2 * ELECTRON_MASS, []
    for energy in ENERGY[0] * KT:
        alpha = 1 / kane_gap if kane_gap else 0.0
        gamma, slope = energy * (1 + alpha * energy), 1 + 2 * alpha * energy
        k2 = 2 * mass * gamma / HBAR**2
        states_of_one_spin = (2 * mass) ** 1.5 / (4 * np.pi**2 * HBAR**3) * np.sqrt(gamma) * slope
        mixing = 2 * alpha * energy * (1 + alpha * energy) / slope**2
        screened = CHARGE**2 / EPS * 1e24 / KT

        def integrand(logq, k2=k2, mixing=mixing, screened=screened):
            # q^2 = 2 k^2 (1 - cos) on a logarithmic axis, since screened scattering is forward
            loss = np.exp(logq) / (2 * k2)
            return squared(np.exp(logq), screened) * loss * (1 - mixing * loss) * np.exp(logq) / (4 * k2)

        top = np.log(4 * k2)
        mean = sum(quad(integrand, top - a, top - b, epsrel=1e-12)[0] for a, b in ((30, 8), (8, 3), (3, 1), (1, 0)))
        result.append(2 * np.pi / HBAR * states_of_one_spin * mean)
    return np.array([result])


GAPS = [None, 0.2 * CHARGE]


# Outside reference for the four elastic mechanisms: the golden rule, integrated over the angle by scipy.integrate.quad.
@pytest.mark.parametrize("gap", GAPS)
def test_acoustic(gap):
    expected = golden_rule(gap, lambda q2, s: KT * (12 * CHARGE) ** 2 / 6e10)
    assert_allclose(Acoustic(12 * CHARGE, 6e10).rate(states(gap), AROUND), expected, rtol=1e-9)


@pytest.mark.parametrize("gap", GAPS)
def test_alloy(gap):
    # Prefactor of Harrison and Hauser 1976: 3 pi^2 / 8 times the golden rule with x (1 - x) Omega U^2.
    expected = golden_rule(gap, lambda q2, s: 3 * np.pi**2 / 8 * 0.21 * 3e-29 * (0.9 * CHARGE) ** 2)
    assert_allclose(Alloy(0.9 * CHARGE, 0.3, 3e-29).rate(states(gap), AROUND), expected, rtol=1e-9)


@pytest.mark.parametrize("gap", GAPS)
def test_ionised_impurities(gap):
    expected = golden_rule(gap, lambda q2, s: 5e23 * (2 * CHARGE**2 / (EPS * (q2 + s))) ** 2)
    assert_allclose(IonisedImpurity(16.0, 2.0).rate(states(gap), AROUND), expected, rtol=1e-8)
    given = IonisedImpurity(16.0, 2.0, 1e23).rate(states(gap), AROUND)
    assert_allclose(given, expected / 5, rtol=1e-8)


# Brooks and Herring, closed form of textbooks.
def test_ionised_impurities_brooks_herring():
    mass, e = 0.2 * ELECTRON_MASS, ENERGY[:, 2:] * KT
    beta = 8 * mass * e * EPS * KT / (CHARGE**2 * 1e24 * HBAR**2)
    bracket = np.log1p(beta) - beta / (1 + beta)
    expected = 1e24 * CHARGE**4 * bracket / (16 * np.sqrt(2 * mass) * np.pi * EPS**2 * e**1.5)
    assert_allclose(IonisedImpurity(16.0).rate(states(), AROUND)[:, 2:], expected, rtol=1e-9)


@pytest.mark.parametrize("gap", GAPS)
def test_polar_optical(gap):
    polar = 1 / (9 * VACUUM_PERMITTIVITY) - 1 / EPS
    expected = golden_rule(gap, lambda q2, s: CHARGE**2 * KT * polar / (q2 + s))
    assert_allclose(PolarOptical(16.0, 9.0).rate(states(gap), AROUND), expected, rtol=1e-8)


# Unscreened: 1/tau = e^2 kT (1/eps_inf - 1/eps_s) (m / 2E)^0.5 / (2 pi hbar^2), Lundstrom 2000, section 2.7 (memory).
def test_polar_optical_unscreened_limit():
    few = Surroundings(np.array([[1.0]]), np.array([[1.0 / KT]]))
    mass, e = 0.2 * ELECTRON_MASS, ENERGY * KT
    polar = 1 / (9 * VACUUM_PERMITTIVITY) - 1 / EPS
    expected = CHARGE**2 * KT * polar * np.sqrt(mass / (2 * e)) / (2 * np.pi * HBAR**2)
    assert_allclose(PolarOptical(16.0, 9.0).rate(states(), few), expected, rtol=1e-9)


def test_integrals_over_the_angle_are_shared_only_in_equal_surroundings():
    more = Surroundings(2 * AROUND.net_density, 2 * AROUND.screening)
    for mechanism in (IonisedImpurity(16.0), PolarOptical(16.0, 9.0), IonisedImpurity(18.0)):
        for around in (AROUND, more):
            used = states(0.2 * CHARGE)
            for other in (AROUND, more):
                IonisedImpurity(16.0).rate(used, other)
            assert_allclose(mechanism.rate(used, around), mechanism.rate(states(0.2 * CHARGE), around), rtol=1e-14)


# Outside reference: scipy.integrate.quad; both sides of the change from series to closed form.
@pytest.mark.parametrize("order", [1, 2])
@pytest.mark.parametrize("mixing", [0.0, 0.3, 0.5])
def test_angle_integral(order, mixing):
    beta = np.array([1e-12, 1e-5, 0.0099, 0.0101, 0.02, 0.5, 30.0, 1e4])
    expected = [
        quad(
            lambda y, b=b: y * (1 - 2 * mixing * y) / (1 + b * y) ** order,
            0,
            1,
            epsrel=1e-13,
            epsabs=0,
            limit=200,
        )[0]
        for b in beta
    ]
    assert_allclose(angle_integral(beta, np.array([mixing]), order), expected, rtol=3e-11)


def test_grain_boundaries():
    # Parabolic: v = (2E/m_I)^0.5.
    speed = np.sqrt(2 * ENERGY * KT / (0.15 * ELECTRON_MASS))
    assert_allclose(GrainBoundary(2e-7, 0.5).rate(states(), AROUND), speed / 1e-7, rtol=1e-12)
    smaller = Surroundings(AROUND.net_density, AROUND.screening, np.array([[1e-8]]))
    assert_allclose(GrainBoundary(2e-7, 0.5).rate(states(), smaller), speed / 5e-9, rtol=1e-12)


def test_speed_of_a_kane_band_is_the_slope_of_its_dispersion():
    found = states(0.2 * CHARGE)
    k = np.sqrt(2 * 0.15 * ELECTRON_MASS * found.gamma) / HBAR  # of the inertial mass

    def energy(k):
        gap = 0.2 * CHARGE
        return gap / 2 * (np.sqrt(1 + 4 * (HBAR * k) ** 2 / (2 * 0.15 * ELECTRON_MASS) / gap) - 1)

    step = 1e-5 * k
    assert_allclose(found.speed, (energy(k + step) - energy(k - step)) / (2 * step * HBAR), rtol=1e-6)


@pytest.mark.parametrize("exponent", [-0.5, 0.0, 0.5, 0.7, 1.5])
def test_mobility(exponent):
    rate = Mobility(0.2, -2.0, exponent).rate(states(), AROUND)
    time = 0.2 * 0.15 * ELECTRON_MASS / CHARGE * (4 / 3) ** -2 * ENERGY**exponent
    assert_allclose(rate, 1 / time, rtol=1e-12)


@pytest.mark.parametrize(
    ("make", "words"),
    [
        (lambda: Acoustic(0.0, 1e10), "deformation_potential of acoustic"),
        (lambda: Acoustic(1e-18, -1.0), "elastic_constant of acoustic"),
        (
            lambda: Alloy(1e-19, 1.0, 1e-29),
            "fraction of alloy scattering is 1 but must lie between 0 and 1; leave",
        ),
        (lambda: Alloy(-1e-19, 0.5, 1e-29), "potential of alloy"),
        (lambda: IonisedImpurity(0.0), "permittivity of ionised"),
        (lambda: IonisedImpurity(10.0, density=-1.0), "density of ionised"),
        (
            lambda: PolarOptical(5.0, 9.0),
            "static_permittivity .* is 5 but must lie above the optical_permittivity 9; leave",
        ),
        (lambda: Mobility(0.0), "mobility .* is 0 but"),
        (
            lambda: Mobility(0.1, energy_exponent=-1.5),
            r"energy_exponent of a mobility is -1\.5 but must lie above -1\.5",
        ),
        (lambda: GrainBoundary(float("nan")), "size of grains"),
    ],
)
def test_impossible_parameters(make, words):
    with pytest.raises(InputError, match=words):
        make()
