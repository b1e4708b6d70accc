"""``tegdesign materials`` as a user types it."""

import csv
import io
import json

import pytest
from numpy.testing import assert_allclose
from typer.testing import CliRunner

from tegdesign.cli import app
from tegdesign.material import library

run = CliRunner()


@pytest.fixture(autouse=True)
def _no_user_folders(monkeypatch):
    monkeypatch.delenv(library.VARIABLE, raising=False)


def materials(*args):
    return run.invoke(app, ["materials", *args])


def names(*args):
    done = materials(*args, "--json")
    assert done.exit_code == 0, done.stderr
    return [record["name"] for record in json.loads(done.stdout)]


@pytest.fixture
def changed(tmp_path):
    """Write the file of clathrate-n with changes and return its path."""

    def write(*changes, name="clathrate-n.toml"):
        text = (library.shipped() / "clathrate-n.toml").read_text()
        for old, new in changes:
            assert old in text
            text = text.replace(old, new, 1)
        path = tmp_path / name
        path.write_text(text)
        return path

    return write


def test_list_all():
    done = materials()
    assert done.exit_code == 0
    assert done.stderr == ""
    lines = done.stdout.splitlines()
    assert [line.split()[0] for line in lines[2:]] == library.names()
    assert "service limit [K]" in lines[0]
    assert "850 (memory)" in next(line for line in lines if line.startswith("skutterudite-n"))


def test_filters():
    every = set(names())
    n, p = set(names("--polarity", "n")), set(names("--polarity", "p"))
    assert n | p == every
    assert not n & p
    # spans of the data sets: bismuth-telluride-p-sb1.54 300 to 500 K, -sb1.58 323 to 573 K
    assert "bismuth-telluride-p-sb1.54" in names("--covers", "300 K..500 K")
    assert "bismuth-telluride-p-sb1.54" not in names("--covers", "300 K..501 K")
    assert "bismuth-telluride-p-sb1.58" in names("--covers", "50..200 degC")
    assert names("--service-above", "1275 K") == [
        "neodymium-telluride-n",
        "silicon-germanium-n",
        "silicon-germanium-p",
    ]
    lead = {"bismuth-oxyselenide-p", "lead-telluride-n", "lead-telluride-p", "tin-selenide-p"}
    lead |= {"lead-telluride-n-bands", "lead-telluride-p-bands"}
    assert set(names("--with", "lead")) == lead
    assert set(names("--without", "lead")) == every - lead
    assert set(names("--with", "lead", "--without", "selenium", "--polarity", "p")) == {
        "lead-telluride-p",
        "lead-telluride-p-bands",
    }


def test_nothing_left_is_no_error():
    done = materials("--service-above", "3000 K", "--csv")
    assert done.exit_code == 0
    assert len(done.stdout.splitlines()) == 1
    assert "no material fits" in done.stderr


def test_list_as_csv():
    rows = list(csv.DictReader(io.StringIO(materials("--csv").stdout)))
    assert [row["name"] for row in rows] == library.names()
    skutterudite = next(row for row in rows if row["name"] == "skutterudite-n")
    assert float(skutterudite["service_limit_K"]) == 850
    assert skutterudite["service_limit_basis"] == "coated or sealed (memory)"
    assert float(skutterudite["air_limit_K"]) == 653


