"""Tables of text, lined up for reading."""

from __future__ import annotations

from collections.abc import Sequence


def table_text(columns: Sequence[str], rows: Sequence[Sequence[str]], right: Sequence[int] = ()) -> str:
    """Return a table lined up for reading; the columns numbered in ``right`` end at the right.

    The name of a column may have several lines.
    """
    names = [name.split("\n") for name in columns]
    height = max(len(lines) for lines in names)
    heads = list(zip(*([""] * (height - len(lines)) + lines for lines in names), strict=True))
    widths = [max(len(line[k]) for line in (*heads, *rows)) for k in range(len(columns))]
    lines = [*heads, ["-" * width for width in widths], *rows]
    return "\n".join("  ".join(_cells(line, widths, right)).rstrip() for line in lines)


def _cells(line: Sequence[str], widths: Sequence[int], right: Sequence[int]) -> list[str]:
    return [
        cell.rjust(width) if k in right else cell.ljust(width)
        for k, (cell, width) in enumerate(zip(line, widths, strict=True))
    ]
