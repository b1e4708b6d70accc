"""Closed forms, and legs with an answer known from elsewhere, against published values and independent integration.

Numbers without a source of their own were computed from the stated inputs with general numerical libraries
(20 digits and more, or two independent solvers); the source beside them is that of the formula or the inputs.
"""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad, solve_ivp
from scipy.optimize import brentq

from tegdesign.leg.closed_form import (
    Couple,
    area_ratio_of_best_efficiency,
    area_ratio_of_best_power,
    best_efficiency,
    couple,
    device_figure_of_merit,
    efficiency_with_contacts,
    engineering_figure_of_merit,
    load_ratio_of_most_power,
    matched_efficiency,
    power_ceiling,
    power_with_contacts,
)
from tegdesign.leg.exact import solve_leg
from tegdesign.material.curve import Curve
from tegdesign.material.material import Material, Stated


def material_of(seebeck, rho, kappa, temperature):
    """Return a material that samples three functions of temperature."""
    t = np.asarray(temperature, dtype=float)
    curves = [Curve(t, np.broadcast_to(f(t), t.shape)) for f in (seebeck, rho, kappa)]
    return Material("sampled", "X", "p", *curves, Stated(t[-1]), Stated(7000.0), "own example")


def constant_material(seebeck, rho, kappa, temperature=(273.15, 298.15, 323.15, 348.15, 373.15)):
    return material_of(lambda t: seebeck + 0 * t, lambda t: rho + 0 * t, lambda t: kappa + 0 * t, temperature)


# Best and matched-load efficiency in % for Z T_mean = 0.5, 1, 2, 4. Formulae: Altenkirch 1909, Ioffe 1957 (as given
# in Kim et al. 2015, PNAS 112, 8205, doi 10.1073/pnas.1510231112); table computed, stated to 1e-7.
BEST_AND_MATCHED = {
    (400.0, 300.0): ((2.845239, 2.816901), (4.784805, 4.651163), (7.373447, 6.896552), (10.348626, 9.090909)),
    (500.0, 300.0): ((4.926604, 4.878049), (8.225812, 8.000000), (12.556344, 11.764706), (17.433545, 15.384615)),
    (800.0, 300.0): ((8.780497, 8.695652), (14.469121, 14.084507), (21.714320, 20.408163), (29.587222, 26.315789)),
    (1273.0, 573.0): ((7.378706, 7.306889), (12.217176, 11.888587), (18.446864, 17.318159), (25.303229, 22.443091)),
}


@pytest.mark.parametrize(("hot", "cold"), BEST_AND_MATCHED)
def test_efficiency_table(hot, cold):
    z = np.array([0.5, 1.0, 2.0, 4.0]) / ((hot + cold) / 2)
    best, matched = np.array(BEST_AND_MATCHED[hot, cold]).T / 100
    # 1e-7 of the percentages as printed: half a unit of the sixth decimal
    assert_allclose(best_efficiency(z, hot, cold), best, rtol=1e-7, atol=5.1e-9)
    assert_allclose(matched_efficiency(z, hot, cold), matched, rtol=1e-7, atol=5.1e-9)
    # the same from the couple itself, at R_load/R = sqrt(1 + Z T) and at 1
    ratio = np.sqrt(1 + z * (hot + cold) / 2)
    made = couple(np.sqrt(z), 1.0, 1.0, 0.5, 0.5, 1.0, 1.0, 0.5, 0.5)  # R = 1 ohm, K = 2 W/K
    made = made._replace(seebeck=made.seebeck * np.sqrt(2))
    assert_allclose(made.figure_of_merit, z, rtol=1e-14)
    for m, expected in ((ratio, best), (1.0, matched)):
        _, power, heat = made.at_load(hot, cold, m)
        assert_allclose(power / heat, expected, rtol=1e-7, atol=5.1e-9)


def test_exercise_generator_efficiency():
    # G. D. Rai 2010, Non-conventional Energy Sources, Khanna, example 13.4.1 (computed to 1e-7): 600 K, 300 K, 2e-3/K
    assert_allclose(np.sqrt(1 + 2e-3 * 450), 1.378404875, rtol=1e-9)
    assert_allclose(best_efficiency(2e-3, 600.0, 300.0), 0.100725057, rtol=1e-7)


