"""The README does what it says: its commands run as written and print the words and numbers it shows."""

import contextlib
import doctest
import io
import os
import re
import shlex
import shutil
import subprocess
import sys
from pathlib import Path

import pytest
import typer.main
from pydantic import BaseModel
from typer.testing import CliRunner

import tegdesign
from tegdesign.cli import app
from tegdesign.design.brief import Brief
from tegdesign.design.design import Design
from tegdesign.system import boundary, load

HERE = Path(__file__).resolve().parents[2]
README = (HERE / "README.md").read_text()
NUMBER = re.compile(r"[-+]?\d+\.?\d*(?:[eE][-+]?\d+)?")
# Numbers of the README are pins of what was printed once; they may differ in the last digits elsewhere.
RTOL, ATOL = 2e-3, 2e-3


def blocks(language):
    return re.findall(rf"^```{language}\n(.*?)^```$", README, re.S | re.M)


def same(shown, printed):
    """Tell whether two lines agree in words and, to some digits, in numbers; a final ... cuts the line."""
    cut = shown.endswith("...")
    shown = shown.removesuffix("...").split()
    printed = printed.split()[: len(shown)] if cut else printed.split()
    if len(shown) != len(printed) or [NUMBER.sub("", w) for w in shown] != [NUMBER.sub("", w) for w in printed]:
        return False
    pairs = zip(NUMBER.findall(" ".join(shown)), NUMBER.findall(" ".join(printed)), strict=True)
    return all(abs(float(a) - float(b)) <= ATOL + RTOL * abs(float(a)) for a, b in pairs)


def check_lines(shown, printed):
    """Find every shown line in what was printed, in order; the next one, unless ... stands between."""
    rest, gap = printed.splitlines(), False
    for line in shown.splitlines():
        if line == "...":
            gap = True
            continue
        k = next((k for k, other in enumerate(rest) if same(line, other)), None) if gap else 0
        found = k is not None and bool(rest) and same(line, rest[k])
        assert found, f"README shows\n{line}\nbut printed is\n{printed}"
        rest, gap = rest[k + 1 :], False
    assert gap or not rest, f"README leaves out\n{rest}"


@pytest.fixture(scope="module")
def folder(tmp_path_factory):
    """Give a folder with the examples, in which all blocks run one after the other."""
    place = tmp_path_factory.mktemp("readme")
    shutil.copytree(HERE / "examples", place / "examples")
    return place


def test_console_blocks(folder, monkeypatch):
    monkeypatch.chdir(folder)
    found = 0
    for block in blocks("console"):
        for part in re.split(r"^\$ ", block, flags=re.M)[1:]:
            command, _, shown = part.partition("\n")
            program, *args = shlex.split(command)
            assert program == "tegdesign"
            done = CliRunner().invoke(app, args)
            assert done.exit_code == 0, (command, done.stderr)
            check_lines(shown, done.stdout)
            found += 1
    assert found >= 6
    assert (folder / "plate.pdf").read_bytes().startswith(b"%PDF")


def test_python_blocks(folder, monkeypatch):
    monkeypatch.chdir(folder)
    names = {}
    for block in blocks("pycon"):
        for example in doctest.DocTestParser().get_examples(block):
            stream = io.StringIO()
            with contextlib.redirect_stdout(stream):
                exec(compile(example.source, "README.md", "single"), names)
            check_lines(example.want, stream.getvalue())


def test_brief_shown_is_the_example():
    whole, *parts = blocks("toml")
    assert whole == (HERE / "examples" / "flue-gas-plate.toml").read_text()
    every = [path.read_text() for path in (HERE / "examples").glob("*.toml")]
    assert all(any(part in text for text in every) for part in parts)


def test_set_up_lines():
    """CI runs the second line word for word; here the job of the first runs with the program under test."""
    first, second = blocks("sh")[0].splitlines()
    start = "python3 -m venv .venv && .venv/bin/pip install -q"
    assert first.startswith(f"{start} . && .venv/bin/tegdesign size examples/")
    assert second.startswith(start)
    job = first.split("&&")[2].split()[1:]
    assert ["tegdesign", *job] == shlex.split(re.findall(r"^\$ (tegdesign size .*)$", README, re.M)[0])
    assert [line for line in README.splitlines() if "bin/pytest" in line] == [second]
    assert "grep -m1 'bin/pytest' README.md" in (HERE / ".ci" / "run").read_text()


def test_picture_is_made_by_the_command_shown(folder):
    command = ["rate", "plate.toml", "--curve", "--figure", "again.png", "-o", "again.txt"]
    environment = {**os.environ, "PYTHONPATH": str(Path(tegdesign.__file__).resolve().parents[1])}
    brief = ["size", "examples/flue-gas-plate.toml", "-o", "plate.toml", "--quiet"]
    for args in (brief, command):
        line = [sys.executable, "-m", "tegdesign", *args]
        done = subprocess.run(line, cwd=folder, env=environment, capture_output=True)
        assert done.returncode == 0, done.stderr
    from matplotlib.image import imread

    shown, made = imread(HERE / "examples" / "flue-gas-plate.png"), imread(folder / "again.png")
    assert shown.shape == made.shape
    assert abs(shown - made).mean() < 0.02  # fonts and anti-aliasing may differ between machines


def keys(model):
    for name, field in model.model_fields.items():
        yield name
        if isinstance(field.annotation, type) and issubclass(field.annotation, BaseModel):
            yield from keys(field.annotation)


def test_every_key_is_told():
    kinds = [getattr(part, name) for part in (boundary, load) for name in part.__all__ if name[0].isupper()]
    typed = [kind for kind in kinds if isinstance(kind, type) and issubclass(kind, BaseModel)]
    wanted = {key for model in (Brief, Design, *typed) for key in keys(model)}
    prose = re.sub(r"^```.*?^```$", "", README, flags=re.S | re.M)
    told = {word for span in re.findall(r"`([^`]+)`", prose) for word in re.findall(r"[a-z_]+", span)}
    assert wanted - told == set()


def commands(command, words=()):
    yield words, command
    for name in getattr(command, "commands", {}):
        yield from commands(command.resolve_command(typer.Context(command), [name])[1], (*words, name))


def test_examples_in_help_exist():
    for words, command in commands(typer.main.get_command(app)):
        for path in re.findall(r"(?:examples|materials)/[\w.-]+\.toml", command.help or ""):
            assert (HERE / path).is_file(), f"help of {' '.join(words)} names {path}"


def test_every_command_is_told():
    for words, _ in commands(typer.main.get_command(app)):
        assert f"tegdesign {words[0]}" in README if words else True
