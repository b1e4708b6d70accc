"""``tegdesign rate``: what a given design does, in its own state, in a table of states, as curve or as map."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from tegdesign.cli import lists, output
from tegdesign.errors import InputError

if TYPE_CHECKING:
    from tegdesign.design.scan import Sweep
    from tegdesign.system.load import AnyLoad


def rate(
    design: Annotated[Path, typer.Argument(metavar="DESIGN.toml", help="The design.", show_default=False)],
    hot: Annotated[
        str | None, typer.Option(metavar="LIST", help='Source temperatures, "200 degC, 250 degC".')
    ] = None,
    cold: Annotated[str | None, typer.Option(metavar="LIST", help="Sink temperatures.")] = None,
    load: Annotated[
        str | None,
        typer.Option(metavar="LIST", help='Loads: "matched", "efficiency" or resistances, "2 ohm, 4 ohm".'),
    ] = None,
    current: Annotated[str | None, typer.Option(metavar="LIST", help='Currents, "0 A, 1 A".')] = None,
    curve: Annotated[
        bool, typer.Option("--curve", help="V-I and P-I from open towards short circuit.")
    ] = False,
    ranges: Annotated[
        bool,
        typer.Option("--ranges", help="Power and voltage over what differs between the states: source, flow, film."),
    ] = False,
    over: Annotated[
        list[str] | None,
        typer.Option(
            "--map",
            metavar="KEY=LIST",
            help='Vary one or two keys of the design, "module.leg_length=1 mm, 2 mm".',
        ),
    ] = None,
    of: Annotated[str, typer.Option(metavar="QUANTITY", help="Quantity shown in a map.")] = "power_W",
    figure: Annotated[
        Path | None,
        typer.Option(
            metavar="FILE",
            help="Draw the curve, ranges or map, else the temperatures of all states: .png, .pdf or .svg.",
        ),
    ] = None,
    json: output.JsonOption = False,
    csv: output.CsvOption = False,
    to: output.OutputOption = None,
) -> None:
    """Rate a design: its report, or a table of states when temperatures, loads, a curve or a map are asked for.

    Exit code 1: a limit or requirement of the design is missed, or a state of the table passes a service limit.

    \b
    Examples:
      tegdesign rate plate.toml
      tegdesign rate plate.toml --figure ladders.png
      tegdesign rate plate.toml --hot "150 degC, 200 degC" --load "matched, 3 ohm"
      tegdesign rate plate.toml --curve --csv -o curve.csv
      tegdesign rate plate.toml --ranges --figure ranges.png
      tegdesign rate plate.toml --map "module.leg_length=1 mm, 2 mm, 3 mm" --of efficiency
    """
    form = output.style(json, csv)
    table = bool(hot or cold or load or current)
    if table + curve + ranges + bool(over) > 1:
        raise typer.BadParameter("give temperatures and loads, or --curve, or --ranges, or --map; one at a time")
    if figure is not None and table:
        raise typer.BadParameter("--figure goes with --curve, --ranges or --map, or with no temperatures and loads")
    output.check_places(design, figure, to)
    if ranges:
        _ranges(design, form, figure, to)
        return
    if not (table or curve or over):
        _report(design, form, figure, to)
        return
    from tegdesign.design.design import read_design
    from tegdesign.design.scan import curve as curve_of
    from tegdesign.design.scan import map_over, operating_table

    made = read_design(design)
    if curve:
        sweep = curve_of(made)
        picture = "curve"
    elif over:
        axes = [_axis(text) for text in over]
        if len(dict(axes)) < len(axes):
            raise InputError(f"--map names the key '{axes[-1][0]}' twice; give each key once with all its values")
        sweep = map_over(made, dict(axes))
        sweep.column(of)
        picture = "map"
    else:
        hots, colds = lists.temperatures("--hot", hot), lists.temperatures("--cold", cold)
        sweep = operating_table(made, hot=hots, cold=colds, loads=_loads(load, current))
        picture = ""
    if figure is not None:
        from tegdesign.sheet.sweep import draw_curve, draw_map

        (draw_curve(sweep, made, figure) if picture == "curve" else draw_map(sweep, made, of, figure))
    output.emit(_text(sweep, form, of if picture == "map" else ""), to)
    if not sweep.met:
        raise typer.Exit(1)


def _report(design: Path, form: output.Style, figure: Path | None, to: Path | None) -> None:
    from tegdesign.design.rate import rate as rate_design
    from tegdesign.sheet.text import rating_report

    rating = rate_design(design)
    if figure is not None:
        from tegdesign.sheet.ladders import draw_ladders

        draw_ladders(rating, figure)
    if form == "json":
        output.emit(output.json_text(rating.to_dict()), to)
    elif form == "csv":
        rows = [s.to_row() for s in rating.states]
        output.emit(output.csv_text(list(rows[0]), [list(r.values()) for r in rows]), to)
    else:
        output.emit(rating_report(rating), to)
    if not rating.met:
        raise typer.Exit(1)


def _ranges(design: Path, form: output.Style, figure: Path | None, to: Path | None) -> None:
    from tegdesign.design.ranges import ranges
    from tegdesign.design.rate import rate as rate_design
    from tegdesign.sheet.ranges import draw_ranges, ranges_table

    found = ranges(rate_design(design))
    if figure is not None:
        draw_ranges(found, figure)
    rows = found.rows()
    if form == "json":
        output.emit(output.json_text(found.to_dict()), to)
    elif form == "csv":
        output.emit(output.csv_text(list(rows[0]), [list(row.values()) for row in rows]), to)
    else:
        output.emit(ranges_table(found), to)
    if not found.rating.met:
        raise typer.Exit(1)


def _text(sweep: Sweep, form: output.Style, of: str) -> str:
    rows = sweep.rows()
    if form == "json":
        return output.json_text({"states": rows})
    if form == "csv":
        return output.csv_text(list(rows[0]), [list(r.values()) for r in rows])
    from tegdesign.sheet.sweep import sweep_table

    return sweep_table(sweep, of)


def _loads(load: str | None, current: str | None) -> list[AnyLoad]:
    from tegdesign.quantity import SI
    from tegdesign.system.load import BestEfficiency, GivenCurrent, Matched, Resistance

    found: list[AnyLoad] = []
    for part in lists.parts("--load", load):
        if part == "matched":
            found.append(Matched())
        elif part == "efficiency":
            found.append(BestEfficiency())
        else:
            value = lists.value("--load", part, "ohm", ", nor matched or efficiency")
            if value <= 0:
                raise InputError(f"--load: '{part}' must be above 0 ohm")
            found.append(Resistance(resistance=SI(value)))
    for part in lists.parts("--current", current):
        value = lists.value("--current", part, "A")
        if value < 0:
            raise InputError(f"--current: '{part}' must be 0 A or more")
        found.append(GivenCurrent(current=SI(value)))
    return found


def _axis(text: str) -> tuple[str, list[str | float]]:
    key, mark, values = text.partition("=")
    if not mark or not values.strip():
        raise InputError(f"--map: '{text}' is not KEY=LIST, like \"module.leg_length=1 mm, 2 mm\"")
    return key.strip(), [_number(part) for part in lists.parts("--map", values)]


def _number(text: str) -> str | float:
    """Return a bare number as one, so that counts and fractions can be varied."""
    try:
        value = float(text)
    except ValueError:
        return text
    return int(value) if value.is_integer() else value
