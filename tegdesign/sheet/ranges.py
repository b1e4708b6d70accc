"""Drawing and table of ranges: power and voltage over what differs between the states, with limits and the states."""

from __future__ import annotations

import os
import textwrap
from typing import TYPE_CHECKING, Any

from tegdesign.design.ranges import Range, Ranges, ranges
from tegdesign.design.rating import Rating
from tegdesign.design.wording import ZERO_CELSIUS
from tegdesign.sheet.drawing import check_ending, plain, save_drawing
from tegdesign.sheet.page import BOTTOM, HEIGHT, Pages
from tegdesign.sheet.table import table_text

if TYPE_CHECKING:
    from matplotlib.axes import Axes

GRID: dict[str, Any] = {"color": "0.88", "linewidth": 0.6}
FORBIDDEN: dict[str, Any] = {"facecolor": "0.86", "edgecolor": "none", "zorder": 0}
TOO_HOT: dict[str, Any] = {"facecolor": "none", "edgecolor": "0.6", "hatch": "////", "linewidth": 0.0, "zorder": 0.5}
WINDOW: dict[str, Any] = {"facecolor": "0.93", "edgecolor": "0.5", "linewidth": 0.6, "zorder": 0}
SHOWN = {"K": "degC", "kg/s": "g/s"}
EXPLAINED = (
    "Lines: the rated state with one quantity varied; marks: the states as they are, with all that differs in them. "
    "Grey: power too low. Hatched: a temperature limit is broken in the varied rated state, its open circuit included."
)


def _shown(each: Range, value: float) -> float:
    if each.unit == "K":
        return value - ZERO_CELSIUS
    return value * 1e3 if each.unit == "kg/s" else value


def ranges_table(found: Ranges) -> str:
    """Return every range as text, the states after the points."""
    parts = []
    for each in found.ranges:
        unit = SHOWN.get(each.unit, each.unit)
        heads = ["", f"{each.quantity} [{unit}]", "P [W]", "V [V]", "V open [V]", "T_hot_j [K]", "room [K]"]
        rows = [
            [name, f"{_shown(each, row.value):.5g}", f"{row.delivered_power_W:.5g}", f"{row.voltage_V:.5g}",
             f"{row.open_circuit_voltage_V:.5g}", f"{row.T_hot_junction_K:.1f}", f"{row.room_K:.1f}"]
            for name, row in [*(("", row) for row in each.rows), *each.states.items()]
        ]  # fmt: skip
        parts.append(table_text(heads, rows, range(1, len(heads))))
    return "\n\n".join(parts) + "\n"


def draw_range(found: Ranges, each: Range, power: Axes, voltage: Axes) -> None:
    """Draw one range on two axes that stand above each other; the states as numbers in their order."""
    require = found.rating.design.require
    x = [_shown(each, row.value) for row in each.rows]
    power.plot(x, [row.delivered_power_W for row in each.rows], "-", color="black", linewidth=1.1)
    voltage.plot(x, [row.voltage_V for row in each.rows], "-", color="black", linewidth=1.1)
    voltage.plot(x, [row.open_circuit_voltage_V for row in each.rows], "--", color="0.3", linewidth=1.0)
    numbers = [number for number, name in numbered(found).items() if name in each.states]
    states = [each.states[numbered(found)[number]] for number in numbers]
    at = [_shown(each, row.value) for row in states]
    opened = [row.open_circuit_voltage_V for row in states]
    voltage.plot(at, opened, "^", color="0.3", markerfacecolor="white", markersize=4)
    tops = {power: require.power or 0.0, voltage: require.open_circuit_voltage or max(require.voltage or (0.0,))}
    for axes, values in ((power, [s.delivered_power_W for s in states]), (voltage, [s.voltage_V for s in states])):
        axes.plot(at, values, "o", color="black", markerfacecolor="white", markersize=4.5, zorder=3, clip_on=False)
        axes.set(xlim=(min(x), max(x)), ylim=(0, 1.08 * max(axes.get_ylim()[1], tops[axes])))
        if len(states) > 1:
            _number(axes, numbers, at, values)
        axes.grid(**GRID)
        axes.tick_params(labelsize=7)
        for first, last in _broken(each, x):
            axes.axvspan(first, last, **TOO_HOT)
    if require.power is not None:
        power.axhspan(0, require.power, **FORBIDDEN)
        power.axhline(require.power, color="0.4", linewidth=0.8)
    if require.voltage is not None:
        voltage.axhspan(*require.voltage, **WINDOW)
    if require.open_circuit_voltage is not None:
        voltage.axhline(require.open_circuit_voltage, color="0.3", linestyle=":", linewidth=1.0)
    power.tick_params(labelbottom=False)
    power.set_ylabel("delivered power [W]", fontsize=7.5)
    voltage.set_ylabel("voltage [V]", fontsize=7.5)
    voltage.set_xlabel(f"{each.quantity} [{SHOWN.get(each.unit, each.unit)}]", fontsize=7.5)


def numbered(found: Ranges) -> dict[int, str]:
    """Return the loaded states by their numbers in the drawing."""
    return dict(enumerate((c.name for c in found.rating.loaded), 1))


