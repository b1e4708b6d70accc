"""What a sheet is made of, before it becomes text, Markdown or pages: sections of words, facts and tables."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass


@dataclass(frozen=True)
class Words:
    """Paragraphs."""

    paragraphs: tuple[str, ...]


@dataclass(frozen=True)
class Entry:
    """One of a list: its title and the paragraphs below it."""

    title: str
    paragraphs: tuple[str, ...]


@dataclass(frozen=True)
class Facts:
    """Names with their values."""

    pairs: tuple[tuple[str, str], ...]


@dataclass(frozen=True)
class Table:
    """Heads and rows; the columns numbered in ``right`` hold numbers."""

    heads: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    right: tuple[int, ...] = ()


Block = Words | Entry | Facts | Table


@dataclass(frozen=True)
class Section:
    """A title and what stands under it."""

    title: str
    blocks: tuple[Block, ...]


def section(title: str, *blocks: Block) -> Section:
    """Return a section."""
    return Section(title, blocks)


def words(*paragraphs: str) -> Words:
    """Return paragraphs."""
    return Words(tuple(paragraphs))


def facts(*pairs: tuple[str, str]) -> Facts:
    """Return names with their values."""
    return Facts(tuple(pairs))


def table(heads: Sequence[str], rows: Sequence[Sequence[str]], left: Sequence[int] = (0,)) -> Table:
    """Return a table; all columns but those numbered in ``left`` hold numbers."""
    right = tuple(k for k in range(len(heads)) if k not in left)
    return Table(tuple(heads), tuple(tuple(row) for row in rows), right)
