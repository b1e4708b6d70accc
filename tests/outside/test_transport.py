"""Transport integrals against published and independently computed values: A1-A11, A17."""

import mpmath
import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.optimize import brentq, minimize_scalar

from tegdesign.material.lorenz import lorenz_rule
from tegdesign.material.transport.band import Band
from tegdesign.material.transport.bands import Bands
from tegdesign.material.transport.conductance import ConductanceFunction
from tegdesign.material.transport.constants import BOLTZMANN, CHARGE, SEEBECK_UNIT
from tegdesign.material.transport.derived import (
    level_from_seebeck,
    quality_factor,
    single_band,
    weighted_mobility,
    weighted_mobility_rule,
)
from tegdesign.material.transport.fermi import fermi_integral
from tegdesign.material.transport.level import Level
from tegdesign.material.transport.reference_lead import absolute_seebeck
from tegdesign.material.transport.scattering.acoustic import Acoustic
from tegdesign.material.transport.scattering.mobility import Mobility

T = 300.0
KT = BOLTZMANN * T


def one_band(exponent=-0.5, carrier="hole"):
    return Bands((Band(carrier, 1.0, (Mobility(0.1, energy_exponent=exponent),)),))


def at_level(bands, level, temperature=T):
    """Holes by choice: S is positive as in the published tables; the level is counted into the band."""
    sign = bands.bands[0].sign
    return bands.at(temperature, sign * np.asarray(level, dtype=float) * BOLTZMANN * temperature)


# A1: SI Brochure, 9th edition (2019), both constants exact.
def test_a1_unit_of_the_seebeck_coefficient():
    assert_allclose(SEEBECK_UNIT * 1e6, 86.1733326215, rtol=1e-12)
    assert_allclose(SEEBECK_UNIT**2, 7.42584325509e-9, rtol=1e-12)


LEVELS_A2 = [-4, -2, 0, 2, 4, 10]
# A2: computed with mpmath at 30 digits, -Gamma(j+1) polylog(j+1, -exp(eta)), checked by quadrature of the definition.
A2 = {
    -0.5: [0.0320493740379, 0.219191607586, 1.07215492994, 2.59539458329, 3.87435315072, 6.29713724453],
    0: [0.0181499279178, 0.126928011043, 0.693147180560, 2.12692801104, 4.01814992792, 10.0000453989],
    0.5: [0.0161277379440, 0.114587823925, 0.678093895153, 2.50245782601, 5.77072652760, 21.3444714924],
    1: [0.0182324489700, 0.131012484714, 0.822467033424, 3.51392158213, 9.62670161788, 51.6448886674],
    1.5: [0.0242694053349, 0.175800988854, 1.15280383709, 5.53725367501, 17.6277025010, 134.270159963],
    2: [0.0365478637632, 0.266265458771, 1.80308535474, 9.51266839283, 34.5293537319, 366.232105470],
    2.5: [0.0607711893745, 0.444554453459, 3.08258608284, 17.5294191874, 71.3480523238, 1034.68425418],
    3: [0.109768487356, 0.805319493023, 5.68219697698, 34.2982832631, 154.211460675, 3004.84434161],
    4: [0.439324340573, 3.23454735196, 23.3308744907, 153.187589123, 808.172748717, 27034.3131151],
}
A2_NORMALISED = {
    -0.5: [0.0180819229914, 0.123665621801, 0.604898643422, 1.46429458909, 2.18586969062, 3.55277923954],
    0.5: [0.0181982035084, 0.129298513320, 0.765147024625, 2.82372127740, 6.51156759275, 24.0846569646],
    1.5: [0.0182567275851, 0.132246782252, 0.867199889012, 4.16541445987, 13.2604881773, 101.005100843],
    2.5: [0.0182861184133, 0.133766929046, 0.927553577774, 5.27462171262, 21.4687082280, 311.337641851],
}


@pytest.mark.parametrize("order", A2)
def test_a2_fermi_integrals(order):
    assert_allclose(fermi_integral(order, LEVELS_A2), A2[order], rtol=5e-12)  # digits printed


@pytest.mark.parametrize("order", A2_NORMALISED)
def test_a2_fermi_integrals_normalised(order):
    assert_allclose(fermi_integral(order, LEVELS_A2, normalised=True), A2_NORMALISED[order], rtol=5e-12)


