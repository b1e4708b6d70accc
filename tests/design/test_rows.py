"""Rows of a design: held against the single plate, against themselves, against the closed form of a long stream."""

import copy
import json

import numpy as np
import pytest
from numpy.testing import assert_allclose

import tegdesign
from tegdesign.cli.output import json_text
from tegdesign.design.along import Along
from tegdesign.errors import DataRangeError, InputError
from tegdesign.sheet.rows import draw_rows, rows_report

GAS = {
    "kind": "stream", "inlet_temperature": "250 degC", "mass_flow": "3 g/s", "heat_capacity": "1050 J/kg/K",
    "coefficient": "120 W/m2/K", "area_enlargement": 8, "fin_efficiency": 0.8,
}  # fmt: skip
WATER = {
    "kind": "stream", "inlet_temperature": "25 degC", "mass_flow": "60 g/s", "heat_capacity": "4180 J/kg/K",
    "coefficient": "2500 W/m2/K",
}  # fmt: skip
SHAPE = {"module.modules_in_series": 3, "module.modules_in_parallel": 2}


@pytest.fixture(scope="session")
def along(design):
    return lambda **keys: design(keys=copy.deepcopy({"source": GAS, "sink": WATER, **SHAPE, **keys}))


def test_one_row_is_the_rated_plate(along):
    made = along()
    rated = tegdesign.rate(made).rated
    one = tegdesign.rows(made, rows=1, most=3)
    assert_allclose(one.power_W, rated.power_W, rtol=1e-9)
    assert_allclose(one.rows[0].T_hot_junction_K, rated.T_hot_junction_K, rtol=1e-9)
    six = tegdesign.rows(made, most=3)
    assert len(six.rows) == 6  # as many as modules
    assert_allclose(six.power_as_one_plate_W, rated.power_W, rtol=1e-9)
    assert six.power_W > rated.power_W  # the first ones see the hot gas


@pytest.mark.parametrize("counter", [False, True])
@pytest.mark.parametrize("one_current", [False, True])
def test_totals_are_the_sum_of_the_rows_and_the_streams_tell_the_same(along, counter, one_current):
    r = tegdesign.rows(along(), counter_current=counter, one_current=one_current)
    assert_allclose(sum(row.power_W for row in r.rows), r.power_W, rtol=1e-12)
    assert_allclose(r.heat_in_W - r.heat_out_W, r.power_W, rtol=1e-8)
    assert_allclose((523.15 - r.T_source_outlet_K) * 0.003 * 1050, r.heat_in_W, rtol=1e-9)
    assert_allclose((r.T_sink_outlet_K - 298.15) * 0.060 * 4180, r.heat_out_W, rtol=1e-9)
    first = -1 if counter else 0
    assert_allclose(r.rows[first].T_sink_before_K, 298.15, rtol=1e-12)
    if one_current:  # strings of 3 cannot pass 6 rows, so one string of 6
        assert (r.series, r.parallel) == (6, 1)
        assert_allclose(r.voltage_V * r.current_A, r.power_W, rtol=1e-9)
    else:
        assert r.voltage_V is None


def test_strings_of_the_design_pass_all_rows_where_they_can(along):
    r = tegdesign.rows(along(**{"load": {"kind": "resistance", "resistance": "9 ohm"}}), rows=3, one_current=True)
    assert (r.series, r.parallel, r.modules_per_row) == (3, 2, 2)
    assert_allclose(r.voltage_V / r.current_A, 9, rtol=1e-9)
    assert_allclose(r.voltage_V * r.current_A, r.power_W, rtol=1e-9)


@pytest.mark.parametrize("area", [{}, {"source.area": "100 cm2", "sink.area": "90 cm2"}])
def test_next_row_and_growth_keep_the_exchanger_of_each_row(along, area):
    """A given area belongs to the six rows; further ones bring the same each, so co-current rows before do not move."""
    made = along(**area)
    six = tegdesign.rows(made, most=24)
    assert six.growth.rows == tuple(range(1, 25))
    assert tegdesign.rows(made, rows=2, modules_per_row=1, most=3).notes[0] == "2 modules here, 6 in the design"
    assert_allclose(six.growth.power_W[5], six.power_W, rtol=1e-9)
    assert_allclose(six.growth.power_W[6] - six.growth.power_W[5], six.next_row_adds_W, rtol=1e-8)
    assert_allclose(np.cumsum([row.power_W for row in six.rows]), six.growth.power_W[:6], rtol=1e-9)
    footprint = made.module.width * made.module.depth
    assert_allclose(six.growth.area_m2[5], 6 * footprint, rtol=1e-12)