def test_exercise_unequal_legs():
    # G. D. Rai 2010, example 13.4.2, inputs as given there, values computed (tolerance 1e-6); the printed 3.16 W at
    # best efficiency comes from a slip, 6.78 W is right
    alpha, hot, cold = 190e-6, 923.0, 323.0
    rho_n, rho_p = 1.45e-5, 1.8e-5
    kappa_n, kappa_p = alpha**2 / (rho_n * 2.0e-3), alpha**2 / (rho_p * 1.7e-3)
    assert_allclose([kappa_n, kappa_p], [1.2448276, 1.1797386], rtol=1e-7)
    ratio = area_ratio_of_best_efficiency(rho_n, rho_p, kappa_n, kappa_p)
    best = couple(2 * alpha, rho_n, rho_p, kappa_n, kappa_p, ratio, 1.0, 1.0, 1.0).figure_of_merit
    assert_allclose(best, 1.84086836e-3, rtol=1e-6)
    made = couple(2 * alpha, rho_n, rho_p, kappa_n, kappa_p, 2.3e-4, 1.303e-4, 1.5e-2, 0.653e-2)
    assert_allclose(made.conductance, 0.042627928, rtol=1e-6)
    assert_allclose(made.resistance, 1.84772432e-3, rtol=1e-6)
    assert_allclose(made.figure_of_merit, 1.83330952e-3, rtol=1e-6)
    assert_allclose(made.seebeck * (hot - cold), 0.228, rtol=1e-12)
    assert_allclose(made.at_load(hot, cold, 1.0)[1], 7.0335168, rtol=1e-6)
    assert_allclose(best_efficiency(best, hot, cold), 0.16660559, rtol=1e-6)
    assert_allclose(matched_efficiency(best, hot, cold), 0.16133857, rtol=1e-6)
    assert_allclose(best_efficiency(made.figure_of_merit, hot, cold), 0.16617697, rtol=1e-6)
    assert_allclose(matched_efficiency(made.figure_of_merit, hot, cold), 0.16095083, rtol=1e-6)
    assert_allclose(made.at_load(hot, cold, 1.46521704)[1], 6.7830366, rtol=1e-6)


def test_exercise_couples_in_series():
    # G. D. Rai 2010, example 13.4.3 (computed, 1e-6); its own heat input mixes two operating points
    hot, cold, current = 1500.0, 1000.0, 20e4 * 48.6e-4
    one = couple(1.2e-3, 1.0e-4, 1.2e-4, 2.0, 3.0, 43.5e-4, 48.6e-4, 0.49e-2, 0.49e-2)
    best = couple(
        1.2e-3, 1.0e-4, 1.2e-4, 2.0, 3.0, area_ratio_of_best_efficiency(1.0e-4, 1.2e-4, 2.0, 3.0), 1.0, 1.0, 1.0
    )
    assert_allclose(best.figure_of_merit, 1.31308230e-3, rtol=1e-6)
    assert_allclose(best_efficiency(best.figure_of_merit, hot, cold), 0.090932779, rtol=1e-6)
    assert_allclose(one.resistance, 2.33631332e-4, rtol=1e-6)
    assert_allclose(current, 972.0, rtol=1e-12)
    load_voltage = one.seebeck * 500 - current * one.resistance
    assert_allclose(load_voltage, 0.37291034, rtol=1e-6)
    assert_allclose(115.0 / load_voltage, 308.39, rtol=2e-5)  # two decimals given
    found, power, heat = one.at_load(hot, cold, load_voltage / (current * one.resistance))
    assert_allclose(found, current, rtol=1e-12)
    assert_allclose(309 * heat, 1240.56e3, rtol=1e-5)
    assert_allclose(309 * power, 112.00e3, rtol=1e-4)
    assert_allclose(power / heat, 0.090284, rtol=1e-5)


