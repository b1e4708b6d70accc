import json
import tomllib

import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from tegdesign.errors import InputError
from tegdesign.material import file


def test_units_become_si(user_file):
    material = file.read(user_file()).to_material()
    assert_allclose(material.seebeck_coefficient.temperature, [373.15, 473.15, 573.15, 673.15], rtol=1e-15)
    assert_allclose(material.seebeck_coefficient.value, [-120e-6, -140e-6, -160e-6, -180e-6], rtol=1e-15)
    assert_allclose(material.resistivity.value, [0.80e-5, 0.95e-5, 1.10e-5, 1.25e-5], rtol=1e-15)
    assert_allclose(material.service_limit.value, 723.15, rtol=1e-15)
    assert_allclose(material.density.value, 3100.0, rtol=1e-15)


@pytest.mark.parametrize(
    ("heads", "factor"),
    [
        ("resistivity [ohm m]", 1e5),
        ("resistivity [uohm m]", 1e-1),
        ("resistivity [ohm cm]", 1e3),
        ("conductivity [S/cm]", None),
    ],
)
def test_any_unit_of_resistivity(user_file, heads, factor):
    # the same table in other units: number * factor is in mohm cm; conductivity 1000 S/cm is 1 mohm cm
    rows = {"0.80": 0.8, "0.95": 0.95, "1.10": 1.1, "1.25": 1.25}
    path = user_file(
        ("resistivity [mohm cm]", heads),
        *((old, repr(value / factor if factor else 1000 / value)) for old, value in rows.items()),
    )
    rho = file.read(path).to_material().resistivity.value
    assert_allclose(rho, np.array(list(rows.values())) * 1e-5, rtol=1e-14)


def test_seebeck_per_degree_celsius_is_a_difference(user_file):
    path = user_file(("[uV/K]", "[uV/degC]"))
    assert_allclose(file.read(path).to_material().seebeck_coefficient.value[0], -120e-6, rtol=1e-15)


def test_each_property_may_have_its_own_temperatures(user_file):
    path = user_file(
        ("100,                       -120,", "100,                           ,"),
        ("1.10,                          2.2", "-,   2.2"),
        ("1.25,                          2.2", "1.25, "),
    )
    material = file.read(path).to_material()
    assert_allclose(material.seebeck_coefficient.temperature, [473.15, 573.15, 673.15], rtol=1e-15)
    assert_allclose(material.resistivity.temperature, [373.15, 473.15, 673.15], rtol=1e-15)
    assert_allclose(material.thermal_conductivity.temperature, [373.15, 473.15, 573.15], rtol=1e-15)
    assert_allclose(material.range, (473.15, 573.15), rtol=1e-15)
    table = material.properties()
    assert_array_equal(np.isnan(table["seebeck_coefficient_V_per_K"]), [True, False, False, False])
    assert_array_equal(np.isnan(table["thermal_conductivity_W_per_m_K"]), [False, False, False, True])
    assert_array_equal(np.isnan(table["figure_of_merit"]), [True, False, False, True])


def test_round_trip_keeps_everything(user_file, tmp_path):
    path = user_file(
        ('polarity = "n"', 'polarity = "n"\ncaution = "say \\"mind\\" \\\\ and \\t µ"\nair_limit = "600 K"'),
        ("density =", 'notes = ["short", "' + "long words " * 30 + 'end"]\ndensity ='),
    )
    content = file.read(path)
    content.write(tmp_path / "again.toml")
    assert file.read(tmp_path / "again.toml") == content
    assert content.caution == 'say "mind" \\ and \t µ'
    assert content.air_limit == 600


def test_all_documented_keys_are_in_the_schema():
    whole = file.schema()
    assert set(whole["discriminator"]["mapping"]) == set(file.KINDS)
    schema = whole["$defs"]["TableFile"]
    assert schema["additionalProperties"] is False
    assert {"kind", "name", "composition", "polarity", "service_limit", "density", "points"} == set(
        schema["required"]
    )
    assert schema["properties"]["density"]["type"] == "string"
    assert json.loads(json.dumps(whole)) == whole


def test_every_shipped_key_is_in_the_schema():
    from tegdesign.material import library

    models = file.schema()["$defs"]
    keys = {"table": set(models["TableFile"]["properties"]), "bands": set(models["BandsFile"]["properties"])}
    for path in library.shipped().glob("*.toml"):
        data = tomllib.loads(path.read_text())
        assert set(data) <= keys[data["kind"]]


def test_caution_becomes_a_warning(user_file):
    material = file.read(user_file(('polarity = "n"', 'polarity = "n"\ncaution = "BRITTLE"'))).to_material()
    assert material.warnings == ("home-made-n: BRITTLE",)


