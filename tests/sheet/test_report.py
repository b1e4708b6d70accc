"""The report on the terminal and the Markdown sheet: order, contents, width."""

import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import pytest
from markdown_it import MarkdownIt

import tegdesign
from tegdesign.design.wording import amount, celsius, percent
from tegdesign.sheet import margin
from tegdesign.sheet.description import connection
from tegdesign.sheet.markdown import plain as escaped
from tegdesign.sheet.markdown import sheet_markdown
from tegdesign.sheet.section import table
from tegdesign.sheet.text import WIDTH, fitted, rating_report


def flat(text):
    return " ".join(text.split())


def value(report, name):
    """Return what stands behind a name at the start of a line."""
    return next(
        line.split(name, 1)[1].strip() for line in report.splitlines() if line.strip().startswith(name)
    )


def test_sections_in_their_order(rating):
    report = rating_report(rating)
    heads = [line.split(" (")[0] for line in report.splitlines() if line.isupper() and line[0] != " "]
    assert heads == [
        "VERDICT",
        *(["BREAK-EVEN"] if margin.break_even(rating) else []),
        *(["NARROW WINDOWS"] if margin.windows(rating) else []),
        "CEILING",
        "DESIGN",
        "CONDITIONS",
        *(["STATES"] if len(rating.design.states) else []),
        "RATED STATE",
        "TEMPERATURES FROM SOURCE TO SINK, RATED",
        "WHERE HEAT AND POWER ARE LOST",
        "HEAT CONDUCTION OF THE LEGS",
        "MOST POWER AND BEST EFFICIENCY",
        "CLOSED-FORM CHECK",
        "OPEN CIRCUIT",
        "SHORT CIRCUIT",
        "DATA RANGE",
        "LEG MATERIAL",
        "CAUTIONS",
        "ASSUMPTIONS",
        *(["NOTES"] if rating.notes else []),
    ]


def test_no_line_is_too_long_and_all_cautions_are_there(rating):
    report = rating_report(rating)
    assert max(map(len, report.splitlines())) <= WIDTH == 100
    assert len(rating.cautions) > 5
    for c in rating.cautions:
        assert f"{c.title} [{c.id}]" in flat(report)
        assert flat(c.text) in flat(report)
        assert flat(f"Value: {c.value}. Limit: {c.limit}.") in flat(report)


def test_wide_tables_are_folded_in_their_words():
    block = table(
        ("what", "a number", "words"), [("x" * 30, "1.234 W", "seven words and more of them " * 5)], (0, 2)
    )
    lines = fitted(block, 80).splitlines()
    assert max(map(len, lines)) <= 80
    assert [lines[0].split(), lines[1].split()] == [["a"], ["what", "number", "words"]]  # heads of numbers fold as well
    assert lines[3].split()[1:3] == ["1.234", "W"]
    assert "x" * 30 in lines[3]
    assert " ".join(line[41:].strip() for line in lines[3:]) == ("seven words and more of them " * 5).strip()


@pytest.mark.parametrize(
    ("series", "parallel", "words"),
    [
        (1, 1, "128 couples in series in the one module"),
        (4, 1, "128 couples in series in each module; 4 modules in series"),
        (1, 3, "128 couples in series in each module; 3 modules in parallel"),
        (4, 3, "each module; 3 strings in parallel of 4 modules in series each"),
    ],
)
def test_connection(plain, series, parallel, words):
    module = plain.design.module.model_copy(
        update={"modules_in_series": series, "modules_in_parallel": parallel}
    )
    rating = replace(plain, design=plain.design.model_copy(update={"module": module}))
    assert connection(rating).endswith(words)


def test_key_numbers(plain):
    report, s = rating_report(plain), plain.rated
    assert value(report, "power ") == amount(s.power_W, "W")
    assert value(report, "voltage ") == amount(s.voltage_V, "V")
    assert value(report, "efficiency ") == percent(s.efficiency, 2)
    contact = percent(s.contact_resistance_ohm / s.internal_resistance_ohm)
    assert value(report, "joints ") == f"{amount(s.contact_resistance_ohm, 'ohm')} ({contact})"
    assert f"{percent(plain.ceiling.share_reached)} reached" in flat(report)
    assert celsius(plain.state("open circuit").T_hot_junction_K) in report
    assert "MET: all 12 limits and requirements hold." in report