@pytest.mark.parametrize(
    ("args", "words"),
    [
        (["--without", "led"], "no material has the hazard tag 'led'; the tags are antimony"),
        (["--covers", "300 K"], "span '300 K' is not of the form"),
        (["--covers", "500 K..300 K"], "span '500 K..300 K' must rise"),
        (["--covers", "300..500"], "'500' has no unit"),
        (["--service-above", "600"], "'600' has no unit"),
        (["--service-above", "600 m"], "unit 'm' has the wrong dimension"),
        (["--folder", "no-such-folder"], "no-such-folder: no such folder of materials"),
        (["skuterudite-n"], "unknown material 'skuterudite-n'; closest: skutterudite-n"),
        (
            ["clathrate-n", "--at", "400 K"],
            "clathrate-n at 400 K: its properties are known from 417 K to 810 K",
        ),
        (["clathrate-n", "--at", "500, x K"], "'x K' is not a number with a unit"),
        (["clathrate-n", "--at", "500,, 600 K"], "is not a number with a unit"),
        (["clathrate-n", "--figure", "a.bmp"], "a.bmp: a figure ends in .png, .pdf, .svg"),
        (["clathrate-n", "--figure", "no-such-folder/a.png"], "no-such-folder/a.png: cannot be written"),
        (["clathrate-n", "-o", "no-such-folder/a.txt"], "no-such-folder/a.txt: cannot be written"),
        (["none.toml"], "none.toml: no such file"),
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


@pytest.mark.parametrize(
    ("args", "words"),
    [
        (["--json", "--csv"], "give --json or --csv, not both"),
        (["clathrate-n", "--json", "--csv"], "give --json or --csv, not both"),
        (["--json", "clathrate-n"], "options of 'show' go behind it"),
        (["--polarity", "x"], "--polarity"),
        (["clathrate-n", "extra"], "extra"),
    ],
)
def test_contradictions_are_refused(args, words):
    done = materials(*args)
    assert (done.exit_code, done.stdout) == (2, "")
    assert words in done.stderr


def test_show_tells_all_and_marks_what_is_from_memory():
    done = materials("skutterudite-n")
    assert done.exit_code == 0
    words = " ".join(done.stdout.split())
    for fact in (
        "850 K; coated or sealed (memory)",
        "653 K; bare CoSb3 oxidises above 653 K",
        "7650 kg/m3; (memory)",
        "10.1021/ja111199y",
        "Shi et al. 2011",
        "MIT licence",
        "(H302 H332 H411, memory;",
        "S 6 %, rho 8 %, kappa 11 %",
        "302.00 -126.30 0.4155 2.6920 3.840 0.431",  # 302 K; by hand 3.8397e-3 W/m/K2, zT 0.43076
    ):
        assert fact in words, fact


def test_warnings_are_shown(changed):
    assert "warning COMPOSITION" not in materials("zinc-antimonide-p").stdout
    assert "COMPOSITION DOUBTFUL" in materials("zinc-antimonide-p").stdout
    path = changed()
    done = materials("clathrate-n", "--folder", str(path.parent))
    assert "which hides the one of the same name" in " ".join(done.stdout.split())


def test_show_as_json_and_csv():
    record = json.loads(materials("clathrate-n", "--at", "500, 600 K", "--json").stdout)
    material = library.find("clathrate-n")
    assert_allclose(record["properties"]["temperature_K"], [500, 600], rtol=0)
    assert (
        record["properties"]["seebeck_coefficient_V_per_K"]
        == material.seebeck_coefficient([500, 600]).tolist()
    )
    assert record["density_basis"] == "(memory)"
    rows = list(
        csv.DictReader(io.StringIO(materials("clathrate-n", "--at", "500 K, 326.85 degC", "--csv").stdout))
    )
    assert_allclose([float(row["temperature_K"]) for row in rows], [500, 600], rtol=1e-15)
    assert float(rows[0]["resistivity_ohm_m"]) == float(material.resistivity(500))


def test_output_file_is_the_same_as_the_screen(tmp_path):
    done = materials("clathrate-n", "--csv", "-o", str(tmp_path / "a.csv"))
    assert (done.exit_code, done.stdout) == (0, "")
    assert (tmp_path / "a.csv").read_text() == materials("clathrate-n", "--csv", "-o", "-").stdout
    assert [path.name for path in tmp_path.iterdir()] == ["a.csv"]


def test_figure_goes_beside_the_text(tmp_path):
    done = materials("clathrate-n", "--figure", str(tmp_path / "a.svg"))
    assert done.exit_code == 0
    assert done.stdout.startswith("clathrate-n\n")
    assert "<svg" in (tmp_path / "a.svg").read_text()


def test_check_sound_file():
    done = materials("check", str(library.shipped() / "skutterudite-n.toml"))
    assert (done.exit_code, done.stdout) == (0, "")
    assert done.stderr == "1 file(s) checked: 0 error(s), 0 warning(s)\n"


def test_check_warnings_only():
    path = library.shipped() / "clathrate-n.toml"
    done = materials("check", str(path))
    assert done.exit_code == 0
    assert done.stdout.startswith(f"{path}:22: warning: gap in ")
    assert "0 error(s), 1 warning(s)" in done.stderr


WRONG = {
    "duplicate temperatures": (("466,", "417,"), 20, "temperature given twice: 417 K"),
    "wrong dimension": (('"5800 kg/m^3"', '"5800 kg"'), 7, "density: unit 'kg' has the wrong dimension"),
    "missing unit": (("temperature [K]", "temperature"), 18, "column without unit: temperature"),
    "unknown key": (("hazards =", "hazard ="), 9, "unknown key: hazard; closest: hazards"),
}


@pytest.mark.parametrize("case", WRONG)
def test_check_and_use_of_wrong_files(changed, case):
    change, line, words = WRONG[case]
    path = changed(change)
    done = materials("check", str(path))
    assert done.exit_code == 2
    assert f"{path}:{line}: error: {words}" in done.stdout
    assert "1 error(s)" in done.stderr
    done = materials(str(path))
    assert (done.exit_code, done.stdout) == (2, "")
    assert done.stderr.startswith(f"tegdesign: {path}:{line}: {words}")
    assert len(done.stderr.splitlines()) == 1


def test_check_of_files_that_are_no_text_goes_on_with_the_others(tmp_path, changed):
    binary = tmp_path / "binary.toml"
    binary.write_bytes(b"\x00\xff\xfe")
    sound = changed()
    done = materials("check", str(binary), str(tmp_path / "none.toml"), str(tmp_path), str(sound), "--json")
    assert done.exit_code == 2
    records = json.loads(done.stdout)
    assert [record["severity"] for record in records] == ["error", "error", "error", "warning"]
    assert "is not a UTF-8 text file" in records[0]["what"]
    assert records[1]["what"] == "no such file"
    assert records[3]["file"] == str(sound)
    assert records[3]["line"] == 22


def test_schema():
    done = materials("schema")
    assert done.exit_code == 0
    assert set(json.loads(done.stdout)["discriminator"]["mapping"]) == {"table", "bands"}