# A3: GNU Scientific Library, tests of special functions, section Fermi-Dirac; normalised by Gamma(j+1).
A3 = {
    -0.5: {
        -2: 0.12366562180120994,
        -1: 0.29402761761145122,
        1: 1.0270571254743507,
        2.5: 1.6663128834358314,
        10: 3.5527792395366172,
        20: 5.0410185075353286,
        50: 7.9775308585818700,
    },
    0.5: {
        -10: 4.539920105264133e-5,
        -2: 0.12929851332007559,
        -1: 0.32779515926071155,
        1: 1.5756407761513002,
        2.5: 3.6069753779503733,
        10: 24.084656964637654,
        20: 67.491512221658920,
        50: 266.09281252136259,
    },
    1.5: {
        -2: 0.13224678225177237,
        -1: 0.34667479479905742,
        1: 2.0022581487784645,
        2.5: 5.7688793122105166,
        10: 101.00510084332600,
        20: 546.56301006576020,
        50: 5332.3535666871456,
    },
    3: {-2: 0.13421991550386802, 0: 0.94703282949724592, 3: 12.621635313399691},
}


@pytest.mark.parametrize("order", A3)
def test_a3_fermi_integrals_of_a_public_library(order):
    level, value = np.array(list(A3[order].items())).T
    assert_allclose(fermi_integral(order, level, normalised=True), value, rtol=1e-12)


# A4: limits of the Lorenz number, Kim et al. 2015, doi 10.1063/1.4908244: (r + 5/2) (k/e)^2 and (pi^2/3) (k/e)^2.
@pytest.mark.parametrize(
    ("exponent", "classical"), [(-0.5, 1.485168651e-8), (0, 1.856460814e-8), (1.5, 2.970337302e-8)]
)
def test_a4_lorenz_number_limits(exponent, classical):
    bands = one_band(exponent)
    few, some = at_level(bands, [-20, -12]).lorenz_number / classical - 1
    assert abs(few) < 2e-9
    assert abs(some) < 1e-5  # the first correction is of order exp(level)
    metal = at_level(bands, [60, 600]).lorenz_number / 2.443004509e-8 - 1
    # Sommerfeld's next term is of order (pi / level)^2, so the distance must fall a hundredfold.
    assert abs(metal[0]) < 6e-3
    assert_allclose(metal[1] / metal[0], 0.01, rtol=0.2)


# A5: computed with mpmath; standard one-band formulae, e.g. Kang and Snyder 2017, arXiv 1710.06896.
A5 = {
    -0.5: (
        [517.82359, 350.23935, 204.50123, 112.38919, 68.215583, 28.345067],
        [1.4885381, 1.5087271, 1.6129837, 1.8561565, 2.0944757, 2.3631413],
    ),
    0: (
        [560.81948, 392.69231, 244.16714, 145.44997, 94.026088, 41.740840],
        [1.8579514, 1.8669427, 1.9150067, 2.0378646, 2.1752265, 2.3668113],
    ),
    0.5: (
        [603.80152, 435.05043, 283.37526, 177.57791, 118.94047, 54.894878],
        [2.2277548, 2.2278434, 2.2304650, 2.2515434, 2.2954916, 2.3905473],
    ),
    1.5: (
        [689.77930, 519.85482, 362.08591, 241.92159, 168.45134, 80.974671],
        [2.9686504, 2.9584540, 2.9037273, 2.7685695, 2.6357052, 2.4896084],
    ),
}


@pytest.mark.parametrize("exponent", A5)
@pytest.mark.parametrize("carrier", ["electron", "hole"])
def test_a5_one_parabolic_band(exponent, carrier):
    found = at_level(one_band(exponent, carrier), LEVELS_A2)
    sign = {"electron": -1, "hole": 1}[carrier]
    assert_allclose(found.seebeck_coefficient * 1e6, sign * np.array(A5[exponent][0]), rtol=1e-7)
    assert_allclose(found.lorenz_number * 1e8, A5[exponent][1], rtol=1e-7)


def test_a5_in_units_of_boltzmann_over_charge():
    assert_allclose(at_level(one_band(-0.5), 0).reduced_seebeck, 2.37313822, rtol=1e-8)
    assert_allclose(at_level(one_band(1.5), 0).reduced_seebeck, 4.20183250, rtol=1e-8)


# A6: Kim, Gibbs, Tang, Wang, Snyder 2015, APL Mater. 3, 041506, doi 10.1063/1.4908244.
def test_a6_lorenz_number_from_the_seebeck_coefficient():
    s = np.array([50, 100, 150, 200, 250, 300]) * 1e-6
    exact = [2.2201728, 1.9126196, 1.7255706, 1.6198347, 1.5605597, 1.5273713]
    rule = [2.1498365, 1.9222875, 1.7744178, 1.6783267, 1.6158832, 1.5753051]
    _, _, lorenz = single_band(level_from_seebeck(s))
    assert_allclose(lorenz * SEEBECK_UNIT**2 * 1e8, exact, rtol=1e-7)
    assert_allclose(lorenz_rule(s) * 1e8, rule, rtol=1e-7)
    everywhere = at_level(one_band(), np.linspace(-6, 16, 221))
    deviation = lorenz_rule(everywhere.seebeck_coefficient) / everywhere.lorenz_number - 1
    assert_allclose(deviation.max(), 0.0365, rtol=0.002)
    assert_allclose(deviation[160], -0.034, rtol=0.01)  # at level 10
    assert np.max(np.abs(deviation)) < 0.05


