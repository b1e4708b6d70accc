"""All about a material that is no column: its parameters in words, bands, best dopings, and how far it is off."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import asdict
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.errors import InputError
from tegdesign.material import library
from tegdesign.material.bands.material import BandMaterial
from tegdesign.material.bands.overlay import overlay
from tegdesign.material.bands.view import Columns, bands, best, computed
from tegdesign.material.material import Material


def describe(material: Material, temperature: ArrayLike, folders: Iterable[library.Folder] = ()) -> dict[str, Any]:
    """Return all that is not a column: doping, grain size, parameters, bands and best dopings at [K], ``laid_over``.

    Names carry their unit. Of a measured material there is nothing of the kind, so {}.

    Raises
    ------
    DataRangeError
        A temperature lies outside the range of the material.
    InputError
        The material was not read from a file, or the file has gone.
    """
    if not isinstance(material, BandMaterial):
        return {}
    found, given = best(material, temperature), parameters(material)
    made = material.doping
    return {
        "doping_1_per_m3": made.cold if made.hot is None else (made.cold, made.hot),
        "doping_bounds_1_per_m3": material.doping_bounds,
        "doping_basis": material.doping_basis,
        "grain_size_m": material.grain_size,
        "grain_size_bounds_m": material.grain_bounds,
        "parameters": given,
        "gap_model": "" if given["gap"] is None else words(given["gap"]),
        "lattice_model": words(given["lattice"]),
        "bands": bands(material, temperature),
        "best_doping": found,
        "laid_over": laid_over(material, folders),
    }


def measured_twin(material: Material, folders: Iterable[library.Folder] = ()) -> Material | None:
    """Return the measured material that a computed one was held against; None where there is none to be found."""
    if not isinstance(material, BandMaterial) or not material.laid_over:
        return None
    try:
        return library.find(material.laid_over, folders)
    except InputError:
        return None  # ``laid_over`` says why


def laid_over(material: BandMaterial, folders: Iterable[library.Folder] = ()) -> dict[str, Any]:
    """Return how far the material, as its file has it, is off the measured one the file names: in figures and words.

    Other dopings and grain sizes are not the measured ones, so they are not compared. A measured material that is
    not to be found is no error: the words say so, and there are no deviations.
    """
    told: dict[str, Any] = {"measured": material.laid_over, "doping_1_per_m3": None, "deviations": [], "words": []}
    if not material.laid_over:
        return told | {"words": ["nothing: its file names no measured material"]}
    filed = computed(library.find(material.path), "overlay") if material.path else material
    try:
        over = overlay(filed, library.find(material.laid_over, folders))
    except InputError as error:
        return told | {"words": [f"{material.laid_over}: not compared, {error}"]}
    return {
        "measured": material.laid_over,
        "doping_1_per_m3": filed.doping.cold,
        "deviations": [asdict(one) for one in over.deviations],
        "words": list(over.texts),
    }


def wide(material: Material, columns: Columns, told: Mapping[str, Any]) -> Columns:
    """Return ``columns`` with what ``describe`` tells as further columns of equal length, for files of one table.

    Bands are counted from 1; the best dopings are those at ``best_doping_at_K``: the temperature of the row where
    ``told`` has it, and its first one elsewhere.
    """
    if not isinstance(material, BandMaterial):
        return columns
    t = columns["temperature_K"]
    more: Columns = {}
    for k, one in enumerate(bands(material, t, columns["doping_1_per_m3"]), 1):
        more |= {f"band{k}_{name}": value for name, value in one.items() if name != "temperature_K"}
        more[f"band{k}_scattering"] = words(told["parameters"]["bands"][k - 1]["scattering"])
    records = {(row["temperature_K"], row["aim"]): row for row in told["best_doping"]}
    first = told["best_doping"][0]["temperature_K"]
    places = [at if (at, "as made") in records else first for at in t.tolist()]
    more["best_doping_at_K"] = places
    for aim, value in (("figure of merit", "figure_of_merit"), ("power factor", "power_factor_W_per_m_K2")):
        rows = [records[place, aim] for place in places]
        more[f"best_doping_for_{aim.replace(' ', '_')}_1_per_m3"] = [row["doping_1_per_m3"] for row in rows]
        more[f"best_{value}"] = [row[value] for row in rows]
    lowest, highest = told["doping_bounds_1_per_m3"]
    more |= {"doping_lowest_1_per_m3": lowest, "doping_highest_1_per_m3": highest}
    more |= {name: told[name] for name in ("grain_size_m", "gap_model", "lattice_model")}
    more["laid_over"] = told["laid_over"]["measured"]
    for one in told["laid_over"]["deviations"]:
        more[f"{one['name']}_largest_deviation_percent"] = one["largest_percent"]
        more[f"{one['name']}_rms_deviation_percent"] = one["rms_percent"]
    return columns | {name: value if np.ndim(value) else [value] * t.size for name, value in more.items()}


def parameters(material: BandMaterial) -> dict[str, Any]:
    """Return gap, bands, lattice and their basis as the file of the material gives them, texts with units.

    Raises
    ------
    InputError
        The material was not read from a file, or the file has gone.
    """
    from pydantic import TypeAdapter

    from tegdesign import document
    from tegdesign.material.bands.carriers import BandEntry
    from tegdesign.material.bands.laws import EnergyLaw
    from tegdesign.material.bands.phonons import AnyLattice

    if not material.path:
        raise InputError(f"{material.name} was not read from a file, which would tell its parameters; write it first")
    data = document.parse_toml(document.read_text(material.path), material.path)

    def typed(model: Any, value: Any) -> Any:
        adapter: TypeAdapter[Any] = TypeAdapter(model)
        return adapter.dump_python(adapter.validate_python(value))

    return {
        "gap": typed(EnergyLaw, data["gap"]) if "gap" in data else None,
        "bands": typed(list[BandEntry], data["bands"]),
        "lattice": typed(AnyLattice, data["lattice"]),
        "basis": data.get("parameters_basis", ""),
    }


def words(entry: Any) -> str:
    """Return a part of ``parameters`` in words: its kind, then what it says in brackets; what adds is joined by +."""
    if isinstance(entry, Mapping):
        said = ", ".join(
            f"{key.replace('_', ' ')} {words(value)}"
            for key, value in entry.items()
            if key != "kind" and value is not None
        )
        kind_of = entry.get("kind", "")
        return f"{kind_of} ({said})".lstrip() if said else str(kind_of)
    if isinstance(entry, (list, tuple)):
        return (" + " if any(isinstance(one, Mapping) for one in entry) else ", ").join(map(words, entry))
    return f"{entry:g}" if isinstance(entry, float) else str(entry)
