"""A material in words and tables: what it is, where its values come from, what to mind, and the values."""

from __future__ import annotations

import textwrap
from collections.abc import Mapping, Sequence
from typing import Any

from tegdesign.material.bands.describe import words
from tegdesign.material.bands.material import BandMaterial
from tegdesign.material.material import Material
from tegdesign.quantity import write
from tegdesign.sheet.table import table_text

_MEV = 1 / 1.602176634e-22  # meV in a joule, exact
_Spec = tuple[tuple[str, str, float, str], ...]  # head, name of the column, factor, format

_DOPING: _Spec = (("doping [1/cm3]", "doping_1_per_m3", 1e-6, ".3e"),)
_VALUES: _Spec = (
    ("T [K]", "temperature_K", 1.0, ".2f"),
    ("S [uV/K]", "seebeck_coefficient_V_per_K", 1e6, ".2f"),
    ("rho [mohm cm]", "resistivity_ohm_m", 1e5, ".4f"),
    ("kappa [W/m/K]", "thermal_conductivity_W_per_m_K", 1.0, ".4f"),
    ("power factor [mW/m/K2]", "power_factor_W_per_m_K2", 1e3, ".3f"),
    ("zT [1]", "figure_of_merit", 1.0, ".3f"),
    ("kappa_e [W/m/K]", "electronic_thermal_conductivity_W_per_m_K", 1.0, ".4f"),
    ("kappa_lattice [W/m/K]", "lattice_thermal_conductivity_W_per_m_K", 1.0, ".4f"),
)
_CARRIERS: _Spec = (
    ("T [K]", "temperature_K", 1.0, ".2f"),
    ("leading band", "leading_band", 1.0, "s"),
    ("mu [kT]", "reduced_level_kT", 1.0, ".2f"),
    ("mu [meV]", "level_above_edge_J", _MEV, ".1f"),
    ("S [k/e]", "seebeck_coefficient_k_per_e", 1.0, ".3f"),
    ("mu_w [cm2/V/s]", "weighted_mobility_m2_per_V_s", 1e4, ".1f"),
    ("B [1]", "quality_factor", 1.0, ".3f"),
    ("L [1e-8 W ohm/K2]", "lorenz_number_W_ohm_per_K2", 1e8, ".3f"),
    ("bipolar [% of kappa_e]", "bipolar_share", 100.0, ".1f"),
    ("majority [1/cm3]", "majority_density_1_per_m3", 1e-6, ".3e"),
    ("minority [1/cm3]", "minority_density_1_per_m3", 1e-6, ".2e"),
)
_BANDS: _Spec = (
    ("T [K]", "temperature_K", 1.0, ".2f"),
    ("band", "name", 1.0, "s"),
    ("carrier", "carrier", 1.0, "s"),
    ("valleys", "degeneracy", 1.0, "g"),
    ("mass [m_e]", "mass_electron_masses", 1.0, ".4g"),
    ("inertial [m_e]", "inertial_mass_electron_masses", 1.0, ".4g"),
    ("offset [meV]", "edge_offset_J", _MEV, ".1f"),
    ("Kane gap [meV]", "kane_gap_J", _MEV, ".1f"),
    ("mu [kT]", "reduced_level_kT", 1.0, ".2f"),
    ("carriers [1/cm3]", "density_1_per_m3", 1e-6, ".3e"),
    ("share of sigma [%]", "conductivity_share", 100.0, ".2f"),
)
_BEST: _Spec = (
    ("T [K]", "temperature_K", 1.0, ".2f"),
    ("best for", "aim", 1.0, "s"),
    *_DOPING,
    ("zT [1]", "figure_of_merit", 1.0, ".3f"),
    ("power factor [mW/m/K2]", "power_factor_W_per_m_K2", 1e3, ".3f"),
    ("S [uV/K]", "seebeck_coefficient_V_per_K", 1e6, ".1f"),
    ("mu [kT]", "reduced_level_kT", 1.0, ".2f"),
    ("at bound", "at_bound", 1.0, "s"),
)
_LEGEND = (
    "mu: chemical potential above the edge, counted into the band (leading: carries most of the majority current). "
    "mu_w, B: weighted mobility and quality factor of the one acoustic band that would have this S and rho. bipolar: "
    "carriers that go round between bands, of the same kind too. offset: edge from the principal edge, into the band."
)


def _table(columns: Mapping[str, Any], spec: _Spec) -> str:
    cells = [
        ["-" if value != value or value == "" else _cell(value, factor, form) for value in columns[name]]
        for _, name, factor, form in spec
    ]
    right = [k for k, (*_, form) in enumerate(spec) if form != "s"]
    return table_text([head for head, *_ in spec], list(zip(*cells, strict=True)), right=right)


