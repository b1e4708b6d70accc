"""Ranges: the curve of the rated state against ratings of designs that were changed, and what the drawing holds."""

import csv
import io
import json

import pytest
from matplotlib.figure import Figure
from numpy.testing import assert_allclose
from typer.testing import CliRunner

from tegdesign.cli import app
from tegdesign.design.design import Design
from tegdesign.design.ranges import ranges
from tegdesign.design.rate import rate
from tegdesign.sheet.ranges import draw_range, draw_ranges, key, ranges_table

STATED = {
    "title": "Drier exhaust",
    "source": {
        "kind": "stream", "inlet_temperature": "240 degC", "mass_flow": "12 g/s", "heat_capacity": "1050 J/kg/K",
        "coefficient": "80 W/m2/K", "area_enlargement": 10,
    },
    "sink": {"kind": "film", "temperature": "35 degC", "coefficient": "2000 W/m2/K"},
    "load": {"kind": "resistance", "resistance": "1.6 ohm"},
    "materials": {"n": "bismuth-telluride-n-se0.3", "p": "bismuth-telluride-p-sb1.58", "hold_outside_data": "40 K"},
    "module": {"columns": 12, "rows": 12, "leg_length": "1.6 mm", "leg_side_n": "2.4 mm", "leg_side_p": "2.6 mm",
               "pitch": "3 mm"},
    "require": {"power": "1 W", "voltage": ["1 V", "2.5 V"], "open_circuit_voltage": "6 V", "hot_junction": "180 degC"},
    "states": [
        {"name": "hot drier", "source": {"inlet_temperature": "330 degC"}, "holds": []},
        {"name": "half flow", "source": {"mass_flow": "6 g/s"}, "holds": []},
        {"name": "warm hall", "sink": {"temperature": "45 degC"}},
    ],
}  # fmt: skip


@pytest.fixture(scope="module")
def found():
    return ranges(rate(Design.model_validate(STATED)))


def test_one_range_for_each_quantity_that_differs(found):
    assert [each.key for each in found.ranges] == ["source_temperature_K", "source_mass_flow_kg_per_s"]
    for each in found.ranges:
        values = [row.value for row in each.rows]
        assert values == sorted(values)
        assert min(values) < min(row.value for row in each.states.values())
        assert max(values) > max(row.value for row in each.states.values())
        assert list(each.states) == ["rated", "hot drier", "half flow", "warm hall"]


@pytest.mark.parametrize(("which", "name", "unit"), [(0, "inlet_temperature", "K"), (1, "mass_flow", "kg/s")])
def test_points_are_those_of_designs_with_that_value(found, which, name, unit):
    for row in found.ranges[which].rows[::8]:
        source = STATED["source"] | {name: f"{row.value!r} {unit}"}
        again = rate(Design.model_validate(STATED | {"source": source, "states": []}), refuse_outside_data=False)
        opened = again.state("open circuit")
        assert_allclose(row.delivered_power_W, again.rated.power_W, rtol=1e-4)
        assert_allclose(row.voltage_V, again.rated.voltage_V, rtol=1e-4)
        assert_allclose(row.open_circuit_voltage_V, opened.voltage_V, rtol=1e-4)
        assert_allclose(row.T_hot_junction_K, opened.T_hot_junction_K, rtol=0, atol=0.01)
        assert_allclose(row.room_K, min(c.margin for c in again.checks if c.unit == "K"), rtol=0, atol=0.01)


def test_states_stand_as_they_were_rated(found):
    for each in found.ranges:
        for name, row in each.states.items():
            state = found.rating.state(name)
            assert (row.delivered_power_W, row.voltage_V) == (state.delivered_power_W, state.voltage_V)


def test_without_states_the_source_is_varied():
    (only,) = ranges(rate(Design.model_validate(STATED | {"states": []}))).ranges
    assert only.key == "source_temperature_K"
    heat = STATED | {"states": [], "source": {"kind": "heat", "heat": "150 W"}, "require": {}}
    (only,) = ranges(rate(Design.model_validate(heat), refuse_outside_data=False)).ranges
    assert only.key == "source_heat_W"


def test_the_drawing_holds_curves_marks_and_limits(found):
    power, voltage = Figure().subplots(2, 1)
    draw_range(found, found.ranges[0], power, voltage)
    assert [len(line.get_xdata()) for line in power.lines if len(line.get_xdata()) > 2] == [33, 4]
    assert voltage.get_xlabel() == "source temperature [degC]"
    assert power.get_ylabel() == "delivered power [W]"
    assert voltage.get_ylim()[1] > 6.0  # the limit of the open circuit is in the picture
    hatched = [p for p in power.patches if p.get_hatch()]
    assert len(hatched) == 1  # from where the hot junction passes 180 degC
    (left, right) = hatched[0].get_x(), hatched[0].get_x() + hatched[0].get_width()
    most = next(b for b in found.rating.margins.break_even if b.state == "rated" and b.key == "source_temperature_K")
    assert_allclose(left + 273.15, most.value, rtol=0, atol=0.5)  # straight between points 3 K apart
    assert_allclose(right, found.ranges[0].rows[-1].value - 273.15, rtol=1e-12)
    assert key(found) == "1 rated, 2 hot drier, 3 half flow, 4 warm hall"


def test_tables_and_files(found, tmp_path):
    text = ranges_table(found)
    assert "source temperature [degC]" in text
    assert "source flow [g/s]" in text
    assert "half flow" in text
    first = [row for row in found.rows() if row["quantity"] == "source_temperature_K"]
    assert all(row["source_mass_flow_kg_per_s"] is None for row in first)
    for ending in ("png", "pdf", "svg"):
        draw_ranges(found, tmp_path / f"r.{ending}")
        assert (tmp_path / f"r.{ending}").stat().st_size > 5000


def test_the_command(tmp_path):
    path = tmp_path / "drier.toml"
    Design.model_validate(STATED).save(path)
    runner = CliRunner()
    drawn = tmp_path / "r.png"
    done = runner.invoke(app, ["rate", str(path), "--ranges", "--csv", "--figure", str(drawn)])
    rows = list(csv.DictReader(io.StringIO(done.stdout)))
    assert done.exit_code == 1  # the hot state breaks the limit of the hot junction
    assert len(rows) == 2 * (33 + 4)
    assert drawn.exists()
    data = json.loads(runner.invoke(app, ["rate", str(path), "--ranges", "--json"]).stdout)
    assert data["required_power_W"] == 1.0
    assert {"state", "source_temperature_K", "delivered_power_W"} <= set(data["ranges"][0]["points"][0])
    assert runner.invoke(app, ["rate", str(path), "--ranges", "--curve"]).exit_code == 2
