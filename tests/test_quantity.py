"""Text with units to SI and back."""

import math
from typing import Annotated

import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.testing import assert_allclose
from pydantic import BaseModel, Field, ValidationError

from tegdesign.errors import InputError
from tegdesign.quantity import SI, Measure, conversion, parse, write

# Expected values: definitions of the units (inch 25.4 mm, bar 1e5 Pa, 0 degC = 273.15 K, degF by 5/9).
KNOWN = [
    ("1.4 mm", "m", 0.0014),
    ("5 mm^2", "m^2", 5e-6),
    ("5 mm2", "m^2", 5e-6),
    ("0 degC", "K", 273.15),
    ("280 degC", "K", 553.15),
    ("-40 degC", "K", 233.15),
    ("212 degF", "K", 373.15),
    ("300K", "K", 300.0),
    ("1.2 mohm cm", "ohm m", 1.2e-5),
    ("10 uohm cm^2", "ohm m^2", 1e-9),
    ("1000 S/cm", "S/m", 1e5),
    ("-150 uV/K", "V/K", -1.5e-4),
    ("2 W/cm/K", "W/m/K", 200.0),
    ("120 W/m2/K", "W/m^2/K", 120.0),
    ("6.5 g/cm3", "kg/m^3", 6500.0),
    ("1 bar", "Pa", 1e5),
    ("5 %", "", 0.05),
    ("1e-3 m", "m", 1e-3),
    (".5 m", "m", 0.5),
    (0.25, "", 0.25),
    (3, "", 3.0),
]


@pytest.mark.parametrize(("text", "unit", "expected"), KNOWN)
def test_known_values(text, unit, expected):
    # degF goes through 459.67 * 5/9, which costs some last digits; all others are exact to the last one
    assert_allclose(parse(text, unit), expected, rtol=1e-14 if "degF" in str(text) else 1e-15)


def test_a_short_decimal_stays_the_nearest_number():
    assert parse("1.4 mm", "m") == 0.0014
    assert parse("89.8 uV/K", "V/K") == 89.8e-6
    assert parse("0.1 mm", "m") == 0.0001


def test_differences():
    assert parse("10 degC", "K", difference=True) == 10.0
    assert_allclose(parse("18 degF", "K", difference=True), 10.0, rtol=1e-15)
    assert conversion("degC", "K") == (1.0, 273.15)
    assert conversion("degC", "K", True) == (1.0, 0.0)
    assert conversion("uV/degC", "V/K", True) == (1e-6, 0.0)


@pytest.mark.parametrize(
    ("text", "unit", "words"),
    [
        ("1.4", "m", "'1.4' has no unit; write one, like '1.4 m'"),
        (1.4, "m", '1.4 has no unit; write it as text with one, like "1.4 m"'),
        ("1.4 kg", "m", "unit 'kg' has the wrong dimension, expected one like 'm'"),
        ("1.4 furlongz", "m", "unit 'furlongz' is not a known unit, expected one like 'm'"),
        ("1.4 m", "", "unit 'm' has the wrong dimension"),
        ("nan m", "m", "'nan m' is not a finite number"),
        ("inf K", "K", "'inf K' is not a finite number"),
        (math.nan, "", "nan is not a finite number"),
        ("many m", "m", "'many m' is not a number with a unit"),
        ("", "m", "'' is not a number with a unit"),
        ("1,4 mm", "m", "unit ',4 mm' is not a known unit"),
        (True, "", "expected a number with a unit"),
        (None, "m", "expected a number with a unit"),
        ([1], "m", "expected a number with a unit"),
    ],
)
def test_what_cannot_be_read(text, unit, words):
    with pytest.raises(InputError) as caught:
        parse(text, unit)
    assert words in str(caught.value)


PAIRS = [
    ("m", "mm"),
    ("K", "degC"),
    ("K", "K"),
    ("ohm m", "mohm cm"),
    ("ohm m^2", "uohm cm^2"),
    ("V/K", "uV/K"),
    ("kg/m^3", "g/cm^3"),
    ("", None),
]


@pytest.mark.parametrize(("unit", "shown"), PAIRS)
@given(value=st.floats(min_value=1e-12, max_value=1e6))
def test_what_is_written_reads_back_exactly(unit, shown, value):
    text = write(value, unit, shown)
    assert parse(text if unit else float(text), unit) == value


def test_written_in_the_unit_people_like():
    assert write(0.0014, "m", "mm") == "1.4 mm"
    assert write(553.15, "K", "degC") == "280 degC"
    assert write(10.0, "K", "degC", difference=True) == "10 degC"
    assert write(1e-9, "ohm m^2", "uohm cm^2") == "10 uohm cm^2"


class Box(BaseModel):
    length: Annotated[float, Measure("m", "mm"), Field(gt=0, le=1)]
    share: Annotated[float, Measure("")] = 0.5


def test_typed_field_reads_checks_and_writes_back():
    box = Box(length="1.4 mm")
    assert box.length == 0.0014
    assert box.model_dump() == {"length": "1.4 mm", "share": 0.5}
    assert Box.model_validate(box.model_dump()) == box
    assert Box(length=SI(0.2)).length == 0.2
    with pytest.raises(ValidationError, match="less than or equal to 1"):
        Box(length="2 m")
    with pytest.raises(ValidationError, match="wrong dimension"):
        Box(length="2 K")
    with pytest.raises(ValidationError, match="has no unit"):
        Box(length=0.2)


def test_schema_of_a_typed_field():
    properties = Box.model_json_schema()["properties"]
    assert properties["length"]["type"] == "string"
    assert "1 mm" in properties["length"]["description"]
    assert properties["share"]["type"] == "number"


@pytest.mark.parametrize("prefix", ["", "n", "u", "m", "k", "M"])
@pytest.mark.parametrize(
    "target", ["m", "W", "V", "V/K", "W/m/K", "W/m^2/K", "ohm", "ohm*m", "A", "W/K", "m^2", "1/K", "S/m", "K", "kg/m^3"]
)
def test_units_read_without_the_library_agree_with_it(prefix, target):
    import pint

    from tegdesign.quantity import _direct, conversion

    direct = _direct(prefix + target, target, True)
    registry = pint.UnitRegistry()
    try:
        expected = registry.Quantity(1.0, prefix + target).to(target).magnitude
    except pint.UndefinedUnitError:
        assert direct is None  # a second prefix, as in mkg
        return
    assert_allclose(conversion(prefix + target, target, True)[0], expected, rtol=1e-14)
    if direct is not None:
        assert_allclose(direct[0], expected, rtol=1e-14)


def test_degrees_celsius_need_no_library():
    from tegdesign.quantity import _direct

    assert _direct("degC", "K", False) == (1.0, 273.15)
    assert _direct("degC", "K", True) == (1.0, 0.0)
    assert _direct("cm2", "m^2", False) is None


def test_common_conversions_are_those_of_the_units_library():
    from tegdesign.quantity import _COMMON, _registry

    for (unit, target), factor in _COMMON.items():
        exact = _registry().Quantity(1.0, unit.replace("^", "**")).to(target.replace("^", "**")).magnitude
        assert_allclose(factor, exact, rtol=1e-15)
