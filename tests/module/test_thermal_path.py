import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.module.gap import conduction, radiation
from tegdesign.module.spreading import spreading_resistance


def test_plates_interfaces_and_joints_by_hand(ideal, change):
    m = change(
        ideal,
        substrate_thickness_hot=0.8e-3,
        substrate_conductivity_hot=24.0,
        substrate_thickness_cold=0.5e-3,
        substrate_conductivity_cold=170.0,
        interface_hot=3e-5,
        interface_cold=5e-5,
        contact_thermal=1e-6,
        electrode_thickness=np.array([0.3e-3]),
        spreading=0.0,
    )
    hot, cold = m.thermal_parts("hot"), m.thermal_parts("cold")
    # footprint 1100 mm2, 100 legs of 1.96 and of 2.56 mm2; electrode over side x (side + half the 0.7 mm gap)
    assert_allclose(hot["interface"], 3e-5 / 1.1e-3, rtol=1e-12)
    assert_allclose(cold["interface"], 5e-5 / 1.1e-3, rtol=1e-12)
    cells = 200 * 2.2e-3**2  # the plate behind the legs; its edge carries no heat of theirs
    assert_allclose(hot["substrate"], 0.8e-3 / (24 * cells), rtol=1e-12)
    assert_allclose(cold["substrate"], 0.5e-3 / (170 * cells), rtol=1e-12)
    assert_allclose(hot["joint"], 1e-6 / 452e-6, rtol=1e-12)
    metal = 100 * (1.4e-3 * 1.75e-3 + 1.6e-3 * 1.95e-3)
    assert_allclose(hot["electrode"], 0.3e-3 / (390 * metal), rtol=1e-12)
    assert hot["spreading"][0] == cold["spreading"][0] == 0
    assert_allclose(m.resistance_hot, sum(hot.values()), rtol=1e-15)


def test_spreading_is_two_kinds_of_patches_in_parallel(ideal, change):
    m = change(ideal, substrate_thickness_hot=0.8e-3, substrate_conductivity_hot=24.0)
    cell = 2.2e-3**2
    one = [spreading_resistance(side * (side + 0.35e-3), cell, 0.8e-3, 24.0) for side in (1.4e-3, 1.6e-3)]
    assert_allclose(m.thermal_parts("hot")["spreading"], 1 / (100 / one[0] + 100 / one[1]), rtol=1e-12)


def fourier_series(patch, cell, thickness, conductivity, terms=400):
    """Return the exact spreading resistance of a square patch of even flux on a square plate with a cold far face.

    Separation of variables: flux and temperature as double cosine series over the cell, each mode (m, n) with
    tanh(g t)/(k g), g = pi sqrt(m^2 + n^2)/b; mean temperature over the patch. Sides of half length a and b.
    """
    a, b = np.sqrt(patch) / 2, np.sqrt(cell) / 2
    m = np.arange(1, terms)
    mean = np.concatenate([[1.0], np.sinc(m * a / b)])  # mean of cos(m pi x / b) over the patch
    flux = a / b * np.concatenate([[1.0], 2 * mean[1:]])
    g = np.pi / b * np.hypot(*np.meshgrid(np.arange(terms), np.arange(terms)))
    g[0, 0] = 1.0
    modes = np.outer(flux * mean, flux * mean) * np.tanh(g * thickness) / (conductivity * g)
    modes[0, 0] = 0.0
    return modes.sum() / patch


@pytest.mark.parametrize("fill", [0.15, 0.3, 0.5, 0.7])
@pytest.mark.parametrize("thickness", [0.25e-3, 0.64e-3, 1e-3, 3e-3])
def test_spreading_against_the_series_of_a_square_flux_tube(fill, thickness):
    cell = 2e-3**2
    exact = fourier_series(fill * cell, cell, thickness, 25.0)
    whole = thickness / (25.0 * cell)
    # circles of equal area for squares: judged by what it adds to the plate, t / (k A_cell)
    assert_allclose(spreading_resistance(fill * cell, cell, thickness, 25.0), exact, rtol=0.15, atol=0.02 * whole)


def test_spreading_limits():
    cell = 4e-6
    assert spreading_resistance(cell, cell, 1e-3, 25.0) == 0
    assert spreading_resistance(0.3 * cell, cell, 0.0, 25.0) == 0
    # thin plate: heat goes straight through below the patch, t/(k A_patch) - t/(k A_cell), if t is far below the side;
    # thick plate: no more change with thickness
    thick = [spreading_resistance(0.3 * cell, cell, t, 25.0) for t in (2e-2, 4e-2)]
    assert_allclose(thick[0], thick[1], rtol=1e-12)
    assert_allclose(
        spreading_resistance(0.3 * cell, cell, 1e-3, 50.0) * 2, spreading_resistance(0.3 * cell, cell, 1e-3, 25.0)
    )


def test_power_law_conduction_is_exact():
    # integral of k (T/300)^n dT by Gauss quadrature, which is exact to rounding for so smooth a function
    x, w = np.polynomial.legendre.leggauss(20)
    hot, cold, k, n = 780.0, 320.0, 0.0267, 0.78
    t = (hot + cold) / 2 + (hot - cold) / 2 * x
    exact = (hot - cold) / 2 * np.sum(w * k * (t / 300) ** n)
    got = conduction(hot, cold, k, n)
    assert_allclose(got[0], exact, rtol=1e-13)
    assert_allclose(got[1:], [k * (hot / 300) ** n, -k * (cold / 300) ** n], rtol=1e-15)


def test_radiation_by_hand():
    # 5.670374419e-8 (800^4 - 300^4) / (1/0.8 + 1/0.5 - 1): Stefan-Boltzmann constant of CODATA 2018
    expected = 5.670374419e-8 * (4.096e11 - 8.1e9) / 2.25
    value, by_hot, by_cold = radiation(800.0, 300.0, 0.8, 0.5)
    assert_allclose(value, expected, rtol=1e-14)
    assert_allclose([by_hot, by_cold], [4 * 5.670374419e-8 * 800**3 / 2.25, -4 * 5.670374419e-8 * 300**3 / 2.25])


def test_bypass_by_hand(ideal, change):
    m = change(
        ideal,
        filler_conductivity=0.03,
        filler_exponent=0.0,
        emittance_hot=0.8,
        emittance_cold=0.5,
        edge_conductance=2e-3,
    )
    hot, cold = np.array([500.0]), np.array([300.0])
    area = 1.1e-3 - 452e-6
    rays = 5.670374419e-8 * (500**4 - 300**4) / 2.25
    assert_allclose(m.bypass(hot, cold)[0], area * (0.03 * 200 / 1.6e-3 + rays) + 2e-3 * 200, rtol=1e-12)
    dark = change(m, emittance_cold=0.0)
    assert_allclose(dark.bypass(hot, cold)[0], area * 0.03 * 200 / 1.6e-3 + 2e-3 * 200, rtol=1e-12)


def test_bypass_slopes_against_central_differences(random_modules):
    m = random_modules(50)
    hot, cold, d = np.full(50, 520.0), np.full(50, 330.0), 1e-2
    value = m.bypass(hot, cold)
    assert_allclose(value[1], (m.bypass(hot + d, cold)[0] - m.bypass(hot - d, cold)[0]) / (2 * d), rtol=1e-7)
    assert_allclose(value[2], (m.bypass(hot, cold + d)[0] - m.bypass(hot, cold - d)[0]) / (2 * d), rtol=1e-7)
