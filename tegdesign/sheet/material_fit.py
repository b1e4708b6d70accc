"""A fit of bands to a measured material in words, tables and a picture."""

from __future__ import annotations

import os
import textwrap
from typing import TYPE_CHECKING

import numpy as np

from tegdesign.material.bands.fit_model import REFERENCE, Prediction
from tegdesign.material.bands.fit_result import FAILS, PROPERTIES, Fit, Fitted
from tegdesign.material.curve import Array
from tegdesign.quantity import conversion
from tegdesign.sheet.drawing import check_ending, plain, save_drawing
from tegdesign.sheet.table import table_text

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_PANELS = (
    ("Seebeck coefficient S [uV/K]", 1e6),
    ("resistivity [mohm cm]", 1e5),
    ("thermal conductivity [W/m/K]", 1.0),
)
_WORDS = ("S", "rho", "kappa")
_SIGNS = ("o", "s", "^")


def text(fit: Fit) -> str:
    """Return the fit for reading: parameters, what they are worth, residuals, where the model fails."""
    parts = [
        f"{fit.table.name}: {fit.model.text}; {int(fit.points.known.sum())} values, "
        f"{len(fit.adjusted)} parameters told, best of {fit.starts} starts",
        f"parameters at {REFERENCE:g} K, uncertainties 1 sigma\n{_parameters(fit)}",
        f"what the table tells whichever of mass and doping is held\n{_combinations(fit)}",
        f"model less measured (means in units of the uncertainty)\n{_residuals(fit)}",
        f"chi-square {fit.chi_square:.4g}, {fit.degrees_of_freedom} degrees of freedom, "
        f"{fit.reduced_chi_square:.3g} each; points beyond {FAILS:g} sigma: {_failures(fit)}",
        f"correlations\n{_correlations(fit)}",
        "\n".join(_filled(f"mind: {remark}") for remark in fit.remarks),
    ]
    return "\n\n".join(part for part in parts if part)


def _filled(line: str) -> str:
    return textwrap.fill(line, 110, subsequent_indent="      ", break_long_words=False, break_on_hyphens=False)


def _parameters(fit: Fit) -> str:
    rows = [
        [one.name, *one.text.split(" ", 1), *_spreads(one), one.basis, one.parameter.meaning]
        if one.parameter.unit
        else [one.name, one.text, "1", *_spreads(one), one.basis, one.parameter.meaning]
        for one in fit.parameters
    ]
    heads = ["parameter", "value", "unit", "own errors", "common errors", "how", "meaning"]
    return table_text(heads, rows, right=(1, 3, 4))


def _spreads(one: Fitted) -> list[str]:
    """Return both uncertainties in the unit of the value as it is shown."""
    unit = one.text.split(" ", 1)[1] if one.parameter.unit else ""
    factor, _ = conversion(unit, one.parameter.unit)
    spreads = (one.parameter.spread(one.value, sigma) / factor for sigma in (one.sigma, one.common_sigma))
    return ["-" if spread != spread else f"{spread:.2g}" for spread in spreads]


def _combinations(fit: Fit) -> str:
    shown = {"m^2/V/s": ("cm^2/V/s", 1e4), "1/m^3": ("1/cm^3", 1e-6)}
    rows = []
    for one in fit.combinations:
        unit, factor = shown[one["unit"]]
        numbers = (one["value"], one["uncertainty"], one["uncertainty_common_error"])
        rows.append([one["name"], *(f"{factor * number:.4g}" for number in numbers), unit])
    return table_text(["combination", "value", "own errors", "common errors", "unit"], rows, right=(1, 2, 3))


def _residuals(fit: Fit) -> str:
    rows = [
        [
            one.name.replace("_", " "), f"{one.largest_percent:+.1f}", f"{one.at_K:.4g}", f"{one.rms_percent:.1f}",
            *(f"{trend[key]:+.2f}" for key in ("cold_sigma", "middle_sigma", "hot_sigma")),
        ]
        for one, trend in zip(fit.deviations, fit.trends, strict=True)
    ]  # fmt: skip
    rows[1][4:] = [f"{-float(cell):+.2f}" for cell in rows[1][4:]]  # residuals are of rho, this line of its inverse
    heads = ["property", "largest [%]", "at [K]", "rms [%]", "cold third", "middle third", "hot third"]
    return table_text(heads, rows, right=(1, 2, 3, 4, 5, 6))