def test_exercise_thermocouples():
    # Balmer, Modern Engineering Thermodynamics (title from memory), examples 19.2 and 19.3; 3 digits
    kelvin = np.linspace(273.15, 373.15, 101)
    iron = material_of(
        lambda t: (13.4 - 0.028 * (t - 273.15) - 0.00039 * (t - 273.15) ** 2) * 1e-6,
        lambda t: 1e-6 + 0 * t,
        lambda t: 50.0 + 0 * t,
        kelvin,
    )
    leg = solve_leg(iron, 373.15, 273.15, 0.0)
    assert_allclose(leg.seebeck_hot, 6.70e-6, rtol=1e-3)
    assert_allclose(leg.seebeck_hot * 373.16, 2.50e-3, rtol=1e-3)
    one, two = constant_material(23e-6, 1e-6, 50.0), constant_material(-18e-6, 1e-6, 50.0)
    first, second = (solve_leg(m, 373.15, 273.15, 0.0, slopes=True) for m in (one, two))
    assert_allclose(first.voltage - second.voltage, 4.1e-3, rtol=1e-3)
    # Peltier coefficient = slope of the heat by current, at the cold end and (plus the voltage) at the hot end
    peltier = [leg.cold_heat_slopes.current for leg in (first, second)]
    assert_allclose(peltier, [6.28e-3, -4.92e-3], rtol=1e-3)
    assert_allclose(peltier[0] - peltier[1], 1.12e-2, rtol=1e-3)
    peltier = [leg.cold_heat_slopes.current + leg.voltage for leg in (first, second)]
    assert_allclose(peltier, [8.58e-3, -6.72e-3], rtol=1e-3)
    # G. D. Rai 2010, example 13.2.1: 55 uV/K at 373 K, 50 uV/K at 273 K, 10 mA
    line = material_of(
        lambda t: (50 + (t - 273) / 20) * 1e-6, lambda t: 1e-6 + 0 * t, lambda t: 50 + 0 * t, (273.0, 323.0, 373.0)
    )
    leg = solve_leg(line, 373.0, 273.0, 0.0)
    assert_allclose(0.01 * leg.seebeck_hot * 373, 0.20515e-3, rtol=1e-3)
    assert_allclose(0.01 * leg.seebeck_cold * 273, 0.13650e-3, rtol=1e-3)


def test_area_ratio_for_efficiency_and_for_power():
    # formulae as above; numbers computed and confirmed by direct minimisation, 1e-7
    rho_n, rho_p, kappa_n, kappa_p = 1e-5, 2e-5, 2.0, 1.2
    for_efficiency = area_ratio_of_best_efficiency(rho_n, rho_p, kappa_n, kappa_p)
    for_power = area_ratio_of_best_power(rho_n, rho_p)
    assert_allclose([for_efficiency, for_power], [0.5477225575, 0.7071067812], rtol=1e-9)

    def built(ratio):
        area_p = 10e-6 / (1 + ratio)
        return couple(400e-6, rho_n, rho_p, kappa_n, kappa_p, 10e-6 - area_p, area_p, 2e-3, 2e-3)

    a, b, c = built(for_efficiency), built(for_power), built(1.0)
    assert_allclose([a.resistance, a.conductance], [11.842373947e-3, 7.4155574715e-3], rtol=1e-7)
    assert_allclose(b.resistance, 11.656854249e-3, rtol=1e-7)
    assert_allclose([a.figure_of_merit, b.figure_of_merit], [1.8219539959e-3, 1.7926199942e-3], rtol=1e-7)
    efficiencies = [best_efficiency(x.figure_of_merit, 500.0, 300.0) for x in (a, b, c)]
    assert_allclose(efficiencies, [0.065766917, 0.064984923, 0.061553740], rtol=1e-7)
    powers = [x.at_load(500.0, 300.0, 1.0)[1] for x in (a, b, c)]
    assert_allclose(powers, [135.10804567e-3, 137.25830020e-3, 133.33333333e-3], rtol=1e-7)


def reduced_current(material_functions, hot, cold, u_hot):
    """Return u at the cold end [1/V] and the scaled current j = integral u kappa dT, by Runge-Kutta in temperature.

    du/dT = u^2 T dS/dT + u^3 rho kappa, u = j/G: Snyder and Ursell 2003, Phys. Rev. Lett. 91, 148301.
    """
    slope_of_s, rho, kappa = material_functions

    def by_t(t, y):
        u = y[0]
        return [u**2 * t * slope_of_s(t) + u**3 * rho(t) * kappa(t), u * kappa(t)]

    end = solve_ivp(by_t, (hot, cold), [u_hot, 0.0], method="DOP853", rtol=1e-12, atol=1e-12).y[:, -1]
    return end[0], -end[1]


def reduced_efficiency(seebeck, functions, hot, cold, u_hot):
    u_cold, _ = reduced_current(functions, hot, cold, u_hot)
    return 1 - (seebeck(cold) * cold + 1 / u_cold) / (seebeck(hot) * hot + 1 / u_hot)


