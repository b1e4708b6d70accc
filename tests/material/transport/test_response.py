from itertools import pairwise

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad

from tegdesign.errors import InputError
from tegdesign.material.transport.band import Band
from tegdesign.material.transport.bands import Bands
from tegdesign.material.transport.conductance import ConductanceFunction
from tegdesign.material.transport.constants import BOLTZMANN, CHARGE, PLANCK
from tegdesign.material.transport.level import Level
from tegdesign.material.transport.response import combine
from tegdesign.material.transport.scattering.mobility import Mobility

KT = BOLTZMANN * 300.0


def test_two_pairs_of_coefficients_describe_one_conductor(narrow_gap):
    found = narrow_gap.doped(np.array([300.0, 700.0]), np.array([[1e25], [-1e25]]))
    by_voltage, by_current = found.voltage_driven(), found.current_driven()
    inverted = by_voltage.current_driven()
    for one, other in zip(inverted, by_current, strict=True):
        assert_allclose(one, other, rtol=1e-10)
    # Kelvin relation: Peltier = T Seebeck; and the mixed coefficients driven by voltage differ by T (Onsager).
    assert_allclose(inverted.kelvin_ratio, found.temperature, rtol=1e-12)
    assert_allclose(by_voltage.peltier_heat, found.temperature * by_voltage.thermal_current, rtol=1e-12)
    # Any field and gradient: current-driven equations give the field back and the same heat.
    field, gradient = 30.0, -2e4
    current = by_voltage.conductivity * field - by_voltage.thermal_current * gradient
    heat = by_voltage.peltier_heat * field - by_voltage.heat_conductivity * gradient
    assert_allclose(by_current.resistivity * current + by_current.seebeck * gradient, field, rtol=1e-10)
    assert_allclose(by_current.peltier * current - by_current.thermal_conductivity * gradient, heat, rtol=1e-10)


def test_signs_of_electrons_and_holes():
    mobile = (Mobility(0.1),)
    n = Bands((Band("electron", 0.3, mobile),)).doped(300.0, 1e25).current_driven()
    p = Bands((Band("hole", 0.3, mobile),)).doped(300.0, -1e25).current_driven()
    assert n.seebeck < 0 < p.seebeck
    assert_allclose([n.seebeck, n.peltier, n.resistivity], [-p.seebeck, -p.peltier, p.resistivity], rtol=1e-12)


def test_zero_voltage_heat_conductivity_is_the_larger_one(narrow_gap):
    found = narrow_gap.doped(500.0, 1e25)
    expected = found.electronic_thermal_conductivity + 500 * found.power_factor
    assert_allclose(found.voltage_driven().heat_conductivity, expected, rtol=1e-12)


def test_coefficients_of_a_sample(narrow_gap):
    found = narrow_gap.doped(500.0, 1e25)
    s, peltier, conductance, heat = found.current_driven().of_sample(2e-3, 4e-6)
    assert_allclose(conductance, found.conductivity * 2e-3, rtol=1e-12)
    assert_allclose(heat, found.electronic_thermal_conductivity * 2e-3, rtol=1e-12)
    assert_allclose([s, peltier], [found.seebeck_coefficient, 500 * found.seebeck_coefficient], rtol=1e-12)
    assert_allclose(found.voltage_driven().of_sample(2e-3, 4e-6)[0], conductance, rtol=1e-12)


# Closed form: a conductance function of 1 over all energies is the quantum 2 e^2/h, without Seebeck effect, and obeys
# Wiedemann and Franz exactly at every temperature.
def test_one_open_mode_conducts_the_quantum():
    wire = ConductanceFunction(np.array([-2.0, 2.0]) * CHARGE, np.ones(2), 1e-6, 1e-14)
    found = wire.at([20.0, 300.0, 500.0], 0.1 * CHARGE)
    _, _, conductance, heat = found.current_driven().of_sample(1e-6, 1e-14)
    assert_allclose(conductance, 2 * CHARGE**2 / PLANCK, rtol=1e-10)
    assert_allclose(found.seebeck_coefficient, 0, atol=1e-15)
    quantum = np.pi**2 * BOLTZMANN**2 * found.temperature / (3 * PLANCK) * 2
    assert_allclose(heat, quantum, rtol=1e-10)


# Outside reference: scipy.integrate.quad over a table with kinks, from one panel a kT to hundreds.
@pytest.mark.parametrize("temperature", [30.0, 300.0, 900.0])
def test_table_equals_adaptive_quadrature(temperature):
    energy = np.array([-1.5, -0.2, -0.05, 0.0, 0.012, 0.3, 1.6]) * CHARGE
    modes = np.array([9.0, 2, 0, 0, 1, 4, 5])
    kt, mu = BOLTZMANN * temperature, 0.02 * CHARGE

    def integrand(x, j):
        t = np.exp(-abs(x))
        return np.interp(mu + x * kt, energy, modes) * t / (1 + t) ** 2 * x**j

    # Nothing conducts beyond the ends of the table; 35 kT away the window is 1e-15.
    kinks = [float(k) for k in np.clip((energy - mu) / kt, -35, 35)]
    bounds = sorted([0.0, *kinks])
    k0, k1, k2 = (
        sum(quad(integrand, a, b, args=(j,), epsrel=1e-12, epsabs=1e-14)[0] for a, b in pairwise(bounds))
        for j in range(3)
    )
    found = ConductanceFunction(energy, modes, 1e-6, 1e-12).at(temperature, mu)
    assert_allclose(found.conductivity, 2 * CHARGE**2 / PLANCK * 1e6 * k0, rtol=1e-9)
    assert_allclose(found.reduced_seebeck, -k1 / k0, rtol=1e-9)
    assert_allclose(found.lorenz_number / (BOLTZMANN / CHARGE) ** 2, k2 / k0 - (k1 / k0) ** 2, rtol=1e-9)


