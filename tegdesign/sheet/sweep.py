"""Tables and drawings of sweeps: operating tables, V-I and P-I curves, maps over one or two keys."""

from __future__ import annotations

import os
from typing import TYPE_CHECKING

from tegdesign.design.design import Design
from tegdesign.design.scan import Sweep
from tegdesign.sheet.drawing import check_ending, plain, save_drawing
from tegdesign.sheet.table import table_text

if TYPE_CHECKING:
    from matplotlib.figure import Figure

COLUMNS = (
    ("load_resistance_ohm", "R_load [ohm]"),
    ("current_A", "I [A]"),
    ("voltage_V", "V [V]"),
    ("power_W", "P [W]"),
    ("efficiency", "efficiency [%]"),
    ("heat_in_W", "heat in [W]"),
    ("T_hot_junction_K", "T_hot_j [K]"),
    ("T_cold_junction_K", "T_cold_j [K]"),
)


def _text(value: float | None, name: str) -> str:
    if value is None:
        return "open"
    return f"{100 * value:.3f}" if name == "efficiency" else f"{value:.5g}"


def sweep_table(sweep: Sweep, of: str = "") -> str:
    """Return a sweep as text: one row a state, or for a map one number a cell when ``of`` names a quantity."""
    if of and len(sweep.x_name) == 2:
        return _cross_table(sweep, of)
    shown = [*COLUMNS] if not of or of in dict(COLUMNS) else [*COLUMNS, (of, of)]
    names = [
        f"{n.replace('_', ' ')} [{u}]" if u else n for n, u in zip(sweep.x_name, sweep.x_unit, strict=True)
    ]
    beside = zip(sweep.x, sweep.states, sweep.T_hot_junction_open_K, sweep.room_to_service_limit_K, strict=True)
    rows = [
        [*(f"{v:.6g}" for v in x), *(_text(getattr(state, key), key) for key, _ in shown), f"{hot:.1f}", f"{room:.1f}"]
        for x, state, hot, room in beside
    ]
    heads = [*names, *(label for _, label in shown), "T_hot_j open [K]", "room [K]"]
    text = table_text(heads, rows, range(len(heads)))
    return text + _held(sweep)


def _cross_table(sweep: Sweep, of: str) -> str:
    first = list(dict.fromkeys(x[0] for x in sweep.x))
    second = list(dict.fromkeys(x[1] for x in sweep.x))
    values = dict(zip(sweep.x, sweep.column(of), strict=True))
    rows = [[f"{a:.6g}", *(f"{values[a, b]:.5g}" for b in second)] for a in first]
    label = [f"{n} [{u}]" for n, u in zip(sweep.x_name, sweep.x_unit, strict=True)]
    head = f"{of}: rows {label[0]}, columns {label[1]}\n"
    return head + table_text(["", *(f"{b:.6g}" for b in second)], rows, range(len(second) + 1)) + _held(sweep)


def _held(sweep: Sweep) -> str:
    lines = [""]
    if max(sweep.outside_data_K) > 0:
        worst = max(sweep.outside_data_K)
        lines.append(f"note: end values of material data held by up to {worst:.1f} K outside the measured range")
    if not sweep.met:
        hot = sum(room < 0 for room in sweep.room_to_service_limit_K)
        lines.append(
            f"SERVICE LIMIT PASSED in {hot} of {len(sweep.states)} states, loaded or open, by up to "
            f"{-min(sweep.room_to_service_limit_K):.1f} K"
        )
    return "\n".join(lines) + "\n"


def draw_curve(sweep: Sweep, design: Design, path: str | os.PathLike[str]) -> None:
    """Draw voltage and power against current into a file."""
    from matplotlib.figure import Figure

    check_ending(path)
    drawing = Figure(figsize=(6.4, 4.4), layout="constrained")
    left = drawing.subplots()
    right = left.twinx()
    current = sweep.column("current_A")
    lines = left.plot(current, sweep.column("voltage_V"), "-", color="black", label="voltage")
    lines += right.plot(current, sweep.column("power_W"), "--", color="0.35", label="power")
    left.set(xlabel="current [A]", ylabel="voltage [V]", title=plain(design.title), xlim=(0, None), ylim=(0, None))
    right.set(ylabel="power [W]", ylim=(0, None))
    left.legend(lines, [str(line.get_label()) for line in lines], loc="lower center")
    left.grid(color="0.88", linewidth=0.6)
    save_drawing(drawing, path)


def draw_map(sweep: Sweep, design: Design, of: str, path: str | os.PathLike[str]) -> None:
    """Draw a quantity over one key as a line, over two as labelled contours on grey."""
    from matplotlib.figure import Figure

    check_ending(path)
    drawing: Figure = Figure(figsize=(6.4, 4.8), layout="constrained")
    axes = drawing.subplots()
    label = [f"{n.replace('_', ' ')} [{u or '1'}]" for n, u in zip(sweep.x_name, sweep.x_unit, strict=True)]
    values = sweep.column(of)
    first = list(dict.fromkeys(x[0] for x in sweep.x))
    if len(sweep.x_name) == 1:
        axes.plot(first, values, "o-", color="black", markersize=4)
        axes.set(xlabel=label[0], ylabel=of, title=plain(design.title))
        axes.grid(color="0.88", linewidth=0.6)
    else:
        second = list(dict.fromkeys(x[1] for x in sweep.x))
        if min(len(first), len(second)) < 2:
            from tegdesign.errors import InputError

            raise InputError("a map figure over two keys needs two or more values of each")
        import numpy as np

        grid = np.array(values).reshape(len(first), len(second))
        shade = axes.contourf(second, first, grid, levels=12, cmap="Greys")
        axes.clabel(axes.contour(second, first, grid, levels=6, colors="black", linewidths=0.8), fontsize=8)
        axes.set(xlabel=label[1], ylabel=label[0], title=plain(design.title))
        drawing.colorbar(shade, ax=axes, label=of)
    save_drawing(drawing, path)
