"""``tegdesign rows``: the module of a design in rows along its source stream."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from tegdesign.cli import output


def rows(
    design: Annotated[Path, typer.Argument(metavar="DESIGN.toml", help="The design.", show_default=False)],
    count: Annotated[
        int | None,
        typer.Option("--rows", metavar="N", help="Rows one after the other; as many as modules if not given."),
    ] = None,
    per_row: Annotated[
        int | None, typer.Option("--per-row", metavar="K", help="Modules side by side in a row.")
    ] = None,
    counter: Annotated[
        bool, typer.Option("--counter/--co", help="Coolant stream against the source, or along it.")
    ] = False,
    one_current: Annotated[
        bool, typer.Option("--one-current", help="One current through all rows, not a load for each.")
    ] = False,
    most: Annotated[
        int | None, typer.Option("--most", metavar="M", help="Look at the growth of power up to M rows.")
    ] = None,
    figure: Annotated[
        Path | None,
        typer.Option(metavar="FILE", help="Draw temperatures, power and growth: .png, .pdf or .svg."),
    ] = None,
    json: output.JsonOption = False,
    csv: output.CsvOption = False,
    to: output.OutputOption = None,
) -> None:
    """Stand the module in rows along the source stream: what each row sees and gives, and what more rows would bring.

    Exit code 1: a limit or requirement of the design is missed in a row.

    \b
    Examples:
      tegdesign rows kiln.toml --counter
      tegdesign rows kiln.toml --rows 8 --per-row 2 --one-current --figure kiln-rows.png
    """
    from tegdesign.design.rows import rows as rate_rows
    from tegdesign.sheet.drawing import check_ending
    from tegdesign.sheet.rows import draw_rows, rows_report

    form = output.style(json, csv)
    if figure is not None:
        check_ending(figure)
    output.check_places(design, figure, to)
    result = rate_rows(
        design, rows=count, modules_per_row=per_row, counter_current=counter, one_current=one_current, most=most
    )
    if figure is not None:
        draw_rows(result, figure)
    data = result.to_dict()
    if form == "json":
        output.emit(output.json_text(data), to)
    elif form == "csv":
        output.emit(output.csv_text(list(data["rows"][0]), [list(row.values()) for row in data["rows"]]), to)
    else:
        output.emit(rows_report(result), to)
    if not result.met:
        raise typer.Exit(1)
