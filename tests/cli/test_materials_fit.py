"""``tegdesign materials fit`` as a user types it."""

import csv
import io
import json

import pytest
from numpy.testing import assert_allclose
from typer.testing import CliRunner

from tegdesign.cli import app
from tegdesign.material import library

run = CliRunner()
NAME = "bismuth-telluride-p-sb1.54"


@pytest.fixture(autouse=True)
def _no_user_folders(monkeypatch):
    monkeypatch.delenv(library.VARIABLE, raising=False)


def fit(*args):
    return run.invoke(app, ["materials", "fit", *map(str, args)])


def test_text_tells_all_and_files_are_written(tmp_path):
    done = fit(NAME, "-o", tmp_path / "my-p.toml", "--figure", tmp_path / "my-p.png")
    assert done.exit_code == 0, done.stderr
    words = " ".join(done.stdout.split())
    for fact in (
        "one valence band and one conduction band, parabolic, acoustic scattering, lattice inverse power; 15 values",
        "held: convention of the weighted mobility, not known",
        "weighted_mobility 393.6",  # pin, no outside source
        "seebeck coefficient +3.5 500 2.5",  # pin, no outside source
        "8 degrees of freedom",
        "points beyond 2 sigma: none",
        "strong correlations, only a combination of the two is told: gap and minority_mobility_ratio +0.9",
        "for another mass m multiply the doping by m^1.5",
    ):
        assert fact in words, fact
    assert "material written to" in done.stderr
    assert (tmp_path / "my-p.png").read_bytes().startswith(b"\x89PNG")
    shown = run.invoke(app, ["materials", str(tmp_path / "my-p.toml"), "--at", "400 K"])
    assert shown.exit_code == 0, shown.stderr
    assert f"fitted to {NAME}" in " ".join(shown.stdout.split())


def test_json_and_csv_say_the_same():
    settings = (NAME, "--no-minority", "--lattice", "constant", "--mass", "0.9", "--hold", "mobility_exponent=-1.5")
    told = json.loads(fit(*settings, "--json").stdout)
    by_name = {one["name"]: one for one in told["parameters"]}
    assert by_name["mass"] | {"meaning": ""} == {
        "name": "mass", "value": 0.9, "unit": "1", "uncertainty": None, "uncertainty_common_error": None, "held": True,
        "at_bound": False, "told_by_table": False, "basis": "held as given", "meaning": "",
    }  # fmt: skip
    assert told["correlation"]["of"] == ["doping", "mobility", "lattice"]
    assert told["degrees_of_freedom"] == 12
    rows = list(csv.DictReader(io.StringIO(fit(*settings, "--csv").stdout)))
    assert [float(row["temperature_K"]) for row in rows] == [300.0, 350.0, 400.0, 450.0, 500.0]
    sum_of_squares = sum(float(value) ** 2 for row in rows for key, value in row.items() if key.endswith("_sigma"))
    assert_allclose(sum_of_squares, told["chi_square"], rtol=1e-9)


def test_a_known_doping_frees_the_mass(tmp_path):
    path = tmp_path / "hall-p.toml"
    bounds = ("--doping-bounds", "1e19 1/cm^3..9e19 1/cm^3")
    told = json.loads(fit(NAME, "--doping", "3e19 1/cm^3", "--json", "-o", path, *bounds).stdout)
    by_name = {one["name"]: one for one in told["parameters"]}
    assert (by_name["doping"]["held"], by_name["mass"]["held"]) == (True, False)
    assert_allclose(by_name["doping"]["value"], 3e25, rtol=1e-12)
    material = library.find(path)
    assert_allclose([*material.doping_bounds, material.doping.cold], [1e25, 9e25, 3e25], rtol=1e-12)
    assert material.doping_basis == "doping held as given; bounds as given"


WRONG = {
    "no table": (("no-such",), "unknown material 'no-such'"),
    "computed": (("lead-telluride-p-bands",), "is computed from bands already"),
    "no equals": ((NAME, "--hold", "gap"), "--hold 'gap' is not of the form 'gap=0.3 eV'"),
    "no unit": ((NAME, "--hold", "gap=0.3"), "gap: '0.3' has no unit"),
    "unknown parameter": ((NAME, "--hold", "gaps=0.3"), "'gaps' is no parameter"),
    "given twice": ((NAME, "--mass", "1", "--hold", "mass=2"), "mass is given twice"),
    "wrong ending": ((NAME, "-o", "OUT/my-p.png"), "a material file ends in .toml"),
    "no folder": ((NAME, "-o", "OUT/none/my-p.toml"), "does not exist"),
    "its own name": ((NAME, "-o", f"OUT/{NAME}.toml"), "is the name of the measured material"),
    "wrong figure": ((NAME, "--figure", "OUT/my-p.doc"), "a figure ends in .png"),
    "bounds without file": ((NAME, "--doping-bounds", "1e19 1/cm^3..2e20 1/cm^3"), "add -o NAME.toml"),
    "no span": ((NAME, "-o", "OUT/my-p.toml", "--doping-bounds", "1e19 1/cm^3"), "is not of the form"),
    "span falls": ((NAME, "-o", "OUT/my-p.toml", "--doping-bounds", "2e20 1/cm^3..1e19 1/cm^3"), "must rise"),
    "doping not in bounds": (
        (NAME, "-o", "OUT/my-p.toml", "--figure", "OUT/my.png", "--doping-bounds", "1e20 1/cm^3..2e20 1/cm^3"),
        "is outside its bounds",
    ),
}


@pytest.mark.parametrize("name", WRONG)
def test_refuses_in_one_line_and_writes_nothing(name, tmp_path):
    args, words = WRONG[name]
    done = fit(*(arg.replace("OUT", str(tmp_path)) for arg in args))
    assert done.exit_code == 2
    assert done.stdout == ""
    assert words in done.stderr
    assert done.stderr.startswith("tegdesign: ")
    assert done.stderr.count("\n") == 1
    assert list(tmp_path.iterdir()) == []
