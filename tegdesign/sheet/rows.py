"""Report and drawing of rows along a stream."""

from __future__ import annotations

import os
from typing import TYPE_CHECKING, Any

from tegdesign.design.along import SHARE, RowGrowth
from tegdesign.design.rows import Row, RowsRating
from tegdesign.design.wording import ZERO_CELSIUS, amount, both, celsius, number, percent
from tegdesign.sheet import description, performance
from tegdesign.sheet.drawing import check_ending, plain, save_drawing
from tegdesign.sheet.figures import GRID
from tegdesign.sheet.section import Section, facts, section, table, words
from tegdesign.sheet.text import fold, section_text

if TYPE_CHECKING:
    from matplotlib.axes import Axes

HEADS = ("row", "source in", "out", "hot j", "open", "cold j", "sink in", "out", "heat [W]", "P [W]", "I [A]", "V [V]")
SHOWN = 8


def rows_report(result: RowsRating) -> str:
    """Return the report of rows: verdict, totals, each row, growth, cautions, notes."""
    told: Any = result  # these sections ask for checks, cautions and notes only
    sections = (
        performance.verdict(told),
        _totals(result),
        _each(result),
        _growth(result),
        description.cautions(told),
        description.notes(told),
    )
    title = fold(f"{result.design.title}, revision {result.design.revision}", 100)
    return "\n\n".join([title, *(section_text(part) for part in sections if part)]) + "\n"


def _totals(r: RowsRating) -> Section:
    each = "1 module each" if r.modules_per_row == 1 else f"{r.modules_per_row} modules side by side in each"
    pairs = [
        ("rows", f"{len(r.rows)} along the source, {each}"),
        ("coolant", _coolant(r)),
        ("load", f"{r.design.load.words()}, {'one current through all rows' if r.one_current else 'each row its own'}"),
        ("power", f"{amount(r.power_W, 'W')}; {amount(r.power_as_one_plate_W, 'W')} if all modules shared one plate"),
    ]
    if r.voltage_V is not None and r.current_A is not None:
        joined = f"{r.parallel} x {r.series} in series"
        pairs.append(("voltage and current", f"{amount(r.voltage_V, 'V')}, {amount(r.current_A, 'A')} ({joined})"))
    pairs += [
        ("heat drawn, rejected", f"{amount(r.heat_in_W, 'W')}, {amount(r.heat_out_W, 'W')}"),
        ("efficiency", percent(r.efficiency, 2)),
        ("source outlet", both(r.T_source_outlet_K)),
        ("sink outlet", "-" if r.T_sink_outlet_K is None else both(r.T_sink_outlet_K)),
    ]
    return section("All rows", facts(*pairs))


def _coolant(r: RowsRating) -> str:
    if r.T_sink_outlet_K is None:
        return f"no stream: {r.design.sink.words()}"
    return "counter-current, in at the last row" if r.counter_current else "co-current, in at the first row"


def _each(r: RowsRating) -> Section:
    rows = [
        (
            f"{row.row}{'' if row.exact else ' ~'}",
            *(_degrees(t) for t in (row.T_source_before_K, row.T_source_after_K, row.T_hot_junction_K)),
            *(_degrees(t) for t in (row.T_hot_junction_open_K, row.T_cold_junction_K)),
            *(_degrees(t) for t in (row.T_sink_before_K, row.T_sink_after_K)),
            *(number(v) for v in (row.heat_in_W, row.power_W, row.module_current_A, row.module_voltage_V)),
        )
        for row in r.rows
    ]
    note = "degC; open: hot junction at open circuit of all rows. Heat and P of the row, I and V of a module."
    return section("Row by row", words(note), table(HEADS, rows, ()))


def _degrees(temperature: float | None) -> str:
    return "-" if temperature is None else celsius(temperature).removesuffix(" degC")


