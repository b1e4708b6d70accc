import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.leg.closed_form import couple
from tegdesign.module.module import flows


def state(modules, seed=1):
    r = np.random.default_rng(seed)
    cold = r.uniform(310, 340, modules.size)
    hot = cold + r.uniform(20, 140, modules.size)
    still = flows(modules, hot, cold, np.zeros(modules.size))
    return hot, cold, r.uniform(0, 0.9, modules.size) * still.open_voltage / still.internal_resistance


@pytest.mark.parametrize("which", [0, 1, 2])
def test_slopes_against_central_differences(random_modules, which):
    m = random_modules(300)
    at = state(m)
    steps = (1e-3, 1e-3, 1e-4 * at[2].mean())
    moved = [[v + sign * steps[which] * (k == which) for k, v in enumerate(at)] for sign in (1, -1)]
    up, down, here = flows(m, *moved[0]), flows(m, *moved[1]), flows(m, *at)
    for name in ("heat_hot", "heat_cold", "voltage"):
        difference = (getattr(up, name) - getattr(down, name)) / (2 * steps[which])
        slope = getattr(here, f"{name}_slopes")[which]
        # kinks of the tables make single differences less sure than the slopes
        assert_allclose(slope, difference, rtol=3e-5, atol=3e-5 * np.abs(difference).max())


def test_voltage_and_heat_balance_on_every_state(random_modules):
    m = random_modules(3000)
    hot, cold, current = state(m)
    f = flows(m, hot, cold, current)
    assert f.converged.all()
    assert_allclose(f.voltage, f.open_voltage - current * f.internal_resistance, rtol=1e-12, atol=0)
    # first law: what enters and does not leave is power at the leads and loss in the leads
    power = current * f.voltage + current**2 * m.lead_resistance
    assert_allclose(f.heat_hot - f.heat_cold, power, rtol=0, atol=1e-12 * f.heat_hot.max())
    # second law of the module between its junctions
    assert np.all(f.heat_cold / cold >= f.heat_hot / hot)


def test_without_losses_the_module_is_the_closed_form(ideal):
    hot, cold, amperes = (np.array([v]) for v in (480.0, 310.0, 3.0))
    f = flows(ideal, hot, cold, amperes)
    c = couple(400e-6, 1.1e-5, 0.9e-5, 1.6, 1.3, 1.4e-3**2, 1.6e-3**2, 1.6e-3, 1.6e-3)
    # V = alpha dT - I R, Q_h = K dT + alpha I T_h - I^2 R / 2 for each of 100 couples (Altenkirch 1909; Ioffe 1957)
    assert_allclose(f.voltage, 100 * (400e-6 * 170 - 3.0 * c.resistance), rtol=1e-12)
    heat = 100 * (c.conductance * 170 + 400e-6 * 3.0 * 480 - 3.0**2 * c.resistance / 2)
    assert_allclose(f.heat_hot, heat, rtol=2e-8)  # the integration of the leg is trusted to 3e-8
    assert_allclose(f.leg_resistance_n, 100 * 1.1e-5 * 1.6e-3 / 1.4e-3**2, rtol=1e-12)
    assert_allclose(f.leg_resistance_p, 100 * 0.9e-5 * 1.6e-3 / 1.6e-3**2, rtol=1e-12)
    assert f.electrode_resistance[0] == f.bypass[0] == 0
    assert ideal.resistance_hot[0] == ideal.resistance_cold[0] == 0


def test_joints_and_electrodes_by_hand(ideal, change):
    m = change(
        ideal,
        contact_resistivity_n=2e-9,
        contact_resistivity_p=3e-9,
        electrode_thickness=np.array([0.3e-3]),
        electrode_resistivity=1.7241e-8,
        electrode_coefficient=0.00393,
        lead_resistance=0.01,
    )
    hot, cold, amperes = (np.array([v]) for v in (493.15, 313.15, 2.0))
    f, bare = flows(m, hot, cold, amperes), flows(ideal, hot, cold, amperes)
    # by hand: one side has 100 joints of each leg
    joints = 100 * (2e-9 / 1.96e-6 + 3e-9 / 2.56e-6)
    # gap 2.2 - 1.5 = 0.7 mm; each leg end sees gap/2 + side/3 of 0.3 mm x side
    paths = 100 * ((0.35e-3 + 1.4e-3 / 3) / (0.3e-3 * 1.4e-3) + (0.35e-3 + 1.6e-3 / 3) / (0.3e-3 * 1.6e-3))
    metal_hot, metal_cold = (1.7241e-8 * (1 + 0.00393 * rise) * paths for rise in (200, 20))
    assert_allclose(f.electrode_resistance, metal_hot + metal_cold, rtol=1e-12)
    parasitic = 2 * joints + metal_hot + metal_cold + 0.01
    assert_allclose(f.internal_resistance - bare.internal_resistance, parasitic, rtol=1e-10)
    # heat of joints and metal is set free at its own junction: 4 A^2 each
    assert_allclose(bare.heat_hot - f.heat_hot, 4 * (joints + metal_hot), rtol=1e-9)
    assert_allclose(f.heat_cold - bare.heat_cold, 4 * (joints + metal_cold), rtol=1e-9)


