"""Picture of a material: its three properties and figure of merit against temperature."""

from __future__ import annotations

import os
from functools import reduce
from typing import TYPE_CHECKING

import numpy as np

from tegdesign.material.bands.material import BandMaterial
from tegdesign.material.curve import Array, Curve
from tegdesign.material.material import Material
from tegdesign.sheet.drawing import check_ending, save_drawing
from tegdesign.sheet.material_text import doping_words

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

PANELS = (
    ("seebeck_coefficient", "Seebeck coefficient S [uV/K]", 1e6),
    ("resistivity", "resistivity [mohm cm]", 1e5),
    ("thermal_conductivity", "thermal conductivity [W/m/K]", 1.0),
    ("figure_of_merit", "figure of merit zT [1]", 1.0),
)


def figure(material: Material, measured: Material | None = None) -> Figure:
    """Return four panels against temperature: points, the curve the program uses, both parts of kappa, limits.

    Points are those of the material when it is measured, and of ``measured``, which a computed one is laid over.
    """
    from matplotlib.figure import Figure

    drawing = Figure(figsize=(8.0, 7.2), layout="constrained")
    panels = drawing.subplots(2, 2, sharex=True).flat
    computed = material.kind == "bands"
    for axes, (name, label, factor) in zip(panels, PANELS, strict=True):
        function = getattr(material, name)
        points, ends = _measured(material, name)
        fine = np.linspace(*ends, 400)
        axes.plot(fine, factor * function(fine), color="0.35", label="computed" if computed else "interpolated")
        highest = float(np.max(function(fine)))
        if not computed:
            axes.plot(points, factor * function(points), "o", color="black", markersize=4, label="measured")
        elif measured is not None:
            over, value = _measured(measured, name)[0], getattr(measured, name)
            points_label = f"measured: {measured.name}"
            axes.plot(over, factor * value(over), "o", color="black", mfc="none", markersize=5, label=points_label)
            highest = max(highest, float(np.max(value(over))))
        axes.set(xlabel="temperature [K]", ylabel=label)
        axes.xaxis.set_tick_params(labelbottom=True)
        if name == "thermal_conductivity":
            _parts(axes, material)
        if name != "seebeck_coefficient":
            axes.set_ylim(0.0, 1.06 * factor * highest)
        axes.grid(color="0.88", linewidth=0.6)
        _limits(axes, material)
    drawing.axes[0].legend(fontsize=8)
    drawing.suptitle(title(material), fontsize=11)
    drawing.supxlabel(footer(material), fontsize=7.5)
    return drawing


def title(material: Material) -> str:
    """Return name, composition and, of a computed material, doping and grain size."""
    made = f"; {doping_words(material)}" if isinstance(material, BandMaterial) else ""
    return _fold(f"{material.name}: {material.composition}{made}")


def footer(material: Material) -> str:
    """Return what to mind and where the values come from."""
    words = [
        *material.warnings,
        "kappa_e " + material.electronic_basis,
        f"source: {material.source or 'not stated'}" + (f", doi {material.doi}" * bool(material.doi)),
    ]
    return "\n".join(_fold(line, 105) for line in words)


def _parts(axes: Axes, material: Material) -> None:
    """Draw the parts of the carriers and of the lattice into the panel of kappa, with its own legend."""
    fine = np.linspace(*material.range, 200)
    for label, function, dashes in (
        ("carriers", material.electronic_thermal_conductivity, "--"),
        ("lattice", material.lattice_thermal_conductivity, "-."),
    ):
        axes.plot(fine, function(fine), color="0.35", linestyle=dashes, label=label)
    total, *_ = axes.get_lines()
    axes.legend([total, *axes.get_lines()[-2:]], ["whole", "carriers", "lattice"], fontsize=8)


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


def save_figure(material: Material, path: str | os.PathLike[str], measured: Material | None = None) -> None:
    """Draw the figure into a file, the same bytes each time; the ending chooses the format.

    Raises
    ------
    InputError
        Another ending than .png, .pdf or .svg, or a place that cannot be written to.
    """
    check_ending(path)
    save_drawing(figure(material, measured), path, material.name)
