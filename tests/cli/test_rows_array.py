"""``tegdesign rows`` and ``tegdesign array`` as users type them: streams, exit codes, files."""

import csv
import io
import json

import pytest
from numpy.testing import assert_allclose
from typer.testing import CliRunner

import tegdesign
from tegdesign.cli import app

DESIGN = """\
title = "Dryer exhaust"

[source]
kind = "stream"
inlet_temperature = "240 degC"
mass_flow = "20 g/s"
heat_capacity = "1050 J/kg/K"
coefficient = "120 W/m2/K"
area_enlargement = 8
fin_efficiency = 0.8

[sink]
kind = "surface"
temperature = "40 degC"

[materials]
n = "bismuth-telluride-n-se0.3"
p = "bismuth-telluride-p-sb1.58"
hold_outside_data = "20 K"

[module]
columns = 12
rows = 12
leg_length = "1.4 mm"
leg_side_n = "2.4 mm"
leg_side_p = "2.9 mm"
pitch = "3.15 mm"
modules_in_series = 4
"""


@pytest.fixture
def file(tmp_path):
    path = tmp_path / "dryer.toml"
    path.write_text(DESIGN)
    return path


def call(*args):
    return CliRunner().invoke(app, [str(a) for a in args])


def test_rows(file, tmp_path):
    done = call("rows", file, "--rows", 2, "--per-row", 2, "--one-current", "--figure", tmp_path / "r.png")
    assert (done.exit_code, done.stderr) == (0, "")
    assert "2 along the source, 2 modules side by side in each" in done.stdout
    assert (tmp_path / "r.png").read_bytes().startswith(b"\x89PNG")
    data = json.loads(call("rows", file, "--json", "--most", 12).stdout)
    known = tegdesign.rows(file, most=12)
    assert_allclose(data["power_W"], known.power_W, rtol=1e-12)
    done = call("rows", file, "--csv", "-o", tmp_path / "rows.csv", "--most", 12)
    assert (done.exit_code, done.stdout) == (0, "")
    table = list(csv.DictReader(io.StringIO((tmp_path / "rows.csv").read_text())))
    assert_allclose([float(row["power_W"]) for row in table], [row.power_W for row in known.rows], rtol=1e-12)


def test_array(file, tmp_path):
    args = (
        "array",
        file,
        "--hot",
        "240 degC, 200 degC, 180 degC, 90 degC",
        "--series",
        2,
        "--bypass",
        "0.3 V",
        "--faults",
    )
    done = call(*args, "--figure", tmp_path / "a.pdf", "--shorted", "2", "--blocking", "0.4 V", "--in-turn")
    assert (done.exit_code, done.stderr) == (0, "")
    assert "2 in parallel of 2 in series, modules dealt to the strings in turn" in done.stdout
    assert "bypass 300.0 mV, blocking 400.0 mV" in done.stdout
    assert (tmp_path / "a.pdf").read_bytes().startswith(b"%PDF")
    hot = [513.15, 473.15, 453.15, 363.15]
    known = tegdesign.array(file, hot=hot, series=2, bypass_drop=0.3, faults=True)
    assert_allclose(json.loads(call(*args, "--json").stdout)["power_W"], known.power_W, rtol=1e-9)
    table = list(csv.DictReader(io.StringIO(call(*args, "--csv").stdout)))
    assert [row["fault"] for row in table] == ["open"] * 4 + ["shorted"] * 4 + ["cold"] * 4
    table = list(csv.DictReader(io.StringIO(call(*args[:-1], "--csv").stdout)))
    assert_allclose([float(row["current_A"]) for row in table], [m.current_A for m in known.modules], rtol=1e-9)


def test_missed_requirement_is_exit_code_1(file):
    file.write_text(DESIGN + '\n[require]\npower = "900 W"\n')
    for command in (("rows", "--most", "12"), ("array",)):
        done = call(command[0], file, *command[1:])
        assert (done.exit_code, done.stderr) == (1, "")
        assert "NOT MET" in done.stdout


@pytest.mark.parametrize(
    ("args", "words"),
    [
        (("rows", "--counter"), "counter-current asks for a sink that is a stream"),
        (("rows", "--rows", "3"), "rows = 3, but the 4 modules"),
        (("rows", "--figure", "x.txt"), "a figure ends in"),
        (("rows", "--figure", "no/such/x.png"), "no/such"),
        (("array", "--hot", "240"), "--hot: '240' has no unit"),
        (("array", "--hot", "240 degC,"), "--hot: list '240 degC,' has an empty place"),
        (("array", "--cold", "-300 degC"), "--cold: '-300 degC' is -26.85 K, outside 0 K..4000 K"),
        (("array", "--broken", "two"), "--broken: 'two' is no whole number"),
        (("array", "--bypass", "1 A"), "--bypass: "),
        (("array", "--broken", "1"), "every string has an open joint"),
    ],
)
def test_bad_input_is_one_line(file, args, words):
    done = call(args[0], file, *args[1:])
    assert done.exit_code == 2
    assert done.stdout == ""
    assert done.stderr.startswith("tegdesign: ")
    assert words in done.stderr
    assert done.stderr.count("\n") == 1
