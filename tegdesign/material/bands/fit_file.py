"""A fit as a material file of kind bands that the rest of the program can use."""

from __future__ import annotations

import os
from pathlib import Path
from typing import Any

from pydantic import ValidationError

import tegdesign
from tegdesign.errors import InputError
from tegdesign.material.bands.file import BandsFile
from tegdesign.material.bands.fit_result import PROPERTIES, Fit
from tegdesign.material.file import Source, Uncertainty
from tegdesign.material.material import Stated
from tegdesign.quantity import SI

# Deviations [%] beyond which the file warns: S, conductivity, thermal conductivity. Common practice, no source.
LIMITS = (10.0, 15.0, 15.0)
DOPING_SPAN = (0.2, 5.0)  # of the doping of the table, unless bounds are given; common practice, no source


def bands_file(fit: Fit, name: str, doping_bounds: tuple[float, float] | None = None) -> BandsFile:
    """Return the fitted material under a new name, its parameters to six digits.

    Parameters
    ----------
    fit : Fit
        The fit.
    name : str
        Name of the material, as in the file name.
    doping_bounds : tuple of float, optional
        [1/m^3]; a fifth and five times the fitted doping if not given.

    Raises
    ------
    InputError
        The name is that of the table or none for a material, or the bounds do not hold the doping.
    """
    table = fit.table
    check_name(f"{name}.toml", table.name)
    values = {one.name: one.parameter.rounded(one.value) for one in fit.parameters}
    doping = values["doping"]
    low, high = doping_bounds or (fit.model.parameter("doping").rounded(doping * share) for share in DOPING_SPAN)
    limits = {"service_limit": table.service_limit, "density": table.density}
    if table.air_limit is not None:
        limits["air_limit"] = table.air_limit
    data: dict[str, Any] = {
        "kind": "bands",
        "name": name,
        "composition": table.composition,
        "polarity": table.polarity,
        "caution": _caution(fit),
        **_stated(limits, table.name),
        "hazards": table.hazards,
        "hazard_tags": table.hazard_tags,
        "notes": tuple(fit.remarks),
        "temperatures": tuple(SI(t) for t in table.range),
        "doping": SI(doping),
        "doping_bounds": (SI(low), SI(high)),
        "doping_basis": _doping_basis(fit, doping_bounds is not None),
        "laid_over": table.name,
        "parameters_basis": _basis(fit),
        "source": _source(fit),
        "uncertainty": _uncertainty(fit),
        **fit.model.parts(values, digits=6),
    }
    try:
        return BandsFile.model_validate(data)
    except ValidationError as error:
        first = error.errors(include_url=False)[0]
        place = ".".join(map(str, first["loc"])) or "file"
        words = str(first.get("ctx", {}).get("error", first["msg"]))
        raise InputError(f"the fit makes no material file, {place}: {words}") from error


def save(fit: Fit, path: str | os.PathLike[str], doping_bounds: tuple[float, float] | None = None) -> None:
    """Write the fitted material to NAME.toml, which becomes its name; raises as ``bands_file``."""
    check_name(path, fit.table.name)
    bands_file(fit, Path(path).stem, doping_bounds).write(path)


def check_name(path: str | os.PathLike[str], table: str) -> None:
    """Refuse a path from which no name of a material follows, or that of the table."""
    import re

    if Path(path).suffix != ".toml":
        raise InputError(f"{path}: a material file ends in .toml")
    if not re.fullmatch("[a-z0-9][a-z0-9.+-]*", Path(path).stem):
        raise InputError(
            f"{path}: '{Path(path).stem}' is no name for a material; use small letters, digits, dots, + and -"
        )
    if Path(path).stem == table:
        raise InputError(f"{path}: '{table}' is the name of the measured material; give the fitted one another name")


def _stated(limits: dict[str, Stated], table: str) -> dict[str, Any]:
    """Return values of the table with their basis, which says whose they are."""
    data: dict[str, Any] = {}
    for key, stated in limits.items():
        data |= {key: SI(stated.value), f"{key}_basis": f"as {table}: {stated.basis or 'no basis stated'}"}
    return data


def _caution(fit: Fit) -> str:
    first, last = fit.table.range
    head = f"computed from bands fitted to {fit.table.name} from {first:.4g} K to {last:.4g} K, not measured; "
    beyond = [
        f"{one.text} (limit {limit:g} %)"
        for one, limit in zip(fit.deviations, LIMITS, strict=True)
        if abs(one.largest_percent) > limit
    ]
    if beyond:
        return f"{head}the model misses the table: {'; '.join(beyond)}; at other dopings unproven"
    s, sigma, kappa = (abs(one.largest_percent) for one in fit.deviations)
    return (
        f"{head}at its own doping within {s:.1f} % in the Seebeck coefficient, {sigma:.1f} % in conductivity and "
        f"{kappa:.1f} % in thermal conductivity; at other dopings unproven"
    )


def _doping_basis(fit: Fit, given: bool) -> str:
    by_name = {one.name: one for one in fit.parameters}
    doping, mass = by_name["doping"], by_name["mass"]
    whose = "held as given" if doping.held else f"from the fit, for a mass of {mass.text} m_e ({mass.basis})"
    span = "bounds as given" if given else f"bounds {DOPING_SPAN[0]:g} and {DOPING_SPAN[1]:g} times that, unproven"
    return f"doping {whose}; {span}"


def _basis(fit: Fit) -> str:
    parts = []
    for one in fit.parameters:
        words = one.basis
        if not one.held and not one.at_bound:
            spread = one.parameter.spread(one.value, max(one.sigma, one.common_sigma))
            words = f"adjusted, +- {one.parameter.text(one.parameter.short(spread, 2))}"
        parts.append(f"{one.name} {one.text} ({words})")
    return (
        f"fitted to {fit.table.name} by tegdesign {tegdesign.__version__}, materials fit, weighted least squares of S, "
        f"ln rho and ln kappa; {fit.model.text}; chi-square {fit.chi_square:.4g} at {fit.degrees_of_freedom} degrees "
        f"of freedom; {'; '.join(parts)}"
    )


def _source(fit: Fit) -> Source:
    table = fit.table
    return Source(
        citation=table.source,
        doi=table.doi,
        verification=f"of the measured values: {table.verification}" if table.verification else "",
        compilation=table.compilation,
        obtained=f"computed from parameters fitted to {table.name}",
    )


def _uncertainty(fit: Fit) -> Uncertainty:
    """Return the uncertainty of the table and the rms deviation from it, as the root of the sum of squares."""
    shares = {
        name: min(float(f"{(share**2 + (one.rms_percent / 100) ** 2) ** 0.5:.3g}"), 0.99)
        for name, share, one in zip(PROPERTIES, fit.table.uncertainty, fit.deviations, strict=True)
    }
    basis = (
        f"that of {fit.table.name} ({fit.table.uncertainty_basis}) and the rms deviation from it, as the root of the "
        "sum of squares; at other dopings more"
    )
    return Uncertainty(basis=basis, **shares)
