"""Laying out pages: folding, columns, tables."""

import pytest

from tegdesign.sheet.page import BOTTOM, HEIGHT, PAD, Pages, fold, printable, shorten, text_width
from tegdesign.sheet.section import Entry, Facts, facts, section, table, words


def texts(pages, page=-1):
    return [t.get_text() for t in pages.figures[page].texts]


@pytest.mark.parametrize("bold", [False, True])
def test_widths_are_those_of_the_drawn_text(bold):
    from matplotlib.backends.backend_agg import FigureCanvasAgg
    from matplotlib.figure import Figure

    figure = Figure(dpi=720)
    canvas = FigureCanvasAgg(figure)
    words_ = "Hot junction close to the service limit, 240.6 degC"
    drawn = figure.text(0, 0, words_, fontsize=10, fontweight="bold" if bold else "normal")
    extent = drawn.get_window_extent(canvas.get_renderer()).width * 72 / 720
    assert extent == pytest.approx(text_width(words_, 10, bold), rel=0.01, abs=0)


def test_folded_lines_fit_and_lose_nothing():
    text = "The cold face exceeds 48.0 degC " * 6 + "x" * 90 + " module.edge_margin_of_some_very_long_name"
    for width in (40.0, 97.3, 250.0):
        lines = fold(text, width, 7.5)
        assert all(text_width(line, 7.5) <= width for line in lines)
        assert "".join(lines).replace(" ", "") == text.replace(" ", "")
    assert fold("stack.electrode_temperature_coefficient", 100.0, 7.5) == [
        "stack.electrode_",
        "temperature_coefficient",
    ]
    assert fold("", 100.0, 7.5) == [""]


def test_characters_that_the_font_lacks_are_shown_as_question_marks():
    assert printable("kiln \u7a91 no. 7\n\u00b5 \u03a9") == "kiln ? no. 7 \u00b5 \u03a9"


def test_shorten():
    assert shorten("short", 100, 7) == "short"
    cut = shorten("a title that goes on and on", 60, 7)
    assert cut.endswith("...")
    assert text_width(cut, 7) <= 60


def test_columns_then_pages():
    pages = Pages(7.5)
    pages.new_page(columns=2)
    for k in range(400):
        pages.lines(f"line {k}")
    assert len(pages.figures) == 3
    assert sum(len(texts(pages, k)) for k in range(3)) == 400
    lowest = min(t.get_position()[1] for page in pages.figures for t in page.texts)
    assert lowest * HEIGHT >= BOTTOM


def test_a_heading_is_never_alone_at_the_foot():
    pages = Pages(7.5)
    pages.new_page()
    pages.y = HEIGHT - BOTTOM - 20
    pages.section(section("Title", words("text")))
    assert len(pages.figures) == 2
    assert texts(pages) == ["Title", "text"]


def test_wide_tables_keep_to_the_column():
    pages = Pages(7.5)
    pages.new_page(columns=2)
    rows = [
        (
            "bismuth-telluride-n-se0.3 of the first kind",
            "1.4 x 1.4 x 1.6 mm",
            "0.4014 cm3",
            "held by a long word",
        )
    ] * 2
    block = table(("material", "size", "volume", "a remark of some length"), rows, (0, 3))
    pages.block(block)
    right = pages.x + pages.width
    assert "1.4 x 1.4 x 1.6 mm" in texts(pages)  # numbers stay whole
    for t in pages.figures[0].texts:
        x = t.get_position()[0] * 595.28
        end = x if t.get_horizontalalignment() == "right" else x + text_width(t.get_text(), 7.5)
        assert end <= right + 0.01
    widths = pages._widths([block.heads, *block.rows], block.right)
    assert sum(widths) + 3 * PAD <= pages.width


def test_entries_and_facts():
    pages = Pages(7.5)
    pages.new_page()
    pages.block(Entry("1. Title", ("Value: 3.", "Text.")))
    pages.block(facts(("n leg", "1.4 mm")))
    assert texts(pages) == ["1. Title", "Value: 3.", "Text.", "n leg", "1.4 mm"]
    assert pages.figures[0].texts[0].get_fontweight() == "bold"
    assert isinstance(facts(("a", "b")), Facts)
