import json

import numpy as np
import pytest
from typer import BadParameter

from tegdesign.cli import output


def test_json_of_arrays_and_of_what_is_not_known():
    data = {"a_K": np.array([1.0, np.nan]), "b": (1, True, None), "c": float("inf"), "d": np.float64(0.1)}
    assert json.loads(output.json_text(data)) == {
        "a_K": [1.0, None],
        "b": [1, True, None],
        "c": None,
        "d": 0.1,
    }


def test_csv_keeps_all_digits_and_quotes():
    text = output.csv_text(["x_K", "words"], [[np.float64(1 / 3), 'a, "b"'], [float("nan"), None]])
    assert text == 'x_K,words\n0.3333333333333333,"a, ""b"""\n,\n'


def test_table_is_lined_up():
    text = output.table_text(["name", "T [K]"], [["a", "300"], ["longer", "1200.5"]], right=[1])
    assert text.splitlines() == [
        "name     T [K]",
        "------  ------",
        "a          300",
        "longer  1200.5",
    ]


def test_one_style_only():
    assert [output.style(False, False), output.style(True, False), output.style(False, True)] == [
        "text",
        "json",
        "csv",
    ]
    with pytest.raises(BadParameter):
        output.style(True, True)