def _failures(fit: Fit) -> str:
    words = []
    for name, short in zip(PROPERTIES, _WORDS, strict=True):
        places = [
            f"{one['temperature_K']:.4g} K ({one['residual_sigma']:+.1f})"
            for one in fit.failures
            if one["property"] == name
        ]
        words += [f"{short} at {', '.join(places)}"] if places else []
    return "; ".join(words) or "none"


def _correlations(fit: Fit) -> str:
    names, matrix = fit.adjusted, fit.correlation
    rows = [[name, *(f"{matrix[i, k]:+.2f}" for k in range(i + 1))] for i, name in enumerate(names)]
    full = [row + [""] * (len(names) + 1 - len(row)) for row in rows]
    return table_text(["", *(str(k + 1) for k in range(len(names)))], _numbered(full), right=range(1, len(names) + 1))


def _numbered(rows: list[list[str]]) -> list[list[str]]:
    return [[f"{k} {row[0]}", *row[1:]] for k, row in enumerate(rows, 1)]


def figure(fit: Fit) -> Figure:
    """Return measured points with their uncertainty, the model, its parts of kappa, and the residuals."""
    from matplotlib.figure import Figure

    drawing = Figure(figsize=(8.0, 7.2), layout="constrained")
    panels = drawing.subplots(2, 2, sharex=True).flat
    t, fine = fit.points.temperature, np.linspace(fit.points.temperature[0], fit.points.temperature[-1], 200)
    predict = Prediction(fit.model, fine)
    curves = predict(fit.values)
    rows = zip(panels, _PANELS, curves, fit.points.measured, fit.points.sigma, strict=False)
    for axes, (label, factor), curve, measured, sigma in rows:
        axes.errorbar(
            t, factor * measured, factor * sigma, fmt="o", color="black", mfc="none", ecolor="0.65", markersize=5,
            elinewidth=0.8, label="measured, 1 sigma",
        )  # fmt: skip
        axes.plot(fine, factor * curve, color="0.35", label="model")
        axes.set(ylabel=label)
    _parts(drawing.axes[2], fit, fine, curves[2])
    _residual_panel(drawing.axes[3], fit)
    for axes in drawing.axes:
        axes.set_xlabel("temperature [K]")
        axes.xaxis.set_tick_params(labelbottom=True)
        axes.grid(color="0.88", linewidth=0.6)
    for axes, room in zip(drawing.axes[1:3], (1.15, 1.35), strict=True):  # for the legend
        axes.set_ylim(0.0, room * axes.get_ylim()[1])
    for axes in drawing.axes:
        axes.legend(fontsize=8)
    drawing.suptitle(textwrap.fill(plain(f"{fit.table.name}: {fit.model.text}"), 80), fontsize=11)
    chi = f"chi-square {fit.chi_square:.3g} at {fit.degrees_of_freedom} degrees of freedom"
    drawing.supxlabel("\n".join([chi, *(one.text for one in fit.deviations)]), fontsize=7.5)
    return drawing


def _parts(axes: Axes, fit: Fit, fine: Array, kappa: Array) -> None:
    lattice = fit.model.crystal(fit.values).lattice.conductivity(fine)
    axes.plot(fine, kappa - lattice, color="0.35", linestyle="--", label="carriers")
    axes.plot(fine, lattice, color="0.35", linestyle="-.", label="lattice")


def _residual_panel(axes: Axes, fit: Fit) -> None:
    for row, word, sign, grey in zip(fit.residuals, _WORDS, _SIGNS, ("0.0", "0.4", "0.6"), strict=True):
        known = np.isfinite(row)
        axes.plot(fit.points.temperature[known], row[known], f"{sign}-", color=grey, mfc="none", lw=0.8, label=word)
    for level in (-FAILS, FAILS):
        axes.axhline(level, color="0.5", linestyle=":", linewidth=0.9)
    axes.axhline(0.0, color="0.5", linewidth=0.8)
    low, high = axes.get_ylim()
    axes.set(ylabel="model less measured [uncertainty]", ylim=(min(low, -1.2 * FAILS), max(high, 1.2 * FAILS)))


def save_figure(fit: Fit, path: str | os.PathLike[str]) -> None:
    """Draw the figure into a file, the same bytes each time; the ending chooses the format.

    Raises
    ------
    InputError
        Another ending than .png, .pdf or .svg, or a place that cannot be written to.
    """
    check_ending(path)
    save_drawing(figure(fit), path, f"fit of {fit.table.name}")
