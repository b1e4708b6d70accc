"""Graphs of the sheet: each a function of data and axes, readable in grey, axes with units."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from tegdesign.design.rating import State
from tegdesign.design.scan import Sweep
from tegdesign.design.wording import ZERO_CELSIUS, kelvin

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.lines import Line2D

GRID: dict[str, Any] = {"color": "0.88", "linewidth": 0.6}


def voltage_current(sweep: Sweep, rated: State, axes: Axes) -> None:
    """Draw voltage and power against current, with the rated point."""
    current = sweep.column("current_A")
    beside = axes.twinx()
    lines = axes.plot(current, sweep.column("voltage_V"), "-", color="black", label="voltage")
    lines += beside.plot(current, sweep.column("power_W"), "--", color="0.3", label="power")
    lines += axes.plot(
        [rated.current_A], [rated.voltage_V], "o", color="black", markersize=5, label="rated voltage"
    )
    lines += beside.plot(
        [rated.current_A],
        [rated.power_W],
        "s",
        color="black",
        markerfacecolor="white",
        markersize=5,
        label="rated power",
    )
    _frame(axes, beside, lines)
    axes.set(xlabel="current [A]", ylabel="voltage [V]", xlim=(0, None), ylim=(0, None))
    beside.set(ylabel="power [W]", ylim=(0, None))


def against_hot(sweep: Sweep, axes: Axes) -> None:
    """Draw power and efficiency at matched load against the temperature or the heat of the source."""
    if sweep.x_unit == ("K",):
        x, label = [v[0] - ZERO_CELSIUS for v in sweep.x], "source temperature [degC]"
    else:
        x, label = [v[0] for v in sweep.x], f"{sweep.x_name[0].replace('_', ' ')} [{sweep.x_unit[0]}]"
    power = sweep.column("power_W")
    efficiency = [100 * v for v in sweep.column("efficiency")]
    beside = axes.twinx()
    lines = axes.plot(x, power, "o-", color="black", markersize=4, label="power")
    lines += beside.plot(
        x, efficiency, "s--", color="0.3", markerfacecolor="white", markersize=4, label="efficiency"
    )
    held = [k for k, outside in enumerate(sweep.outside_data_K) if outside > 0]
    if held:
        lines += axes.plot(
            [x[k] for k in held],
            [power[k] for k in held],
            "x",
            color="black",
            markersize=9,
            label="data held",
        )
    _frame(axes, beside, lines)
    axes.set(xlabel=label, ylabel="power [W]", ylim=(0, None))
    beside.set(ylabel="efficiency [%]", ylim=(0, None))


def ladder(state: State, axes: Axes) -> None:
    """Draw the temperatures from the source to the sink, place by place, with each drop."""
    rungs = state.ladder
    temperature = [rung.T_K - ZERO_CELSIUS for rung in rungs]
    level = list(range(len(rungs)))
    axes.plot(temperature, level, "o-", color="black", markersize=3.5, linewidth=1.0)
    axes.set_yticks(level, [rung.place for rung in rungs])
    axes.set_ylim(len(rungs) - 0.5, -0.5)
    axes.set(xlabel="temperature [degC]")
    beside = axes.get_yaxis_transform()
    style: dict[str, Any] = {"transform": beside, "fontsize": 7, "va": "center", "ha": "right"}
    axes.text(1.10, -1, "[degC]", **style)
    axes.text(1.20, -1, "drop [K]", **style)
    top = temperature.index(max(temperature))  # the ambient of a fixed heat lies before, and colder
    for k, rung in enumerate(rungs):
        axes.text(1.10, k, f"{temperature[k]:.1f}", **style)
        if k > top:
            axes.text(1.20, k, kelvin(rung.drop_K).removesuffix(" K"), **style)
    axes.grid(**GRID)
    axes.tick_params(labelsize=7)


def _frame(axes: Axes, beside: Axes, lines: Sequence[Line2D]) -> None:
    axes.grid(**GRID)
    for each in (axes, beside):
        each.tick_params(labelsize=7)
        each.yaxis.label.set_fontsize(7.5)
    axes.xaxis.label.set_fontsize(7.5)
    names = [str(line.get_label()) for line in lines]
    axes.legend(
        lines,
        names,
        loc="lower center",
        bbox_to_anchor=(0.5, 1.0),
        ncol=len(lines),
        fontsize=7,
        frameon=False,
    )
