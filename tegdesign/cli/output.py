"""How every command prints: text, CSV or JSON, on standard output or into a file written whole."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Annotated, Any, Literal

import typer

from tegdesign.sheet.table import table_text

JsonOption = Annotated[bool, typer.Option("--json", help="Print JSON; keys carry the SI unit.")]
CsvOption = Annotated[bool, typer.Option("--csv", help="Print CSV; columns carry the SI unit.")]
OutputOption = Annotated[
    Path | None,
    typer.Option(
        "--output", "-o", metavar="FILE", help="Write to FILE, whole or not at all; - is the screen."
    ),
]
Style = Literal["text", "csv", "json"]

__all__ = [
    "CsvOption",
    "JsonOption",
    "OutputOption",
    "check_places",
    "csv_text",
    "emit",
    "json_text",
    "note",
    "style",
    "table_text",
]


def style(json: bool, csv: bool) -> Style:
    """Return the wanted style; ``--json`` and ``--csv`` together are refused."""
    if json and csv:
        raise typer.BadParameter("give --json or --csv, not both")
    return "json" if json else "csv" if csv else "text"


def emit(text: str, output: Path | None = None) -> None:
    """Print a text on standard output, or write it into a file in one piece."""
    text = text if text.endswith("\n") or not text else text + "\n"
    if output is None or str(output) == "-":
        typer.echo(text, nl=False)
    else:
        from tegdesign.document import write_whole

        write_whole(output, text)


def check_places(*places: Path | None) -> None:
    """Refuse files that could not be written before the work for them begins, so that none is written alone."""
    from tegdesign.document import check_place

    for place in places:
        if place is not None and str(place) != "-":
            check_place(place)


def note(text: str) -> None:
    """Say something that is no data, on standard error."""
    typer.echo(text, err=True)


def json_text(data: Any) -> str:
    """Return JSON of plain data, arrays and paths; a value that is not finite becomes null."""
    import json

    return json.dumps(_plain(data), indent=2, ensure_ascii=False, allow_nan=False)


def _plain(data: Any) -> Any:
    if isinstance(data, Mapping):
        return {str(key): _plain(value) for key, value in data.items()}
    if hasattr(data, "tolist"):
        return _plain(data.tolist())
    if isinstance(data, (list, tuple)):
        return [_plain(value) for value in data]
    if isinstance(data, float) and not math.isfinite(data):
        return None
    return str(data) if isinstance(data, Path) else data


def csv_text(columns: Sequence[str], rows: Sequence[Sequence[Any]]) -> str:
    """Return CSV with a header; numbers keep all digits, None and nan become blank cells."""
    import csv
    import io

    stream = io.StringIO()
    writer = csv.writer(stream, lineterminator="\n")
    writer.writerow(columns)
    for row in rows:
        cells = [cell.item() if hasattr(cell, "item") else cell for cell in row]
        writer.writerow(["" if cell is None or cell != cell else cell for cell in cells])
    return stream.getvalue()
