"""Picture of a computed material against doping at given temperatures."""

from __future__ import annotations

import os
from collections.abc import Sequence
from typing import TYPE_CHECKING

from tegdesign.errors import InputError
from tegdesign.material.bands import view
from tegdesign.material.bands.material import BandMaterial
from tegdesign.material.material import Material
from tegdesign.sheet.drawing import check_ending, save_drawing
from tegdesign.sheet.material import footer, title

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_PANELS = (
    ("seebeck_coefficient_V_per_K", "Seebeck coefficient S [uV/K]", 1e6),
    ("conductivity", "conductivity sigma [S/cm]", 1e-2),
    ("thermal_conductivity_W_per_m_K", "thermal conductivity [W/m/K]", 1.0),
    ("electronic_thermal_conductivity_W_per_m_K", "its parts [W/m/K]", 1.0),
    ("power_factor_W_per_m_K2", "power factor [mW/m/K2]", 1e3),
    ("figure_of_merit", "figure of merit zT [1]", 1.0),
)
_MEASURED = (0, 1, 2, 4, 5)  # panels with measured points; the parts of a measured kappa are only estimated
_PARTS = 3
_LATTICE = "lattice_thermal_conductivity_W_per_m_K"
_STYLES = (("0.0", "-", "o"), ("0.35", "--", "s"), ("0.5", "-.", "^"), ("0.6", ":", "D"))  # told apart in grey
_THICK, _THIN = 1.8, 0.7
_BESIDE = 0.12  # share of the width of the bounds that is drawn beside them


def figure(
    material: BandMaterial, temperature: Sequence[float], measured: Material | None = None, doping: float | None = None
) -> Figure:
    """Return S, sigma, kappa and its parts, power factor and zT against doping, with bounds and the doping it has.

    Parameters
    ----------
    temperature : sequence of float
        One to four temperatures [K].
    measured : Material, optional
        Measured material whose points go in, at ``doping`` [1/m^3], where it is known at the temperatures.

    Raises
    ------
    InputError
        More than four temperatures, or one outside the range.
    """
    from matplotlib.figure import Figure

    if len(temperature) > len(_STYLES):
        raise InputError(
            f"{len(temperature)} temperatures are too many for one drawing against doping; give at most {len(_STYLES)}"
        )
    drawing = Figure(figsize=(8.0, 10.4), layout="constrained")
    grid = drawing.add_gridspec(4, 2, height_ratios=(1.0, 1.0, 1.0, 0.35))
    panels = [drawing.add_subplot(grid[k // 2, k % 2]) for k in range(len(_PANELS))]
    for t, (grey, dashes, _) in zip(temperature, _STYLES, strict=False):
        columns = _with_conductivity(view.against_doping(material, [t], 121))
        x = columns["doping_1_per_m3"] * 1e-6
        for axes, (name, _, factor) in zip(panels, _PANELS, strict=True):
            axes.plot(x, factor * columns[name], color=grey, linestyle=dashes, linewidth=_THICK, label=f"{t:g} K")
        panels[_PARTS].plot(x, columns[_LATTICE], color=grey, linestyle=dashes, linewidth=_THIN)
    for axes, (_, label, _) in zip(panels, _PANELS, strict=True):
        _frame(axes, material, label)
    if measured is not None and doping is not None:
        _points(panels, temperature, measured, doping)
    for axes in panels:
        if axes.get_ylim()[1] > 0:
            axes.set_ylim(min(axes.get_ylim()[0], 0.0) if axes is panels[0] else 0.0, None)
    _legends(drawing.add_subplot(grid[3, :]), panels[0], panels[_PARTS])
    drawing.suptitle(title(material), fontsize=11)
    drawing.supxlabel(footer(material), fontsize=7.5)
    return drawing


def _with_conductivity(columns: view.Columns) -> view.Columns:
    return columns | {"conductivity": 1 / columns["resistivity_ohm_m"]}


def _points(panels: Sequence[Axes], temperature: Sequence[float], measured: Material, doping: float) -> None:
    first, last = measured.range
    for t, (grey, _, sign) in zip(temperature, _STYLES, strict=False):
        if first <= t <= last:
            point = _with_conductivity(view.properties(measured, [t]))
            words = f"{measured.name} measured, {t:g} K\n(at the doping of the file)"
            for k in _MEASURED:
                name, _, factor = _PANELS[k]
                panels[k].plot(
                    [doping * 1e-6], factor * point[name], sign, color=grey, mfc="none", markersize=7, label=words
                )


def _frame(axes: Axes, material: BandMaterial, label: str) -> None:
    """Shade what lies outside the bounds and mark the doping of the material."""
    from matplotlib.ticker import FuncFormatter, LogLocator, NullFormatter

    low, high = (bound * 1e-6 for bound in material.doping_bounds)
    beside = (high / low) ** _BESIDE
    axes.set(xscale="log", xlabel="doping [1/cm3]", ylabel=label, xlim=(low / beside, high * beside))
    axes.xaxis.set_major_locator(LogLocator(subs=(1.0, 2.0, 5.0) if high / low < 60 else (1.0,)))
    axes.xaxis.set_major_formatter(FuncFormatter(lambda x, _: f"{x:.0e}".replace("e+", "e")))
    axes.xaxis.set_minor_formatter(NullFormatter())
    axes.axvspan(low / beside, low, color="0.85", zorder=0, label="outside the doping bounds")
    axes.axvspan(high, high * beside, color="0.85", zorder=0)
    made = material.doping
    for end in [made.cold] if made.hot is None else [made.cold, made.hot]:
        axes.axvline(end * 1e-6, color="0.45", linewidth=0.9, linestyle=(0, (1, 1)), label="doping as made")
    axes.grid(color="0.88", linewidth=0.6)


def _legends(below: Axes, first: Axes, parts: Axes) -> None:
    """Say once below the panels what all share, and in the panel of the parts which is which."""
    from matplotlib.lines import Line2D

    handles, labels = first.get_legend_handles_labels()
    once = dict(zip(labels, handles, strict=True))
    below.axis("off")
    below.legend(list(once.values()), list(once), loc="center", ncols=3, fontsize=8)
    widths = (("carriers", _THICK), ("lattice", _THIN))
    lines = [Line2D([], [], color="0.0", linewidth=width, label=label) for label, width in widths]
    parts.legend(handles=lines, fontsize=8)


def save_figure(
    material: BandMaterial,
    temperature: Sequence[float],
    path: str | os.PathLike[str],
    measured: Material | None = None,
    doping: float | None = None,
) -> None:
    """Draw ``figure`` into a file, the same bytes each time; the ending chooses the format.

    Raises
    ------
    InputError
        As ``figure``; another ending than .png, .pdf or .svg, or a place that cannot be written to.
    """
    check_ending(path)
    save_drawing(figure(material, temperature, measured, doping), path, f"{material.name} against doping")