def _number(axes: Axes, numbers: list[int], x: list[float], y: list[float]) -> None:
    """Write the numbers beside the marks; where marks stand above each other, in one line from the uppermost down."""
    (low, high), height = axes.get_xlim(), axes.get_ylim()[1]
    near: list[list[int]] = []
    for k in sorted(range(len(x)), key=lambda k: (x[k], y[k])):
        before = near[-1][-1] if near else None
        if before is not None and abs(x[k] - x[before]) < 0.03 * (high - low) and y[k] - y[before] < 0.06 * height:
            near[-1].append(k)
        else:
            near.append([k])
    for marks in near:
        at = sum(x[k] for k in marks) / len(marks)
        aside = -1 if at > low + 0.8 * (high - low) else 1
        axes.annotate(
            ", ".join(str(numbers[k]) for k in reversed(marks)),
            (at + 0.018 * aside * (high - low), max(sum(y[k] for k in marks) / len(marks), 0.03 * height)),
            fontsize=6.5, va="center", ha="left" if aside > 0 else "right", zorder=4,
            bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.8, "alpha": 0.75},
        )  # fmt: skip


def _broken(each: Range, x: list[float]) -> list[tuple[float, float]]:
    """Return the stretches in which a temperature limit is broken, from and to where the room is none."""
    spans: list[tuple[float, float]] = []
    for k in range(len(x) - 1):
        a, b = each.rows[k].room_K, each.rows[k + 1].room_K
        if min(a, b) >= 0:
            continue
        cross = x[k] + (x[k + 1] - x[k]) * a / (a - b) if (a < 0) != (b < 0) else None
        first, last = (x[k] if a < 0 or cross is None else cross), (x[k + 1] if b < 0 or cross is None else cross)
        if spans and spans[-1][1] == first:
            spans[-1] = spans[-1][0], last
        else:
            spans.append((first, last))
    return spans


def key(found: Ranges) -> str:
    """Return the numbers of the states with their names; nothing where there is but one."""
    names = numbered(found)
    return ", ".join(f"{number} {name}" for number, name in names.items()) if len(names) > 1 else ""


def explained(found: Ranges) -> list[Any]:
    """Return the handles of a legend: what is drawn and no more."""
    from matplotlib.lines import Line2D
    from matplotlib.patches import Patch

    require, mark = found.rating.design.require, {"color": "0.3", "markerfacecolor": "white"}
    handles: list[Any] = [
        Line2D([], [], color="black", marker="o", markersize=4.5, markerfacecolor="white", label="in use"),
        Line2D([], [], linestyle="--", marker="^", markersize=4, label="open circuit", **mark),  # type: ignore[arg-type]
    ]
    if require.power is not None:
        handles.append(Patch(facecolor="0.86", label="less than the required power"))
    if require.voltage is not None:
        handles.append(Patch(**{**WINDOW, "label": "voltage window"}))
    if require.open_circuit_voltage is not None:
        handles.append(Line2D([], [], color="0.3", linestyle=":", label="most open-circuit voltage"))
    if any(row.room_K < 0 for each in found.ranges for row in each.rows):
        handles.append(Patch(**{**TOO_HOT, "label": "temperature limit broken"}))
    return handles


def on_pages(pages: Pages, rating: Rating) -> None:
    """Write a page with every range below the other: power above voltage."""
    found = ranges(rating)
    pages.new_page()
    pages.heading("Power and voltage over what differs between the states")
    pages.lines(EXPLAINED)
    pages.lines(key(found))
    room = (HEIGHT - BOTTOM - 40 - pages.y) / len(found.ranges)
    height = min(120.0, (room - 60) / 2)
    first = pages.y + 34
    for k, each in enumerate(found.ranges):
        y = first + k * min(room, 2 * height + 60)
        spots = [(pages.x + 40, top, pages.width - 60, height) for top in (y, y + height + 8)]
        above, below = (pages.axes(*spot) for spot in spots)
        draw_range(found, each, above, below)
        if k == 0:
            above.legend(handles=explained(found), loc="lower center", bbox_to_anchor=(0.5, 1.0), ncol=6, fontsize=6.5,
                         frameon=False, columnspacing=1.2, handletextpad=0.5)  # fmt: skip
    pages.y = HEIGHT - BOTTOM


def draw_ranges(found: Ranges, path: str | os.PathLike[str]) -> None:
    """Draw every range into a file, one column each: power above voltage."""
    from matplotlib.figure import Figure

    check_ending(path)
    count = len(found.ranges)
    drawing = Figure(figsize=(1.6 + 3.6 * count, 5.8), layout="constrained")
    panels = drawing.subplots(2, count, squeeze=False, sharex="col")
    for k, each in enumerate(found.ranges):
        draw_range(found, each, panels[0, k], panels[1, k])
    lines = textwrap.wrap(found.rating.design.title, 45 * count) + textwrap.wrap(key(found), 70 * count)
    drawing.suptitle("\n".join(plain(line) for line in lines), fontsize=8)
    drawing.legend(handles=explained(found), loc="outside lower center", ncol=3, fontsize=7, frameon=False)
    save_drawing(drawing, path)
