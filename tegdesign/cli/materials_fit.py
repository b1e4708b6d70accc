"""``tegdesign materials fit``: from a measured table to bands and lattice."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated, Literal

import typer

from tegdesign.cli import output
from tegdesign.cli.progress import on_terminal
from tegdesign.errors import InputError


def fit(
    name: Annotated[
        str, typer.Argument(metavar="TABLE", help="A measured material: name in the library, or path of a .toml file.")
    ],
    bands: Annotated[int, typer.Option(metavar="1|2", min=1, max=2, help="Majority bands.")] = 1,
    minority: Annotated[
        bool, typer.Option("--minority/--no-minority", help="With or without a band across the gap.")
    ] = True,
    dispersion: Annotated[
        Literal["parabolic", "kane"], typer.Option(help="Of the bands on both sides of the gap.")
    ] = "parabolic",
    scattering: Annotated[
        Literal["acoustic", "alloy", "polar", "ionised", "constant"],
        typer.Option(help="Power of the energy; the power of temperature is adjusted except with alloy (-0.5)."),
    ] = "acoustic",
    lattice: Annotated[
        Literal["constant", "inverse", "inverse power", "alloy"],
        typer.Option(help="Lattice conductivity: constant, 1/T, a free power of 1/T, 1/T with disorder."),
    ] = "inverse power",
    doping: Annotated[
        str | None,
        typer.Option(metavar="N", help='Known doping, as the Hall density of a paper, "4e19 1/cm^3"; frees the mass.'),
    ] = None,
    mass: Annotated[
        float | None,
        typer.Option(metavar="M", help="Known density-of-states mass, all valleys, in electron masses."),
    ] = None,
    hold: Annotated[
        list[str] | None,
        typer.Option(metavar="NAME=VALUE", help='Hold another parameter, "gap=0.3 eV"; may be repeated.'),
    ] = None,
    free: Annotated[
        list[str] | None,
        typer.Option(metavar="NAME", help="Adjust a parameter that is usually held, mass_exponent; may be repeated."),
    ] = None,
    doping_bounds: Annotated[
        str | None,
        typer.Option(
            metavar="SPAN", help='For the file, "1e19 1/cm^3..1e20 1/cm^3"; 0.2 to 5 times the doping if not given.'
        ),
    ] = None,
    to: Annotated[
        Path | None,
        typer.Option("--output", "-o", metavar="NAME.toml", help="Write a material file of kind bands."),
    ] = None,
    figure: Annotated[
        Path | None, typer.Option(metavar="FILE", help="Draw points and model into a .png, .pdf or .svg file.")
    ] = None,
    folder: Annotated[
        list[Path] | None, typer.Option("--folder", metavar="DIR", help="Look in DIR first; may be repeated.")
    ] = None,
    json: output.JsonOption = False,
    csv: output.CsvOption = False,
    quiet: Annotated[bool, typer.Option("--quiet", "-q", help="No progress.")] = False,
) -> None:
    """Fit bands and a lattice to measured S, resistivity and thermal conductivity, and say how far to trust them.

    S, resistivity and thermal conductivity tell doping / mass^1.5 and mobility x mass^1.5, never the three apart: mass
    or doping is held, a mass of 1 electron mass if neither is given. --csv prints measured and modelled values.

    \b
    Examples:
      tegdesign materials fit bismuth-telluride-p-sb1.54 -o my-telluride-p.toml --figure fit.png
      tegdesign materials fit magnesium-silicide-tin-n --bands 2 --doping "2e20 1/cm^3" --hold "gap=0.5 eV"
      tegdesign materials fit lead-telluride-p --no-minority --free mass_exponent --json
    """
    from tegdesign.material import library
    from tegdesign.material.bands.fit import fit as fit_table
    from tegdesign.material.bands.fit_file import check_name, save
    from tegdesign.sheet import material_fit
    from tegdesign.sheet.drawing import check_ending

    style = output.style(json, csv)
    span = None if doping_bounds is None else _span(doping_bounds)
    if span is not None and to is None:
        raise InputError("--doping-bounds is for the file; add -o NAME.toml")
    if figure is not None:
        check_ending(figure)
    table = library.find(name, folder or ())
    if to is not None:
        check_name(to, table.name)
    output.check_places(Path(table.path), to, figure)
    known = [f"doping={doping}"] * (doping is not None) + [f"mass={mass}"] * (mass is not None)
    result = fit_table(
        table, bands=bands, minority=minority, dispersion=dispersion, scattering=scattering, lattice=lattice,
        hold=_held([*known, *(hold or ())]), free=free or (), progress=on_terminal("fitting", quiet),
    )  # fmt: skip
    if to is not None:
        save(result, to, span)
    if figure is not None:
        material_fit.save_figure(result, figure)
    if style == "json":
        text = output.json_text(result.to_dict())
    elif style == "csv":
        columns = result.columns()
        text = output.csv_text(list(columns), list(zip(*columns.values(), strict=True)))
    else:
        text = material_fit.text(result)
    output.emit(text)
    written = [f"{what} written to {path}" for what, path in (("material", to), ("figure", figure)) if path is not None]
    if written:
        output.note(", ".join(written))


def _held(given: list[str]) -> dict[str, float]:
    """Return values [SI] by name of texts ``NAME=VALUE``, each once."""
    from tegdesign.material.bands.fit_model import unit_of
    from tegdesign.quantity import parse

    held: dict[str, float] = {}
    for text in given:
        name, sign, value = (part.strip() for part in text.partition("="))
        if not sign or not name:
            raise InputError(f"--hold '{text}' is not of the form 'gap=0.3 eV'")
        if name in held:
            raise InputError(f"{name} is given twice; give it once")
        try:
            held[name] = parse(value, unit_of(name))
        except InputError as error:
            raise InputError(f"{name}: {error}") from error
    return held


def _span(text: str) -> tuple[float, float]:
    from tegdesign.quantity import parse

    ends = text.split("..")
    if len(ends) != 2:
        raise InputError(f"--doping-bounds '{text}' is not of the form '1e19 1/cm^3..1e20 1/cm^3'")
    low, high = (parse(end, "1/m^3") for end in ends)
    if not low < high:
        raise InputError(f"--doping-bounds '{text}' must rise")
    return low, high
