import numpy as np
from numpy.testing import assert_allclose

from tegdesign.module.bridge import bar, bolts


def test_bar_by_hand():
    # 2 cm2 of steel, 15 W/m/K, over 10 mm
    assert_allclose(bar(2e-4, 0.01, 15.0), 0.3, rtol=1e-12)


def test_bolts_are_bars_side_by_side():
    assert_allclose(bolts(4, 5e-3, 0.012, 16.0), 4 * bar(np.pi * 2.5e-3**2, 0.012, 16.0), rtol=1e-12)
    two = bolts(2, 5e-3, 0.012, 16.0)
    assert_allclose(bolts([0, 1, 2], 5e-3, 0.012, 16.0), [0, two / 2, two], rtol=1e-12)


def test_washers_are_in_series():
    # two resistances of 10 K/W in series: half the conductance; the limit of perfect washers is none
    one = bolts(1, 5e-3, 0.012, 16.0)
    assert_allclose(bolts(3, 5e-3, 0.012, 16.0, washer_resistance=1 / one), 1.5 * one, rtol=1e-12)
    assert_allclose(bolts(3, 5e-3, 0.012, 16.0, washer_resistance=1e-15), 3 * one, rtol=1e-12)
    assert_allclose(bolts(3, 5e-3, 0.012, 16.0, washer_resistance=1e15), 0, atol=1e-14)
