"""Paper: pages of A4, text measured and folded by the font itself, columns that fill one after the other."""

from __future__ import annotations

import re
from collections.abc import Sequence
from functools import cache
from typing import TYPE_CHECKING, Any

from tegdesign.sheet.section import Block, Entry, Facts, Section, Table, Words

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

WIDTH, HEIGHT = 595.28, 841.89  # A4 [pt]
LEFT, RIGHT, TOP, BOTTOM = 42.0, 42.0, 40.0, 50.0
LEADING = 1.32
PAD = 7.0  # between columns of a table
MARKS = "./_,-"  # a long word may be split behind one of these
UNKNOWN = "?"  # stands for a character that the font does not have


@cache
def _font(bold: bool) -> Any:
    from matplotlib.font_manager import FontProperties, findfont, get_font

    return get_font(findfont(FontProperties(family="DejaVu Sans", weight="bold" if bold else "normal")))


@cache
def _advance(character: str, bold: bool) -> float:
    from matplotlib.ft2font import LoadFlags

    glyph = _font(bold).load_char(ord(character), flags=LoadFlags.NO_HINTING | LoadFlags.NO_SCALE)
    return float(glyph.horiAdvance) / float(_font(bold).units_per_EM)


def printable(text: str) -> str:
    """Return a text on one line, with a question mark for each character that the font lacks."""
    known = _font(False)
    return "".join(c if known.get_char_index(ord(c)) else UNKNOWN for c in " ".join(text.split()))


def text_width(text: str, size: float, bold: bool = False) -> float:
    """Return the width of a text [pt]."""
    return size * sum(_advance(c, bold) for c in text)


def fold(text: str, width: float, size: float, bold: bool = False) -> list[str]:
    """Return a text in lines of at most ``width`` [pt]; a wider word is split, best behind a mark."""
    lines: list[str] = []
    line = ""
    for word in printable(text).split(" "):
        longer = f"{line} {word}".strip()
        if text_width(longer, size, bold) <= width:
            line = longer
            continue
        if line:
            lines.append(line)
        while text_width(word, size, bold) > width:
            cut = _cut(word, width, size, bold)
            lines, word = [*lines, word[:cut]], word[cut:]
        line = word
    return [*lines, line]


def _pieces(text: str) -> list[str]:
    """Return the parts of a text between which a line may end."""
    return re.findall(rf"[^ {MARKS}]*[{MARKS}]+|[^ {MARKS}]+", text) or [""]


def _cut(word: str, width: float, size: float, bold: bool) -> int:
    """Return how many characters of a word fit, ending behind one of ``MARKS`` if there is any."""
    most = 1
    while most < len(word) and text_width(word[: most + 1], size, bold) <= width:
        most += 1
    return max((k for k in range(2, most + 1) if word[k - 1] in MARKS), default=most)


def shorten(text: str, width: float, size: float) -> str:
    """Return a text cut to ``width`` [pt] with an ellipsis; for footers, where the whole stands elsewhere."""
    text = printable(text)
    if text_width(text, size) <= width:
        return text
    while text and text_width(f"{text}...", size) > width:
        text = text[:-1]
    return f"{text.rstrip()}..."