# A7: Snyder et al. 2020, Adv. Mater. 32, 2001537, doi 10.1002/adma.202001537; exact counterpart computed.
def test_a7_weighted_mobility():
    s = np.array([20, 50, 100, 150, 200, 250, 300]) * 1e-6
    exact = [23.325658, 58.807404, 131.82583, 249.10158, 452.40160, 812.29254, 1453.4040]
    rule = [24.048830, 60.741731, 134.84906, 253.46110, 455.94015, 815.00980, 1456.0327]
    assert_allclose(weighted_mobility(s, 1e-5, 300.0) * 1e4, exact, rtol=1e-7)
    assert_allclose(weighted_mobility_rule(s, 1e-5, 300.0) * 1e4, rule, rtol=1e-7)
    assert_allclose(weighted_mobility(200e-6, 2e-5, 600.0) * 1e4, 79.974060, rtol=1e-7)
    assert_allclose(weighted_mobility_rule(200e-6, 2e-5, 600.0) * 1e4, 80.599593, rtol=1e-7)
    fine = np.linspace(20e-6, 300e-6, 99)
    ratio = weighted_mobility_rule(fine, 1e-5, 300.0) / weighted_mobility(fine, 1e-5, 300.0)
    assert 1.0 < ratio.min() < ratio.max() < 1.0335


def test_a7_weighted_mobility_of_the_general_code_is_the_one_put_in():
    found = Bands((Band("electron", 0.3, (Mobility(0.05),), degeneracy=4),)).at(300.0, 1.3 * KT)
    got = weighted_mobility(found.seebeck_coefficient, 1 / found.conductivity, 300.0)
    assert_allclose(got, 4 * 0.3**1.5 * 0.05, rtol=1e-9)


# A8: Mahan and Sofo 1996, PNAS 93, 7436, doi 10.1073/pnas.93.15.7436; position of the optimum computed with mpmath.
def test_a8_single_level():
    level = Level(0.1 * CHARGE, 1e-15)
    found = level.at(300.0, 0.0)
    assert_allclose(found.seebeck_coefficient, -333.333333333e-6, rtol=1e-11)
    assert found.electronic_thermal_conductivity == 0
    assert found.lorenz_number == 0

    def power_factor(x):
        return float(Level(x * KT, KT).at(T, 0.0).power_factor) / SEEBECK_UNIT**2

    best = minimize_scalar(lambda x: -power_factor(x), bounds=(2, 3), method="bounded", options={"xatol": 1e-10})
    assert_allclose(power_factor(2.39935728052), 0.439228839891, rtol=1e-11)
    assert_allclose(-best.fun, 0.439228839891, rtol=1e-11)
    assert_allclose(best.x, 2.39935728052, rtol=1e-7)  # a flat top; the value is the sharp test
    for temperature in (100.0, 300.0, 1000.0):
        here = Level(2.39935728052 * BOLTZMANN * temperature, 1.0).at(temperature, 0.0)
        assert_allclose(here.seebeck_coefficient * 1e6, -206.76061, rtol=1e-7)


def test_a8_narrow_window_tends_to_a_single_level():
    middle = 2.4 * KT
    for width in (1.0, 0.1, 1e-3, 1e-6):
        half, edge = width / 2 * KT, 1e-9 * width * KT
        energy = np.array([-CHARGE, middle - half - edge, middle - half, middle + half, middle + half + edge, CHARGE])
        found = ConductanceFunction(energy, np.array([0, 0, 1, 1, 0, 0.0]), 1e-6, 1e-12).at(T, 0.0)
        # A window of width w has the variance w^2/12 about its middle.
        assert_allclose(found.lorenz_number / SEEBECK_UNIT**2, width**2 / 12, rtol=0.2 * width**2 + 1e-6)
    assert_allclose(found.seebeck_coefficient, -2.4 * SEEBECK_UNIT, rtol=1e-9)


