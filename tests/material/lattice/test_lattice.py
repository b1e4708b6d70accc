from itertools import pairwise

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad

from tegdesign.errors import DataRangeError, InputError
from tegdesign.material.curve import Curve
from tegdesign.material.lattice.alloy import Alloy
from tegdesign.material.lattice.callaway import Branch, DebyeCallaway
from tegdesign.material.lattice.constant import Constant
from tegdesign.material.lattice.disorder import disorder
from tegdesign.material.lattice.phonon.boundary import Boundary
from tegdesign.material.lattice.phonon.holland import TransverseUmklapp
from tegdesign.material.lattice.phonon.point_defect import PointDefect
from tegdesign.material.lattice.phonon.power import PowerRate
from tegdesign.material.lattice.phonon.umklapp import Umklapp
from tegdesign.material.lattice.power import InversePower
from tegdesign.material.lattice.table import Table
from tegdesign.material.transport.constants import BOLTZMANN, HBAR

T = np.array([[200.0, 300.0], [500.0, 900.0]])


def model(size=1e-6):
    rates = (Umklapp(3e-18, 40.0), PointDefect(5e-43), Boundary(size, 0.8))
    return DebyeCallaway(
        (Branch(1500.0, 90.0, rates, weight=2 / 3), Branch(2900.0, 130.0, rates, weight=1 / 3, lower=10.0))
    )


# Outside reference: scipy.integrate.quad, grains from 1 nm to 1 m (boundary next to nothing).
@pytest.mark.parametrize("size", [1e-9, 1e-6, 1e-3, 1.0])
@pytest.mark.parametrize("temperature", [3.0, 50.0, 300.0, 1200.0])
def test_debye_callaway_equals_adaptive_quadrature(size, temperature):
    expected = 0.0
    for velocity, low, high, weight in ((1500.0, 0.0, 90.0, 2 / 3), (2900.0, 10.0, 130.0, 1 / 3)):

        def integrand(log, velocity=velocity):
            x = np.exp(log)
            w = BOLTZMANN * temperature / HBAR * x
            rate = 3e-18 * w**2 * temperature * np.exp(-40 / temperature) + 5e-43 * w**4 + velocity / (0.8 * size)
            return x**5 * np.exp(-x) / np.expm1(-x) ** 2 / rate

        first, last = np.log(max(low / temperature, 1e-9)), np.log(min(high / temperature, 80.0))
        cuts = np.linspace(first, last, 9)
        integral = sum(quad(integrand, a, b, epsrel=1e-12, epsabs=0)[0] for a, b in pairwise(cuts))
        unit = BOLTZMANN / (2 * np.pi**2 * velocity) * (BOLTZMANN * temperature / HBAR) ** 3
        expected += weight * unit * integral
    assert_allclose(model(size).conductivity(temperature), expected, rtol=1e-8)


def test_grain_size_in_a_batch():
    sizes = np.array([1e-8, 1e-7, 1e-5])[:, None, None]
    found = model().conductivity(T, sizes)
    assert found.shape == (3, 2, 2)
    assert_allclose(found[1], model(1e-7).conductivity(T), rtol=1e-13)
    assert np.all(np.diff(found, axis=0) > 0)
    assert model().conductivity(300.0).shape == ()
    assert model().has_grain_size


def test_simple_models():
    assert_allclose(Constant(1.7).conductivity(T), 1.7, rtol=1e-15)
    assert_allclose(InversePower(3.0).conductivity(T), 900 / T, rtol=1e-14)
    assert_allclose(InversePower(3.0, 0.5, 400.0).conductivity(T), 3 * np.sqrt(400 / T), rtol=1e-14)
    curve = Curve(np.array([200.0, 600, 1000]), np.array([3.0, 2, 1.5]))
    assert_allclose(Table(curve).conductivity(T), curve(T), rtol=1e-15)


def test_umklapp_alone_falls_as_one_over_temperature():
    hot = DebyeCallaway((Branch(1770.0, 136.0, (Umklapp(3e-18),)),)).conductivity([3000.0, 6000.0])
    assert_allclose(hot[1] / hot[0], 0.5, rtol=2e-4)


def test_umklapp_estimate():
    # hbar g^2 / (M v^2 theta) by hand: 1.0546e-34 * 4 / (2.8e-25 * 1e6 * 130)
    rate = Umklapp.from_gruneisen(2.0, 2.8e-25, 1000.0, 130.0)
    assert_allclose([rate.coefficient, rate.freezing], [1.15887e-17, 43.3333], rtol=1e-5)


# Point defects with Umklapp well above the Debye temperature: the integral and the closed reduction are the same law.
def test_reduction_equals_the_integral_with_point_defects():
    theta, velocity, volume, umklapp = 100.0, 1800.0, 3e-29, 3e-18
    gamma = disorder((0.7, 0.3), (207.0, 118.7), (1.8, 1.7), 30.0)
    pure = DebyeCallaway((Branch(velocity, theta, (Umklapp(umklapp),)),))
    defects = PointDefect.from_disorder(gamma, volume, velocity)
    both = DebyeCallaway((Branch(velocity, theta, (Umklapp(umklapp), defects)),))
    hot = 4000.0
    # k theta = hbar omega_max; the closed form has the Debye relation of a volume, omega_max^3 = 6 pi^2 v^3 / volume,
    # cancelled, so it holds for any theta.
    closed = Alloy(pure, theta, velocity, volume, gamma).conductivity(hot)
    assert_allclose(both.conductivity(hot), closed, rtol=2e-4)
    assert closed < 0.95 * pure.conductivity(hot)


