"""Loads against general numerical libraries that know nothing of the conditions by which they are solved."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.interpolate import RegularGridInterpolator
from scipy.optimize import minimize, minimize_scalar

from tegdesign.material.library import find
from tegdesign.module.module import Modules
from tegdesign.quantity import SI
from tegdesign.system.boundary import Film
from tegdesign.system.load import Battery, Converter, GivenCurrent
from tegdesign.system.load.efficiency_table import EfficiencyTable
from tegdesign.system.operating_point import operating_point

ONE = np.ones(1)
SOURCE = Film(temperature="540 K", coefficient="600 W/m^2/K")
SINK = Film(temperature="300 K", coefficient="1200 W/m^2/K")


@pytest.fixture(scope="module")
def module():
    pair = [find("bismuth-telluride-n-se0.3"), find("bismuth-telluride-p-sb1.54")]
    index = np.zeros(1, dtype=np.intp)
    return Modules(
        pair, index, index + 1, *(np.array([v]) for v in (1.6e-3, 1.4e-3, 1.4e-3, 2e-3, 100.0, 8e-4)),
        contact_resistivity_n=2e-9, contact_resistivity_p=2e-9, lead_resistance=0.01,
    )  # fmt: skip


def solve(module, load):
    laws = (side.law(module.footprint, ONE) for side in (SOURCE, SINK))
    return operating_point(module, *laws, load.law(ONE, ONE))


def at_current(module, current):
    return solve(module, GivenCurrent(current=SI(current)))


@pytest.mark.parametrize("window", [(0.1, 0.9), (0.6, 0.9), (0.1, 0.3)])
def test_converter_is_the_best_current_in_its_window(module, window):
    """scipy.optimize.minimize_scalar over the current, penalised outside the window of voltage."""
    opened = at_current(module, 0.0)
    least, greatest = (share * opened.voltage[0] for share in window)
    load = Converter(running_voltage=(SI(least), SI(greatest)), input_voltage_limit=SI(100.0), efficiency=0.9)
    point = solve(module, load)
    short = opened.voltage[0] / opened.internal_resistance[0]

    def lost(current):
        at = at_current(module, current)
        v = at.voltage[0]
        return -at.power[0] + 1e3 * (max(least - v, 0) + max(v - greatest, 0))

    found = minimize_scalar(lost, bounds=(0, 0.95 * short), method="bounded", options={"xatol": 1e-7 * short})
    # the search stops within its own step: flat at the top, steep at an edge
    assert_allclose(point.power, -found.fun, rtol=2e-6)
    assert_allclose(point.current, found.x, rtol=2e-4)


@pytest.mark.parametrize("share", [0.3, 0.8, 0.999, 1.1])
def test_battery_is_the_top_of_a_constrained_program(module, share):
    """I >= 0, V_held + I R >= V, one of both an equality: the optimum of integral (V - held - I R) dI over I >= 0.

    (Complementarity as the condition of a minimum: Cottle, Pang, Stone, The Linear Complementarity Problem; memory.)
    The voltage comes from a polynomial through given currents, its integral from numpy; the bound is scipy's.
    """
    opened = at_current(module, 0.0)
    short = opened.voltage[0] / opened.internal_resistance[0]
    grid = short * np.linspace(0, 0.8, 13)
    curve = np.polynomial.Polynomial.fit(grid, [at_current(module, i).voltage[0] for i in grid], 8)
    held, ohms = share * opened.voltage[0], 0.1 * opened.internal_resistance[0]
    fall = np.polynomial.Polynomial.fit(grid, ohms * grid, 1)
    slope = curve - held - fall
    gain = slope.integ()
    unit = opened.voltage[0] * short
    found = minimize(
        lambda x: -gain(x[0] * short) / unit,
        [0.3],
        jac=lambda x: [-slope(x[0] * short) * short / unit],
        bounds=[(0, 0.8)],
        method="L-BFGS-B",
        options={"ftol": 1e-15, "gtol": 1e-12},
    )
    point = solve(module, Battery(voltage=SI(held), series_resistance=SI(ohms)))
    assert_allclose(point.current / short, found.x, rtol=1e-6, atol=1e-9)


def test_bilinear_table_against_scipy():
    """scipy.interpolate.RegularGridInterpolator, method linear, on random points of a grid of uneven steps."""
    r = np.random.default_rng(2)
    volts, watts = np.cumsum(r.uniform(0.1, 2, 5)), np.cumsum(r.uniform(0.1, 9, 4))
    values = r.uniform(0.3, 0.95, (5, 4))
    table = EfficiencyTable(
        voltage=tuple(map(SI, volts)), power=tuple(map(SI, watts)), efficiency=tuple(values.ravel().tolist())
    )
    v, p = r.uniform(volts[0], volts[-1], 500), r.uniform(watts[0], watts[-1], 500)
    expected = RegularGridInterpolator((volts, watts), values)(np.stack([v, p], axis=-1))
    got, outside = table.at(v, p)
    assert_allclose(got, expected, rtol=1e-13)
    assert not outside.any()
    corner, _ = table.at(volts[[0, -1]], watts[[0, -1]])
    assert_allclose(corner, [values[0, 0], values[-1, -1]], rtol=1e-15)
