"""What is shipped: contents of wheel and sdist, and that every way to install finds the materials."""

import os
import shutil
import subprocess
import sys
import tarfile
import zipfile
from pathlib import Path

import pytest

import tegdesign

HERE = Path(__file__).resolve().parents[2]
SHIPPED = ("README.md", "DEVELOPERS.md", "pyproject.toml", "tegdesign", "materials", "tests", "examples")


def files(folder, *parts):
    paths = [path for part in parts for path in (folder / part, *(folder / part).rglob("*"))]
    names = {path.relative_to(folder).as_posix() for path in paths if path.is_file()}
    return {name for name in names if "__pycache__" not in name}


def build(source, target, kind):
    """Build with the tool of the test environment, so that no index is asked."""
    command = [sys.executable, "-m", "hatchling", "build", "-t", kind, "-d", str(target)]
    done = subprocess.run(command, cwd=source, capture_output=True, text=True, timeout=120)
    assert done.returncode == 0, done.stderr
    return next(target.glob("*.whl" if kind == "wheel" else "*.tar.gz"))


@pytest.fixture(scope="module")
def source(tmp_path_factory):
    """Copy what git would hold, so that a build cannot take or leave anything else."""
    folder = tmp_path_factory.mktemp("source") / "tegdesign"
    folder.mkdir()
    for name in SHIPPED:
        path = HERE / name
        if path.is_dir():
            shutil.copytree(path, folder / name, ignore=shutil.ignore_patterns("__pycache__", ".*_cache"))
        else:
            shutil.copy(path, folder)
    return folder


@pytest.fixture(scope="module")
def wheel(source, tmp_path_factory):
    return build(source, tmp_path_factory.mktemp("wheel"), "wheel")


@pytest.fixture(scope="module")
def sdist(source, tmp_path_factory):
    return build(source, tmp_path_factory.mktemp("sdist"), "sdist")


def test_wheel_holds_program_and_materials_and_nothing_else(wheel):
    with zipfile.ZipFile(wheel) as archive:
        names = set(archive.namelist())
        metadata = archive.read(next(n for n in names if n.endswith("METADATA"))).decode()
        scripts = archive.read(next(n for n in names if n.endswith("entry_points.txt"))).decode()
    program = files(HERE, "tegdesign")
    materials = {f"tegdesign/{name}" for name in files(HERE, "materials")}
    assert len(materials) == 36  # the library; a lost file would be missed by comparing copies alone
    assert {name for name in names if ".dist-info/" not in name} == program | materials
    assert f"\nVersion: {tegdesign.__version__}\n" in metadata
    assert "tegdesign = tegdesign.cli:main" in scripts


def test_sdist_is_complete(sdist):
    with tarfile.open(sdist) as archive:
        names = {member.name.split("/", 1)[1] for member in archive.getmembers() if member.isfile()}
    assert names - {"PKG-INFO", ".gitignore"} == files(HERE, *SHIPPED)


def test_wheel_of_sdist_is_the_wheel(sdist, wheel, tmp_path):
    with tarfile.open(sdist) as archive:
        archive.extractall(tmp_path, filter="data")
    again = build(next(tmp_path.iterdir()), tmp_path / "dist", "wheel")
    with zipfile.ZipFile(again) as new, zipfile.ZipFile(wheel) as old:
        assert {(i.filename, i.CRC) for i in new.infolist()} == {(i.filename, i.CRC) for i in old.infolist()}


def run(place, folder, *args):
    environment = {**os.environ, "PYTHONPATH": str(place)}
    command = [sys.executable, *args]
    done = subprocess.run(command, capture_output=True, text=True, env=environment, cwd=folder, check=True)
    return done.stdout


@pytest.mark.parametrize("way", ["wheel", "checkout"])
def test_materials_are_found(way, wheel, source, tmp_path):
    """An editable installation puts the checkout on the path, so it is the second case."""
    if way == "wheel":
        place = tmp_path / "installed"
        with zipfile.ZipFile(wheel) as archive:
            archive.extractall(place)
        expected = place / "tegdesign" / "materials"
    else:
        place, expected = source, source / "materials"
    folder = tmp_path / "elsewhere"
    folder.mkdir()
    program = run(place, folder, "-c", "import tegdesign; print(tegdesign.__file__)")
    assert Path(program.strip()).parent == place / "tegdesign"
    listed = run(place, folder, "-m", "tegdesign", "materials", "--csv").splitlines()
    assert len(listed) == 1 + 36
    shown = run(place, folder, "-m", "tegdesign", "materials", "clathrate-n", "--json")
    assert str(expected / "clathrate-n.toml") in shown
