"""``tegdesign materials`` of kind bands as a user types it."""

import csv
import io
import json

import pytest
from numpy.testing import assert_allclose
from typer.testing import CliRunner

from tegdesign.cli import app
from tegdesign.material import library
from tegdesign.material.bands import view

run = CliRunner()
NAME = "lead-telluride-p-bands"


@pytest.fixture(autouse=True)
def _no_user_folders(monkeypatch):
    monkeypatch.delenv(library.VARIABLE, raising=False)


def materials(*args):
    return run.invoke(app, ["materials", *args])


def record(*args):
    done = materials(*args, "--json")
    assert done.exit_code == 0, done.stderr
    return json.loads(done.stdout)


def rows(*args):
    done = materials(*args, "--csv")
    assert done.exit_code == 0, done.stderr
    return list(csv.DictReader(io.StringIO(done.stdout)))


def test_kinds_are_listed_and_filtered():
    kinds = {one["name"]: one["kind"] for one in record()}
    assert kinds[NAME] == "bands"
    assert kinds["lead-telluride-p"] == "table"
    for kind in ("table", "bands"):
        listed = [one["name"] for one in record("--kind", kind)]
        assert listed == [name for name, found in kinds.items() if found == kind]
    lines = materials("--kind", "bands", "--polarity", "p").stdout.splitlines()
    assert "kind" in lines[0]
    assert all("  bands  " in line for line in lines[2:])


def test_text_tells_all():
    done = materials(NAME, "--at", "600 K")
    assert (done.exit_code, done.stderr) == (0, "")
    words = " ".join(done.stdout.split())
    material = library.find(NAME)
    table = view.properties(material, [600.0])
    for fact in (
        "kind bands",
        "warning lead-telluride-p-bands: computed from bands, not measured",
        "made at holes",
        "doping bounds",
        "gap linear (value",
        "lattice debye-callaway (branches",
        "laid over lead-telluride-p at ",
        "seebeck coefficient: largest",
        "kappa_e from the transport integrals",
        "mu [kT]",
        "S [k/e]",
        "mu_w [cm2/V/s]",
        "L [1e-8 W ohm/K2]",
        "bipolar [% of kappa_e]",
        "scattering L valence: acoustic (deformation potential",
        "best for",
        "as made",
        # in the units of the page: k/e, cm2/V/s, 1e-8 W ohm/K2
        f"{table['seebeck_coefficient_k_per_e'][0]:.3f} {table['weighted_mobility_m2_per_V_s'][0] * 1e4:.1f} "
        f"{table['quality_factor'][0]:.3f} {table['lorenz_number_W_ohm_per_K2'][0] * 1e8:.3f}",
        f"{table['level_above_edge_J'][0] / 1.602176634e-22:.1f}",
    ):
        assert fact in words, fact


def test_measured_material_tells_the_parts_of_kappa_and_their_basis():
    done = materials("skutterudite-n", "--at", "302 K")
    words = " ".join(done.stdout.split())
    assert "kappa_e estimated by the Lorenz number of Kim et al. 2015" in words
    assert "kappa_e [W/m/K] kappa_lattice [W/m/K]" in words
    found = record("skutterudite-n", "--at", "302 K")
    assert found["kind"] == "table"
    assert found["electronic_thermal_conductivity_basis"].startswith("estimated by the Lorenz number")
    assert "bands" not in found
    # 302 K: S = -126.3 uV/K, rho = 0.4155 mohm cm; 1.83662e-8 302 / 0.4155e-5 by hand, doi 10.1063/1.4908244
    parts = [found["properties"][f"{part}_thermal_conductivity_W_per_m_K"][0] for part in ("electronic", "lattice")]
    assert_allclose(parts, [1.3350, 2.6920 - 1.3350], rtol=1e-3)


def test_json_and_csv_tell_the_same():
    found, (cold, hot) = record(NAME, "--at", "400, 600 K"), rows(NAME, "--at", "400, 600 K")
    for name, column in found["properties"].items():
        shown = [cold[name], hot[name]]
        assert shown == column if name == "leading_band" else [float(one) for one in shown] == column
    for k, band in enumerate(found["bands"], 1):
        assert cold[f"band{k}_name"] == band["name"]
        assert float(hot[f"band{k}_reduced_level_kT"]) == band["reduced_level_kT"][1]
        assert float(hot[f"band{k}_density_1_per_m3"]) == band["density_1_per_m3"][1]
    best = {(one["temperature_K"], one["aim"]): one for one in found["best_doping"]}
    assert float(hot["best_doping_at_K"]) == 600
    named = best[600, "figure of merit"]["doping_1_per_m3"]
    assert float(hot["best_doping_for_figure_of_merit_1_per_m3"]) == named
    assert float(cold["best_power_factor_W_per_m_K2"]) == best[400, "power factor"]["power_factor_W_per_m_K2"]
    assert cold["lattice_model"] == found["lattice_model"]
    for one in found["laid_over"]["deviations"]:
        assert float(cold[f"{one['name']}_largest_deviation_percent"]) == one["largest_percent"]
    assert found["doping_bounds_1_per_m3"] == [float(cold[f"doping_{end}_1_per_m3"]) for end in ("lowest", "highest")]