# The same band twice: by the closed form of its distribution and as a fine table of it.
def test_band_as_a_table():
    band = Bands((Band("electron", 0.3, (Mobility(0.1),)),))
    energy = np.linspace(-0.6, 1.2, 18001) * CHARGE
    unit = 2 * CHARGE**2 / PLANCK
    xi = band.transport_distribution(energy, 300.0, 0.0)[0]
    mu = np.linspace(-0.3, 0.2, 7) * CHARGE
    found, expected = ConductanceFunction(energy, xi / unit, 1.0, 1.0).at(300.0, mu), band.at(300.0, mu)
    assert_allclose(found.conductivity, expected.conductivity, rtol=1e-6)
    assert_allclose(found.seebeck_coefficient, expected.seebeck_coefficient, rtol=1e-6)


def test_levels_in_parallel():
    # Two levels of equal weight at +-x: no Seebeck effect, and all of the heat goes round between them.
    x, mu = 2.5, np.zeros(1)
    found = combine(Level(x * KT, 1.0).at(300.0, mu), Level(-x * KT, 1.0).at(300.0, mu))
    assert_allclose(found.seebeck_coefficient, 0, atol=1e-18)
    assert_allclose(found.lorenz_number / (BOLTZMANN / CHARGE) ** 2, x**2, rtol=1e-12)
    assert_allclose(found.bipolar_share, 1, rtol=1e-12)


WIRE = ConductanceFunction(np.array([-0.3, 0.3]) * CHARGE, np.ones(2), 1e-6, 1e-12)


@pytest.mark.parametrize(
    ("ask", "words"),
    [
        (
            lambda: WIRE.at(300.0, 0.1 * CHARGE),
            r"must be known from -0\.15.* to 0\.358.* \(10 kT .* goes from -0\.3 eV to 0\.3 eV; add",
        ),
        (lambda: WIRE.at([300.0, 400.0], 0.0), "at 400 K .* must be known"),
        (lambda: WIRE.at(0.0, 0.0), r"temperature \[K\] is 0"),
        (lambda: ConductanceFunction([0.0, 1.0], [1.0], 1.0, 1.0), "equal lists .* got 2 and 1"),
        (lambda: ConductanceFunction([0.0], [1.0], 1.0, 1.0), "two or more"),
        (lambda: ConductanceFunction([0.0, np.nan], [1.0, 1.0], 1.0, 1.0), "not finite"),
        (
            lambda: ConductanceFunction([0.0, -1e-19], [1.0, 1.0], 1.0, 1.0),
            "must increase: 0 eV is followed by -0.62",
        ),
        (
            lambda: ConductanceFunction([0.0, 1e-19], [1.0, -1.0], 1.0, 1.0),
            r"is -1 at 0\.624151 eV but must not be",
        ),
        (lambda: ConductanceFunction([0.0, 1e-19], [1.0, 1.0], 0.0, 1.0), r"length of the sample \[m\] is 0"),
        (
            lambda: ConductanceFunction([0.0, 1e-19], [1.0, 1.0], 1.0, -2.0),
            r"area of the sample \[m\^2\] is -2",
        ),
        (
            lambda: ConductanceFunction(np.array([-1.0, 1]) * CHARGE, [0, 0], 1.0, 1.0).at(300.0, 0.0),
            "no carriers: .* raise",
        ),
        (
            lambda: Level(20 * CHARGE, 1.0).at(300.0, 0.0),
            "no carriers: conductivity 0 S/m at 300 K and chemical potential 0 eV",
        ),
        (lambda: Level(0.0, 0.0), "strength of a level"),
        (
            lambda: combine(Level(0.0, 1.0).at(300.0, 0.0), Level(0.0, 1.0).at(310.0, 0.0)),
            "have different temperatures",
        ),
    ],
)
def test_questions_without_an_answer(ask, words):
    with pytest.raises(InputError, match=words):
        ask()


def test_table_does_not_change_with_its_lists():
    energy = np.array([-1.0, 1.0]) * CHARGE
    wire = ConductanceFunction(energy, np.ones(2), 1.0, 1.0)
    energy[0] = 5.0
    assert_allclose(wire.energy[0], -CHARGE, rtol=1e-15)
    with pytest.raises(ValueError, match="read-only"):
        wire.energy[0] = 5.0