WRONG = {
    "unknown key": (("density =", "densitty ="), ":7: unknown key: densitty; closest: density"),
    "unknown key in a table": (("citation =", "citatoin ="), ":17: unknown key: source.citatoin; closest:"),
    "missing key": (('polarity = "n"\n', ""), ":1: missing key: polarity; add it"),
    "wrong word": (('polarity = "n"', 'polarity = "m"'), ":4: polarity: 'm' (limit: one of 'n' or 'p')"),
    "number without unit": (('"3.1 g/cm3"', "3100"), ":7: density: 3100 has no unit"),
    "text without unit": (('"3.1 g/cm3"', '"3100"'), ":7: density: '3100' has no unit"),
    "wrong dimension": (('"450 degC"', '"450 m"'), ":5: service_limit: unit 'm' has the wrong dimension"),
    "unknown unit": (('"450 degC"', '"450 grd"'), ":5: service_limit: unit 'grd' is not a known unit"),
    "impossible value": (('"3.1 g/cm3"', '"3.1 mg/cm3"'), ":7: density: "),
    "no kind": (('kind = "table"\n', ""), ":1: missing key kind; write kind = 'table'"),
    "unknown kind": (('kind = "table"', 'kind = "tabel"'), ":1: kind = 'tabel' is not a known kind"),
    "not TOML": (('polarity = "n"', "polarity = n"), ":4: not valid TOML"),
    "column without unit": (("resistivity [mohm cm]", "resistivity"), ":9: column without unit: resistivity"),
    "column of wrong dimension": (("[mohm cm]", "[mohm]"), ":9: column resistivity: unit 'mohm' has"),
    "unknown column": (("thermal_conductivity [", "termal_conductivity ["), ":9: unknown column: termal_"),
    "column twice": (("resistivity [mohm cm]", "seebeck_coefficient [uV/K]"), ":9: column given twice"),
    "missing column": ((", thermal_conductivity [W/m/K]", ""), ":9: missing column: thermal_c"),
    "both": (("thermal_conductivity [W/m/K]", "conductivity [S/m]"), ":9: missing column: thermal_c"),
    "too few cells": (("0.95,                          2.3", "0.95"), ":11: number of cells: 3 (limit: 4"),
    "no number": (("0.95", "abc"), ":11: resistivity is not a finite number: 'abc'"),
    "decimal comma": (("0.95", "0,95"), ":11: number of cells: 5"),
    "not finite": (("0.95", "nan"), ":11: resistivity is not a finite number: 'nan'"),
    "no temperature": (("               200,", ","), ":11: temperature is not a finite number: ''"),
    "temperature twice": (("200,", "100,"), ":11: temperature given twice: 373.15 K"),
    "falling": (("300,", "150,"), ":12: temperatures must rise: 423.15 K (limit: above 473.15 K); sort"),
    "resistivity high": (("[mohm cm]", "[ohm m]"), ":10: resistivity out of reach: 0.8 ohm m"),
    "resistivity low": (("0.80", "0.0080"), ":10: resistivity out of reach: 8e-08 ohm m"),
    "negative": (("0.95", "-0.95"), ":11: resistivity out of reach: -9.5e-06 ohm m (limit: 1e-7 ohm m to"),
    "kappa": (("2.3", "2300"), ":11: thermal_conductivity out of reach: 2300 W/m/K (limit: 0.01 W/m/K"),
    "S": (("[uV/K]", "[V/K]"), ":10: seebeck_coefficient out of reach: -120 V/K"),
    "temperature": (("400,", "4000,"), ":13: temperature out of reach: 4273.15 K"),
    "sign": (('polarity = "n"', 'polarity = "p"'), ":10: seebeck_coefficient has the wrong sign everywhere"),
    "doi": (("citation = ", 'doi = "doi 10.1/x"\ncitation ='), ":17: source.doi: "),
    "name": (('"home-made-n"', '"Home Made"'), ":2: name: "),
}  # fmt: skip


@pytest.mark.parametrize("case", WRONG)
def test_wrong_files_are_refused_with_file_and_line(user_file, case):
    change, words = WRONG[case]
    path = user_file(change)
    with pytest.raises(InputError) as caught:
        file.read(path)
    assert str(caught.value).startswith(f"{path}{words}"), str(caught.value)
    assert "\n" not in str(caught.value)


def test_properties_that_are_nowhere_known_together(user_file):
    path = user_file(
        ("0.80,                          2.4", "0.80, "),
        ("0.95,                          2.3", "0.95, "),
        ("1.10,                          2.2", "-, 2.2"),
        ("1.25,                          2.2", "-, 2.2"),
    )
    with pytest.raises(
        InputError, match=r"share no temperatures: resistivity ends at 473\.15 K, thermal_con"
    ):
        file.read(path)


def test_too_few_points_and_an_empty_table(user_file):
    path = user_file(("-120", "-"), ("-140", "-"), ("-160", "-"))
    with pytest.raises(InputError, match="too few points of seebeck_coefficient: 1 "):
        file.read(path)
    text = path.read_text()
    start, end = text.index("temperature ["), text.index('"""\n\n[')
    path.write_text(text[:start] + text[end:])
    with pytest.raises(InputError, match=":9: the table of points is empty"):
        file.read(path)


def test_files_that_are_no_text(tmp_path):
    binary = tmp_path / "binary.toml"
    binary.write_bytes(b"\x89PNG\xff\xfe")
    with pytest.raises(InputError, match=r"binary\.toml: is not a UTF-8 text file"):
        file.read(binary)
    with pytest.raises(InputError, match="no such file"):
        file.read(tmp_path / "none.toml")
    with pytest.raises(InputError, match="is a folder"):
        file.read(tmp_path)
