"""How every command prints: text, CSV or JSON, on standard output or into a file written whole."""

from __future__ import annotations

import math
import os
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
        _print(text)
    else:
        from tegdesign.document import write_whole

        write_whole(output, text)


def _print(text: str) -> None:
    """Print data; characters that the screen does not know become question marks, a full disk one line."""
    import sys

    from tegdesign.errors import TegdesignError

    known = sys.stdout.encoding or "utf-8"
    try:
        sys.stdout.write(text.encode(known, "replace").decode(known))
        sys.stdout.flush()
    except BrokenPipeError:
        raise
    except OSError as error:
        raise TegdesignError(f"standard output cannot be written ({error.strerror})") from error


def check_places(read: Path, *places: Path | None) -> None:
    """Refuse files that could not be written, or would overwrite the input or each other, before the work begins."""
    from tegdesign.document import check_place
    from tegdesign.errors import InputError

    taken = {os.path.realpath(read): "the file that is read"}
    for place in places:
        if place is None or str(place) == "-":
            continue
        check_place(place)
        real = os.path.realpath(place)
        if real in taken and os.path.isfile(real) | (taken[real] != "the file that is read"):
            raise InputError(f"{place}: would overwrite {taken[real]}; give another name")
        taken[real] = f"another output, {place}"


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
