"""The sheet as pages of A4: verdict and tables, drawings, curves, then everything that stands behind them."""

from __future__ import annotations

import io
from collections.abc import Callable
from typing import TYPE_CHECKING, Any, TypeVar

from tegdesign import __version__
from tegdesign.design.rating import Rating
from tegdesign.design.scan import Sweep, against_hot, curve
from tegdesign.errors import ConvergenceError
from tegdesign.sheet import description, figures, ladders, legs, margin, performance, plan, ranges, states
from tegdesign.sheet.page import BOTTOM, HEIGHT, LEFT, RIGHT, TOP, WIDTH, Pages, fold, shorten, text_width

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

Data = TypeVar("Data")

SIZES = (7.5, 7.0, 6.5, 6.0, 5.5, 5.0)  # of the text [pt]: the largest that keeps to its pages is taken
STYLE: dict[Any, Any] = {"pdf.fonttype": 42, "font.size": 7.0}
TITLE_SIZES = (15.0, 12.0, 10.0)


def sheet_pdf(rating: Rating) -> bytes:
    """Return the sheet of a rating as PDF, the same bytes for the same rating.

    Raises
    ------
    ConvergenceError
        The design has no operating point.
    """
    import matplotlib as mpl
    from matplotlib.backends.backend_pdf import PdfPages

    stream = io.BytesIO()
    metadata = {
        "Title": rating.design.title,
        "Subject": f"design sheet, revision {rating.design.revision}",
        "Creator": f"tegdesign {__version__}",
        "Producer": f"tegdesign {__version__}",
        "CreationDate": None,
    }
    usual = mpl.rc_context(mpl.rcParamsDefault)  # whatever the user has set for drawings of his own
    with usual, mpl.rc_context(STYLE), PdfPages(stream, metadata=metadata) as file:
        for page in sheet_pages(rating):
            file.savefig(page)
    return stream.getvalue()


def _found(find: Callable[[], Sweep]) -> Sweep | str:
    """Return a sweep, or in words why there is none: the rest of the sheet still holds."""
    try:
        return find()
    except ConvergenceError as error:
        return str(error)


def sheet_pages(rating: Rating) -> list[Figure]:
    """Return the pages of the sheet, three to five, one or two more with named states."""
    curves = _found(lambda: curve(rating.design)), _found(lambda: against_hot(rating.design))
    pages = Pages(SIZES[0])
    _fill(pages, lambda on: _front(on, rating), columns=1, most=1)
    if states.named(rating):
        _fill(pages, lambda on: _states(on, rating), columns=1, most=1)
        ranges.on_pages(pages, rating)
    pages.new_page()
    _drawings(pages, rating)
    pages.new_page()
    _graphs(pages, rating, curves)
    _fill(pages, lambda on: _behind(on, rating), columns=2, most=2)
    _feet(pages, rating)
    return pages.figures


def _fill(pages: Pages, write: Callable[[Pages], None], columns: int, most: int) -> None:
    """Begin a page and write, in the largest text that keeps to ``most`` pages, else in the smallest."""
    for size in SIZES:
        trial = Pages(size)
        trial.new_page(columns)
        write(trial)
        if len(trial.figures) <= most:
            break
    pages.figures += trial.figures


def _front(pages: Pages, rating: Rating) -> None:
    _head(pages, rating)
    for section in (
        performance.conditions(rating),
        performance.nominal(rating),
        None if states.named(rating) else performance.limits(rating),
        performance.ceiling(rating),
        description.masses(rating),
    ):
        if section:
            pages.section(section)


def _states(pages: Pages, rating: Rating) -> None:
    """Write the states that are asked for with their limits, and draw their temperatures."""
    for section in (states.section_of_states(rating), performance.limits(rating)):
        if section:
            pages.section(section)
    height = ladders.ROW * len(rating.loaded)
    pages.need(height + 100)
    _graph(pages, "Temperatures of the states, from source to sink", ladders.EXPLAINED, rating, ladders.ladders,
           height=height, left=100.0, right=10.0, above=40.0)  # fmt: skip


def _behind(pages: Pages, rating: Rating) -> None:
    for section in (
        margin.break_even(rating),
        margin.windows(rating),
        performance.losses(rating),
        legs.conduction(rating),
        performance.optima(rating),
        performance.sanity(rating),
        performance.opened(rating),
        performance.data_range(rating),
        description.cautions(rating),
        description.materials(rating),
        description.assumptions(rating),
        description.uncertainty(rating),
        description.notes(rating),
    ):
        if section:
            pages.section(section)