# A9: Kang and Snyder 2017, arXiv 1710.06896 (method); numbers computed.
@pytest.mark.parametrize(
    ("quality", "level", "merit", "seebeck"),
    [
        (0.1, 0.080110621, 0.33954976, 199.6346),
        (0.3, -0.41240550, 0.82720337, 231.0080),
        (0.5, -0.68896038, 1.1997938, 250.0382),
        (1, -1.1009097, 1.9004185, 279.9806),
        (2, -1.5469076, 2.8649623, 314.1437),
    ],
)
def test_a9_best_level_for_a_quality_factor(quality, level, merit, seebeck):
    mobility = 0.04
    lattice = quality_factor(mobility, T, 1.0) / quality
    bands = Bands((Band("hole", 1.0, (Mobility(mobility),)),))

    def zt(eta):
        r = at_level(bands, eta)
        return float(r.power_factor * T / (r.electronic_thermal_conductivity + lattice))

    best = minimize_scalar(lambda eta: -zt(eta), bounds=(-3, 2), method="bounded", options={"xatol": 1e-9})
    assert_allclose(best.x, level, atol=1e-5)
    assert_allclose(-best.fun, merit, rtol=1e-7)
    assert_allclose(zt(level), merit, rtol=1e-7)
    assert_allclose(at_level(bands, best.x).seebeck_coefficient * 1e6, seebeck, rtol=1e-5)


# A10: computed with mpmath.
def test_a10_level_of_the_largest_power_factor():
    def factor(eta):
        sigma, s, _ = single_band(eta)
        return float(s**2 * sigma)

    assert_allclose(factor(0.6681219007), 4.060340994, rtol=1e-9)
    assert factor(0.6681219007) > max(factor(0.668), factor(0.6682))
    assert_allclose(single_band(0.6681219007)[1] * SEEBECK_UNIT * 1e6, 166.93246, rtol=1e-7)
    slope = brentq(lambda eta: factor(eta + 1e-4) - factor(eta - 1e-4), 0.5, 0.8, xtol=1e-10)
    assert_allclose(slope, 0.6681219007, rtol=1e-6)


# A11: computed with mpmath; Ravich et al. formalism of acoustic scattering in a Kane band (memory).
LEVELS_A11 = [-2, 0, 2, 4, 8]
A11 = {
    0: (
        [350.2394, 204.5012, 112.3892, 68.21558, 35.39975],
        [1.508727, 1.612984, 1.856157, 2.094476, 2.320763],
    ),
    0.05: (
        [345.7829, 199.6312, 106.4427, 60.99503, 26.65653],
        [1.425984, 1.528903, 1.773389, 2.022584, 2.280102],
    ),
    0.1: (
        [340.3888, 193.7512, 99.40649, 52.96704, 18.97241],
        [1.334983, 1.438082, 1.690885, 1.964919, 2.273272],
    ),
    0.2: (
        [330.7757, 183.4385, 87.77582, 41.16084, 10.73495],
        [1.200008, 1.308484, 1.590369, 1.921503, 2.299569],
    ),
    0.5: (
        [312.7230, 164.6566, 68.75147, 25.27618, 3.711845],
        [1.012993, 1.142200, 1.502379, 1.939367, 2.360265],
    ),
}


@pytest.mark.parametrize("bend", A11)
def test_a11_kane_band(bend):
    gap = KT / bend if bend else None
    found = at_level(Bands((Band("hole", 0.2, (Acoustic(3e-18, 7e10),), kane_gap=gap),)), LEVELS_A11)
    assert_allclose(found.seebeck_coefficient * 1e6, A11[bend][0], rtol=5e-7)  # digits printed
    assert_allclose(found.lorenz_number * 1e8, A11[bend][1], rtol=5e-7)


def test_a11_kane_bands_go_40_percent_below_the_metallic_lorenz_number():
    # Published remark: about 40 % or more below the degenerate limit, Kim et al. 2015, doi 10.1063/1.4908244.
    found = at_level(Bands((Band("hole", 0.2, (Acoustic(3e-18, 7e10),), kane_gap=5 * KT),)), 0)
    assert found.lorenz_number < 0.6 * 2.443004509e-8


# A17: AIP Advances 9, 065312 (2019): platinum -4.8 +- 0.2 uV/K at 300 K (2 sigma).
def test_a17_reference_lead():
    assert_allclose(absolute_seebeck(104.8e-6), 100e-6, rtol=1e-12)
    assert_allclose(absolute_seebeck([-95.2e-6, 0.0]), [-100e-6, -4.8e-6], rtol=1e-12)


# Outside reference: mpmath, which shares no code with numpy. Orders and levels between and beyond the tables.
@pytest.mark.parametrize("order", [-0.99, -0.9, -0.7, -0.5, -0.3, 0, 0.3, 0.5, 1, 1.7, 2.5, 3.5, 5])
def test_fermi_integrals_of_real_order(order):
    levels = np.array([-40, -23.7, -8.2, -7.6, -3.3, -0.25, 0, 0.24, 1.1, 4.26, 12.3, 27, 39.9, 40.3, 51.2, 60.0])
    mpmath.mp.dps = 30
    expected = [float(-mpmath.gamma(order + 1) * mpmath.polylog(order + 1, -mpmath.exp(x)).real) for x in levels]
    assert_allclose(fermi_integral(order, levels), expected, rtol=3e-11 if order > 4 else 2e-12)
