"""What all commands share: start, help, errors, streams, exit codes."""

import os
import subprocess
import sys
from pathlib import Path

import pytest
import typer.main
from typer.testing import CliRunner

import tegdesign
from tegdesign.cli import COMMANDS, app
from tegdesign.errors import InputError, TegdesignError

run = CliRunner()
ROOT = Path(tegdesign.__file__).resolve().parent.parent


def shell(*args, **settings):
    environment = {**os.environ, "PYTHONPATH": str(ROOT), **settings}
    return subprocess.run(
        [sys.executable, "-m", "tegdesign", *args],
        capture_output=True,
        text=True,
        env=environment,
        timeout=60,
    )


def test_starting_imports_nothing_heavy():
    heavy = "numpy scipy pandas matplotlib pint pydantic rich"
    code = (
        "import sys, tegdesign.cli, typer.main; typer.main.get_command(tegdesign.cli.app); "
        f"print([name for name in '{heavy}'.split() if name in sys.modules])"
    )
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
    )
    assert done.stdout == "[]\n", done.stderr


def test_help_lists_all_commands_without_importing_them():
    code = (
        "import sys, tegdesign.cli; sys.argv = ['tegdesign', '--help']\n"
        "try: tegdesign.cli.main()\n"
        "except SystemExit as end:\n"
        "  print([name for name in sys.modules if name.startswith('tegdesign.cli.')], end.code)"
    )
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
    )
    assert done.stdout.endswith("[] 0\n"), done.stderr
    for name, text in COMMANDS.items():
        assert f"  {name}" in done.stdout
        assert text in done.stdout


@pytest.mark.parametrize("args", [["-h"], ["--help"], []])
def test_help(args):
    done = run.invoke(app, args)
    assert "Usage: " in done.output
    assert done.exit_code == (0 if args else 2)


def commands(command, words=()):
    yield words, command
    for name in getattr(command, "commands", {}):
        found = command.resolve_command(typer.Context(command), [name])[1]
        yield from commands(found, (*words, name))


@pytest.mark.parametrize("words", [words for words, _ in commands(typer.main.get_command(app))], ids=" ".join)
def test_every_help_has_an_example_and_names_every_option(words):
    done = run.invoke(app, [*words, "-h"])
    assert done.exit_code == 0
    assert "Example" in done.stdout
    assert " ".join(["tegdesign", *words][:2]) in done.stdout
    assert done.stderr == ""


def test_version():
    done = run.invoke(app, ["--version"])
    assert done.stdout == f"tegdesign {tegdesign.__version__}\n"


@pytest.mark.parametrize("args", [["bogus"], ["--bogus"], ["materials", "--bogus"], ["materials", "check"]])
def test_wrong_usage(args):
    done = run.invoke(app, args)
    assert done.exit_code == 2
    assert done.stdout == ""
    assert "Error: " in done.stderr
    assert "Traceback" not in done.stderr


@pytest.mark.parametrize(
    ("error", "code"), [(InputError("wrong\n  thing"), 2), (TegdesignError("job failed"), 1)]
)
def test_errors_of_the_package_are_one_line(monkeypatch, error, code):
    from tegdesign.material import library

    def fail(name, folders=()):
        raise error

    monkeypatch.setattr(library, "find", fail)
    done = run.invoke(app, ["materials", "clathrate-n"])
    assert done.exit_code == code
    assert done.stdout == ""
    assert done.stderr == f"tegdesign: {' '.join(str(error).split())}\n"


def test_debug_shows_the_traceback_and_keeps_the_exit_code():
    done = run.invoke(app, ["--debug", "materials", "no-such"])
    assert done.exit_code == 2
    assert "Traceback" in done.stderr
    assert done.stderr.splitlines()[-1].startswith("tegdesign: unknown material 'no-such'")


def test_the_real_program_and_its_streams():
    done = shell("materials", "no-such")
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr == "tegdesign: unknown material 'no-such'; tegdesign materials lists all\n"


def test_broken_pipe_is_quiet():
    command = f"{sys.executable} -m tegdesign materials --json | head -c 1"
    done = subprocess.run(
        command, shell=True, capture_output=True, text=True, env={**os.environ, "PYTHONPATH": str(ROOT)}
    )
    assert done.stdout == "["
    assert done.stderr == ""