def test_best_doping_is_at_the_middle_of_the_range_if_no_temperature_is_asked():
    first, last = library.find(NAME).range
    assert {one["temperature_K"] for one in record(NAME)["best_doping"]} == {(first + last) / 2}
    assert {float(row["best_doping_at_K"]) for row in rows(NAME)} == {(first + last) / 2}


def test_another_doping_and_grain_size():
    found = record(NAME, "--doping", "3e19 1/cm^3", "--grain-size", "0.2 um", "--at", "500 K")
    assert found["doping_1_per_m3"] == 3e25
    assert_allclose(found["grain_size_m"], 2e-7, rtol=1e-15)
    made = library.find(NAME).made(view.Doping(3e25), 2e-7)
    expected = float(made.seebeck_coefficient(500.0))
    assert_allclose(found["properties"]["seebeck_coefficient_V_per_K"], expected, rtol=1e-9)
    assert found["laid_over"] == record(NAME)["laid_over"]
    words = " ".join(materials(NAME, "--doping", "3e19 1/cm^3", "--at", "500 K").stdout.split())
    assert "made at holes 3e+19 1/cm3" in words


def test_against_doping(tmp_path):
    done = materials(NAME, "--against-doping", "--at", "400, 700 K", "--figure", str(tmp_path / "a.svg"), "--csv")
    assert done.exit_code == 0, done.stderr
    table = list(csv.DictReader(io.StringIO(done.stdout)))
    low, high = library.find(NAME).doping_bounds
    assert [float(row["temperature_K"]) for row in table] == [400.0] * (len(table) // 2) + [700.0] * (len(table) // 2)
    assert_allclose([float(table[0]["doping_1_per_m3"]), float(table[-1]["doping_1_per_m3"])], [low, high], rtol=1e-12)
    assert [float(table[0]["best_doping_at_K"]), float(table[-1]["best_doping_at_K"])] == [400, 700]
    assert "<svg" in (tmp_path / "a.svg").read_text()
    head = materials(NAME, "--against-doping").stdout
    assert "doping [1/cm3]   T [K]" in head


@pytest.mark.parametrize(
    ("args", "words"),
    [
        (["skutterudite-n", "--doping", "3e19 1/cm^3"], "--doping: skutterudite-n is a table of measured values"),
        (["skutterudite-n", "--grain-size", "1 um"], "--grain-size: skutterudite-n is a table of measured values"),
        (["skutterudite-n", "--against-doping"], "--against-doping: skutterudite-n is a table of measured values"),
        ([NAME, "--doping", "3e22 1/cm^3"], "doping 3e+22 1/cm^3 is outside its bounds, "),
        ([NAME, "--doping", "-3e19 1/cm^3"], "doping -3e+19 1/cm^3 is outside its bounds"),
        ([NAME, "--doping", "3e19"], "--doping: '3e19' has no unit; write one, like '3e19 1/cm^3'"),
        ([NAME, "--doping", ""], "--doping: '' is not a number with a unit"),
        ([NAME, "--grain-size", "3 eV"], "--grain-size: unit 'eV' has the wrong dimension"),
        ([NAME, "--grain-size", "1 nm"], "grain size 1 nm is outside its bounds"),
        (["magnesium-silicide-tin-n-bands", "--grain-size", "1 um"], "but its model has no grains"),
        ([NAME, "--at", "2000 K"], f"{NAME} at 2000 K: its properties are known from 300 K to 900 K"),
        ([NAME, "--at", "2000 K", "--against-doping"], f"{NAME} at 2000 K: its properties are known from"),
        (
            [NAME, "--at", "300, 400, 500, 600, 700 K", "--against-doping", "--figure", "a.png"],
            "5 temperatures are too many for one drawing against doping; give at most 4",
        ),
        ([NAME, "--against-doping", "--figure", "a.bmp"], "a.bmp: a figure ends in .png, .pdf, .svg"),
        (["--kind", "band"], "--kind: 'band' is no kind of material; the kinds are table, bands"),
    ],
)
def test_wrong_input_is_one_line_and_leaves_nothing(args, words, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    done = materials(*args)
    assert done.exit_code == 2
    assert done.stdout == ""
    assert len(done.stderr.splitlines()) == 1
    assert done.stderr.startswith("tegdesign: ")
    assert words in done.stderr
    assert list(tmp_path.iterdir()) == []


def test_options_of_show_go_behind_the_name():
    done = materials("--kind", "bands", NAME)
    assert (done.exit_code, done.stdout) == (2, "")
    assert "options of 'show' go behind it" in done.stderr