def _cell(value: Any, factor: float, form: str) -> str:
    return str(value) if form == "s" else format(value * factor, form)


def _filled(lines: Sequence[tuple[str, str]]) -> list[str]:
    indent = " " * 17
    return [
        textwrap.fill(text.rstrip("; "), 110, initial_indent=f"  {label:<15}", subsequent_indent=indent,
                      break_long_words=False, break_on_hyphens=False)
        for label, text in lines
        if text
    ]  # fmt: skip


def card(material: Material, told: Mapping[str, Any]) -> str:
    """Return the words about a material; ``told`` is what ``describe`` tells of it."""
    s, rho, kappa = (f"{100 * share:.3g} %" for share in material.uncertainty)
    air = material.air_limit
    entries = [
        ("composition", material.composition),
        ("kind", material.kind),
        ("polarity", material.polarity),
        *(("warning", warning) for warning in material.warnings),
        ("known", f"from {material.range[0]:g} K to {material.range[1]:g} K"),
        ("service limit", f"{material.service_limit.value:g} K; {material.service_limit.basis}"),
        ("air limit", f"{air.value:g} K; {air.basis}" if air else "not stated"),
        ("density", f"{material.density.value:g} kg/m3; {material.density.basis}"),
        *(_computed(material, told) if isinstance(material, BandMaterial) else ()),
        ("kappa_e", material.electronic_basis),
        ("uncertainty", f"S {s}, rho {rho}, kappa {kappa} (1 sigma); {material.uncertainty_basis}"),
        ("source", material.source or "not stated"),
        ("doi", material.doi or "not stated"),
        ("verification", material.verification),
        ("compilation", material.compilation),
        ("obtained", material.obtained),
        ("hazards", material.hazards or "not stated"),
        ("hazard tags", ", ".join(material.hazard_tags) or "none"),
        *(("note", note) for note in material.notes),
        ("file", material.path),
    ]
    return "\n".join([material.name, *_filled(entries)])


def doping_words(material: BandMaterial) -> str:
    """Return doping and, where it has one, grain size."""
    made = material.doping
    n = f"{made.cold * 1e-6:.4g}" + (f" (cold) to {made.hot * 1e-6:.4g} (hot)" if made.hot is not None else "")
    grain = "" if material.grain_size is None else f", grains {_size(material.grain_size)}"
    return f"{n} 1/cm3{grain}"


def _size(grain: float) -> str:
    return write(grain, "m", "nm" if grain < 1e-6 else "um")


def _computed(material: BandMaterial, told: Mapping[str, Any]) -> list[tuple[str, str]]:
    low, high = material.doping_bounds
    carriers = "electrons" if material.polarity == "n" else "holes"
    entries = [
        ("made at", f"{carriers} {doping_words(material)}"),
        ("doping bounds", f"{low * 1e-6:.4g} to {high * 1e-6:.4g} 1/cm3; {material.doping_basis}"),
    ]
    if material.grain_bounds is not None:
        finest, coarsest = map(_size, material.grain_bounds)
        entries.append(("grain bounds", f"{finest} to {coarsest}"))
    head, *deviations = told["laid_over"]["words"]
    return [
        *entries,
        ("gap", told["gap_model"]),
        ("lattice", told["lattice_model"]),
        ("parameters", told["parameters"]["basis"]),
        ("laid over", f"{head.removeprefix('laid over ')}" + " (doping and grains of the file)" * bool(deviations)),
        *(("", text) for text in deviations),
    ]


def tables(columns: Mapping[str, Any], told: Mapping[str, Any], against_doping: bool = False) -> str:
    """Return the values as tables: of any material its properties, of a computed one level, bands and best doping."""
    front = _DOPING if against_doping else ()
    parts = [_table(columns, front + _VALUES)]
    if told:
        parts += [_table(columns, front + _CARRIERS), *_band_tables(told), _best_table(told["best_doping"])]
        parts.append(textwrap.fill(_LEGEND, 110, break_on_hyphens=False))
    return "\n\n".join(parts)


def _band_tables(told: Mapping[str, Any]) -> list[str]:
    rows = [
        {name: value[k] if hasattr(value, "shape") else value for name, value in band.items()}
        for k in range(len(told["bands"][0]["temperature_K"]))
        for band in told["bands"]
    ]
    scattering = [("", f"{band['name']}: {words(band['scattering'])}") for band in told["parameters"]["bands"]]
    return [_table(_columns(rows), _BANDS), "\n".join(["  scattering", *_filled(scattering)])]


def _best_table(records: Sequence[Mapping[str, Any]]) -> str:
    return _table(_columns(records), _BEST)


def _columns(rows: Sequence[Mapping[str, Any]]) -> dict[str, list[Any]]:
    return {name: [row[name] for row in rows] for name in rows[0]}
