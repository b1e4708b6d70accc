"""The report on the terminal: plain text, at most 100 columns."""

from __future__ import annotations

import textwrap
from collections.abc import Sequence
from itertools import zip_longest

from tegdesign.design.rating import Rating
from tegdesign.sheet import description, legs, margin, performance, states
from tegdesign.sheet.section import Block, Entry, Facts, Section, Table, Words
from tegdesign.sheet.table import table_text

WIDTH = 100
INDENT = "  "


def rating_report(rating: Rating) -> str:
    """Return the report of a rating, in the order of an engineer's questions."""
    sections = (
        performance.verdict(rating),
        margin.break_even(rating),
        margin.windows(rating),
        performance.ceiling(rating),
        description.geometry(rating),
        performance.conditions(rating),
        states.section_of_states(rating),
        performance.rated(rating),
        performance.ladder(rating),
        performance.losses(rating),
        legs.conduction(rating),
        performance.optima(rating),
        performance.sanity(rating),
        performance.opened(rating),
        performance.shorted(rating),
        performance.data_range(rating),
        description.masses(rating),
        description.cautions(rating),
        description.assumptions(rating),
        description.notes(rating),
    )
    title = fold(f"{rating.design.title}, revision {rating.design.revision}", WIDTH)
    return "\n\n".join([title, *(section_text(section) for section in sections if section)]) + "\n"


def section_text(section: Section) -> str:
    """Return a section as text."""
    return "\n".join([section.title.upper(), *(block_text(block) for block in section.blocks)])


def block_text(block: Block) -> str:
    """Return words, facts or a table as text, indented."""
    if isinstance(block, Words):
        return "\n".join(fold(paragraph, WIDTH, INDENT) for paragraph in block.paragraphs)
    if isinstance(block, Entry):
        body = [fold(paragraph, WIDTH, INDENT * 3) for paragraph in block.paragraphs]
        return "\n".join([fold(block.title, WIDTH, INDENT, INDENT * 3), *body])
    if isinstance(block, Facts):
        room = min(38, max(len(name) for name, _ in block.pairs)) + 2
        return "\n".join(
            fold(value, WIDTH, f"{INDENT}{name:<{room}}", " " * (room + len(INDENT)))
            for name, value in block.pairs
        )
    return textwrap.indent(fitted(block, WIDTH - len(INDENT)), INDENT)


def fold(text: str, width: int, first: str = "", rest: str | None = None) -> str:
    """Return a text in lines of at most ``width`` characters."""
    indent = first if rest is None else rest
    return textwrap.fill(text, width, initial_indent=first, subsequent_indent=indent, break_on_hyphens=False)


def fitted(block: Table, width: int) -> str:
    """Return a table of at most ``width`` characters: heads of numbers are folded, then the widest columns of words."""
    lines = [block.heads, *block.rows]
    widths = [max(len(line[k]) for line in lines) for k in range(len(block.heads))]
    words = [k for k in range(len(widths)) if k not in block.right]
    if sum(widths) + 2 * (len(widths) - 1) > width:
        for k in block.right:
            heads = block.heads[k].split() or [""]
            widths[k] = max(len(cell) for cell in (*heads, *(row[k] for row in block.rows)))
    while sum(widths) + 2 * (len(widths) - 1) > width and max(widths[k] for k in words) > 10:
        widths[max(words, key=lambda k: widths[k])] -= 1
    rows = [row for line in block.rows for row in _folded(line, widths)]
    heads = [textwrap.fill(head, width) if head else "" for head, width in zip(block.heads, widths, strict=True)]
    return table_text(heads, rows, block.right)


def _folded(cells: Sequence[str], widths: Sequence[int]) -> list[list[str]]:
    pieces = [textwrap.wrap(cell, width) or [""] for cell, width in zip(cells, widths, strict=True)]
    return [list(row) for row in zip_longest(*pieces, fillvalue="")]