def test_disorder():
    # By hand: masses 1 and 3 half and half, average 2: mass part 1/4; radii 1 and 1.2: (0.1/1.1)^2.
    assert_allclose(disorder((0.5, 0.5), (1.0, 3.0)), 0.25, rtol=1e-14)
    assert_allclose(disorder((0.5, 0.5), (1.0, 3.0), (1.0, 1.2), 10.0), 0.25 + 10 * (0.1 / 1.1) ** 2, rtol=1e-12)
    assert Alloy(Constant(2.0), 100.0, 2000.0, 3e-29, disorder((1.0,), (5.0,))).conductivity(300.0) == 2.0


def test_alloy_passes_the_grain_size_on():
    alloy = Alloy(model(), 120.0, 2000.0, 3e-29, 0.1)
    assert alloy.has_grain_size
    assert np.all(alloy.conductivity(T, 1e-8) < alloy.conductivity(T, 1e-6))
    assert not Alloy(Constant(2.0), 120.0, 2000.0, 3e-29, 0.1).has_grain_size


UMKLAPP = (Umklapp(1e-18),)


@pytest.mark.parametrize(
    ("ask", "words"),
    [
        (lambda: Constant(0.0), r"lattice conductivity \[W/m/K\] is 0 but must be .* give"),
        (lambda: Constant(1.0).conductivity([300.0, -1.0]), r"temperature \[K\] is -1"),
        (
            lambda: Constant(1.0).conductivity(300.0, 1e-6),
            "grain_size was given but the lattice model Constant has none; leave",
        ),
        (
            lambda: InversePower(1.0, -1.0),
            "exponent of the lattice conductivity is -1 but must lie from 0 to 3",
        ),
        (lambda: InversePower(1.0, 1.0, 0.0), "reference temperature of the lattice"),
        (
            lambda: Table(Curve(np.array([300.0, 400]), np.array([1.0, -1]))).conductivity(390.0),
            "at 390 K but must be",
        ),
        (lambda: DebyeCallaway(()), "branches .* are empty"),
        (lambda: Branch(1e3, 100.0, ()), "scattering of a phonon branch is empty"),
        (lambda: Branch(0.0, 100.0, UMKLAPP), "velocity of a phonon branch"),
        (
            lambda: Branch(1e3, 100.0, UMKLAPP, lower=100.0),
            "lower end of a phonon branch is 100 K but .* upper end 100 K",
        ),
        (
            lambda: DebyeCallaway((Branch(1e3, 100.0, UMKLAPP),)).conductivity(300.0, 1e-6),
            "no branch .* has boundary",
        ),
        (lambda: model().conductivity(300.0, [1e-6, 0.0]), r"grain_size \[m\] is 0"),
        (lambda: Umklapp(-1.0), "coefficient of Umklapp"),
        (lambda: Umklapp(1.0, -1.0), "freezing temperature of Umklapp scattering is -1 K"),
        (lambda: Umklapp.from_gruneisen(1.0, 0.0, 1.0, 1.0), r"atomic mass \[kg\] of Umklapp"),
        (lambda: PointDefect(0.0), "coefficient of point-defect"),
        (lambda: PointDefect.from_disorder(0.1, 1e-29, 0.0), "velocity of point-defect"),
        (lambda: Boundary(0.0), "size of grains"),
        (lambda: PowerRate(0.0), "coefficient of a phonon rate"),
        (lambda: TransverseUmklapp(0.0), "coefficient of transverse"),
        (lambda: Alloy(Constant(1.0), 100.0, 1e3, 1e-29, -0.1), "disorder of an alloy is -0.1"),
        (lambda: Alloy(Constant(1.0), 0.0, 1e3, 1e-29, 0.1), "debye_temperature of an alloy"),
        (lambda: disorder((0.5, 0.6), (1.0, 2.0)), r"fractions of the disorder add to 1\.1 but"),
        (lambda: disorder((0.5, 0.5), (1.0,)), "equal lists, got 2 fractions, 1 masses"),
        (lambda: disorder((0.5, 0.5), (1.0, -1.0)), "mass of an atom is -1"),
        (
            lambda: disorder((0.5, 0.5), (1.0, 2.0), None, 3.0),
            "strain of the disorder is 3 but must be 0 or above, and needs",
        ),
    ],
)
def test_questions_without_an_answer(ask, words):
    with pytest.raises(InputError, match=words):
        ask()


def test_table_is_refused_outside():
    table = Table(Curve(np.array([300.0, 400]), np.array([1.0, 2])))
    with pytest.raises(
        DataRangeError, match=r"lattice conductivity \[W/m/K\] at 450 K: its table goes from 300 K to 400 K"
    ):
        table.conductivity([350.0, 450.0])
