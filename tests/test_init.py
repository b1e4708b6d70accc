"""The front door for Python: the twins of the commands, imported on first use."""

import ast
from pathlib import Path

import pytest

import tegdesign
from tegdesign.cli import COMMANDS


def test_lists_agree():
    tree = ast.parse(Path(tegdesign.__file__).read_text())
    block = next(node for node in tree.body if isinstance(node, ast.If))
    typed = {alias.asname or alias.name for node in block.body for alias in node.names}
    assert typed == set(tegdesign.__all__) == set(tegdesign._HOMES)
    assert set(tegdesign.__all__) <= set(dir(tegdesign))


@pytest.mark.parametrize("name", tegdesign.__all__)
def test_every_name_is_there_and_has_words(name):
    assert getattr(tegdesign, name).__doc__


def test_unknown_name():
    with pytest.raises(AttributeError, match="no attribute 'sise'"):
        _ = tegdesign.sise


# What a person calls in Python for each command; a new command needs a line here.
TWINS = {
    "size": "size",
    "rate": "rate",
    "compare": "compare",
    "sheet": "write_sheet",
    "materials": "materials",
    "rows": "rows",
    "array": "array",
}


def test_every_command_has_a_twin():
    for command in COMMANDS:
        assert TWINS[command] in tegdesign.__all__


def test_twins_of_sheet_and_materials(tmp_path):
    frame = tegdesign.materials("n").to_frame()
    assert {"lead-telluride-n", "skutterudite-n"} <= set(frame.index)
    assert set(frame["polarity"]) == {"n"}
    kinds = [material.kind for material in tegdesign.materials()]
    assert (kinds.count("table"), kinds.count("bands")) == (30, 6)
    with pytest.raises(tegdesign.InputError, match=r"\.pdf or \.md"):
        tegdesign.sheet("design.toml", tmp_path / "sheet.doc")
