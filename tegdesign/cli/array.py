"""``tegdesign array``: modules of a design joined in strings at unequal temperatures."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from tegdesign.cli import lists, output


def array(
    design: Annotated[Path, typer.Argument(metavar="DESIGN.toml", help="The design.", show_default=False)],
    series: Annotated[int | None, typer.Option(metavar="S", help="Modules in a string.")] = None,
    parallel: Annotated[int | None, typer.Option(metavar="P", help="Strings side by side.")] = None,
    in_turn: Annotated[
        bool, typer.Option("--in-turn", help="Deal the modules to the strings in turn, not string after string.")
    ] = False,
    hot: Annotated[
        str | None,
        typer.Option(metavar="LIST", help='Source temperature of each module, or of all, "300 degC, 280 degC".'),
    ] = None,
    cold: Annotated[
        str | None, typer.Option(metavar="LIST", help="Sink temperature of each module, or of all.")
    ] = None,
    broken: Annotated[
        str | None, typer.Option(metavar="NUMBERS", help='Modules with an open joint, counted from 1: "3, 7".')
    ] = None,
    shorted: Annotated[str | None, typer.Option(metavar="NUMBERS", help="Shorted modules.")] = None,
    bypass: Annotated[
        str | None, typer.Option(metavar="DROP", help='Bypass diode across each module, "0.4 V".')
    ] = None,
    blocking: Annotated[str | None, typer.Option(metavar="DROP", help="Blocking diode in each string.")] = None,
    faults: Annotated[
        bool, typer.Option("--faults", help="What each single fault leaves: one open, shorted, cold.")
    ] = False,
    figure: Annotated[
        Path | None, typer.Option(metavar="FILE", help="Draw module by module: .png, .pdf or .svg.")
    ] = None,
    json: output.JsonOption = False,
    csv: output.CsvOption = False,
    to: output.OutputOption = None,
) -> None:
    """Join modules at unequal temperatures: operating point, mismatch, modules driven backwards, faults, connections.

    Exit code 1: a limit or requirement of the design is missed.

    \b
    Examples:
      tegdesign array kiln.toml --faults --figure kiln-array.png
      tegdesign array kiln.toml --series 4 --parallel 4 --broken 3 --bypass "0.4 V"
    """
    from tegdesign.design.array import array as rate_array
    from tegdesign.sheet.array import array_report, draw_array
    from tegdesign.sheet.drawing import check_ending

    form = output.style(json, csv)
    if figure is not None:
        check_ending(figure)
    output.check_places(design, figure, to)
    result = rate_array(
        design,
        series=series,
        parallel=parallel,
        in_turn=in_turn,
        hot=lists.temperatures("--hot", hot),
        cold=lists.temperatures("--cold", cold),
        broken=lists.counts("--broken", broken),
        shorted=lists.counts("--shorted", shorted),
        bypass_drop=None if bypass is None else lists.value("--bypass", bypass, "V"),
        blocking_drop=None if blocking is None else lists.value("--blocking", blocking, "V"),
        faults=faults,
    )
    if figure is not None:
        draw_array(result, figure)
    data = result.to_dict()
    if form == "json":
        output.emit(output.json_text(data), to)
    elif form == "csv":
        shown = data["faults"] or data["modules"]
        output.emit(output.csv_text(list(shown[0]), [list(row.values()) for row in shown]), to)
    else:
        output.emit(array_report(result), to)
    if not result.met:
        raise typer.Exit(1)