def _growth(r: RowsRating) -> Section:
    share = percent(r.next_row_adds_W / r.power_W if r.power_W > 0 else None, 2)
    gain = f"Row {len(r.rows) + 1} would add {amount(r.next_row_adds_W, 'W')} ({share})."
    g = r.growth
    if g is None:
        return section("More rows", words(gain))
    if g.rows_for_90_percent is None:
        enough = f"{g.rows[-1]} rows do not reach {percent(SHARE, 0)} of it; look at more."
    else:
        area = number(g.area_for_90_percent_m2 or 0)
        enough = f"{percent(SHARE, 0)} of it takes {g.rows_for_90_percent} rows, {area} m2 of plates."
    kind = "One string can never give more" if r.one_current else "Any number of rows can never give more"
    said = words(
        f"{gain} {kind} than {amount(g.limit_W, 'W')}, each row with its own share of the exchangers. {enough}"
    )
    step = max(1, len(g.rows) // SHOWN)
    rows = [
        (str(g.rows[k]), number(g.area_m2[k]), number(g.power_W[k]), percent(g.power_W[k] / g.limit_W))
        for k in range(step - 1, len(g.rows), step)
    ]
    return section("More rows", said, table(("rows", "area [m2]", "P [W]", "of the limit"), rows, ()))


def draw_rows(result: RowsRating, path: str | os.PathLike[str]) -> None:
    """Draw temperatures and power row by row, and beside them the power of more rows, into a file."""
    from matplotlib.figure import Figure

    check_ending(path)
    drawing = Figure(figsize=(9.6, 5.2), layout="constrained")
    places = drawing.subplot_mosaic([["temperature", "growth"], ["power", "growth"]], width_ratios=[3, 2])
    _draw_temperatures(result.rows, result.counter_current, places["temperature"])
    power = places["power"]
    power.bar(
        [row.row for row in result.rows],
        [row.power_W for row in result.rows],
        color="0.6",
        edgecolor="black",
        linewidth=0.6,
    )
    power.axhline(0, color="black", linewidth=0.6)
    power.set(xlabel="row along the source", ylabel="power of the row [W]")
    power.sharex(places["temperature"])
    _draw_growth(result, places["growth"])
    for axes in places.values():
        axes.grid(**GRID)
        axes.set_axisbelow(True)
    drawing.suptitle(plain(result.design.title), fontsize=10)
    save_drawing(drawing, path)


def _draw_temperatures(rows: tuple[Row, ...], against: bool, axes: Axes) -> None:
    from matplotlib.ticker import MaxNLocator

    place = [row.row for row in rows]
    _draw_stream([(row.T_source_before_K, row.T_source_after_K) for row in rows], "-", "source", axes)
    for name, mark, face, label in (
        ("T_hot_junction_open_K", "^", "white", "hot junction, open"),
        ("T_hot_junction_K", "o", "black", "hot junction"),
        ("T_cold_junction_K", "s", "white", "cold junction"),
    ):
        values = [getattr(row, name) - ZERO_CELSIUS for row in rows]
        axes.plot(place, values, mark, color="black", markerfacecolor=face, markersize=4, label=label)
    sink = [(row.T_sink_before_K, row.T_sink_after_K) for row in rows if row.T_sink_before_K is not None]
    if sink:
        _draw_stream([ends[::-1] if against else ends for ends in sink], "--", "sink", axes)
    axes.set(ylabel="temperature [degC]", xlim=(0.4, len(rows) + 0.6))
    axes.xaxis.set_major_locator(MaxNLocator(integer=True))
    axes.legend(fontsize=7, ncols=5, loc="lower center", bbox_to_anchor=(0.5, 1.0), frameon=False)


def _draw_stream(ends: list[tuple[Any, Any]], style: str, label: str, axes: Axes) -> None:
    """Draw temperatures [K] at both edges of each row, from left to right."""
    x = [k + side for k in range(len(ends)) for side in (0.5, 1.5)]
    axes.plot(x, [t - ZERO_CELSIUS for pair in ends for t in pair], style, color="black", label=label)


def _draw_growth(r: RowsRating, axes: Axes) -> None:
    g: RowGrowth | None = r.growth
    axes.plot([len(r.rows)], [r.power_W], "o", color="black", markersize=6, label="these rows", zorder=3)
    if g is not None:
        axes.plot([0, *g.rows], [0.0, *g.power_W], "-", color="black", label="more rows")
        axes.axhline(g.limit_W, color="0.4", linestyle="--", linewidth=1.0, label="most that can be had")
        if g.rows_for_90_percent is not None:
            x, y = g.rows_for_90_percent, SHARE * g.limit_W
            label = f"{percent(SHARE, 0)}: {x} rows, {number(g.area_for_90_percent_m2 or 0, 3)} m2"
            axes.plot([x, x, 0], [0, y, y], ":", color="black", label=label)
    axes.set(xlabel="rows", ylabel="power [W]", xlim=(0, None), ylim=(0, None))
    axes.legend(fontsize=7, loc="lower right", framealpha=1.0)
