"""The temperatures of every state from source to sink, one row a state, with the limits of both joints shaded."""

from __future__ import annotations

import os
import textwrap
from typing import TYPE_CHECKING, Any

from tegdesign.design.condition import OPEN, Condition
from tegdesign.design.rating import Rating, State
from tegdesign.design.wording import ZERO_CELSIUS
from tegdesign.sheet.drawing import check_ending, plain, save_drawing
from tegdesign.sheet.states import COLD, HOT, checks_of

if TYPE_CHECKING:
    from matplotlib.axes import Axes

UP = 0.17  # by how much the hot side lies above the middle of its row, the cold side below
HALF = 0.36  # half the height of a row that is shaded
ROW = 24.0  # height of a row on paper [pt]
TOO_HOT: dict[str, Any] = {"facecolor": "0.78", "edgecolor": "none", "zorder": 0}
BEYOND: dict[str, Any] = {"facecolor": "white", "edgecolor": "0.65", "hatch": "//////", "linewidth": 0.0, "zorder": 0}
MARKS: dict[str, dict[str, Any]] = {
    "source": {"marker": "|", "markersize": 8},
    "hot face": {"marker": "s", "markerfacecolor": "white", "markersize": 4},
    "junctions": {"marker": "o", "markersize": 4.5},
    "junctions, open circuit": {"marker": "o", "markerfacecolor": "white", "markersize": 4.5},
    "cold face": {"marker": "D", "markerfacecolor": "white", "markersize": 3.5},
    "sink": {"marker": "|", "markersize": 8, "markeredgewidth": 2.0},
}
EXPLAINED = (
    "Each row is a state: source, hot face and hot junction on its upper line, cold junction, cold face and sink on "
    "its lower one; dashed the open circuit. Shaded: where a joint would be beyond its nearest limit."
)


def ladders(rating: Rating, axes: Axes) -> None:
    """Draw the temperatures of every state that is asked for."""
    low, high = _reach(rating)
    for row, c in enumerate(rating.loaded):
        _limits(rating, c, row, (low, high), axes)
        state, opened = rating.state(c.name), rating.state(c.name if c.load is OPEN else c.opened)
        if c.load is not OPEN:
            _mark(axes, "junctions, open circuit", _joints(opened), row, linestyle="--", color="0.4")
        _ladder(state, row, axes)
    names = ["\n".join(plain(line) for line in textwrap.wrap(c.name, 22)) for c in rating.loaded]
    axes.set_yticks(range(len(names)), names)
    axes.set(xlabel="temperature [degC]", xlim=(low, high), ylim=(len(names) - 0.5, -0.5))
    axes.grid(axis="x", color="0.88", linewidth=0.6)
    axes.set_axisbelow(True)
    axes.tick_params(labelsize=7)
    axes.xaxis.label.set_fontsize(7.5)
    _legend(axes)


def _joints(state: State) -> tuple[float, float]:
    return state.T_hot_junction_K, state.T_cold_junction_K


def _mark(axes: Axes, what: str, pair: tuple[float, float], row: int, **line: Any) -> None:
    """Draw two temperatures, hot above cold, joined by a line."""
    values = [t - ZERO_CELSIUS for t in pair]
    axes.plot(values, [row - UP, row + UP], linewidth=0.9, **{"color": "black", **line, **MARKS[what]})


def _ladder(state: State, row: int, axes: Axes) -> None:
    """Draw source, faces, junctions and sink of one state."""
    rungs = state.ladder
    top = max(rungs, key=lambda rung: rung.T_K)  # the ambient of a given heat lies before, and colder
    places = {
        "source": (top.T_K, -UP), "hot face": (state.T_hot_face_K, -UP),
        "cold face": (state.T_cold_face_K, UP), "sink": (rungs[-1].T_K, UP),
    }  # fmt: skip
    for side in (("source", "hot face"), ("sink", "cold face")):
        joint = state.T_hot_junction_K if side[0] == "source" else state.T_cold_junction_K
        values = [places[side[0]][0] - ZERO_CELSIUS, joint - ZERO_CELSIUS]
        axes.plot(values, [row + places[side[0]][1]] * 2, "-", color="black", linewidth=0.9)
    for what, (value, at) in places.items():
        axes.plot([value - ZERO_CELSIUS], [row + at], linestyle="", color="black", **MARKS[what])
    _mark(axes, "junctions", _joints(state), row, linestyle="-")


def _reach(rating: Rating) -> tuple[float, float]:
    """Return the ends of the axis [degC]: every temperature and every limit of a joint."""
    values = [rung.T_K for s in rating.asked for rung in s.ladder]
    values += [t for s in rating.asked for t in _joints(s)]
    values += [k.limit for c in rating.loaded for bounds in _bounds(rating, c) for k in bounds if k]
    low, high = min(values) - ZERO_CELSIUS, max(values) - ZERO_CELSIUS
    return low - 0.04 * (high - low), high + 0.04 * (high - low)


def _bounds(rating: Rating, c: Condition) -> tuple[tuple[Any, Any], tuple[Any, Any]]:
    """Return the nearest check that bounds each joint from below and from above, None where there is none."""
    both = []
    for names in (HOT, COLD):
        checks = checks_of(rating, c, names)
        below = max((k for k in checks if k.sense == "least"), key=lambda k: k.limit, default=None)
        above = min((k for k in checks if k.sense == "most"), key=lambda k: k.limit, default=None)
        both.append((below, above))
    return both[0], both[1]


def _limits(rating: Rating, c: Condition, row: int, span: tuple[float, float], axes: Axes) -> None:
    """Shade where the hot joint (upper half of the row) and the cold joint (lower half) must not be."""
    from matplotlib.patches import Rectangle

    for (below, above), y, style in zip(_bounds(rating, c), (row - HALF, row), (TOO_HOT, BEYOND), strict=True):
        for check, edge in ((below, span[0]), (above, span[1])):
            if check is not None:
                at = check.limit - ZERO_CELSIUS
                axes.add_patch(Rectangle((min(at, edge), y), abs(edge - at), HALF, **style))


def _legend(axes: Axes) -> None:
    from matplotlib.lines import Line2D
    from matplotlib.patches import Patch

    marks: list[Any] = [Line2D([], [], color="black", linestyle="", label=name, **mark) for name, mark in MARKS.items()]
    marks += [Patch(**TOO_HOT, label="hot joint beyond limit"), Patch(**BEYOND, label="cold joint beyond limit")]
    axes.legend(
        handles=marks, loc="lower center", bbox_to_anchor=(0.45, 1.0), ncol=4, fontsize=7, frameon=False,
        columnspacing=1.4, handletextpad=0.5,
    )  # fmt: skip


def draw_ladders(rating: Rating, path: str | os.PathLike[str]) -> None:
    """Draw the temperatures of every state into a file."""
    from matplotlib.figure import Figure

    check_ending(path)
    height = 1.9 + ROW / 72 * len(rating.loaded)
    drawing = Figure(figsize=(7.2, height), layout="constrained")
    axes = drawing.subplots()
    ladders(rating, axes)
    drawing.suptitle(plain(rating.design.title), fontsize=10)
    save_drawing(drawing, path)