def test_shares_of_the_ladder_add_up_to_all(ratings):
    for rating in ratings.values():
        lines = rating_report(rating).split("SINK, RATED\n")[1].split("\n\n")[0].splitlines()[2:]
        shares = [float(line.split()[-2]) for line in lines if line.endswith("%")]
        assert 99.5 < sum(shares) < 100.5  # each rounded to 0.1
        assert min(shares) >= 0


def test_fixed_heat_counts_no_fall_from_its_ambient(ratings):
    lines = rating_report(ratings["tiny"]).split("SINK, RATED\n")[1].splitlines()
    ambient, face = lines[2], lines[3]
    assert "source ambient" in ambient
    assert "hot face" in face
    assert ambient.split()[-1] == face.split()[-1] == "K"  # no drop and no share behind the temperature


def test_missed_limits_are_in_the_verdict(ratings):
    rating = ratings["heavy"]
    report = rating_report(rating)
    top = report.split("CEILING")[0]
    assert f"NOT MET: {len(rating.failed)} of {len(rating.checks)} limits" in top
    for check in rating.failed:
        assert check.name in flat(top)
    assert f"at least {amount(2000.0, 'W')}" in top
    assert amount(2000.0 - rating.rated.power_W, "W") in top


def test_short_circuit_is_zero_power_and_a_missing_one_is_told(plain):
    for rating in (
        plain,
        replace(plain, states=plain.states[:-1], notes=("short circuit: no steady state",)),
    ):
        report = rating_report(rating)
        assert ("Not found; see the notes." in report) == (rating is not plain)
        assert ("NOTES\n  short circuit: no steady state" in report) == (rating is not plain)
    row = next(line for line in sheet_markdown(plain).splitlines() if line.startswith("| power | "))
    assert row.split(" | ")[-1] == "0 W |"


def test_assumptions_carry_their_values(plain):
    report = rating_report(plain)
    assert "stack.electrode_thickness" in plain.assumptions
    assert value(report, "stack.electrode_thickness") == "0.3 mm"
    assert value(report, "stack.emittance_hot") == "0.8"
    for key in plain.assumptions:
        assert value(report, key)


def test_held_data_are_listed(ratings):
    rating = ratings["tiny"]
    assert rating.held
    section = rating_report(rating).split("DATA RANGE")[1].split("LEG MATERIAL")[0]
    worst = max(rating.held, key=lambda d: d.above_K)
    assert f"{worst.above_K:.1f} K" in section


def test_report_imports_neither_drawing_nor_tables():
    code = (
        "import sys, tegdesign.sheet.text, tegdesign.sheet.markdown, tegdesign.sheet; "
        "print([name for name in ('matplotlib', 'pandas') if name in sys.modules])"
    )
    root = str(Path(tegdesign.__file__).parent.parent)
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, env={"PYTHONPATH": root}
    )
    assert done.stdout == "[]\n", done.stderr


def test_markdown_is_what_it_says(rating):
    text = sheet_markdown(rating)
    assert text.startswith(f"# {escaped(rating.design.title)}\n")
    html = MarkdownIt("commonmark").enable("table").render(text)
    shown = flat(html.replace("&amp;", "&").replace("&lt;", "<").replace("&gt;", ">").replace("&quot;", '"'))
    assert f"<h1>{rating.design.title}</h1>" in shown  # no mark of the title acts
    for c in rating.cautions:
        assert f"{c.title} [{c.id}]</strong>" in shown
        assert flat(c.text) in shown
    assert amount(rating.rated.power_W, "W") in shown
    assert "no conformity with any standard is claimed" in shown
    for m in rating.materials:
        assert m.doi in shown
        assert m.composition in shown
    # every line of a table has as many cells as its head
    for block in text.split("\n\n"):
        if block.startswith("|"):
            assert len({line.replace("\\|", "").count("|") for line in block.splitlines()}) == 1


@pytest.mark.parametrize("title", ["a | b", "*bold* <b>x</b> `c`", "# head\nsecond"])
def test_titles_with_marks(plain, title):
    rating = replace(plain, design=plain.design.model_copy(update={"title": title}))
    first = sheet_markdown(rating).splitlines()[0]
    html = MarkdownIt("commonmark").render(first)
    assert "<strong>" not in html
    assert "<em>" not in html
    assert "<b>" not in html
    assert "<code>" not in html
    assert rating_report(rating).splitlines()[0] == f"{flat(title)}, revision B2"
