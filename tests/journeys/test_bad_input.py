"""What a user gets for wrong input: exit code 2, one clear line, nothing on standard output, nothing written."""

import os
import subprocess
import sys
from pathlib import Path

import pytest
from typer.testing import CliRunner

import tegdesign
from tegdesign.cli import app
from tegdesign.material import library

BRIEF = """\
title = "plate"

[source]
kind = "film"
temperature = "300 degC"
coefficient = "700 W/m2/K"

[sink]
kind = "film"
temperature = "30 degC"
coefficient = "3000 W/m2/K"

[materials]
n = "bismuth-telluride-n-se0.3"
p = "bismuth-telluride-p-sb1.58"
hold_outside_data = "15 K"

[limits]
footprint = ["40 mm", "40 mm"]

[require]
voltage = ["3 V", "6 V"]
"""

DESIGN = """\
title = "plate"

[source]
kind = "surface"
temperature = "200 degC"

[sink]
kind = "surface"
temperature = "50 degC"

[materials]
n = "bismuth-telluride-n-se0.3"
p = "bismuth-telluride-p-sb1.58"
hold_outside_data = "15 K"

[module]
columns = 10
rows = 10
leg_length = "1.5 mm"
leg_side_n = "1.4 mm"
leg_side_p = "1.5 mm"
pitch = "2.2 mm"

[require]
power = "1 W"
"""

MATERIAL = (library.shipped() / "clathrate-n.toml").read_text()


@pytest.fixture
def folder(tmp_path, monkeypatch):
    """Give an empty folder to work in, and one beside it that may hold what is wrong."""
    here = tmp_path / "here"
    here.mkdir()
    monkeypatch.chdir(here)
    monkeypatch.delenv(library.VARIABLE, raising=False)
    return here


def changed(text, *changes):
    for old, new in changes:
        assert text.count(old) >= 1, old
        text = text.replace(old, new, 1)
    return text


def refused(folder, args, words):
    """Run in the program itself, then see that nothing but one line came of it."""
    before = {path: path.read_bytes() for path in sorted(folder.rglob("*")) if path.is_file()}
    done = CliRunner().invoke(app, args)
    assert done.exit_code == 2, (done.exit_code, done.output, done.exception)
    assert done.stdout == ""
    assert "Traceback" not in done.stderr
    lines = done.stderr.splitlines()
    if lines[0].startswith("Usage: "):  # a slip on the command line itself
        assert sum(line.startswith("Error: ") for line in lines) == 1
    else:
        assert len(lines) == 1
        assert lines[0].startswith("tegdesign: ")
    for word in [words] if isinstance(words, str) else words:
        assert word in done.stderr
    assert {path: path.read_bytes() for path in sorted(folder.rglob("*")) if path.is_file()} == before
    return done.stderr


