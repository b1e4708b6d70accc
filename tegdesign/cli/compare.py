"""``tegdesign compare``: rank pairs of materials for a brief."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from tegdesign.cli import output
from tegdesign.cli.progress import on_terminal


def compare(
    brief: Annotated[
        Path,
        typer.Argument(
            metavar="BRIEF.toml",
            help="The brief; materials not named mean all of the library.",
            show_default=False,
        ),
    ],
    top: Annotated[int, typer.Option(min=1, help="Pairs shown in the text table.")] = 20,
    figure: Annotated[
        Path | None, typer.Option(metavar="FILE", help="Draw the ranking: .png, .pdf or .svg.")
    ] = None,
    json: output.JsonOption = False,
    csv: output.CsvOption = False,
    to: output.OutputOption = None,
    quiet: Annotated[bool, typer.Option("--quiet", "-q", help="No progress.")] = False,
) -> None:
    """Rank every allowed n with every allowed p material, each pair at its own best geometry for the brief.

    Exit code 1: no pair meets the brief.

    \b
    Examples:
      tegdesign compare examples/pair-choice.toml --top 10
      tegdesign compare examples/pair-choice.toml --csv -o pairs.csv --figure pairs.png
    """
    from tegdesign.design.compare import compare as compare_pairs
    from tegdesign.sheet.comparison import comparison_report, draw_comparison
    from tegdesign.sheet.drawing import check_ending

    form = output.style(json, csv)
    if figure is not None:
        check_ending(figure)
    output.check_places(brief, figure, to)
    result = compare_pairs(brief, progress=on_terminal("comparing", quiet))
    if figure is not None:
        draw_comparison(result, figure)
    data = result.to_dict()
    if form == "json":
        output.emit(output.json_text(data), to)
    elif form == "csv":
        rows = data["pairs"]
        output.emit(output.csv_text(list(rows[0]) if rows else [], [list(r.values()) for r in rows]), to)
    else:
        output.emit(comparison_report(result, top), to)
    if not result.met:
        raise typer.Exit(1)