def test_compatibility_factor_and_reduced_current_of_constant_properties():
    # Snyder and Ursell 2003, Phys. Rev. Lett. 91, 148301; numbers computed, efficiency to 1e-8
    hot, cold = 500.0, 300.0
    m = constant_material(200e-6, 1e-5, 1.5, np.linspace(300.0, 500.0, 9))
    assert_allclose(m.compatibility_factor([300.0, 400.0, 500.0]), [5.694013108, 5.469882211, 5.275252317], rtol=1e-9)
    z = 200e-6**2 / 1.5e-5
    assert_allclose(best_efficiency(z, hot, cold), 0.08590353368, rtol=1e-9)
    functions = (lambda t: 0.0, lambda t: 1e-5, lambda t: 1.5)
    u_hot = 5.7269024
    u_cold, j = reduced_current(functions, hot, cold, u_hot)
    assert_allclose(u_cold, 5.2349412, rtol=2e-8)
    eta = reduced_efficiency(lambda t: 200e-6, functions, hot, cold, u_hot)
    assert_allclose(eta, 0.08590353368, rtol=1e-8)
    leg = solve_leg(m, hot, cold, j)
    assert_allclose(leg.power / leg.hot_heat, 0.08590353368, rtol=1e-8)
    assert_allclose(j / (leg.hot_heat - j * 200e-6 * hot), u_hot, rtol=1e-9)  # u = j/G at the hot end
    assert_allclose(j / (leg.cold_heat - j * 200e-6 * cold), u_cold, rtol=1e-9)

    def local(t):
        root = np.sqrt(1 + z * t)
        return (root - 1) / (root + 1) / t

    assert_allclose(1 - np.exp(-quad(local, cold, hot, epsrel=1e-12)[0]), 0.08603540237, rtol=1e-9)


# Bismuth-telluride-like polynomials: Meng, Chen and Sun 2011, Energy 36, 3513 (volume and pages from memory), eqs
# 53 to 55. Results of one 1.9 mm leg between 500 K and 300 K computed by reduced-current integration and by a
# boundary-value solver, agreeing to 1e-11.
def meng_seebeck(t):
    return (22224 + 930.6 * t - 0.9905 * t**2) * 1e-9


def meng_rho(t):
    return (5112 + 163.4 * t + 0.6279 * t**2) * 1e-10


def meng_kappa(t):
    return (62605 - 277.7 * t + 0.4131 * t**2) * 1e-4


MENG = (lambda t: (930.6 - 2 * 0.9905 * t) * 1e-9, meng_rho, meng_kappa)
LENGTH = 1.9e-3


@pytest.fixture(scope="module")
def meng():
    # every kelvin: the monotone cubic follows the parabolas to about 2e-7, worst where S is flat (470 K)
    return material_of(meng_seebeck, meng_rho, meng_kappa, np.linspace(300.0, 500.0, 201))


def vertex(x, y):
    """Return the position and value of the top of the parabola through three points."""
    c, b, a = np.polynomial.polynomial.polyfit(x - x[1], y, 2)
    return x[1] - b / (2 * a), c - b**2 / (4 * a)


def test_polynomial_leg_by_the_exact_solver(meng):
    def leg(current_density):
        return solve_leg(meng, 500.0, 300.0, np.asarray(current_density) * LENGTH)

    still = leg(0.0)
    assert_allclose(still.voltage, 46.53646667e-3, rtol=1e-6)
    assert_allclose(still.hot_heat / LENGTH, 199978.94737, rtol=1e-6)
    best = leg(594504.414)
    assert_allclose(best.power / best.hot_heat, 0.05911359980, rtol=1e-6)
    assert_allclose(best.hot_heat / LENGTH, 263164.9207, rtol=1e-6)
    assert_allclose(best.power / LENGTH, 15556.6258, rtol=1e-6)
    assert_allclose(1 - 594504.414 * LENGTH * best.resistance / best.voltage, 0.562298489, rtol=1e-6)
    j = 594504.414 * LENGTH
    assert_allclose(j / (best.hot_heat - j * best.seebeck_hot * 500), 3.09872681, rtol=1e-6)
    assert_allclose(j / (best.cold_heat - j * best.seebeck_cold * 300), 2.83432572, rtol=1e-6)
    most = leg(674229.328)
    assert_allclose(most.power / LENGTH, 15780.38106, rtol=1e-6)
    assert_allclose(most.power / most.hot_heat, 0.05831564925, rtol=1e-6)
    assert_allclose(1 - 674229.328 * LENGTH * most.resistance / most.voltage, 0.502940304, rtol=1e-6)
    # where the tops lie, from three currents 2 % apart
    near = 594504.414 * np.array([0.98, 1.0, 1.02])
    at, value = vertex(near, leg(near).power / leg(near).hot_heat)
    assert_allclose(at, 594504.414, rtol=1e-4)
    assert_allclose(value, 0.05911359980, rtol=1e-6)
    near = 674229.328 * np.array([0.98, 1.0, 1.02])
    at, value = vertex(near, leg(near).power / LENGTH)
    assert_allclose(at, 674229.328, rtol=1e-4)
    assert_allclose(value, 15780.38106, rtol=1e-6)
    assert_allclose(device_figure_of_merit(best.power / best.hot_heat, 500.0, 300.0), 0.631899698, rtol=1e-5)


