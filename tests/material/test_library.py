import os
import shutil

import pytest

from tegdesign.errors import InputError
from tegdesign.material import library


@pytest.fixture(autouse=True)
def _no_user_folders(monkeypatch):
    monkeypatch.delenv(library.VARIABLE, raising=False)


def test_unknown_name_gives_the_closest():
    with pytest.raises(InputError, match="unknown material 'skuterudite-n'; closest: skutterudite-n"):
        library.find("skuterudite-n")
    with pytest.raises(InputError, match="unknown material 'zzz'; tegdesign materials lists all"):
        library.find("zzz")


def test_a_path_is_loaded_as_it_is(user_file):
    path = user_file(name="anything.toml")
    assert library.find(path).name == "home-made-n"
    assert library.find(str(path)).path == str(path)
    with pytest.raises(InputError, match="no such file"):
        library.find(str(path) + "x.toml")


def test_folders_and_environment(user_file, monkeypatch, tmp_path):
    path = user_file()
    assert "home-made-n" not in library.names()
    assert "home-made-n" in library.names([path.parent])
    assert library.find("home-made-n", [path.parent]).warnings == ()
    other = tmp_path / "other"
    other.mkdir()
    monkeypatch.setenv(library.VARIABLE, os.pathsep.join([str(other), str(path.parent)]))
    assert library.find("home-made-n").path == str(path)
    monkeypatch.setenv(library.VARIABLE, str(tmp_path / "gone"))
    with pytest.raises(
        InputError, match=r"gone: no such folder of materials \(named in the environment variable"
    ):
        library.names()


def test_twin_name_the_users_wins_and_says_so(user_file):
    path = user_file(('"home-made-n"', '"clathrate-n"'), name="clathrate-n.toml")
    twin = library.find("clathrate-n", [path.parent])
    assert twin.composition == "Mg2Si0.4Sn0.6"
    (warning,) = twin.warnings
    assert f"taken from {path}, which hides" in warning
    assert str(library.shipped() / "clathrate-n.toml") in warning
    assert library.find("clathrate-n").warnings == ()


def test_the_shipped_folder_given_again_is_no_twin():
    assert library.find("clathrate-n", [library.shipped()]).warnings == ()


def test_file_name_and_name_must_agree(user_file):
    path = user_file(name="other-n.toml")
    with pytest.raises(InputError, match="key name says 'home-made-n'"):
        library.find("other-n", [path.parent])


def test_loaded_once_and_again_when_changed(user_file):
    path = user_file()
    first = library.find(path)
    assert library.find(path) is first
    path.write_text(path.read_text().replace("Mg2Si0.4Sn0.6", "Mg2Si"))
    os.utime(path, ns=(1, 1))
    assert library.find(path).composition == "Mg2Si"


def test_library_inside_the_package_comes_first(monkeypatch, tmp_path):
    # as the wheel lays it out: tegdesign/materials beside tegdesign/material
    package = tmp_path / "site" / "tegdesign"
    (package / "material").mkdir(parents=True)
    monkeypatch.setattr(library, "__file__", str(package / "material" / "library.py"))
    with pytest.raises(InputError, match="library of materials is missing"):
        library.shipped()
    beside = tmp_path / "site" / "materials"
    beside.mkdir()
    with pytest.raises(InputError, match="library of materials is missing"):
        library.shipped()  # some folder of that name beside an installed package is not ours
    (tmp_path / "site" / "pyproject.toml").touch()
    assert library.shipped() == beside
    shutil.copytree(beside, package / "materials")
    assert library.shipped() == package / "materials"
