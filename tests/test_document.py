"""Typed TOML files: lines of keys, writing and reading back, whole or not at all."""

import math
import os
import stat
import tomllib

import pytest
from hypothesis import given
from hypothesis import strategies as st
from pydantic import BaseModel, ConfigDict, Field

from tegdesign import document
from tegdesign.errors import InputError

KEYS = st.text(min_size=1, max_size=8)
TEXTS = st.text(max_size=300)
SCALARS = st.one_of(
    TEXTS, st.booleans(), st.integers(-(2**63), 2**63 - 1), st.floats(allow_nan=False, allow_infinity=False)
)
VALUES = st.one_of(SCALARS, st.lists(SCALARS, max_size=4))
TABLES = st.recursive(
    st.dictionaries(KEYS, VALUES, max_size=4),
    lambda inner: st.dictionaries(KEYS, VALUES | inner | st.lists(inner, min_size=1, max_size=3), max_size=4),
    max_leaves=6,
)


@given(TABLES)
def test_written_toml_reads_back_equal(data):
    assert tomllib.loads(document.to_toml(data)) == data


@given(
    st.lists(
        st.sampled_from(["word", 'quo"te', "back\\slash", '"""', "a=b", "[x]", "é"]), min_size=1, max_size=80
    )
)
def test_long_texts_are_folded_without_loss(words):
    text = " ".join(words)
    written = document.to_toml({"key": text, "list": [text, text]})
    assert tomllib.loads(written) == {"key": text, "list": [text, text]}


def test_folded_lines_are_short():
    written = document.to_toml({"key": "word " * 99 + "end", "list": ["word " * 99 + "end"]})
    assert max(map(len, written.splitlines())) <= 110
    assert len(written.splitlines()) > 10


def test_none_is_left_out_and_strange_values_are_refused():
    assert document.to_toml({"a": None, "b": 1}) == "b = 1\n"
    with pytest.raises(TypeError):
        document.to_toml({"a": object()})


TEXT = '''\
a = 1
"b c" = """
a = 2
[not.a.table]
"""
list = [
  "x = 1",
]
[one]  # comment
a = 3
two.a = 4
[[stage]]
a = 5
[stage.leg]
a = 6
[[stage]]
a = 7
b = "" # "
c = 8
'''


def test_lines_of_keys():
    lines = document.line_numbers(TEXT)
    assert lines == {
        ("a",): 1,
        ("b c",): 2,
        ("list",): 6,
        ("one",): 9,
        ("one", "a"): 10,
        ("one", "two", "a"): 11,
        ("stage", 0): 12,
        ("stage", 0, "a"): 13,
        ("stage", 0, "leg"): 14,
        ("stage", 0, "leg", "a"): 15,
        ("stage", 1): 16,
        ("stage", 1, "a"): 17,
        ("stage", 1, "b"): 18,
        ("stage", 1, "c"): 19,
    }


def test_writing_replaces_in_one_step_and_leaves_nothing_else(tmp_path):
    target = tmp_path / "a.txt"
    document.write_whole(target, "one")
    assert target.read_text() == "one"
    os.chmod(target, 0o640)
    document.write_whole(target, b"two")
    assert target.read_text() == "two"
    assert stat.S_IMODE(target.stat().st_mode) == 0o640
    assert list(tmp_path.iterdir()) == [target]


def test_writing_where_it_is_impossible(tmp_path):
    with pytest.raises(InputError, match=r"none/a\.txt: cannot be written \(No such file"):
        document.write_whole(tmp_path / "none" / "a.txt", "one")
    with pytest.raises(InputError, match="is a folder, expected a file to write"):
        document.write_whole(tmp_path, "one")
    assert list(tmp_path.iterdir()) == []


def test_a_link_stays_a_link(tmp_path):
    (tmp_path / "real").write_text("old")
    (tmp_path / "link").symlink_to(tmp_path / "real")
    document.write_whole(tmp_path / "link", "new")
    assert (tmp_path / "link").is_symlink()
    assert (tmp_path / "real").read_text() == "new"


def test_numbers_are_written_with_all_digits():
    assert tomllib.loads(document.to_toml({"a": math.pi}))["a"] == math.pi


class Leg(BaseModel):
    model_config = ConfigDict(extra="forbid")
    length: float = Field(gt=0)


class Plan(BaseModel):
    model_config = ConfigDict(extra="forbid")
    name: str
    leg: Leg | None = None
    stage: list[Leg] = []


def test_load_gives_the_model_or_one_message_with_its_line(tmp_path):
    path = tmp_path / "plan.toml"
    path.write_text('name = "a"\n[leg]\nlength = 1.0\n[[stage]]\nlength = 2.0\n[[stage]]\nlength = 3.0\n')
    assert document.load(path, Plan) == Plan(
        name="a", leg=Leg(length=1), stage=[Leg(length=2), Leg(length=3)]
    )
    for old, new, words in [
        ("length = 3.0", "length = 0.0", ":7: stage.1.length: 0.0 (limit: above 0)"),
        ("length = 2.0", "lenth = 2.0", ":5: unknown key: stage.0.lenth; closest: length (and 1 more)"),
        ("length = 1.0", "lenth = 1.0", ":3: unknown key: leg.lenth; closest: length (and 1 more)"),
        ("length = 1.0", "", ":2: missing key: leg.length; add it"),
        ("length = 1.0", 'length = "x"', ":3: leg.length: "),
    ]:
        wrong = tmp_path / "wrong.toml"
        wrong.write_text(path.read_text().replace(old, new))
        with pytest.raises(InputError) as caught:
            document.load(wrong, Plan)
        assert str(caught.value).startswith(f"{wrong}{words}")
