import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.material import library
from tegdesign.material.check import check
from tegdesign.material.file import read
from tegdesign.material.lorenz import lorenz_rule


def findings(path):
    return [(finding.line, finding.severity, finding.text) for finding in check(path)]


def test_a_sound_file_has_no_findings(user_file):
    assert findings(user_file()) == []


def test_lorenz_number_of_the_rule():
    # rule of Kim et al. 2015, doi 10.1063/1.4908244, worked out apart with 8 digits, in 1e-8 W ohm/K^2
    expected = {50: 2.1498365, 100: 1.9222875, 150: 1.7744178, 200: 1.6783267, 250: 1.6158832, 300: 1.5753051}
    s = np.array(list(expected)) * 1e-6
    assert_allclose(lorenz_rule(s), np.array(list(expected.values())) * 1e-8, rtol=3e-8)
    assert_allclose(lorenz_rule(-s), lorenz_rule(s), rtol=0)


def test_exact_band_integral_stays_within_the_claimed_five_percent():
    # exact one-band acoustic values: 50: 2.2201728, 100: 1.9126196, 200: 1.6198347, 300: 1.5273713 (mpmath)
    exact = {50: 2.2201728, 100: 1.9126196, 200: 1.6198347, 300: 1.5273713}
    assert_allclose(
        lorenz_rule(np.array(list(exact)) * 1e-6), np.array(list(exact.values())) * 1e-8, rtol=0.05
    )


# what is changed in the sound file -> the one finding it makes: line, severity, beginning of the text
DOUBTS = {
    "no source": ([('citation = "our laboratory, series 7"', "")], 16, "no source; give source.citation"),
    "names differ": (
        [('"home-made-n"', '"house-made-n"')],
        2,
        "file and material have different names: house-made-n (limit: home-made-n)",
    ),
    "other sign": (
        [("-120,", "5,"), ("-140,", "-20,"), ("-160,", "-45,"), ("-180,", "-70,")],
        10,
        "seebeck_coefficient of the other sign: 5 uV/K at 373.15 K (limit: polarity n)",
    ),
    "few points": (
        [
            (
                f"{'400,':>19}{'-180,':>28}{'1.25,':>23}{'2.2':>29}\n",
                "",
            )
        ],
        10,
        "few points of seebeck_coefficient: 3 (limit: at least 4)",
    ),
    "slip of ten": (
        [("1.10,", "11.0,")],
        12,
        "resistivity far off its neighbours: 0.00011 ohm m at 573.15 K",
    ),
    "slip at the end": (
        [("1.25,", "12.5,")],
        13,
        "resistivity far off its neighbours: 0.000125 ohm m at 673.15 K",
    ),
    "slip in S": (
        [("-160,", "-16,")],
        12,
        "seebeck_coefficient far off its neighbours: -16 uV/K at 573.15 K",
    ),
    "slip in kappa": (
        [("0.95,                          2.3", "0.95,   1.3")],
        11,
        "thermal_conductivity far off its neighbours: 1.3 W/m/K at 473.15 K",
    ),
    "gap": (
        [("400, ", "800, ")],
        13,
        "gap in seebeck_coefficient, resistivity, thermal_conductivity: 500 K from 573.15 K to 1073.15 K",
    ),
}


@pytest.mark.parametrize("case", DOUBTS)
def test_each_doubt_is_found_on_its_line_and_the_file_still_loads(user_file, case):
    changes, line, words = DOUBTS[case]
    path = user_file(*changes)
    found = findings(path)
    assert (line, "warning") == found[0][:2], found
    assert found[0][2].startswith(words), found
    assert len(found) == (3 if case == "few points" else 1), found  # three properties of three points
    read(path)


def test_conductivity_below_what_electrons_carry(user_file):
    # at 400 degC: L = 1.5 + exp(-180/116) = 1.71189, so L T / rho = 1.71189e-8 * 673.15 / 3.9e-6 = 2.955
    path = user_file(("0.80", "0.24"), ("0.95", "0.29"), ("1.10", "0.34"), ("1.25", "0.39"))
    found = findings(path)
    assert [(line, severity) for line, severity, _ in found] == [(k, "warning") for k in (10, 11, 12, 13)]
    assert "Wiedemann-Franz" in found[3][2]
    assert "2.2 W/m/K at 673.15 K (limit: 2.955 W/m/K" in found[3][2]


def test_figure_of_merit_too_good(user_file):
    # zT at 400 degC by hand: (360e-6)^2 * 673.15 / (1.25e-5 * 2.2) = 3.172; 2.425 at 300
    path = user_file(("-120", "-240"), ("-140", "-280"), ("-160", "-320"), ("-180", "-360"))
    assert [(line, text) for line, _, text in findings(path)] == [
        (13, "figure of merit too good: zT 3.17 at 673.15 K (limit: 3); check the units")
    ]


def test_a_bend_or_a_step_is_no_slip(user_file):
    assert findings(user_file(("-160", "-135"), ("-180", "-110"))) == []
    # resistivity falls to a third between two points at the phase change of tin selenide, as measured
    assert findings(library.shipped() / "tin-selenide-p.toml") == []


def test_intervals_twice_as_wide_are_no_gap(user_file):
    assert findings(user_file(("400,                       -180", "500, -180"))) == []


def test_all_errors_at_once_sorted_by_line(user_file):
    path = user_file(
        ('"450 degC"', '"450"'),
        ("density =", "densty ="),
        ("0.95", "abc"),
        ("300,", "150,"),
        ("citation", "cite"),
    )
    found = findings(path)
    assert [line for line, _, _ in found] == [1, 5, 7, 11, 12, 17]
    assert {severity for _, severity, _ in found} == {"error"}
    assert "missing key: density" in found[0][2]


def test_lines_are_right_when_the_table_begins_on_the_line_of_its_key(user_file):
    path = user_file(('points = """\n', 'points = """'), ("1.10,", "11.0,"))
    assert findings(path)[0][0] == 11
    path = user_file(('points = """\n', 'points = """\n\n\n'), ("1.10,", "11.0,"))
    assert findings(path)[0][0] == 14


def test_unreadable_files_are_findings_too(user_file, tmp_path):
    assert findings(tmp_path / "none.toml") == [(1, "error", "no such file")]
    broken = user_file(('polarity = "n"', "polarity = n"))
    ((line, severity, text),) = findings(broken)
    assert (line, severity) == (4, "error")
    assert text.startswith("not valid TOML")
