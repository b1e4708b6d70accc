"""Every shipped example as a user runs it: verdict, exit code, what binds, files that reproduce the numbers."""

import json
import os
import subprocess
import sys
from pathlib import Path

import pypdf
import pytest
from typer.testing import CliRunner

import tegdesign
from tegdesign.cli import app

EXAMPLES = Path(__file__).resolve().parents[2] / "examples"

# Exit code and some of the limits that bind. The limits follow from the scenes: all modules are wanted where power
# is asked for, a gas burner without load drives its legs to what they bear, a bus voltage is met at its lower end.
SIZED = {
    "burner-beacon": (0, "efficiency", {"service limit of the n leg (open circuit)"}),
    "flue-gas-plate": (0, "power_W", {"number of modules", "footprint"}),
    "kiln-exhaust": (0, "power_W", {"number of modules", "footprint"}),
    "oven-wall": (0, "power_W", {"footprint"}),
}
COMPARED = {"pair-choice"}


def test_every_example_is_run():
    briefs = {path.stem for path in EXAMPLES.glob("*.toml") if not path.stem.endswith(".design")}
    with_states = {name for name in briefs if tegdesign.read_brief(EXAMPLES / f"{name}.toml").states}
    assert briefs - with_states == {*SIZED, *COMPARED}  # the others: test_examples_states.py


@pytest.fixture(scope="module")
def sized(tmp_path_factory):
    """Size each example once, with design file and sheet."""
    done = {}

    def run(name):
        if name not in done:
            folder = tmp_path_factory.mktemp(name)
            design, sheet = folder / "made.toml", folder / "made.pdf"
            brief = EXAMPLES / f"{name}.toml"
            command = ["size", str(brief), "-o", str(design), "--sheet", str(sheet), "--json"]
            done[name] = (CliRunner().invoke(app, command), design, sheet)
        return done[name]

    return run


@pytest.mark.parametrize("name", SIZED)
def test_verdict_and_binding_limits(name, sized):
    code, aim, binding = SIZED[name]
    done, design, sheet = sized(name)
    assert done.exit_code == code, done.stderr
    assert done.stderr == f"design written to {design}, sheet to {sheet}\n"
    answer = json.loads(done.stdout)
    assert answer["met"] is (code == 0)
    assert binding <= {item["name"] for item in answer["binding"]}
    assert answer[f"aimed_{aim}"] > 0
    # rounding to workshop steps costs little
    assert answer[f"aimed_{aim}"] > 0.95 * answer[f"aimed_before_rounding_{aim}"]


@pytest.mark.parametrize("name", SIZED)
def test_report_says_the_verdict_first(name, sized, tmp_path):
    done = CliRunner().invoke(app, ["size", str(EXAMPLES / f"{name}.toml"), "-o", str(tmp_path / "again.toml")])
    title = tegdesign.read_brief(EXAMPLES / f"{name}.toml").title
    assert done.stdout.splitlines()[0] == f"BRIEF MET: {title}"
    # the same brief gives the same file, byte by byte
    assert (tmp_path / "again.toml").read_bytes() == sized(name)[1].read_bytes()


@pytest.mark.parametrize("name", SIZED)
def test_design_file_reproduces_every_number(name, sized):
    done, design, _ = sized(name)
    again = CliRunner().invoke(app, ["rate", str(design), "--json"])
    assert again.exit_code == SIZED[name][0], again.stderr
    assert json.loads(again.stdout) == json.loads(done.stdout)["rating"]  # to the last digit
    text = design.read_text()
    assert tegdesign.read_design(design).text() == text


# Keys whose numbers have no unit, or have it beside them under "unit".
BARE = {
    "efficiency", "efficiency_of_given_heat",
    "efficiency_deviation", "carnot_efficiency", "module_figure_of_merit", "fill_factor", "load_ratio",
    "power_deviation", "share_of_heat", "share_of_internal_resistance", "share_reached", "value", "limit", "margin",
    "aimed_efficiency", "aimed_before_rounding_efficiency", "area_ratio_n_to_p", "penalty_of_equal_areas",
    "compatibility_spread", "couples_per_module", "limits.slenderness", "outside_data_K",
    *(f"{end}_couples" for end in ("now", "from", "to")),
    *(f"{end}_modules_in_{way}" for end in ("now", "from", "to") for way in ("series", "parallel")),
}  # fmt: skip
UNITS = ("_W", "_V", "_A", "_ohm", "_K", "_m", "_m3", "_kg", "_W_per_m2", "_A_per_m2", "_W_per_kg", "_K_per_W")


