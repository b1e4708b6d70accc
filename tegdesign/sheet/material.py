"""Picture of a material: its three properties and figure of merit against temperature."""

from __future__ import annotations

import os
from functools import reduce
from typing import TYPE_CHECKING

import numpy as np

from tegdesign.material.curve import Array, Curve
from tegdesign.material.material import Material
from tegdesign.sheet.drawing import check_ending, save_drawing

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

PANELS = (
    ("seebeck_coefficient", "Seebeck coefficient S [uV/K]", 1e6),
    ("resistivity", "resistivity [mohm cm]", 1e5),
    ("thermal_conductivity", "thermal conductivity [W/m/K]", 1.0),
    ("figure_of_merit", "figure of merit zT [1]", 1.0),
)


def figure(material: Material) -> Figure:
    """Return four panels against temperature: measured points, the curve the program uses, and the limits."""
    from matplotlib.figure import Figure

    drawing = Figure(figsize=(8.0, 7.2), layout="constrained")
    panels = drawing.subplots(2, 2, sharex=True).flat
    for axes, (name, label, factor) in zip(panels, PANELS, strict=True):
        function = getattr(material, name)
        points, ends = _measured(material, name)
        fine = np.linspace(*ends, 400)
        axes.plot(fine, factor * function(fine), color="0.35", label="interpolated")
        axes.plot(points, factor * function(points), "o", color="black", markersize=4, label="measured")
        axes.set(xlabel="temperature [K]", ylabel=label)
        axes.xaxis.set_tick_params(labelbottom=True)
        if name != "seebeck_coefficient":
            axes.set_ylim(0.0, 1.06 * factor * float(np.max(function(fine))))
        axes.grid(color="0.88", linewidth=0.6)
        _limits(axes, material)
    drawing.axes[0].legend(fontsize=8)
    drawing.suptitle(_fold(f"{material.name}: {material.composition}"), fontsize=11)
    words = [
        *material.warnings,
        f"source: {material.source or 'not stated'}" + (f", doi {material.doi}" * bool(material.doi)),
    ]
    drawing.supxlabel("\n".join(_fold(line, 105) for line in words), fontsize=7.5)
    return drawing


def _measured(material: Material, name: str) -> tuple[Array, tuple[float, float]]:
    """Return the points [K] and the range [K] of a property; the figure of merit has what all share."""
    curves = (material.seebeck_coefficient, material.resistivity, material.thermal_conductivity)
    if name == "figure_of_merit":
        return reduce(np.intersect1d, [curve.temperature for curve in curves]), material.range
    curve: Curve = getattr(material, name)
    return curve.temperature, curve.range


def _limits(axes: Axes, material: Material) -> None:
    """Mark the temperatures not to be passed, told apart by their dashes."""
    for name, stated, dashes in (
        ("service limit", material.service_limit, "--"),
        ("air limit", material.air_limit, ":"),
    ):
        if stated is not None:
            memory = " (memory)" if "memory" in stated.basis else ""
            axes.axvline(
                stated.value, color="0.5", linestyle=dashes, label=f"{name} {stated.value:.0f} K{memory}"
            )


def _fold(text: str, width: int = 80) -> str:
    import textwrap

    return textwrap.fill(text, width, break_on_hyphens=False)


def save_figure(material: Material, path: str | os.PathLike[str]) -> None:
    """Draw the figure into a file, the same bytes each time; the ending chooses the format.

    Raises
    ------
    InputError
        Another ending than .png, .pdf or .svg, or a place that cannot be written to.
    """
    check_ending(path)
    save_drawing(figure(material), path, material.name)