def test_polynomial_leg_by_reduced_current(meng):
    u_hot = 3.09872681
    u_cold, j = reduced_current(MENG, 500.0, 300.0, u_hot)
    assert_allclose(u_cold, 2.83432572, rtol=1e-8)
    assert_allclose(j / LENGTH, 594504.414, rtol=1e-8)
    eta = reduced_efficiency(meng_seebeck, MENG, 500.0, 300.0, u_hot)
    assert_allclose(eta, 0.05911359980, rtol=1e-9)
    # at any other current the exact solver agrees with it as well
    for share in (0.3, 0.8, 1.5):
        u_cold, j = reduced_current(MENG, 500.0, 300.0, share * u_hot)
        leg = solve_leg(meng, 500.0, 300.0, j)
        expected = reduced_efficiency(meng_seebeck, MENG, 500.0, 300.0, share * u_hot)
        assert_allclose(leg.power / leg.hot_heat, expected, rtol=1e-6)
        assert_allclose(leg.cold_heat, j * (meng_seebeck(300.0) * 300 + 1 / u_cold), rtol=1e-6)


def test_second_order_sampling_error_falls_as_it_should():
    # a table every 20 K, 10 K, 5 K of the same polynomials: the answer closes in on the polynomial one
    errors = []
    for points in (11, 21, 41):
        sampled = material_of(meng_seebeck, meng_rho, meng_kappa, np.linspace(300.0, 500.0, points))
        leg = solve_leg(sampled, 500.0, 300.0, 674229.328 * LENGTH)
        errors.append(abs(leg.power / LENGTH / 15780.38106 - 1))
    assert errors[0] < 5e-4
    assert errors[0] > 3.5 * errors[1] > 12 * errors[2]


def test_averages_of_the_polynomials_overrate():
    # the same leg with averaged constant properties: zT 0.658809768, 6.100759289 %, 16468.51053 W/m^2
    e, r, k = (quad(f, 300, 500, epsrel=1e-13)[0] for f in (meng_seebeck, meng_rho, meng_kappa))
    z = (e / 200) ** 2 / (r / 200 * k / 200)
    assert_allclose(z * 400, 0.658809768, rtol=1e-8)
    assert_allclose(best_efficiency(z, 500.0, 300.0), 0.06100759289, rtol=1e-8)
    # (ZT)_eng and (PF)_eng: Kim et al. 2015, PNAS 112, 8205, doi 10.1073/pnas.1510231112; computed, 1e-7
    zt, pf = engineering_figure_of_merit(e, r, k, 200.0)
    assert_allclose([zt, pf], [0.329404885, 0.6258033999], rtol=1e-8)
    assert_allclose(pf * 200 / (4 * LENGTH), 16468.51053, rtol=1e-8)
    flat_zt, _ = engineering_figure_of_merit(200e-6 * 200, 1e-5 * 200, 1.5 * 200, 200.0)
    assert_allclose(flat_zt, 200e-6**2 / 1.5e-5 * 200, rtol=1e-14)


def test_device_figure_of_merit():
    # Snyder and Snyder 2017, Energy Environ. Sci. 10, 2280, doi 10.1039/C7EE02007D; 1e-5
    assert_allclose(device_figure_of_merit(0.08225812, 500.0, 300.0), 1.0, rtol=1e-5)
    assert_allclose(device_figure_of_merit(0.147, 973.0, 300.0), 0.8309, rtol=1e-4)
    assert_allclose(device_figure_of_merit(0.08590353368, 500.0, 300.0), 1.0666667, rtol=1e-7)
    # implied by peak efficiencies at 973 K hot: El-Genk, Saber and Caillat 2003, Energy Convers. Manage. 44, 1755;
    # segmented 7.8 % (573 K) and 14.7 % (300 K), stated to be 55 % and 99 % above silicon germanium
    efficiency = np.array([0.078 / 1.55, 0.147 / 1.99, 0.078, 0.147])
    implied = device_figure_of_merit(efficiency, 973.0, np.array([573.0, 300.0, 573.0, 300.0]))
    assert_allclose(implied, [0.492, 0.337, 0.883, 0.831], rtol=1.5e-3)  # three digits given