def numbers(data, key=""):
    if isinstance(data, dict):
        for name, value in data.items():
            if name != "design":  # a design is its file: texts with units
                yield from numbers(value, name)
    elif isinstance(data, list):
        for value in data:
            yield from numbers(value, key)
    elif isinstance(data, float):
        yield key


def check_units(data):
    keys = set(numbers(data))
    assert len(keys) > 10
    assert {key for key in keys if key not in BARE and not key.endswith(UNITS)} == set()


@pytest.mark.parametrize("name", SIZED)
def test_every_number_names_its_unit(name, sized):
    check_units(json.loads(sized(name)[0].stdout))


@pytest.mark.parametrize("name", SIZED)
def test_sheet_is_a_readable_pdf(name, sized):
    pages = pypdf.PdfReader(sized(name)[2]).pages
    assert 1 <= len(pages) <= 12
    text = " ".join(" ".join(page.extract_text() for page in pages).split())
    assert tegdesign.read_brief(EXAMPLES / f"{name}.toml").title in text
    assert "Cautions".upper() in text.upper()


def test_ranking_of_pairs(tmp_path):
    picture = tmp_path / "pairs.png"
    brief = str(EXAMPLES / "pair-choice.toml")
    done = CliRunner().invoke(app, ["compare", brief, "--json", "--figure", str(picture)])
    assert (done.exit_code, done.stderr) == (0, "")
    answer = json.loads(done.stdout)
    check_units(answer)
    measured = [m for m in tegdesign.materials() if m.kind == "table"]
    n, p = (sum(m.polarity == side for m in measured) for side in "np")
    assert len(answer["pairs"]) + len(answer["dropped"]) == n * p
    powers = [pair["power_W"] for pair in answer["pairs"] if pair["met"]]
    assert powers == sorted(powers, reverse=True)
    assert "telluride" in answer["pairs"][0]["n"] or "telluride" in answer["pairs"][0]["p"]  # 250 degC is theirs
    assert picture.read_bytes().startswith(b"\x89PNG")


# The units library looks whether scipy is there; its parts are what costs half a second each.
HEAVY = {"scipy.interpolate", "scipy.linalg", "scipy.optimize", "scipy.special", "pandas", "matplotlib"}


def loaded_by(*args, folder):
    """Return what a whole run of the program has imported in the end."""
    code = (
        "import sys, tegdesign.cli\n"
        f"sys.argv = ['tegdesign', *{list(args)!r}]\n"
        "try: tegdesign.cli.main()\n"
        "except SystemExit as end: assert end.code == 0, end.code\n"
        "print(*sys.modules, file=sys.stderr)"
    )
    environment = {**os.environ, "PYTHONPATH": str(Path(tegdesign.__file__).resolve().parents[1])}
    command = [sys.executable, "-c", code]
    done = subprocess.run(command, capture_output=True, text=True, env=environment, cwd=folder, check=True)
    return set(done.stderr.split())


@pytest.mark.parametrize(
    ("args", "unwanted"),
    [
        (["--help"], {"numpy", "pint", "pydantic", *HEAVY}),
        (["size", str(EXAMPLES / "flue-gas-plate.toml"), "-o", "d.toml"], HEAVY),
        (["compare", str(EXAMPLES / "pair-choice.toml"), "--top", "3"], HEAVY),
        (["materials"], HEAVY),
    ],
    ids=lambda value: value[0] if isinstance(value, list) else "",
)
def test_nothing_heavy_is_loaded_for(args, unwanted, tmp_path):
    assert loaded_by(*args, folder=tmp_path) & unwanted == set()
