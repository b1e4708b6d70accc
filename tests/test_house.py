"""The rules of the house (DEVELOPERS.md): who may import whom, file sizes, what starting may cost."""

import ast
import os
import shutil
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

import tegdesign

HERE = Path(__file__).resolve().parents[1]
PACKAGE = Path(tegdesign.__file__).resolve().parent
FILES = sorted(PACKAGE.rglob("*.py"))

# From the bottom up: a room imports from itself and from rooms before it.
ROOMS = ("errors", "quantity", "document", "material", "leg", "module", "system", "design", "sheet", "cli")
MOST_LINES = 400
HEAVY = ("numpy", "scipy", "pandas", "matplotlib", "pint", "pydantic", "rich")


def room(module):
    parts = module.split(".")
    return parts[1] if len(parts) > 1 else ""


def name_of(path):
    return ".".join(("tegdesign", *path.relative_to(PACKAGE).with_suffix("").parts)).removesuffix(".__init__")


def imports(path):
    """Yield line and module of every import, those inside functions and under TYPE_CHECKING as well."""
    for node in ast.walk(ast.parse(path.read_text())):
        if isinstance(node, ast.Import):
            yield from ((node.lineno, alias.name) for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}:{node.lineno}: relative import; write it from the root"
            front = node.module == "tegdesign"  # then the names may be rooms
            names = [f"tegdesign.{alias.name}" for alias in node.names] if front else [node.module]
            yield from ((node.lineno, name) for name in names)


def test_the_package_under_test_is_this_checkout():
    """An installation that is older than the files here would pass or fail for files that nobody sees."""
    for path in sorted((HERE / "tegdesign").rglob("*.py")):
        twin = PACKAGE / path.relative_to(HERE / "tegdesign")
        assert twin.read_text() == path.read_text(), f"{twin} differs from {path}; pip install -e '.[test]'"


def test_every_room_is_known():
    found = {room(name_of(path)) for path in FILES} - {"", "__main__"}
    assert found == set(ROOMS)


def test_the_book_tells_of_every_room_in_this_order():
    lines = (HERE / "DEVELOPERS.md").read_text().splitlines()
    told = [line.split("`")[1].rstrip("/").removesuffix(".py") for line in lines if line.startswith("| `")]
    assert tuple(reversed(told[: len(ROOMS)])) == ROOMS


@pytest.mark.parametrize("path", FILES, ids=name_of)
def test_imports_go_down(path):
    own = room(name_of(path))
    if own in ("", "__main__"):  # the front doors
        return
    allowed = ROOMS[: ROOMS.index(own) + 1]
    for line, module in imports(path):
        if module.split(".")[0] == "tegdesign" and room(module) not in ("", "__version__"):
            assert room(module) in allowed, f"{path}:{line}: {own} imports {module} from above"


@pytest.mark.parametrize("path", [*FILES, *sorted((HERE / "tests").rglob("*.py"))], ids=str)
def test_files_stay_short(path):
    count = len(path.read_text().splitlines())
    assert count <= MOST_LINES, f"{path}: {count} lines, at most {MOST_LINES}; split it"


def test_one_user_of_the_units_library():
    users = {name_of(path) for path in FILES for _, module in imports(path) if module.split(".")[0] == "pint"}
    assert users == {"tegdesign.quantity"}


def test_dependencies_are_those_that_are_imported():
    used = {module.split(".")[0] for path in FILES for _, module in imports(path)}
    used -= {*sys.stdlib_module_names, "tegdesign", "pydantic_core"}  # pydantic brings its core
    project = tomllib.loads((HERE / "pyproject.toml").read_text())["project"]
    assert {entry.split(">")[0] for entry in project["dependencies"]} == used


# Where the name to import is not the name to install.
INSTALLED_AS = {"skfem": "scikit-fem", "markdown_it": "markdown-it-py"}


def test_tests_import_only_what_the_test_extra_brings():
    paths = sorted((HERE / "tests").rglob("*.py"))
    own = {path.stem for path in paths}
    used = {module.split(".")[0] for path in paths for _, module in imports(path)}
    used -= {*sys.stdlib_module_names, "tegdesign", *own}
    project = tomllib.loads((HERE / "pyproject.toml").read_text())["project"]
    entries = [*project["dependencies"], *project["optional-dependencies"]["test"]]
    assert {INSTALLED_AS.get(name, name) for name in used} <= {entry.split(">")[0] for entry in entries}


def modules_after(code):
    done = subprocess.run(
        [sys.executable, "-c", f"{code}\nimport sys; print(' '.join(sorted(sys.modules)))"],
        capture_output=True,
        text=True,
        env={**os.environ, "PYTHONPATH": str(PACKAGE.parent)},
        check=True,
    )
    return done.stdout.splitlines()[-1].split()


@pytest.mark.parametrize("code", ["import tegdesign", "import tegdesign.cli"])
def test_starting_is_light(code):
    heavy = [name for name in modules_after(code) if name in HEAVY]
    assert heavy == []


@pytest.mark.skipif(
    not (HERE / ".git").exists() or shutil.which("git") is None, reason="only git knows what is in the repository"
)
def test_the_top_level_holds_nothing_more():
    """Dot-files aside."""
    command = ["git", "-C", str(HERE), "ls-files", "--cached", "--others", "--exclude-standard"]
    listed = subprocess.run(command, capture_output=True, text=True, check=True).stdout.splitlines()
    found = {name.split("/")[0] for name in listed if not name.startswith(".")}
    allowed = {"README.md", "DEVELOPERS.md", "pyproject.toml", "tegdesign", "materials", "tests", "examples"}
    assert found - {"plate.toml", "plate.pdf"} == allowed  # what the first line of the README leaves
