"""The sheet as Markdown: the same sections as the pages, without drawings."""

from __future__ import annotations

import re
from collections.abc import Sequence

from tegdesign.design.rating import Rating
from tegdesign.sheet import description, legs, margin, performance, states
from tegdesign.sheet.section import Block, Entry, Facts, Section, Words


def sections(rating: Rating) -> list[Section]:
    """Return all sections of the sheet."""
    found = (
        description.identification(rating),
        performance.verdict(rating),
        performance.conditions(rating),
        states.section_of_states(rating),
        performance.nominal(rating),
        performance.limits(rating),
        margin.break_even(rating),
        margin.windows(rating),
        performance.ceiling(rating),
        description.geometry(rating),
        performance.ladder(rating),
        performance.losses(rating),
        legs.conduction(rating),
        performance.optima(rating),
        performance.sanity(rating),
        performance.opened(rating),
        performance.data_range(rating),
        description.masses(rating),
        description.materials(rating),
        description.cautions(rating),
        description.uncertainty(rating),
        description.assumptions(rating),
        description.notes(rating),
    )
    return [section for section in found if section]


def sheet_markdown(rating: Rating) -> str:
    """Return the sheet of a rating as Markdown."""
    parts = [f"# {plain(rating.design.title)}"]
    for section in sections(rating):
        parts += [f"## {plain(section.title)}", *(block_markdown(block) for block in section.blocks)]
    return "\n\n".join(parts) + "\n"


def block_markdown(block: Block) -> str:
    """Return words, facts or a table as Markdown."""
    if isinstance(block, Words):
        return "\n\n".join(plain(paragraph) for paragraph in block.paragraphs)
    if isinstance(block, Entry):
        return "\n\n".join(
            [f"**{plain(block.title)}**", *(plain(paragraph) for paragraph in block.paragraphs)]
        )
    if isinstance(block, Facts):
        return _table(("", ""), [(name, value) for name, value in block.pairs], ())
    return _table(block.heads, block.rows, block.right)


def _table(heads: Sequence[str], rows: Sequence[Sequence[str]], right: Sequence[int]) -> str:
    rule = ["---:" if k in right else "---" for k in range(len(heads))]
    lines = [heads, rule, *rows]
    return "\n".join(
        "| " + " | ".join(cell if line is rule else plain(cell) for cell in line) + " |" for line in lines
    )


def plain(text: str) -> str:
    """Return a text on one line in which no character acts as Markdown or HTML."""
    return re.sub(r"([\\`*_\[\]<>|#~])", r"\\\1", " ".join(text.split()))
