"""Rows along a stream against closed forms and against an independent continuous exchanger."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import solve_bvp

from tegdesign.material.curve import Curve
from tegdesign.material.material import Material, Stated
from tegdesign.module.module import Modules
from tegdesign.system.boundary import Film, Stream
from tegdesign.system.growth import growth
from tegdesign.system.load import GivenCurrent, Matched
from tegdesign.system.rows import rows_point

ONE = np.ones(1)
KAPPA, RHO, LENGTH, SIDE, PITCH = 1.5, 1e-5, 2e-3, 1.5e-3, 2e-3
FOOTPRINT = 2 * PITCH**2 * 100  # of 100 couples


def module(seebeck):
    """Return 100 couples of constant properties, mirror-image legs, without losses."""
    t = np.array([100.0, 3000.0])
    pair = [
        Material(f"constant-{p}", "", p, *(Curve(t, np.full(2, v)) for v in (s, RHO, KAPPA)), Stated(3000.0),
                 Stated(7000.0), "made for this test")
        for p, s in (("n", -seebeck), ("p", seebeck))
    ]  # fmt: skip
    first = np.zeros(1, dtype=np.intp)
    return Modules(pair, first, first + 1, LENGTH, SIDE, SIDE, PITCH, 100.0, FOOTPRINT)


def stream(inlet, rate, coefficient):
    return Stream.model_construct(
        kind="stream", inlet_temperature=inlet, mass_flow=rate / 1000, heat_capacity=1000.0, coefficient=coefficient,
        area=None, area_enlargement=1.0, fin_efficiency=1.0,
    )  # fmt: skip


CONDUCTANCE = 100 * 2 * KAPPA * SIDE**2 / LENGTH  # W/K per module
UA = 1 / (1 / CONDUCTANCE + 1 / (500 * FOOTPRINT) + 1 / (2000 * FOOTPRINT))  # per module, both films


@pytest.mark.parametrize("counter", [False, True])
@pytest.mark.parametrize("ratio", [0.2, 0.6, 1.7])
def test_conducting_rows_are_a_heat_exchanger(counter, ratio):
    """Effectiveness of parallel-flow and counter-flow exchangers (Kays and London, Compact Heat Exchangers).

    Open circuit of legs with hardly any Seebeck coefficient: modules only conduct, so the continuous exchanger has the
    textbook effectiveness. Rows approach it with 1/N^2, so two numbers of rows give it to 1/N^4 (Richardson).
    """
    count, small = 300.0, 25.0  # modules in all, W/K of the source stream
    ntu, c = UA * count / small, ratio  # capacity rates source/sink
    if counter:
        x = np.exp(-ntu * (1 - c))
        expected = (1 - x) / (1 - c * x)
    else:
        expected = (1 - np.exp(-ntu * (1 + c))) / (1 + c)

    def effectiveness(rows):
        load = GivenCurrent(current="0 A").law(np.ones(rows), np.ones(rows))
        p = rows_point(
            module(1e-9), stream(600.0, small, 500.0), stream(300.0, small / ratio, 2000.0), load, rows=rows,
            modules_per_row=count / rows, counter_current=counter,
        )  # fmt: skip
        return p.heat_in.sum() / (small * 300)

    coarse, fine = effectiveness(40), effectiveness(80)
    assert_allclose((expected - coarse) / (expected - fine), 4, rtol=0.02)
    assert_allclose((4 * fine - coarse) / 3, expected, rtol=5e-6)  # what is left after Richardson's step


def test_power_along_a_hot_stream():
    """P(A) = p_0 C/(2U) (1 - exp(-2 U A / C)), so 90 % of the limit at U A / C = 1.15 and 50 % at 0.35.

    Closed form of a stream that cools as exp(-U A / C) over modules whose power goes with the square of the
    temperature difference (own derivation, common practice, no source). Little Seebeck coefficient, so that heat is
    that of conduction; sink without film; UA of the modules and the gas film. 120 rows of a fortieth of U A / C.
    """
    ua = 1 / (1 / CONDUCTANCE + 1 / (500 * FOOTPRINT) + 1 / (1e9 * FOOTPRINT))
    rate, rows = ua * 40.0, 120
    sink = Film(temperature="300 K", coefficient="1e9 W/m^2/K")
    g = growth(module(2e-6), stream(600.0, rate, 500.0), sink, Matched().law(ONE, ONE), most=rows)
    number = np.arange(1, rows + 1) * ua / rate  # U A / C
    drop = 300 * ua / CONDUCTANCE  # of the junctions at the inlet
    resistance = 100 * 2 * RHO * LENGTH / SIDE**2
    first = (100 * 2 * 2e-6 * drop) ** 2 / (4 * resistance)  # p_0 of one module
    limit = first * rate / (2 * ua)
    expected = limit * (1 - np.exp(-2 * number))
    # a Seebeck coefficient this small still takes Z T / 2 = 2e-5 of the temperature difference; rows: 1/N^2
    assert_allclose(g.power[0], expected, rtol=3e-4)
    assert_allclose(g.limit[0], limit, rtol=3e-4)
    for share, known in ((0.9, 1.15), (0.5, 0.35)):
        assert -0.005 <= number[g.rows_for(share)[0] - 1] - known <= 1 / 40 + 0.005  # to the row and the digits given


@pytest.mark.parametrize("counter", [False, True])
def test_working_rows_against_a_boundary_value_problem(counter):
    """Continuous exchanger of constant-property modules at one given current density, by scipy.integrate.solve_bvp.

    Q_h = K dT + S I T_h - I^2 R / 2, Q_c = K dT + S I T_c + I^2 R / 2 with films, local; the rows know nothing of
    these equations but through the exact leg.
    """
    seebeck, count, current = 180e-6, 80.0, 0.6
    rates = 20.0, 15.0
    s, r = 100 * 2 * seebeck, 100 * 2 * RHO * LENGTH / SIDE**2
    films = 500 * FOOTPRINT, 2000 * FOOTPRINT

    def heats(gas, water):
        """Solve both junctions of one module between local fluids, a linear system by hand."""
        a = films[0] + CONDUCTANCE + s * current
        d = films[1] + CONDUCTANCE - s * current
        e, f = films[0] * gas + current**2 * r / 2, films[1] * water + current**2 * r / 2
        hot = (e * d + f * CONDUCTANCE) / (a * d - CONDUCTANCE**2)
        cold = (f * a + e * CONDUCTANCE) / (a * d - CONDUCTANCE**2)
        return films[0] * (gas - hot), films[1] * (cold - water), s * (hot - cold) - current * r

    way = -1 if counter else 1

    def slope(x, y):
        q_in, q_out, voltage = heats(y[0], y[1])
        return np.array([-count * q_in / rates[0], way * count * q_out / rates[1], count * voltage])

    def ends(left, right):
        return np.array([left[0] - 620, (right[1] if counter else left[1]) - 290, left[2]])

    x = np.linspace(0, 1, 41)
    known = solve_bvp(slope, ends, x, np.outer([500.0, 320.0, 100.0], np.ones(41)), tol=1e-9, max_nodes=5000)
    assert known.success

    def total(rows):
        load = GivenCurrent.model_construct(current=current).law(ONE, ONE)
        p = rows_point(
            module(seebeck), stream(620.0, rates[0], 500.0), stream(290.0, rates[1], 2000.0), load, rows=rows,
            modules_per_row=count / rows, counter_current=counter, one_current=True,
        )  # fmt: skip
        outlet = p.sink_after[0, 0 if counter else -1]
        return np.array([p.source_after[0, -1], outlet, p.total_power[0] / current])

    fine = (4 * total(60) - total(30)) / 3
    expected = [known.sol(1)[0], known.sol(0 if counter else 1)[1], known.sol(1)[2]]
    assert_allclose(fine, expected, rtol=1e-6)