@pytest.mark.parametrize("one_current", [False, True])
def test_rows_for_90_percent(along, one_current):
    """Closed forms of a stream cooling as exp(-x), x = U A / C, over power as the square of the difference.

    Own loads: 1 - exp(-2 x) = 0.9 at x = 1.15; one string: (1 - exp(-x))^2 / x is highest at x = 1.26 with 0.407, and
    90 % of that at x = 0.73 (own derivation, no source). Real legs change with temperature and the coolant warms.
    """
    r = tegdesign.rows(along(**{"source.mass_flow": "20 g/s", "sink.mass_flow": "6 kg/s"}), one_current=one_current)
    g = r.growth
    x = -np.log((r.T_source_outlet_K - 298.15) / (523.15 - 298.15)) / len(r.rows)
    assert_allclose(g.rows_for_90_percent * x, 0.73 if one_current else 1.15, rtol=0.15)
    assert_allclose(g.area_for_90_percent_m2 / g.rows_for_90_percent, g.area_m2[0] / g.rows[0], rtol=1e-9)
    again = Along(r.design, g.rows_for_90_percent, 1, False, one_current).solve(r.design.load)
    assert_allclose(again.total_power / g.limit_W, 0.9, rtol=0.02)  # to the row


def test_limits_of_the_first_row(along):
    """Bismuth telluride between gas of 560 degC and water: the first row, open, is the hottest."""
    with pytest.raises(DataRangeError, match=r"open circuit, row 1: junction .* above"):
        tegdesign.rows(along(**{"source.inlet_temperature": "560 degC", "materials.hold_outside_data": "2 K"}))
    hot = along(**{"source.inlet_temperature": "560 degC", "materials.hold_outside_data": "200 K"})
    r = tegdesign.rows(hot)
    assert not r.met
    assert "over-service-limit" in [c.id for c in r.cautions]
    assert r.rows[0].room_to_service_limit_K < 0
    assert r.rows[0].outside_data_K > 0
    assert min(row.room_to_service_limit_K for row in r.rows) == r.rows[0].room_to_service_limit_K


def test_outlet_and_power_asked_for(along):
    r = tegdesign.rows(along(**{"source.least_outlet_temperature": "220 degC", "require.power": "500 W"}))
    assert {c.name for c in r.failed} == {"required power", "outlet temperature of the source"}


def test_rows_driven_backwards_are_told(along):
    r = tegdesign.rows(along(**{"source.mass_flow": "1.2 g/s"}), one_current=True)
    assert r.rows[-1].driven_backwards
    assert "driven-backwards" in [c.id for c in r.cautions]
    assert "are driven backwards" in rows_report(r)


@pytest.mark.parametrize(
    ("keys", "options", "words"),
    [
        ({"source": {"kind": "surface", "temperature": "200 degC"}}, {}, "source is of kind 'surface'.*stream"),
        ({"sink": {"kind": "surface", "temperature": "30 degC"}}, {"counter_current": True}, "sink that is a stream"),
        ({}, {"rows": 4}, "rows = 4, but the 6 modules .*divisor"),
        ({}, {"modules_per_row": 5}, "modules_per_row = 5, .*give rows as well"),
        ({}, {"rows": 0}, "rows = 0"),
        ({}, {"most": 2}, "most = 2 rows"),
        ({}, {"most": 3, "one_current": True}, "most = 3 rows: power still grows at the last .*look at more rows"),
    ],
)  # fmt: skip
def test_bad_input(along, keys, options, words):
    with pytest.raises(InputError, match=words):
        tegdesign.rows(along(**keys), **options)


@pytest.mark.parametrize("keys", [{}, {"sink": {"kind": "surface", "temperature": "30 degC"}}])
def test_result_leaves_in_every_form(along, keys, tmp_path):
    r = tegdesign.rows(along(**keys), rows=3)
    frame = r.to_frame()
    assert list(frame.index) == [1, 2, 3]
    assert_allclose(frame["power_W"].sum(), r.power_W, rtol=1e-12)
    assert_allclose(r.growth_frame()["power_W"], r.growth.power_W, rtol=1e-15)
    data = json.loads(json_text(r.to_dict()))
    assert_allclose(data["rows"][1]["heat_in_W"], r.rows[1].heat_in_W, rtol=1e-15)
    report = rows_report(r)
    assert max(map(len, report.splitlines())) <= 100
    assert f"{r.growth.rows_for_90_percent} rows" in report
    draw_rows(r, tmp_path / "rows.svg")
    assert "power of the row" in (tmp_path / "rows.svg").read_text()


def test_no_power_no_growth(along):
    r = tegdesign.rows(along(**{"load": {"kind": "current", "current": "0 A"}}))
    assert r.growth is None
    assert r.growth_frame().empty
    assert "give no power" in rows_report(r)
