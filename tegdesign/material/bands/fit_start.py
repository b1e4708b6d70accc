"""Where a fit starts: values read off the measured points by rules of thumb, several where a fit may get stuck."""

from __future__ import annotations

from collections.abc import Mapping
from itertools import product

import numpy as np

from tegdesign.errors import InputError
from tegdesign.material.bands.fit_model import REFERENCE, Model, Prediction
from tegdesign.material.curve import Array
from tegdesign.material.material import Material
from tegdesign.material.transport.constants import BOLTZMANN, CHARGE
from tegdesign.material.transport.derived import level_from_seebeck

_OFFSETS = (0.03, 0.12, 0.25)  # [eV] of a second band
_LEAST_LATTICE = 0.1  # share of kappa


def starts(model: Model, table: Material, held: Mapping[str, float]) -> list[dict[str, float]]:
    """Return sets of values [SI] to start from, ``held`` ones as given.

    Level from S at the coldest third of the points, where the minority matters least; gap by the rule of Goldsmid
    and Sharp 1999, J. Electron. Mater. 28, 869, doi 10.1007/s11664-999-0211-y: 2 e |S| T at the largest |S|;
    mobility and lattice so that rho and kappa of the coldest third are met.
    """
    parameters = model.parameters()
    base = {name: parameter.start for name, parameter in parameters.items()} | dict(held)
    base |= _filling(model, table, base, held)
    choices: dict[str, list[float]] = {}
    if "gap" in base and "gap" not in held:
        choices["gap"] = _gaps(model, table)
    if model.minority and "minority_mobility_ratio" not in held:
        choices["minority_mobility_ratio"] = [1.0, 0.2]
    if model.bands == 2 and "second_offset" not in held:
        choices["second_offset"] = [offset * CHARGE for offset in _OFFSETS]
    found = []
    for chosen in product(*choices.values()):
        values = base | dict(zip(choices, chosen, strict=True))
        scaled = _scaled(model, table, values, held)
        found.append({name: min(max(value, parameters[name].low), parameters[name].high)
                      for name, value in scaled.items()})  # fmt: skip
    return found


def _cold(curve_temperature: Array) -> Array:
    """Return the coldest third of the temperatures [K] of a property."""
    return curve_temperature[: max(1, curve_temperature.size // 3)]


def _filling(model: Model, table: Material, base: Mapping[str, float], held: Mapping[str, float]) -> dict[str, float]:
    """Return doping and mass that one parabolic band needs for the Seebeck coefficient of the cold points."""
    curve = table.seebeck_coefficient
    sign = -1.0 if model.polarity == "n" else 1.0
    right = sign * curve.value > 0
    if not right.any():
        raise InputError(f"{table.name}: no Seebeck coefficient has the sign of polarity {model.polarity}")
    seebeck, temperature = np.abs(curve.value[right]), curve.temperature[right]
    k = max(1, temperature.size // 3)
    seebeck, temperature = seebeck[:k], temperature[:k]
    level = level_from_seebeck(seebeck, base["energy_exponent"])
    single = Model(model.polarity, model.range, minority=False, lattice="constant")
    one = {name: parameter.start for name, parameter in single.parameters().items()}
    density = single.crystal(one).bands.carriers(temperature, -sign * level * BOLTZMANN * temperature)[0]
    # the carriers of mass 1; of another they are more by mass^1.5
    dense = float(np.median(density * (temperature / REFERENCE) ** (1.5 * base["mass_exponent"])))
    if "mass" not in held:
        return {"mass": (base["doping"] / dense) ** (2 / 3)}
    return {} if "doping" in held else {"doping": dense * base["mass"] ** 1.5}


def _gaps(model: Model, table: Material) -> list[float]:
    if not model.minority:  # only the bend of Kane's dispersion tells it
        return [0.3 * CHARGE, CHARGE]
    curve = table.seebeck_coefficient
    peak = int(np.argmax(np.abs(curve.value)))
    rule = 2 * CHARGE * float(np.abs(curve.value[peak]) * curve.temperature[peak])
    return [rule, 1.6 * rule] if peak < curve.temperature.size - 1 else [1.3 * rule, 2.5 * rule]


def _scaled(model: Model, table: Material, values: dict[str, float], held: Mapping[str, float]) -> dict[str, float]:
    """Return the values with mobility and lattice changed so that cold rho and kappa are met."""
    t = _cold(table.resistivity.temperature)
    _, rho, _ = Prediction(model, t)(values)
    factor = float(np.exp(np.median(np.log(rho / table.resistivity(t)))))
    changed = values if "mobility" in held else values | {"mobility": values["mobility"] * factor}
    if "lattice" in held:
        return changed
    t = _cold(table.thermal_conductivity.temperature)
    _, _, kappa = Prediction(model, t)(changed)
    measured = table.thermal_conductivity(t)
    lattice = model.crystal(changed).lattice.conductivity(t)
    wanted = np.maximum(measured - (kappa - lattice), _LEAST_LATTICE * measured)
    return changed | {"lattice": changed["lattice"] * float(np.median(wanted / lattice))}