# What is changed in the brief, and words the message must have: place, value, limit, mend.
BRIEFS = {
    "unknown key": ([('footprint = [', 'footprnt = [')], ["b.toml:19:", "unknown key", "limits.footprnt", "closest: footprint"]),
    "unknown table": ([("[require]", "[requires]")], ["b.toml:21:", "unknown key: requires", "closest: require"]),
    "missing key": ([('temperature = "300 degC"\n', "")], ["b.toml:3:", "missing key: source", "temperature"]),
    "missing table": ([(BRIEF[BRIEF.index("[sink]"):BRIEF.index("[materials]")], "")], ["b.toml:1:", "missing key: sink"]),
    "no unit": ([('"300 degC"', '"300"')], ["b.toml:5:", "temperature", "'300' has no unit", "300 K"]),
    "bare number": ([('"300 degC"', "300")], ["b.toml:5:", "300 has no unit", '"300 K"']),
    "wrong dimension": ([('"300 degC"', '"300 mm"')], ["b.toml:5:", "unit 'mm' has the wrong dimension", "'K'"]),
    "unknown unit": ([('"300 degC"', '"300 blorg"')], ["b.toml:5:", "'blorg' is not a known unit"]),
    "words for a number": ([('"300 degC"', '"hot"')], ["b.toml:5:", "'hot' is not a number with a unit"]),
    "list for a number": ([('"300 degC"', '["300 degC"]')], ["b.toml:5:", "expected a number with a unit"]),
    "nan": ([('"300 degC"', '"nan degC"')], ["b.toml:5:", "'nan degC' is not a finite number"]),
    "infinite": ([('"3000 W/m2/K"', '"inf W/m2/K"')], ["b.toml:11:", "'inf W/m2/K' is not a finite number"]),
    "negative": ([('"3000 W/m2/K"', '"-3000 W/m2/K"')], ["b.toml:11:", "sink.coefficient", "-3000", "above 0 W/m^2/K"]),
    "below absolute zero": ([('"30 degC"', '"-300 degC"')], ["b.toml:10:", "temperature", "above 0 K"]),
    "too hot to be meant": ([('"300 degC"', '"30000 degC"')], ["b.toml:5:", "temperature", "below 4000 K"]),
    "hot is colder than cold": ([('"300 degC"', '"20 degC"')], ["source at 293.15 K", "sink at 303.15 K", "exchange"]),
    "source and sink alike": ([('"300 degC"', '"30 degC"')], ["is not hotter than the sink"]),
    "unknown kind": ([('kind = "film"', 'kind = "flim"')], ["b.toml:4:", "source.kind: 'flim'", "one of 'surface'", "'film'"]),
    "sink of fixed heat": (
        [(BRIEF[BRIEF.index("[sink]"):BRIEF.index("[materials]")], '[sink]\nkind = "heat"\nheat = "3 W"\n')],
        ["sink of kind 'heat'", "surface, film or stream"],
    ),
    "unknown aim": ([('title = "plate"', 'aim = "money"')], ["b.toml:1:", "aim: 'money'", "'power'", "'efficiency'"]),
    "unknown load": ([("[limits]", '[load]\nkind = "lamp"\n[limits]')], ["b.toml:19:", "load.kind: 'lamp'", "'resistance'"]),
    "unknown material": ([("-n-se0.3", "-n-se3")], ["unknown material 'bismuth-telluride-n-se3'", "closest: bismuth"]),
    "wrong polarity": (
        [("bismuth-telluride-n-se0.3", "bismuth-telluride-p-sb1.58")],
        ["materials.n", "is p-type", "choose one of type n", "tegdesign materials --polarity n"],
    ),
    "no material": ([('n = "bismuth-telluride-n-se0.3"\n', "")], ["materials.n names no materials", "tegdesign compare"]),
    "two materials": (
        [('"bismuth-telluride-n-se0.3"', '["bismuth-telluride-n-se0.3", "clathrate-n"]')],
        ["materials.n names 2 materials", "tegdesign compare"],
    ),
    "folder of materials missing": (
        [("hold_outside_data", 'folder = "mine"\nhold_outside_data')], ["mine: no such folder of materials"],
    ),
    "footprint too small": ([('["40 mm", "40 mm"]', '["3 mm", "3 mm"]')], ["b.toml:18:", "3 mm x 3 mm", "no room for one couple"]),
    "three sides": ([('["40 mm", "40 mm"]', '["40 mm", "40 mm", "40 mm"]')], ["b.toml:19:", "footprint"]),
    "leg lengths upside down": (
        [("[require]", 'leg_length = ["5 mm", "1 mm"]\n[require]')], ["leg_length is upside down", "5 mm is above 1 mm"],
    ),
    "voltage upside down": ([('["3 V", "6 V"]', '["6 V", "3 V"]')], ["b.toml:21:", "voltage window is upside down: 6 V is above 3 V"]),
    "no modules": ([("[require]", "modules = 0\n[require]")], ["b.toml:21:", "modules", "0", "at least 1"]),
    "half a module": ([("[require]", "modules = 1.5\n[require]")], ["b.toml:21:", "modules", "1.5", "integer"]),
    "huge": ([('"40 mm", "40 mm"', '"40 mm", "1e300 mm"')], ["b.toml:19:", "footprint", "below 10 m"]),
    "tiny": ([('["40 mm", "40 mm"]', '["1e-300 mm", "40 mm"]')], ["b.toml:18:", "no room for one couple"]),
    "steps that nothing fits": (
        [("[require]", '[workshop]\nleg_length_step = "9 m"\n[require]')],
        ["no design with whole workshop steps fits", "finer steps"],
    ),
    "unknown filler": ([("[require]", '[stack]\nfiller = "straw"\n[require]')], ["filler 'straw' is not one of", "filler_conductivity"]),
    "share above one": ([("[require]", "[stack]\nemittance_hot = 1.2\n[require]")], ["b.toml:22:", "emittance_hot", "1.2", "at most 1"]),
    "word for a switch": ([("[require]", '[losses]\nspreading = "perhaps"\n[require]')], ["b.toml:22:", "losses.spreading"]),
    "syntax": ([('title = "plate"', "title = plate")], ["b.toml:1: not valid TOML"]),
    "key given twice": ([("[limits]", 'n = "clathrate-n"\n[limits]')], ["b.toml:18: not valid TOML", "overwrite"]),
    "data do not cover the job": (
        [('"15 K"', '"0 K"'), ('"300 degC"', '"700 degC"'), ('"700 W/m2/K"', '"90000 W/m2/K"')],
        ["open circuit: junction at", "573.0 K, the last measured point of bismuth", "materials.hold_outside_data = "],
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", BRIEFS)
def test_size_refuses_a_brief(name, folder):
    changes, words = BRIEFS[name]
    (folder / "b.toml").write_text(changed(BRIEF, *changes))
    refused(folder, ["size", "b.toml", "-o", "d.toml", "--sheet", "s.pdf"], words)


# A design is read by rate and by sheet, in the same words.
DESIGNS = {
    "unknown key": ([("rows = 10", "row = 10")], ["b.toml:18:", "unknown key: module.row", "closest: rows"]),
    "odd grid": ([("columns = 10", "columns = 9"), ("rows = 10", "rows = 9")], ["b.toml:16:", "9 x 9 is odd", "even number"]),
    "legs wider than the pitch": ([('"2.2 mm"', '"1.2 mm"')], ["b.toml:16:", "1.4 mm and 1.5 mm do not fit a pitch of 1.2 mm"]),
    "no rows": ([("rows = 10", "rows = 0")], ["b.toml:18:", "module.rows: 0", "at least 1"]),
    "no modules": ([("rows = 10", "rows = 10\nmodules_in_series = 0")], ["module.modules_in_series: 0", "at least 1"]),
    "no thickness": ([('"1.5 mm"', '"0 mm"')], ["b.toml:19:", "module.leg_length: 0 mm", "above 0 m"]),
    "list of materials": ([('"bismuth-telluride-n-se0.3"', '["clathrate-n"]')], ["b.toml:12:", "materials.n", "string"]),
    "wrong polarity": ([("bismuth-telluride-p-sb1.58", "clathrate-n")], ["materials.p: 'clathrate-n' is n-type"]),
    "unknown material": ([("bismuth-telluride-p-sb1.58", "unobtainium")], ["unknown material 'unobtainium'"]),
    "hot is colder than cold": ([('"200 degC"', '"20 degC"')], ["source at 293.15 K is not hotter than the sink"]),
    "data do not cover the state": (
        [('"200 degC"', '"400 degC"')],
        ["open circuit: junction at", "above 573.0 K", "bismuth-telluride-n-se0.3", "hold_outside_data = ", "(now 15 K)"],
    ),
    "load of nothing": (
        [("[module]", '[load]\nkind = "resistance"\nresistance = "0 ohm"\n[module]')],
        ["load.resistance: 0 ohm", "above 0 ohm"],
    ),
}  # fmt: skip


@pytest.mark.parametrize("command", ["rate", "sheet"])
@pytest.mark.parametrize("name", DESIGNS)
def test_rate_and_sheet_refuse_a_design(name, command, folder):
    changes, words = DESIGNS[name]
    (folder / "b.toml").write_text(changed(DESIGN, *changes))
    refused(folder, [command, "b.toml", "-o", "s.md" if command == "sheet" else "s.txt"], words)


def other_files(folder):
    (folder / "b.toml").write_text(BRIEF)
    (folder / "d.toml").write_text(DESIGN)
    (folder / "m.toml").write_text(MATERIAL)
    (folder / "empty.toml").write_text("")
    (folder / "blank.csv").write_text("")
    (folder / "binary.toml").write_bytes(bytes(range(256)))
    (folder / "zero.toml").write_bytes(b"title = 'a'\0")
    (folder / "sub").mkdir()


FILES = {
    "no file": ("none.toml", "none.toml: no such file"),
    "folder": ("sub", "sub: is a folder, expected a file"),
    "file below a file": ("b.toml/x.toml", "b.toml/x.toml: cannot be read (Not a directory)"),
    "binary": ("binary.toml", "binary.toml: is not a UTF-8 text file (byte 128)"),
    "zero byte": ("zero.toml", "zero.toml: is not a text file (byte 11 is zero)"),
    "empty": ("empty.toml", "empty.toml:1: missing key: source; add it"),
    "empty table": ("blank.csv", "blank.csv:1: missing key: source; add it"),
    "material file": ("m.toml", "'points' tells that this is a material file"),
}


@pytest.mark.parametrize("command", ["size", "compare", "rate", "sheet"])
@pytest.mark.parametrize("name", FILES)
def test_files_that_cannot_be_used(name, command, folder):
    other_files(folder)
    path, words = FILES[name]
    refused(folder, [command, path], words)


@pytest.mark.parametrize("command", ["rate", "sheet"])
def test_brief_for_a_design(command, folder):
    other_files(folder)
    refused(folder, [command, "b.toml"], "b.toml:18: 'limits' tells that this is a brief, not a design: tegdesign size makes")


@pytest.mark.parametrize("command", ["size", "compare"])
def test_design_for_a_brief(command, folder):
    other_files(folder)
    refused(folder, [command, "d.toml"], "d.toml:16: 'module' tells that this is a design, not a brief: tegdesign rate and")


def test_file_that_may_not_be_read(folder, monkeypatch):
    """The tests may run as a user who can read all, so the refusal of the system is acted."""
    other_files(folder)

    def refuse(self, **settings):
        raise PermissionError(13, "Permission denied")

    with monkeypatch.context() as patch:
        patch.setattr(Path, "read_text", refuse)
        done = CliRunner().invoke(app, ["rate", "d.toml"])
    assert (done.exit_code, done.stdout) == (2, "")
    assert done.stderr == "tegdesign: d.toml: cannot be read (Permission denied)\n"


COMMANDS = {
    "list with an empty place": (["rate", "d.toml", "--hot", "150 degC,,200 degC"], "has an empty place"),
    "temperatures without unit": (["rate", "d.toml", "--hot", "150, 200"], "--hot: '150' has no unit"),
    "temperature of another kind": (["rate", "d.toml", "--cold", "3 W"], "--cold: unit 'W' has the wrong dimension"),
    "temperature below zero": (["rate", "d.toml", "--hot", "-3 K"], ["--hot: '-3 K'", "0 K..4000 K"]),
    "hot list below the sink": (["rate", "d.toml", "--hot", "150 degC, 20 degC"], "is not hotter than the sink"),
    "hot list beyond the data": (["rate", "d.toml", "--hot", "200 degC, 500 degC"], ["773.1", "hold_outside_data"]),
    "unknown word for a load": (["rate", "d.toml", "--load", "mached"], ["--load: 'mached'", "matched", "efficiency", "ohm"]),
    "load below zero": (["rate", "d.toml", "--load", "-1 ohm"], ["--load: '-1 ohm'", "above 0 ohm"]),
    "current below zero": (["rate", "d.toml", "--current", "-1 A"], ["--current: '-1 A'", "0 A or more"]),
    "current without unit": (["rate", "d.toml", "--current", "1"], "--current: '1' has no unit"),
    "map without values": (["rate", "d.toml", "--map", "module.leg_length"], "is not KEY=LIST"),
    "map with empty list": (["rate", "d.toml", "--map", "module.leg_length="], "is not KEY=LIST"),
    "map of an unknown key": (["rate", "d.toml", "--map", "module.length=1 mm"], ["map at module.length = 1 mm", "unknown key", "closest: leg_length"]),
    "map of a word": (["rate", "d.toml", "--map", "title=1, 2"], "map at title = 1: title: input should be a valid string"),
    "map of impossible values": (["rate", "d.toml", "--map", "module.leg_length=1 mm, -2 mm"], ["module.leg_length: -2 mm", "above 0 m"]),
    "map over three keys": (
        ["rate", "d.toml", *(f"--map={key}=1 mm" for key in ("module.leg_length", "module.leg_side_n", "module.pitch"))],
        "one or two keys",
    ),
    "map of an unknown quantity": (
        ["rate", "d.toml", "--map", "module.leg_length=1 mm, 2 mm", "--of", "power"], ["unknown quantity 'power'", "power_W"],
    ),
    "curve and map": (["rate", "d.toml", "--curve", "--map", "module.leg_length=1 mm"], "one at a time"),
    "json and csv": (["rate", "d.toml", "--json", "--csv"], "give --json or --csv, not both"),
    "comparison in json and csv": (["compare", "b.toml", "--json", "--csv"], "give --json or --csv, not both"),
    "figure of a table": (["rate", "d.toml", "--hot", "450 K", "--figure", "a.png"], "--figure goes with --curve, --ranges or --map"),
    "figure of unknown format": (["rate", "d.toml", "--curve", "--figure", "a.bmp"], "a.bmp: a figure ends in .png, .pdf, .svg"),
    "ranking of unknown format": (["compare", "b.toml", "--figure", "a.gif"], "a.gif: a figure ends in .png, .pdf, .svg"),
    "sheet of unknown format": (["sheet", "d.toml", "-o", "a.docx"], ["a.docx", ".pdf", ".md"]),
    "sheet of unknown format while sizing": (["size", "b.toml", "--sheet", "a.docx"], ["a.docx", ".pdf", ".md"]),
    "no folder for the design": (["size", "b.toml", "-o", "no/d.toml"], "no/d.toml: cannot be written, "),
    "design into a folder": (["size", "b.toml", "-o", "sub"], "sub: is a folder, expected a file to write"),
    "design below a file": (["size", "b.toml", "-o", "b.toml/d.toml"], ["b.toml/d.toml: cannot be written, ", "is no folder"]),
    "no folder for the sheet": (["size", "b.toml", "-o", "n.toml", "--sheet", "no/s.pdf"], "no/s.pdf: cannot be written"),
    "no folder for the figure": (["rate", "d.toml", "--curve", "--figure", "no/a.png"], "no/a.png: cannot be written"),
    "no folder for the table": (["rate", "d.toml", "--curve", "--csv", "-o", "no/a.csv"], "no/a.csv: cannot be written"),
    "sheet below a file": (["sheet", "d.toml", "-o", "d.toml/s.pdf"], "d.toml/s.pdf: cannot be written"),
    "none shown": (["compare", "b.toml", "--top", "0"], "--top"),
    "no brief": (["size"], "BRIEF.toml"),
    "unknown option": (["size", "b.toml", "--power", "3 W"], "--power"),
    "unknown command": (["rank", "b.toml"], "rank"),
}


@pytest.mark.parametrize("name", COMMANDS)
def test_command_lines_that_make_no_sense(name, folder):
    other_files(folder)
    args, words = COMMANDS[name]
    refused(folder, args, words)


# What is changed in a user's own material file, found through ``materials.folder`` of the brief.
MATERIALS = {
    "temperature twice": ([("            466,", "            417,")], ["own/m.toml:20:", "temperature given twice: 417 K"]),
    "temperatures fall": ([("            466,", "            400,")], ["own/m.toml:20:", "temperatures must rise: 400 K"]),
    "not a number": ([("-89.80", "nan")], ["own/m.toml:20:", "seebeck_coefficient is not a finite number: 'nan'"]),
    "no unit": ([("conductivity [S/m]", "conductivity")], ["own/m.toml:18:", "column without unit: conductivity"]),
    "wrong unit": ([("conductivity [S/m]", "conductivity [W/m]")], ["own/m.toml:18:", "wrong dimension"]),
    "cell missing": ([("-89.80,", "-89.80")], ["own/m.toml:20:", "number of cells: 3", "4 as in the header"]),
    "unknown key": ([("density_basis", "densty_basis")], ["own/m.toml:", "unknown key: densty_basis", "closest: density_basis"]),
    "no kind": ([('kind = "table"\n', "")], ["own/m.toml:", "kind"]),
    "another name inside": ([('name = "clathrate-n"', 'name = "clathrate"')], ["own/m.toml", "make file name and name agree"]),
    "sign of the other polarity": ([('polarity = "n"', 'polarity = "p"')], ["own/m.toml:19:", "wrong sign everywhere"]),
}  # fmt: skip


@pytest.mark.parametrize("name", MATERIALS)
def test_own_material_that_cannot_be_used(name, folder):
    changes, words = MATERIALS[name]
    own = folder / "own"
    own.mkdir()
    text = changed(MATERIAL, *changes)
    (own / "m.toml").write_text(text if "another" in name else text.replace('name = "clathrate-n"', 'name = "m"'))
    (folder / "b.toml").write_text(
        changed(BRIEF, ('"bismuth-telluride-n-se0.3"', '"m"'), ("hold_outside_data", 'folder = "own"\nhold_outside_data'))
    )
    refused(folder, ["size", "b.toml"], words)


@pytest.mark.parametrize(
    ("args", "code"),
    [
        (["size", "none.toml"], 2),
        (["rate", "b.toml"], 2),
        (["sheet", "d.toml", "-o", "no/s.pdf"], 2),
        (["materials", "no-such"], 2),
    ],
)
def test_the_real_program(args, code, folder):
    """The same through a process of its own, in which warnings would show as well."""
    other_files(folder)
    before = sorted(folder.rglob("*"))
    environment = {**os.environ, "PYTHONPATH": str(Path(tegdesign.__file__).resolve().parents[1])}
    done = subprocess.run(
        [sys.executable, "-m", "tegdesign", *args], capture_output=True, text=True, env=environment, timeout=60
    )
    assert (done.returncode, done.stdout) == (code, "")
    assert done.stderr.startswith("tegdesign: ")
    assert done.stderr.count("\n") == 1
    assert sorted(folder.rglob("*")) == before
