"""Drawings of the module to scale: plan of the couples, corner in detail, section through the stack."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from typing import TYPE_CHECKING, Any, Literal

from tegdesign.design.design import Design, Geometry
from tegdesign.design.wording import millimetres

if TYPE_CHECKING:
    from matplotlib.axes import Axes

SCALES = (100.0, 50.0, 20.0, 10.0, 5.0, 2.0, 1.0, 0.5, 0.2, 0.1, 0.05, 0.02, 0.01, 0.005, 0.002, 0.001)
SMALL = 6.5  # size of the text [pt]
N_LEG, P_LEG, METAL, CERAMIC = "1.0", "0.45", "0.72", "0.9"
FINEST = 1.2  # legs drawn smaller than this on paper [mm] have no outline
LETTER = 3.0  # legs drawn smaller than this on paper [mm] bear no letter
MOST_LEGS = 6000  # more are not drawn one by one

Box = tuple[float, float, float, float]
Point = tuple[float, float]
Align = Literal["left", "center", "right"]


def path(g: Geometry) -> list[tuple[int, int]]:
    """Return column and row of the legs as the current takes them from the minus lead: there and back."""
    return [
        (column if row % 2 == 0 else g.columns - 1 - column, row)
        for row in range(g.rows)
        for column in range(g.columns)
    ]


def polarity(cell: tuple[int, int]) -> str:
    """Return the polarity of the leg in a cell: n and p in turn, n first."""
    return "np"[sum(cell) % 2]


def to_scale(axes: Axes, width: float, height: float, margins: Box) -> float:
    """Fit a drawing of ``width`` x ``height`` [mm] into the axes; return the round scale, paper over real.

    ``margins`` [mm of paper] are left, right, bottom and top. The lower left corner is at 0, 0.
    """
    place, paper = axes.get_position(), _paper(axes)
    box = (place.width * paper[0], place.height * paper[1])
    left, right, bottom, top = margins
    room = (box[0] - left - right, box[1] - bottom - top)
    fitting = min(room[0] / width, room[1] / height)
    scale = next((s for s in SCALES if s <= fitting), fitting)
    beside, below = (room[0] - width * scale) / 2, room[1] - height * scale
    axes.set_xlim(-(left + beside) / scale, width + (right + beside) / scale)
    axes.set_ylim(-(bottom + below) / scale, height + top / scale)
    axes.set_axis_off()
    return scale


def _paper(axes: Axes) -> Point:
    figure = axes.get_figure(root=True)
    assert figure is not None
    width, height = figure.get_size_inches()
    return 25.4 * float(width), 25.4 * float(height)


def scale_words(scale: float) -> str:
    """Return a scale as drawings state it."""
    return f"scale {scale:.3g} : 1" if scale >= 1 else f"scale 1 : {1 / scale:.3g}"


def _boxes(axes: Axes, boxes: Sequence[Box], **style: Any) -> None:
    """Draw rectangles given as left, bottom, width, height [mm]."""
    from matplotlib.collections import PatchCollection
    from matplotlib.patches import Rectangle

    patches = [Rectangle((x, y), w, h) for x, y, w, h in boxes]
    axes.add_collection(PatchCollection(patches, **style))


def _dimension(
    axes: Axes, start: Point, end: Point, words: str, at: Point, align: Align = "center", turn: float = 0.0
) -> None:
    """Draw a dimension line with its words at a place of their own [mm]."""
    style = {"arrowstyle": "<|-|>,head_width=0.12,head_length=0.3", "linewidth": 0.5, "color": "black"}
    axes.annotate("", start, end, arrowprops={**style, "shrinkA": 0, "shrinkB": 0, "mutation_scale": 8})
    axes.text(*at, words, fontsize=SMALL, ha=align, va="center", rotation=turn, parse_math=False)


def _centre(g: Geometry, cell: tuple[int, int]) -> tuple[float, float]:
    """Return the centre of a leg [mm], from the lower left corner of the plate; the first row is on top."""
    column, row = cell
    x = g.edge_margin + (column + 0.5) * g.pitch
    y = g.edge_margin + (g.rows - 1 - row + 0.5) * g.pitch
    return 1e3 * x, 1e3 * y


def _side(g: Geometry, cell: tuple[int, int]) -> float:
    return 1e3 * (g.leg_side_n if polarity(cell) == "n" else g.leg_side_p)


def _square(g: Geometry, cell: tuple[int, int]) -> Box:
    (x, y), side = _centre(g, cell), _side(g, cell)
    return x - side / 2, y - side / 2, side, side


def _strip(g: Geometry, first: tuple[int, int], second: tuple[int, int]) -> list[Box]:
    """Return the two halves of the electrode that joins neighbouring legs, each as wide as its leg."""
    halves = []
    for here, there in ((first, second), (second, first)):
        (x, y), (u, v), side = _centre(g, here), _centre(g, there), _side(g, here)
        reach = side / 2 + 1e3 * g.gap / 2
        if x == u:
            halves.append((x - side / 2, y - side / 2 if v > y else y - reach, side, side / 2 + reach))
        else:
            halves.append((x - side / 2 if u > x else x - reach, y - side / 2, side / 2 + reach, side))
    return halves


def _legs(axes: Axes, g: Geometry, cells: list[tuple[int, int]], line: float) -> None:
    for kind, grey in (("n", N_LEG), ("p", P_LEG)):
        squares = [_square(g, cell) for cell in cells if polarity(cell) == kind]
        _boxes(axes, squares, facecolor=grey, edgecolor="black", linewidth=line, zorder=3)


def plan(design: Design, axes: Axes) -> str:
    """Draw the plan of a module: plate, legs, electrodes, path of the current, leads; return its title."""
    g = design.module
    width, depth = 1e3 * g.width, 1e3 * g.depth
    scale = to_scale(axes, width, depth, (9.0, 15.0, 8.0, 1.0))
    paper = 1e3 * min(g.leg_side_n, g.leg_side_p) * scale  # side of a leg on paper [mm]
    fine, edge = min(0.6, 0.1 * paper), min(0.6, 0.1 * paper) if paper > FINEST else 0.0
    _boxes(axes, [(0, 0, width, depth)], facecolor=CERAMIC, edgecolor="black", linewidth=0.8, zorder=1)
    order = path(g)
    if len(order) <= MOST_LEGS:
        joined = list(pairwise(order))
        hot = [half for pair in joined[0::2] for half in _strip(g, *pair)]
        cold = [half for pair in joined[1::2] for half in _strip(g, *pair)]
        if edge:
            _boxes(axes, cold, facecolor="none", edgecolor="0.35", linewidth=edge, linestyle=":", zorder=2)
        _boxes(axes, hot, facecolor=METAL, edgecolor="none", zorder=2)
        _legs(axes, g, order, edge)
        points = [_centre(g, cell) for cell in order]
        axes.plot(*zip(*points, strict=True), color="black", linewidth=fine, zorder=4)
    else:
        inner = [(1e3 * g.edge_margin,) * 2 + (width - 2e3 * g.edge_margin, depth - 2e3 * g.edge_margin)]
        _boxes(axes, inner, facecolor="0.7", edgecolor="black", hatch="xx", linewidth=0.4, zorder=2)
    tab = 4.0 / scale
    for cell, sign in ((order[0], "-"), (order[-1], "+")):
        x, y = _centre(g, cell)
        outside = -tab if cell[0] < g.columns / 2 else width + tab
        axes.plot([x, outside], [y, y], color="black", linewidth=1.4, zorder=5)
        beside = outside + (-2.2 if outside < 0 else 2.2) / scale
        axes.text(beside, y, sign, fontsize=11, ha="center", va="center", fontweight="bold")
    _dimension(axes, (0, -3 / scale), (width, -3 / scale), f"{width:.4g} mm", (width / 2, -6 / scale))
    right = order[-1][0] >= g.columns / 2  # then the plus lead comes out here
    side = width + (9 if right else 3) / scale
    _dimension(axes, (side, 0), (side, depth), f"{depth:.4g} mm", (side + 3 / scale, depth / 2), turn=90.0)
    return f"Plan of the couples, seen through the hot plate, {scale_words(scale)}"


def corner(design: Design, axes: Axes) -> str:
    """Draw the first two by two legs of the plan, large, with their dimensions; return the title."""
    g = design.module
    columns, rows = min(2, g.columns), min(2, g.rows)
    width = 1e3 * (columns * g.pitch + g.edge_margin)
    depth = 1e3 * (rows * g.pitch + g.edge_margin)
    scale = to_scale(axes, width, depth, (2.0, 24.0, 28.0, 1.0))
    drop = 1e3 * g.depth - depth  # the corner is the upper left one of the plate
    ground = [(0, 0, width, depth)]
    _boxes(axes, ground, facecolor=CERAMIC, edgecolor="none", zorder=1)
    axes.plot([0, 0, width], [0, depth, depth], color="black", linewidth=1.0, zorder=4)
    cells = [(c, r) for r in range(rows) for c in range(columns)]
    for kind, grey in (("n", N_LEG), ("p", P_LEG)):
        squares = [
            (x, y - drop, w, h) for x, y, w, h in (_square(g, c) for c in cells if polarity(c) == kind)
        ]
        _boxes(axes, squares, facecolor=grey, edgecolor="black", linewidth=0.8, zorder=3)
    for cell in cells:
        x, y = _centre(g, cell)
        kind = polarity(cell)
        colour = "black" if kind == "n" else "white"
        axes.text(x, y - drop, kind, fontsize=8, ha="center", va="center", color=colour, zorder=5)
    edge, half = 1e3 * g.edge_margin, 1e3 * g.pitch / 2
    n, p = 1e3 * g.leg_side_n, 1e3 * g.leg_side_p
    first = edge + half
    spans = [("edge", 0.0, edge), ("n leg", first - n / 2, first + n / 2)]
    across = columns > 1
    if not across:  # one column: its second leg lies below, so the grid repeats downwards
        spans += [("p leg", first - p / 2, first + p / 2)]
    else:
        second = first + 2 * half
        spans += [
            ("gap", first + n / 2, second - p / 2),
            ("p leg", second - p / 2, second + p / 2),
            ("pitch", first, second),
        ]
    for k, (name, low, high) in enumerate(spans):
        y = -(4 + 4.6 * k) / scale
        axes.plot([low, low], [0, y], color="0.6", linewidth=0.3)
        axes.plot([high, high], [0, y], color="0.6", linewidth=0.3)
        _dimension(
            axes, (low, y), (high, y), f"{name} {high - low:.4g} mm", (width + 2 / scale, y), align="left"
        )
    return f"Corner of the minus lead, {scale_words(scale)}"


def section(design: Design, axes: Axes) -> str:
    """Draw a section through the first legs and the whole stack with thicknesses; return title and scale."""
    g, stack = design.module, design.stack
    run = g.columns if g.columns > 1 else g.rows
    legs = min(4, run)
    width = 1e3 * (legs * g.pitch + g.edge_margin * (2 if legs == run else 1))
    metal, length = 1e3 * stack.electrode_thickness, 1e3 * g.leg_length
    cold, hot = 1e3 * stack.cold.substrate_thickness, 1e3 * stack.hot.substrate_thickness
    levels = [
        0.0,
        cold,
        cold + metal,
        cold + metal + length,
        cold + 2 * metal + length,
        cold + 2 * metal + length + hot,
    ]
    height = levels[-1]
    scale = to_scale(axes, width, height, (12.0, 62.0, 7.0, 7.0))
    _boxes(
        axes,
        [(0, levels[4], width, hot), (0, 0, width, cold)],
        facecolor=CERAMIC,
        edgecolor="black",
        linewidth=0.6,
    )
    centres = [1e3 * (g.edge_margin + (k + 0.5) * g.pitch) for k in range(legs + 1)]
    sides = [1e3 * (g.leg_side_n if k % 2 == 0 else g.leg_side_p) for k in range(legs + 1)]
    for kind, grey in ((0, N_LEG), (1, P_LEG)):
        boxes = [(centres[k] - sides[k] / 2, levels[2], sides[k], length) for k in range(kind, legs, 2)]
        _boxes(axes, boxes, facecolor=grey, edgecolor="black", linewidth=0.6)
    _boxes(
        axes,
        _bars(centres, sides, legs, run, levels[3], metal, 0),
        facecolor=METAL,
        edgecolor="black",
        linewidth=0.4,
    )
    _boxes(
        axes,
        _bars(centres, sides, legs, run, levels[1], metal, 1),
        facecolor=METAL,
        edgecolor="black",
        linewidth=0.4,
    )
    for k in range(legs if scale * min(length, *sides) > LETTER else 0):
        axes.text(centres[k], (levels[2] + levels[3]) / 2, "np"[k % 2], fontsize=8, ha="center", va="center",
                  color="black" if k % 2 == 0 else "white")  # fmt: skip
    if legs < run:
        axes.plot(
            [width, width], [-2 / scale, height + 2 / scale], color="black", linewidth=0.8, linestyle="-."
        )
    axes.text(width / 2, height + 4.2 / scale, "hot side", fontsize=SMALL, ha="center", va="center")
    axes.text(width / 2, -4.2 / scale, "cold side", fontsize=SMALL, ha="center", va="center")
    x = -4 / scale
    _dimension(axes, (x, 0), (x, height), f"{height:.4g} mm", (x - 3.5 / scale, height / 2), turn=90.0)
    labels = [
        (height, f"hot interface {stack.hot.interface:.3g} m2 K/W"),
        (
            (levels[4] + height) / 2,
            f"hot substrate {hot:.4g} mm, {stack.hot.substrate_conductivity:.4g} W/m/K",
        ),
        ((levels[3] + levels[4]) / 2, f"hot electrode {millimetres(stack.electrode_thickness)}"),
        ((levels[2] + levels[3]) / 2, f"legs {length:.4g} mm long, {_between(design)} between them"),
        ((levels[1] + levels[2]) / 2, f"cold electrode {millimetres(stack.electrode_thickness)}"),
        (cold / 2, f"cold substrate {cold:.4g} mm, {stack.cold.substrate_conductivity:.4g} W/m/K"),
        (0.0, f"cold interface {stack.cold.interface:.3g} m2 K/W"),
    ]
    step = max(4.0 / scale, (height + 4.0 / scale) / (len(labels) - 1))
    middle = height / 2 + step * (len(labels) - 1) / 2
    for k, (y, words) in enumerate(labels):
        aside = middle - k * step
        axes.plot(
            [width, width + 4 / scale, width + 5 / scale], [y, aside, aside], color="0.3", linewidth=0.4
        )
        axes.text(width + 6 / scale, aside, words, fontsize=SMALL, ha="left", va="center", parse_math=False)
    shown = "all legs of the row" if legs == run else f"{legs} of {run} legs of the row"
    return f"Section through the stack, {shown}, {scale_words(scale)}"


def _between(design: Design) -> str:
    given = design.stack.filler_conductivity
    return design.stack.filler if given is None else f"filler of {given:.4g} W/m/K"


def _bars(
    centres: list[float], sides: list[float], legs: int, run: int, level: float, metal: float, start: int
) -> list[Box]:
    """Return the electrodes of one side; those of the cold side start a leg later, after the lead's pad."""
    bars = [(centres[0] - sides[0] / 2, level, sides[0], metal)] if start else []
    for k in range(start, legs, 2):
        left = centres[k] - sides[k] / 2
        if k + 1 < legs:
            right = centres[k + 1] + sides[k + 1] / 2
        elif legs < run:  # goes on beyond the cut
            right = (
                centres[legs] - sides[legs] / 2 - (centres[legs] - centres[legs - 1]) / 2 + sides[legs] / 2
            )
            right = min(right, centres[legs - 1] + (centres[legs] - centres[legs - 1]) / 2)
        else:
            right = centres[k] + sides[k] / 2
        bars.append((left, level, right - left, metal))
    return bars