class Pages:
    """Pages under construction; y runs down from the top edge [pt]."""

    def __init__(self, size: float) -> None:
        """Start without any page; ``size`` is the size of the text [pt]."""
        self.size = size
        self.figures: list[Figure] = []
        self.columns: list[tuple[float, float]] = []
        self.column = 0
        self.top = self.y = TOP

    def new_page(self, columns: int = 1) -> None:
        """Begin a page with so many columns."""
        from matplotlib.figure import Figure

        self.figures.append(Figure(figsize=(WIDTH / 72, HEIGHT / 72)))
        between = 18.0
        each = (WIDTH - LEFT - RIGHT - between * (columns - 1)) / columns
        self.columns = [(LEFT + k * (each + between), each) for k in range(columns)]
        self.column, self.top, self.y = 0, TOP, TOP

    @property
    def x(self) -> float:
        """Left edge of the column [pt]."""
        return self.columns[self.column][0]

    @property
    def width(self) -> float:
        """Width of the column [pt]."""
        return self.columns[self.column][1]

    @property
    def leading(self) -> float:
        """Distance of two lines [pt]."""
        return LEADING * self.size

    def need(self, height: float) -> None:
        """Go on to the next column or page if less than ``height`` [pt] is left here."""
        if self.y + height <= HEIGHT - BOTTOM or self.y == self.top:
            return
        if self.column + 1 < len(self.columns):
            self.column, self.y = self.column + 1, self.top
        else:
            self.new_page(len(self.columns))

    def put(
        self,
        x: float,
        y: float,
        text: str,
        size: float | None = None,
        bold: bool = False,
        align: str = "left",
    ) -> None:
        """Write one line whose top is at ``y`` [pt]."""
        size = size or self.size
        self.figures[-1].text(
            x / WIDTH,
            1 - (y + 0.95 * size) / HEIGHT,
            text,
            fontsize=size,
            fontfamily="DejaVu Sans",
            fontweight="bold" if bold else "normal",
            horizontalalignment=align,
            verticalalignment="baseline",
            parse_math=False,
        )

    def rule(self, x0: float, x1: float, y: float, width: float = 0.5) -> None:
        """Draw a line across at ``y`` [pt]."""
        from matplotlib.lines import Line2D

        height = 1 - y / HEIGHT
        self.figures[-1].add_artist(
            Line2D((x0 / WIDTH, x1 / WIDTH), (height, height), color="0.2", linewidth=width)
        )

    def axes(self, x: float, y: float, width: float, height: float) -> Axes:
        """Return axes in a box of the page [pt]."""
        return self.figures[-1].add_axes(
            (x / WIDTH, 1 - (y + height) / HEIGHT, width / WIDTH, height / HEIGHT)
        )

    def lines(self, text: str, size: float | None = None, bold: bool = False, indent: float = 0.0) -> None:
        """Write a paragraph."""
        size = size or self.size
        for line in fold(text, self.width - indent, size, bold):
            self.need(LEADING * size)
            self.put(self.x + indent, self.y, line, size, bold)
            self.y += LEADING * size

    def heading(self, text: str) -> None:
        """Write the title of a section, never alone at the foot of a column."""
        size = 1.15 * self.size
        self.need(LEADING * size + 4 * self.leading)
        self.lines(text, size, bold=True)
        self.rule(self.x, self.x + self.width, self.y)
        self.y += 0.3 * self.size

    def section(self, section: Section) -> None:
        """Write a section."""
        self.heading(section.title)
        for block in section.blocks:
            self.block(block)
            self.y += 0.35 * self.size
        self.y += 0.55 * self.size

    def block(self, block: Block) -> None:
        """Write words, an entry, facts or a table."""
        if isinstance(block, Words):
            for paragraph in block.paragraphs:
                self.lines(paragraph)
        elif isinstance(block, Entry):
            self.need(3 * self.leading)
            self.lines(block.title, bold=True)
            for paragraph in block.paragraphs:
                self.lines(paragraph)
        elif isinstance(block, Facts):
            names, values = (
                max(text_width(printable(pair[k]), self.size) for pair in block.pairs) for k in (0, 1)
            )
            names = min(names + 1e-6, max(0.45 * self.width, self.width - values - PAD))
            self.rows([list(pair) for pair in block.pairs], [names, self.width - names - PAD], ())
        else:
            self.table(block)

    def table(self, block: Table) -> None:
        """Write a table as wide as it must be; where that is too wide its widest columns are folded."""
        cells = [[printable(cell) for cell in row] for row in (block.heads, *block.rows)]
        widths = self._widths(cells, block.right)
        self.rows([cells[0]], widths, block.right, bold=True, keep=2)
        self.rule(self.x, self.x + sum(widths) + PAD * (len(widths) - 1), self.y, 0.3)
        self.y += 0.15 * self.size
        self.rows(cells[1:], widths, block.right)

    def _widths(self, cells: Sequence[Sequence[str]], right: Sequence[int]) -> list[float]:
        """Return widths of columns [pt]: whole cells, else folded between words, heads first, at last inside them."""

        def widest(k: int, split: bool) -> float:
            pieces = ((w, row is cells[0]) for row in cells for w in (_pieces(row[k]) if split else [row[k]]))
            return max(text_width(words, self.size, bold) for words, bold in pieces) + 1e-6

        columns = range(len(cells[0]))
        widths = [widest(k, split=False) for k in columns]
        heads = [max(text_width(w, self.size, True) for w in cells[0][k].split(" ")) + 1e-6 for k in columns]
        figures = [
            max(text_width(row[k], self.size) for row in cells[1:]) + 1e-6 if cells[1:] else 0.0
            for k in columns
        ]
        least = [max(heads[k], figures[k]) if k in right else widest(k, split=True) for k in columns]
        heads_folded = [least[k] if k in right else widths[k] for k in columns]
        for floor in (heads_folded, least, [3 * self.size] * len(widths)):
            while (over := sum(widths) + PAD * (len(widths) - 1) - self.width) > 0:
                loose = [k for k in columns if widths[k] > floor[k]]
                if not loose:
                    break
                k = max(loose, key=lambda k: widths[k] - floor[k])
                widths[k] = max(floor[k], widths[k] - min(over, 4.0) - 1e-6)
        return widths

    def rows(
        self,
        rows: Sequence[Sequence[str]],
        widths: Sequence[float],
        right: Sequence[int],
        bold: bool = False,
        keep: int = 0,
    ) -> None:
        """Write rows of cells, each folded in its column; ``keep`` more lines must fit below."""
        for row in rows:
            folded = [fold(cell, w, self.size, bold) for cell, w in zip(row, widths, strict=True)]
            height = max(len(lines) for lines in folded)
            if height < 40:
                self.need((height + keep) * self.leading)
            for k in range(height):
                self.need(self.leading)
                x = self.x
                for column, (lines, width) in enumerate(zip(folded, widths, strict=True)):
                    if k < len(lines) and lines[k]:
                        aside = column in right
                        self.put(
                            x + width * aside, self.y, lines[k], bold=bold, align="right" if aside else "left"
                        )
                    x += width + PAD
                self.y += self.leading