def test_average_zt_overrates_efficiency():
    # Wu, Xie, Chao, Yang and He 2019, ACS Appl. Energy Mater.: germanium-telluride leg, 298 K to 773 K, average
    # zT 1.23, published efficiency 11.2 %; the closed form gives 16.13 %, a device ZT of 0.713 would give 11.2 %
    mean = (773.0 + 298.0) / 2
    assert_allclose(best_efficiency(1.23 / mean, 773.0, 298.0), 0.1613, rtol=5e-4)
    assert_allclose(device_figure_of_merit(0.112, 773.0, 298.0), 0.713, rtol=1e-3)


def coupled_power(generator, external, hot_body, cold_body, load_ratio):
    """Return power [W] and junction difference [K] behind two equal resistances of total conductance ``external``."""
    side = 2 * external

    def cold_junction(hot):
        def misfit(cold):
            _, power, heat = generator.at_load(hot, cold, load_ratio)
            return (cold - cold_body) * side - (heat - power)

        return brentq(misfit, cold_body, hot, xtol=1e-13, rtol=8.9e-16)

    def misfit(hot):
        return (hot_body - hot) * side - generator.at_load(hot, cold_junction(hot), load_ratio)[2]

    hot = brentq(misfit, cold_body + 1e-9, hot_body, xtol=1e-13, rtol=8.9e-16)
    cold = cold_junction(hot)
    return float(generator.at_load(hot, cold, load_ratio)[1]), hot - cold


def test_best_load_and_length_behind_thermal_resistances():
    # Apertet et al. 2012, EPL 97, 28001 (page from memory), arXiv 1108.6164; numbers computed for ZT = 1, 300 K, 1 K
    hot, cold, mean = 300.5, 299.5, 300.0
    seebeck, conductance = 400e-6, 0.02

    def generator(k):
        return Couple(np.asarray(seebeck), np.asarray(seebeck**2 * mean / k), np.asarray(k))

    # generator given, K_c = K: best load 1.5
    assert_allclose(load_ratio_of_most_power(1.0, 1.0), 1.5, rtol=1e-14)
    loads = 1.5 * np.array([0.997, 1.0, 1.003])
    powers = [coupled_power(generator(conductance), conductance, hot, cold, m)[0] for m in loads]
    assert_allclose(vertex(loads, np.array(powers))[0], 1.5, rtol=1e-5)
    # leg length free as well: K_c/K = R_load/R = sqrt(2), half of the difference on the generator
    root = np.sqrt(2.0)
    power, difference = coupled_power(generator(conductance / root), conductance, hot, cold, root)
    assert_allclose(difference, 0.5, rtol=1e-6)
    assert_allclose(power, conductance / (4 * mean) / (1 + root) ** 2, rtol=1e-6)
    assert_allclose(power, power_ceiling(1 / mean, 1.0, mean, 1 / conductance), rtol=1e-6)
    for k, m in ((0.98, 1.0), (1.02, 1.0), (1.0, 0.98), (1.0, 1.02)):
        assert coupled_power(generator(conductance / root * k), conductance, hot, cold, root * m)[0] < power


def test_leg_length_with_contact_layers():
    # Min and Rowe 1992, J. Power Sources 38, 253; Rowe and Min 1998, J. Power Sources 73, 193 (formula from memory,
    # derived again); numbers computed, 1e-6
    length = np.array([0.2e-3, 0.5e-3, 1e-3, 2e-3, 5e-3])
    power = power_with_contacts(200e-6, 1e-5, 1e-6, length, 100.0, 1e-4, 0.2 * 0.8e-3)
    assert_allclose(power, [9.8619329e-3, 12.393417e-3, 10.434928e-3, 7.0777419e-3, 3.4639895e-3], rtol=1e-6)
    z = 200e-6**2 / (1e-5 * 1.5)
    efficiency = efficiency_with_contacts(z, 400.0, 300.0, length, 1e-4, 0.2 * 0.8e-3)
    assert_allclose(efficiency, np.array([0.91575092, 2.0123964, 2.8696051, 3.5258444, 4.0371547]) / 100, rtol=1e-6)
    assert np.argmax(power) == 1
    assert np.all(np.diff(efficiency) > 0)
    # without contacts it is the plain closed form
    assert_allclose(
        efficiency_with_contacts(z, 400.0, 300.0, 1e-3, 0.0, 0.0), matched_efficiency(z, 400.0, 300.0), rtol=1e-13
    )
