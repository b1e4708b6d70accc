"""``tegdesign sheet``: files, screen, exit codes."""

import pypdf
import pytest
from typer.testing import CliRunner

from tegdesign.cli import app

run = CliRunner()
DESIGN = """\
title = "Flue of a bakery oven"

[source]
kind = "film"
temperature = "220 degC"
coefficient = "800 W/m2/K"

[sink]
kind = "film"
temperature = "40 degC"
coefficient = "3000 W/m2/K"

[materials]
n = "bismuth-telluride-n-se0.3"
p = "bismuth-telluride-p-sb1.58"
hold_outside_data = "30 K"

[module]
columns = 6
rows = 4
leg_length = "1.6 mm"
leg_side_n = "1.4 mm"
leg_side_p = "1.4 mm"
pitch = "2.4 mm"
"""


@pytest.fixture
def design(tmp_path):
    path = tmp_path / "oven.design.toml"
    path.write_text(DESIGN)
    return path


def test_pdf(design, tmp_path):
    target = tmp_path / "oven.pdf"
    done = run.invoke(app, ["sheet", str(design), "-o", str(target)])
    assert (done.exit_code, done.stdout) == (0, ""), done.output
    assert done.stderr == f"sheet written to {target}\n"
    reader = pypdf.PdfReader(target)
    assert 3 <= len(reader.pages) <= 5
    assert "Flue of a bakery oven" in reader.pages[0].extract_text()


def test_markdown_on_the_screen_is_that_of_the_file(design, tmp_path):
    target = tmp_path / "oven.md"
    screen = run.invoke(app, ["sheet", str(design)])
    assert screen.exit_code == 0
    assert screen.stderr == ""
    assert screen.stdout.startswith("# Flue of a bakery oven\n\n## Identification\n")
    assert run.invoke(app, ["sheet", str(design), "-o", str(target)]).exit_code == 0
    assert target.read_text() == screen.stdout == run.invoke(app, ["sheet", str(design), "-o", "-"]).stdout


def test_a_missed_requirement_is_exit_code_1_with_the_sheet_written(design, tmp_path):
    design.write_text(DESIGN + '\n[require]\npower = "50 W"\n')
    target = tmp_path / "oven.md"
    done = run.invoke(app, ["sheet", str(design), "-o", str(target)])
    assert done.exit_code == 1
    assert "NOT MET: 1 of " in target.read_text()


@pytest.mark.parametrize(
    ("name", "change", "words"),
    [
        ("oven.docx", ("", ""), "a sheet ends in .pdf or .md"),
        ("oven.pdf", ('leg_length = "1.6 mm"', 'leg_length = "1.6"'), "oven.design.toml:21: "),
        ("oven.pdf", ('hold_outside_data = "30 K"', ""), "hold_outside_data"),
        ("none/oven.md", ("", ""), "cannot be written"),
    ],
)
def test_wrong_input_is_one_line_and_writes_nothing(design, tmp_path, name, change, words):
    if "hold" in words:  # cold side far below the first data point
        design.write_text(DESIGN.replace("40 degC", "5 degC").replace(*change))
    else:
        design.write_text(DESIGN.replace(*change))
    done = run.invoke(app, ["sheet", str(design), "-o", str(tmp_path / name)])
    assert (done.exit_code, done.stdout) == (2, "")
    assert words in done.stderr
    assert done.stderr.count("\n") == 1
    assert [p.name for p in tmp_path.iterdir()] == ["oven.design.toml"]
