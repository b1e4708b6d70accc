"""The sheet as a file: pages, contents, the same bytes each time."""

import io
import os
import re
import subprocess
import sys
from dataclasses import replace
from pathlib import Path

import matplotlib as mpl
import pypdf
import pytest

import tegdesign
from tegdesign.design.wording import amount, percent
from tegdesign.errors import ConvergenceError, InputError
from tegdesign.sheet import check_suffix, pdf, write_sheet
from tegdesign.sheet.markdown import sheet_markdown
from tegdesign.sheet.page import BOTTOM, HEIGHT, LEFT, RIGHT, TOP, WIDTH


class Files(dict):
    """The sheets of the cases, each made when it is first asked for."""

    def __init__(self, ratings):
        super().__init__()
        self.ratings = ratings

    def __missing__(self, name):
        self[name] = pdf.sheet_pdf(self.ratings[name])
        return self[name]


@pytest.fixture(scope="module")
def files(ratings):
    return Files(ratings)


@pytest.fixture(scope="module")
def sheets(files):
    return lambda name: pypdf.PdfReader(io.BytesIO(files[name]))


def words(reader):
    """Return the text without blanks: the folds of lines do not matter."""
    return squeezed("\n".join(page.extract_text() for page in reader.pages))


def squeezed(text):
    return "".join(text.split())


@pytest.mark.parametrize("name", ["plain", "heavy", "tiny", "states"])
def test_pages_of_a4(sheets, name):
    pages = sheets(name).pages
    assert 3 <= len(pages) <= 5 + 2 * (name == "states")
    for page in pages:
        # ISO 216: 210 mm x 297 mm
        assert float(page.mediabox.width) == pytest.approx(210 / 25.4 * 72, abs=0.1)
        assert float(page.mediabox.height) == pytest.approx(297 / 25.4 * 72, abs=0.1)


@pytest.mark.parametrize("name", ["plain", "heavy", "tiny", "states"])
def test_everything_is_on_it(ratings, sheets, name):
    rating, reader = ratings[name], sheets(name)
    foot = re.escape(squeezed(rating.design.title)[:20]) + r".{0,120}?;noconformitywithanystandardisclaimedpage\d/\d"
    text = re.sub(foot, "", words(reader))  # a caution may run on over a page
    s = rating.rated
    expected = [
        rating.design.title,
        f"tegdesign {tegdesign.__version__}",
        amount(s.power_W, "W"),
        amount(s.voltage_V, "V"),
        amount(rating.state("open circuit").voltage_V, "V"),
        percent(s.efficiency, 2),
        rating.design.source.words(),
        rating.design.sink.words(),
        f"scale {'20' if name == 'tiny' else '2'} : 1",
        "27.2 % in power, 59.2 % in heat and 25.9 % in efficiency",
        "Alleno et al. 2015",
        *(f"{c.title} [{c.id}]" for c in rating.cautions),
        *(c.text for c in rating.cautions),
        *(f"{m.composition}" for m in rating.materials),
        *(m.source for m in rating.materials),
        *(m.doi for m in rating.materials),
        *(m.compilation for m in rating.materials),
        *rating.assumptions,
        *(mass.density_basis for mass in rating.masses),
        *(c.name for c in rating.checks),
        *(rung.place for rung in s.ladder),
    ]
    for item in expected:
        assert squeezed(item) in text, item
    verdict = "MET: all" if rating.met else "NOT MET:"
    assert squeezed(verdict) in words(reader)
    for k, page in enumerate(reader.pages, 1):
        foot = squeezed(page.extract_text())
        assert f"page{k}/{len(reader.pages)}" in foot
        assert squeezed("no conformity with any standard is claimed") in foot
        assert squeezed(f"revision {rating.design.revision[:12]}") in foot


def boxes(figure):
    """Return left, bottom, right, top [pt] and words of all texts of a page as they are drawn."""
    figure.set_dpi(288)
    figure.draw_without_rendering()
    texts = [*figure.texts]
    for axes in figure.axes:
        texts += [*axes.texts, axes.xaxis.label, axes.yaxis.label]
        if axes.axison:
            for along, axis in enumerate((axes.xaxis, axes.yaxis)):
                if not axis.get_visible():
                    continue
                low, high = sorted(axis.get_view_interval())  # ticks beyond are made but not drawn
                texts += [t for t in axis.get_ticklabels() if low <= t.get_position()[along] <= high]
        if axes.get_legend():
            texts += axes.get_legend().get_texts()
    found = []
    for text in texts:
        if text.get_text():
            box = text.get_window_extent()
            found.append((box.x0 / 4, box.y0 / 4, box.x1 / 4, box.y1 / 4, text.get_text()))
    return sorted(found)