def test_number_of_couples_multiplies_everything_but_the_current(random_modules, change):
    m = random_modules(50)
    at = state(m)
    twice = change(m, couples=2 * m.couples, footprint=2 * m.footprint, lead_resistance=2 * m.lead_resistance)
    twice = change(twice, edge_conductance=2 * m.edge_conductance)
    one, two = flows(m, *at), flows(twice, *at)
    for name in ("heat_hot", "heat_cold", "voltage", "open_voltage", "internal_resistance", "bypass"):
        assert_allclose(getattr(two, name), 2 * getattr(one, name), rtol=1e-12, err_msg=name)
    assert_allclose(twice.resistance_hot, m.resistance_hot / 2, rtol=1e-12)
    assert_allclose(twice.resistance_cold, m.resistance_cold / 2, rtol=1e-12)


def test_larger_legs_scale_as_the_equations_say(ideal):
    """All lengths times k: current and heat times k, voltage unchanged (J L stays)."""
    at = [np.array([v]) for v in (480.0, 310.0, 3.0)]
    k = 2.5
    big = type(ideal)(
        ideal.materials, ideal.n, ideal.p, k * ideal.leg_length, k * ideal.side_n, k * ideal.side_p,
        k * ideal.pitch, 100.0, k**2 * ideal.footprint, filler_conductivity=0.03, filler_exponent=0.5,
    )  # fmt: skip
    small = type(ideal)(
        ideal.materials, ideal.n, ideal.p, ideal.leg_length, ideal.side_n, ideal.side_p,
        ideal.pitch, 100.0, ideal.footprint, filler_conductivity=0.03, filler_exponent=0.5,
    )  # fmt: skip
    a, b = flows(small, *at), flows(big, at[0], at[1], k * at[2])
    assert_allclose(b.voltage, a.voltage, rtol=1e-12)
    assert_allclose(b.heat_hot, k * a.heat_hot, rtol=1e-12)
    assert_allclose(b.bypass, k * a.bypass, rtol=1e-12)


def test_exchanging_n_and_p_changes_nothing(constant, ideal, change):
    """A leg of the other sign with the current the other way carries the same heat."""
    mirror = [constant("n", -210e-6, 0.9e-5, 1.3), constant("p", 190e-6, 1.1e-5, 1.6)]
    other = change(ideal, materials=mirror, side_n=ideal.side_p, side_p=ideal.side_n)
    at = [np.array([v]) for v in (480.0, 310.0, 3.0)]
    one, two = flows(ideal, *at), flows(other, *at)
    for name in ("heat_hot", "heat_cold", "voltage", "internal_resistance"):
        assert_allclose(getattr(two, name), getattr(one, name), rtol=1e-13, err_msg=name)
    assert_allclose(two.leg_resistance_p, one.leg_resistance_n, rtol=1e-13)


def test_mixed_batch_equals_separate_batches_and_single_designs(random_modules):
    m = random_modules(400)
    at = state(m)
    together = flows(m, *at)
    for first in (0, 2, 4):
        mask = m.n == first
        alone = flows(m.take(mask), *(v[mask] for v in at))
        for name in ("heat_hot", "heat_cold", "voltage", "internal_resistance"):
            assert_allclose(getattr(together, name)[mask], getattr(alone, name), rtol=1e-9, err_msg=name)
    single = flows(m.take([7]), *(v[[7]] for v in at))
    assert_allclose(single.heat_hot, together.heat_hot[[7]], rtol=1e-9)
    assert_allclose(single.voltage, together.voltage[[7]], rtol=1e-9)


def test_take_keeps_single_numbers_and_picks_from_arrays(random_modules):
    m = random_modules(10)
    part = m.take(np.array([3, 8]))
    assert part.size == 2
    assert part.electrode_resistivity == 1.7241e-8
    assert_allclose(part.leg_length, m.leg_length[[3, 8]], rtol=0)
    assert_allclose(part.resistance_hot, m.resistance_hot[[3, 8]], rtol=1e-15)
