"""From typed tables to the arrays that the solver works on."""

from __future__ import annotations

from collections.abc import Sequence
from functools import lru_cache
from typing import TYPE_CHECKING, Any, cast

import numpy as np

from tegdesign.design.design import Design
from tegdesign.design.parts import Losses, Made, Stack
from tegdesign.errors import InputError
from tegdesign.material.library import find
from tegdesign.material.material import Material
from tegdesign.module.module import Modules

if TYPE_CHECKING:
    from tegdesign.material.bands.material import BandMaterial


def material(name: str, polarity: str, folder: str | None, made: Made | None = None) -> Material:
    """Return a material by name, made as asked for, and insist on its polarity.

    Raises
    ------
    InputError
        Unknown name, the material is of the other polarity, or it cannot be made so.
    """
    found = find(name, [folder] if folder else [])
    if found.polarity != polarity:
        raise InputError(
            f"materials.{polarity}: '{name}' is {found.polarity}-type; choose one of type {polarity} "
            f"(tegdesign materials --polarity {polarity} lists them)"
        )
    return found if made is None else made_of(found, made, polarity)


def computed(found: Material, polarity: str) -> BandMaterial:
    """Return a material whose properties are computed, so that it can be made in several ways.

    Raises
    ------
    InputError
        It is a table of one sample.
    """
    if found.kind == "bands":  # asked without loading what tables do not need
        return cast("BandMaterial", found)
    raise InputError(
        f"materials.make_{polarity}: '{found.name}' is a table of one sample, its doping and grain size are fixed; use "
        "a material of kind bands (tegdesign materials lists the kinds)"
    )


@lru_cache(maxsize=256)
def made_of(found: Material, made: Made, polarity: str, tolerance: float = 1e-8) -> Material:
    """Return a computed material made as asked for, its curves within ``tolerance`` of the integrals.

    Raises
    ------
    InputError
        It is a table of one sample, or the doping or grain size is out of its bounds.
    """
    if made.as_filed:
        return found
    from tegdesign.material.bands.crystal import Doping

    whole = computed(found, polarity)
    doping = None if made.doping is None else Doping(made.doping, made.doping_hot, made.graded_between)
    return whole.made(doping, made.grain_size, tolerance)


def stack_values(stack: Stack, losses: Losses, turned: bool = False) -> dict[str, float]:
    """Return the members of ``Modules`` that come from the stack, with losses switched off where asked.

    ``turned`` swaps its hot and cold side, for a state in which heat goes the other way.
    """
    conductivity, exponent, transparent = stack.filler_law
    rays = losses.radiation and losses.bypass and transparent
    values: dict[str, float] = {
        "contact_resistivity_n": stack.contact_resistivity_n * losses.contacts,
        "contact_resistivity_p": stack.contact_resistivity_p * losses.contacts,
        "contact_thermal": stack.contact_thermal_resistance * losses.contacts,
        "electrode_thickness": stack.electrode_thickness * losses.electrodes,
        "electrode_resistivity": stack.electrode_resistivity,
        "electrode_coefficient": stack.electrode_temperature_coefficient,
        "electrode_conductivity": stack.electrode_conductivity,
        "filler_conductivity": conductivity * losses.bypass,
        "filler_exponent": exponent,
        "emittance_hot": (stack.emittance_cold if turned else stack.emittance_hot) * rays,
        "emittance_cold": (stack.emittance_hot if turned else stack.emittance_cold) * rays,
        "edge_conductance": stack.bridges * losses.bypass,
        "lead_resistance": stack.lead_resistance * losses.leads,
        "spreading": float(losses.spreading and losses.substrates),
    }
    plates = (stack.cold, stack.hot) if turned else (stack.hot, stack.cold)
    for side, plate in zip(("hot", "cold"), plates, strict=True):
        values[f"interface_{side}"] = plate.interface * losses.interfaces
        values[f"substrate_thickness_{side}"] = plate.substrate_thickness * losses.substrates
        values[f"substrate_conductivity_{side}"] = plate.substrate_conductivity
    return values


def modules_of(
    designs: Sequence[Design], losses: Sequence[Losses] | None = None, turned: Sequence[bool] | None = None
) -> Modules:
    """Return designs of one pair of materials as a batch, each with its own or with the given loss switches.

    ``turned`` tells which stand with hot and cold side swapped.

    Raises
    ------
    InputError
        The designs are not all of the same pair.
    """
    chosen = designs[0].materials
    if any(d.materials.pair != chosen.pair for d in designs):
        raise InputError("materials differ between the designs of one table; rate them one by one")
    pair = [material(*leg, chosen.folder, make) for leg, make in chosen.legs]
    switches = losses or [d.losses for d in designs]
    sides = turned or [False] * len(designs)
    rows = [
        {**stack_values(d.stack, off, swap), **_geometry(d)}
        for d, off, swap in zip(designs, switches, sides, strict=True)
    ]
    columns: dict[str, Any] = {name: np.array([row[name] for row in rows], dtype=float) for name in rows[0]}
    size = len(rows)
    return Modules(pair, np.zeros(size, dtype=np.intp), np.ones(size, dtype=np.intp), **columns)


def _geometry(design: Design) -> dict[str, float]:
    g = design.module
    return {
        "leg_length": g.leg_length,
        "side_n": g.leg_side_n,
        "side_p": g.leg_side_p,
        "pitch": g.pitch,
        "couples": g.couples,
        "footprint": g.width * g.depth,
    }
