"""Numbers in words."""

import math

import pytest

from tegdesign.design.wording import amount, both, celsius, kelvin, millimetres, number, percent


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (3.33615, "3.336"),
        (1000.0, "1000"),
        (12345.6, "12346"),
        (0.0, "0"),
        (-0.0, "0"),
        (1e-7, "1e-07"),
        (math.inf, "unlimited"),
        (math.nan, "-"),
    ],
)
def test_number(value, text):
    assert number(value) == text


@pytest.mark.parametrize(
    ("value", "unit", "text"),
    [
        (3.33615, "W", "3.336 W"),
        (0.04, "ohm", "40.00 mohm"),
        (-0.005, "V", "-5.000 mV"),
        (999.96, "W", "1.000 kW"),  # rounding may reach the next prefix
        (999.94, "W", "999.9 W"),
        (2.5e-8, "W", "25.00 nW"),
        (1e-15, "W", "0 W"),
        (0.0, "A", "0 A"),
        (0.0005, "1", "0.0005000"),
        (1500.0, "N", "1500 N"),
        (math.inf, "W", "unlimited W"),
        (None, "W", "-"),
    ],
)
def test_amount(value, unit, text):
    assert amount(value, unit) == text


def test_temperatures_lengths_and_shares():
    assert celsius(504.12) == "231.0 degC"
    assert celsius(273.14) == "0.0 degC"  # never -0.0
    assert both(300.0) == "26.9 degC (300.0 K)"
    assert kelvin(-0.01) == "0.0 K"
    assert millimetres(0.0014) == "1.4 mm"
    assert (percent(0.0394, 2), percent(-0.00001), percent(None)) == ("3.94 %", "0.0 %", "-")