def _head(pages: Pages, rating: Rating) -> None:
    """Write title, identification and verdict."""
    title = rating.design.title
    size = next((s for s in TITLE_SIZES if len(fold(title, pages.width, s, bold=True)) <= 2), TITLE_SIZES[-1])
    pages.lines(title, size=size, bold=True)
    pages.lines("Design sheet of a thermoelectric generator", size=10.0)
    pages.y += 3
    pages.rule(pages.x, pages.x + pages.width, pages.y, 1.2)
    pages.y += 6
    for block in description.identification(rating).blocks:
        pages.block(block)
    pages.y += 6
    pages.section(performance.verdict(rating))


def _drawings(pages: Pages, rating: Rating) -> None:
    """Draw plan, corner and section, with the dimensions as facts below."""
    design, top, width = rating.design, TOP, WIDTH - LEFT - RIGHT
    left, right = 0.6 * width, 0.38 * width
    spots: list[tuple[Callable[..., str], float, float, float, float]] = [
        (plan.plan, LEFT, top + 14, left, 316.0),
        (plan.corner, LEFT + left + 0.02 * width, top + 14, right, 316.0),
        (plan.section, LEFT, top + 376, width, 180.0),
    ]
    for draw, x, y, w, h in spots:
        title = draw(design, pages.axes(x, y, w, h))
        pages.put(x, y - 14, shorten(title, w, 7.5), size=7.5, bold=False)
    _legend(pages, top + 338)
    pages.y = top + 566
    pages.section(description.geometry(rating))


def _legend(pages: Pages, y: float) -> None:
    """Explain the marks of the plan."""
    from matplotlib.lines import Line2D
    from matplotlib.patches import Patch

    marks = [
        Patch(facecolor=plan.N_LEG, edgecolor="black", label="n leg"),
        Patch(facecolor=plan.P_LEG, edgecolor="black", label="p leg"),
        Patch(facecolor=plan.METAL, label="hot electrode"),
        Patch(facecolor="none", edgecolor="0.35", linestyle=":", label="cold electrode"),
        Patch(facecolor=plan.CERAMIC, edgecolor="black", label="plate"),
        Line2D([], [], color="black", linewidth=0.8, label="path of the current, inside from - to +"),
    ]
    place = (LEFT / WIDTH, 1 - y / HEIGHT)
    pages.figures[-1].legend(
        handles=marks, loc="upper left", bbox_to_anchor=place, ncol=len(marks), fontsize=7, frameon=False,
        borderpad=0, borderaxespad=0, columnspacing=1.6,
    )  # fmt: skip


def _graphs(pages: Pages, rating: Rating, curves: tuple[Sweep | str, Sweep | str]) -> None:
    """Draw the curves and the ladder, each with its conditions."""
    by_current, by_hot = curves
    source, sink = rating.design.source.words(), rating.design.sink.words()
    steady = f"source {source}; sink {sink}; steady, junctions follow the load"
    _graph(pages, "Voltage and power against current", steady, by_current,
           lambda sweep, axes: figures.voltage_current(sweep, rating.rated, axes))  # fmt: skip
    _graph(pages, "Power and efficiency against the source",
           f"matched load (most power) at each point; source {source}, varied; sink {sink}; steady", by_hot,
           figures.against_hot)  # fmt: skip
    _graph(pages, "Temperatures from source to sink", rating.rated.conditions, rating.rated, figures.ladder,
           height=240.0, left=100.0, right=96.0)  # fmt: skip


def _graph(
    pages: Pages, title: str, conditions: str, data: Data | str, draw: Callable[[Data, Axes], None],
    height: float = 140.0, left: float = 40.0, right: float = 40.0, above: float = 16.0,
) -> None:  # fmt: skip
    """Write a title and conditions and draw below, at most as high as the page has room."""
    pages.heading(title)
    pages.lines(conditions)
    if isinstance(data, str):
        pages.lines(f"Not found: {data}")
        pages.y += pages.leading
        return
    pages.y += above
    height = min(height, HEIGHT - BOTTOM - 26 - pages.y)
    draw(data, pages.axes(pages.x + left, pages.y, pages.width - left - right, height))
    pages.y += height + 34


def _feet(pages: Pages, rating: Rating) -> None:
    """Write page number, title, revision and what is not claimed at the foot of every page."""
    size, y = 6.5, HEIGHT - BOTTOM + 14
    drawn = pages.figures
    for k, page in enumerate(drawn, 1):
        pages.figures = [page]
        number = f"page {k}/{len(drawn)}"
        claim = f"revision {shorten(rating.design.revision, 80, size)}; {description.NO_CLAIM}"
        used = text_width(number, size) + text_width(claim, size) + 30
        pages.rule(LEFT, WIDTH - RIGHT, y - 4, 0.5)
        pages.put(LEFT, y, shorten(rating.design.title, WIDTH - LEFT - RIGHT - used, size), size)
        pages.put(WIDTH - RIGHT - text_width(number, size) - 15, y, claim, size, align="right")
        pages.put(WIDTH - RIGHT, y, number, size, align="right")
    pages.figures = drawn