@pytest.mark.parametrize("name", ["plain", "heavy", "tiny", "states"])
def test_no_text_is_cut_off_or_over_another(ratings, name):
    with mpl.rc_context({**pdf.STYLE, "text.hinting": "none"}):
        for figure in pdf.sheet_pages(ratings[name]):
            placed = boxes(figure)
            assert len(placed) > 20
            for k, (left, bottom, right, top, words_) in enumerate(placed):
                assert left >= LEFT - 0.5, words_
                assert right <= WIDTH - RIGHT + 0.5, words_
                assert bottom >= BOTTOM - 1 or (bottom >= 20 and top <= BOTTOM - 8), words_  # or the footer
                assert top <= HEIGHT - TOP + 1, words_
                trim = 0.15 * (top - bottom)  # the box of a line is higher than its letters
                for other_left, other_bottom, _, other_top, other in placed[k + 1 :]:
                    if other_left >= right - 0.5:
                        break
                    shared = min(top - trim, other_top) - max(bottom + trim, other_bottom)
                    assert shared < 0.15 * (other_top - other_bottom) + 0.5, (words_, other)


def test_metadata_and_no_time(sheets, ratings):
    reader = sheets("plain")
    assert reader.metadata.title == ratings["plain"].design.title
    assert reader.metadata.creator == f"tegdesign {tegdesign.__version__}"
    assert "/CreationDate" not in reader.metadata


def test_same_bytes_in_another_process_with_other_settings(tmp_path, plain, files):
    plain.design.save(tmp_path / "d.toml")
    (tmp_path / "matplotlibrc").write_text("axes.grid: True\nfont.size: 30\nlines.linewidth: 9\n")
    code = (
        "import sys; from tegdesign.design.rate import rate; from tegdesign.sheet import write_sheet; "
        "write_sheet(rate('d.toml'), 'd.pdf')"
    )
    root = str(Path(tegdesign.__file__).parent.parent)
    done = subprocess.run(
        [sys.executable, "-c", code],
        capture_output=True,
        text=True,
        cwd=tmp_path,  # holds the settings
        env={**os.environ, "PYTHONPATH": root, "PYTHONHASHSEED": "7"},
    )
    assert done.returncode == 0, done.stderr
    assert (tmp_path / "d.pdf").read_bytes() == files["plain"]


def test_a_curve_that_is_not_found_is_told(plain, monkeypatch):
    def fail(design):
        raise ConvergenceError("matched load at 380 K: no operating point found")

    monkeypatch.setattr(pdf, "against_hot", fail)
    shown = " ".join(text.get_text() for page in pdf.sheet_pages(plain) for text in page.texts)
    assert "Not found: matched load at 380 K: no operating point found" in shown


def test_characters_of_other_scripts(plain):
    title = "\u7a91\u7089 wall \u00b5-generator"
    rating = replace(plain, design=plain.design.model_copy(update={"title": title}))
    assert pdf.sheet_pages(rating)[0].texts[0].get_text() == "?? wall \u00b5-generator"
    assert sheet_markdown(rating).startswith(f"# {title}")


def test_write_sheet_chooses_by_suffix(tmp_path, plain, files, monkeypatch):
    made = files["plain"]
    monkeypatch.setattr(pdf, "sheet_pdf", lambda rating: made)
    write_sheet(plain, tmp_path / "a.PDF")
    write_sheet(plain, tmp_path / "a.md")
    assert (tmp_path / "a.PDF").read_bytes() == files["plain"]
    assert (tmp_path / "a.md").read_text() == sheet_markdown(plain)
    assert sorted(p.name for p in tmp_path.iterdir()) == ["a.PDF", "a.md"]
    for wrong in ("a.docx", "a"):
        with pytest.raises(InputError, match=r"a sheet ends in \.pdf or \.md"):
            write_sheet(plain, tmp_path / wrong)
    assert check_suffix("x.md") == ".md"
    with pytest.raises(InputError, match="cannot be written"):
        write_sheet(plain, tmp_path / "none" / "a.pdf")
