"""``tegdesign materials``: list the library, show a material, check a file, fit a table, print the schema of files."""

from __future__ import annotations

import re
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any, Literal

import typer
import typer.core

from tegdesign.cli import output
from tegdesign.cli.materials_fit import fit
from tegdesign.errors import InputError

if TYPE_CHECKING:
    from tegdesign.material.material import Material, Stated


class NameOrCommand(typer.core.TyperGroup):
    """Group in which a word that is no command is the name of a material to show."""

    def resolve_command(self, ctx: Any, args: list[str]) -> Any:
        """Put ``show`` before a word that is no command."""
        return super().resolve_command(ctx, args if args[0] in self.commands else ["show", *args])


materials = typer.Typer(
    cls=NameOrCommand,
    invoke_without_command=True,
    subcommand_metavar="[NAME | COMMAND] [OPTIONS]",
    add_completion=False,
    rich_markup_mode=None,
)

FolderOption = Annotated[
    list[Path] | None,
    typer.Option("--folder", metavar="DIR", help="Look in DIR first; may be repeated."),
]


@materials.callback()
def list_materials(
    context: typer.Context,
    polarity: Annotated[Literal["n", "p"] | None, typer.Option(help="Only n-type or only p-type.")] = None,
    kind: Annotated[
        str | None, typer.Option(metavar="KIND", help="Only measured ones (table) or only computed ones (bands).")
    ] = None,
    covers: Annotated[
        str | None,
        typer.Option(metavar="SPAN", help='Only those measured over the whole span, "300 K..500 K".'),
    ] = None,
    service_above: Annotated[
        str | None, typer.Option(metavar="T", help='Only those with a service limit of at least T, "600 K".')
    ] = None,
    with_: Annotated[
        list[str] | None, typer.Option("--with", metavar="TAG", help="Only those with this hazard tag.")
    ] = None,
    without: Annotated[
        list[str] | None,
        typer.Option("--without", metavar="TAG", help="Only those without it; may be repeated."),
    ] = None,
    folder: FolderOption = None,
    json: output.JsonOption = False,
    csv: output.CsvOption = False,
    to: output.OutputOption = None,
) -> None:
    """List the materials, or show the one named NAME (tegdesign materials show --help tells how).

    \b
    Examples:
      tegdesign materials --polarity n --covers "300 K..800 K" --without lead
      tegdesign materials skutterudite-n --at "300 K, 500 K, 700 K"
      tegdesign materials check materials/skutterudite-n.toml
    """
    given = (polarity, kind, covers, service_above, with_, without, folder, json, csv, to)
    if context.invoked_subcommand is not None:
        if any(given):
            raise typer.BadParameter(f"options of '{context.invoked_subcommand}' go behind it")
        return
    from tegdesign.material.file import KINDS
    from tegdesign.quantity import parse

    style = output.style(json, csv)
    if kind not in (None, *KINDS):
        raise InputError(f"--kind: '{kind}' is no kind of material; the kinds are {', '.join(KINDS)}")
    span = _span(covers) if covers else None
    limit = parse(service_above, "K") if service_above else 0.0
    wanted = []
    for material in _checked_tags(_all(folder or ()), [*(with_ or ()), *(without or ())]):
        tags = set(material.hazard_tags)
        if (
            polarity in (None, material.polarity)
            and kind in (None, material.kind)
            and (span is None or (material.range[0] <= span[0] and span[1] <= material.range[1]))
            and material.service_limit.value >= limit
            and tags >= set(with_ or ())
            and not tags & set(without or ())
        ):
            wanted.append(material)
    if not wanted:
        output.note("tegdesign: no material fits; loosen a filter")
    output.emit(_listing(wanted, style), to)


def _all(folders: Sequence[Path]) -> list[Material]:
    from tegdesign.material import library

    return [library.find(name, folders) for name in library.names(folders)]


def _checked_tags(found: list[Material], asked: list[str]) -> list[Material]:
    """Refuse a tag that no material has: a slip in ``--without`` would let everything pass."""
    known = sorted({tag for material in found for tag in material.hazard_tags})
    for tag in asked:
        if tag not in known:
            raise InputError(f"no material has the hazard tag '{tag}'; the tags are {', '.join(known)}")
    return found


def _listing(found: list[Material], style: output.Style) -> str:
    records = [_summary(material) for material in found]
    if style == "json":
        return output.json_text(records)
    if style == "csv":
        columns = list(_SUMMARY)
        return output.csv_text(columns, [[_cell(record[name]) for name in columns] for record in records])
    rows = []
    for material, record in zip(found, records, strict=True):
        rows.append(
            [
                material.name,
                material.polarity,
                f"{material.range[0]:.0f} to {material.range[1]:.0f}",
                _limit(material.service_limit),
                _limit(material.air_limit),
                f"{record['peak_figure_of_merit']:.2f}",
                f"{record['peak_temperature_K']:.0f}",
                ", ".join(material.hazard_tags),
                record["kind"],
                material.composition,
            ]
        )
    heads = [
        "name",
        "type",
        "known [K]",
        "service limit [K]",
        "air limit [K]",
        "peak zT",
        "at [K]",
        "hazard tags",
        "kind",
    ]
    return output.table_text([*heads, "composition"], rows, right=(2, 5, 6))


def _limit(stated: Stated | None) -> str:
    if stated is None:
        return "-"
    return f"{stated.value:.0f}" + (" (memory)" if "memory" in stated.basis else "")


def _cell(value: object) -> object:
    return "; ".join(map(str, value)) if isinstance(value, tuple) else value


_SUMMARY = (
    "name", "polarity", "composition", "temperature_min_K", "temperature_max_K", "service_limit_K",
    "service_limit_basis", "air_limit_K", "air_limit_basis", "density_kg_per_m3", "density_basis",
    "peak_figure_of_merit", "peak_temperature_K", "hazard_tags", "source", "doi", "verification", "warnings", "kind",
)  # fmt: skip


def _summary(material: Material) -> dict[str, Any]:
    import numpy as np


    kind = material.kind
    fine = None if kind == "table" else np.linspace(*material.range, 201)  # no measured points to choose from
    table = material.properties(fine)
    peak = int(np.nanargmax(table["figure_of_merit"]))
    air = material.air_limit
    values = (
        material.name, material.polarity, material.composition, *material.range, material.service_limit.value,
        material.service_limit.basis, air.value if air else None, air.basis if air else "",
        material.density.value, material.density.basis,
        float(table["figure_of_merit"][peak]), float(table["temperature_K"][peak]), material.hazard_tags,
        material.source, material.doi, material.verification, material.warnings, kind,
    )  # fmt: skip
    return dict(zip(_SUMMARY, values, strict=True))


@materials.command()
def show(
    name: Annotated[
        str, typer.Argument(metavar="NAME", help="Name in the library, or path of a .toml file.")
    ],
    at: Annotated[
        str | None,
        typer.Option(
            metavar="LIST",
            help='Temperatures of the values, of the bands and of the best doping, "300 K, 400 K"; '
            "if not given, the measured ones or steps of 50 K, and for bands and best doping the middle of the range.",
        ),
    ] = None,
    doping: Annotated[
        str | None, typer.Option(metavar="N", help='Look at another doping, "3e19 1/cm^3" (kind bands only).')
    ] = None,
    grain_size: Annotated[
        str | None, typer.Option(metavar="D", help='Look at another grain size, "200 nm" (kind bands only).')
    ] = None,
    against_doping: Annotated[
        bool,
        typer.Option(
            "--against-doping", help="Values and figure against doping, at the temperatures of --at (kind bands only)."
        ),
    ] = False,
    figure: Annotated[
        Path | None, typer.Option(metavar="FILE", help="Draw the curves into a .png, .pdf or .svg file.")
    ] = None,
    folder: FolderOption = None,
    json: output.JsonOption = False,
    csv: output.CsvOption = False,
    to: output.OutputOption = None,
) -> None:
    """Show one material: what it is, where its values come from, what to mind, and the values.

    Of one computed from bands also level, carriers and bands, the best doping, and how far it is off the measured
    material of its family.

    \b
    Examples:
      tegdesign materials skutterudite-n
      tegdesign materials skutterudite-n --at "300, 500, 700 K" --csv
      tegdesign materials skutterudite-n --figure skutterudite-n.png
      tegdesign materials lead-telluride-p-bands --doping "5e19 1/cm^3" --at "600 K"
      tegdesign materials lead-telluride-p-bands --against-doping --at "400, 700 K" --figure doping.png
    """
    from tegdesign.material import library
    from tegdesign.material.bands import describe, view
    from tegdesign.sheet import material_text

    style = output.style(json, csv)
    folders = folder or ()
    material = view.made(
        library.find(name, folders),
        None if doping is None else 1e6 * _value("--doping", doping, "1/cm^3"),
        None if grain_size is None else _value("--grain-size", grain_size, "m"),
    )
    asked = _temperatures(at) if at else None
    places = asked or [view.middle(material)]
    if against_doping:
        table = view.against_doping(view.computed(material, "--against-doping"), places)
    else:
        table = view.properties(material, asked)
    told = describe.describe(material, places, folders)
    if style == "json":
        text = output.json_text(_description(material) | told | {"properties": table})
    elif style == "csv":
        wide = describe.wide(material, table, told)
        text = output.csv_text(list(wide), list(zip(*wide.values(), strict=True)))
    else:
        text = material_text.card(material, told) + "\n\n" + material_text.tables(table, told, against_doping)
    if figure is not None:
        measured = describe.measured_twin(material, folders)
        if against_doping:
            from tegdesign.sheet import material_doping

            computed = view.computed(material, "--against-doping")
            material_doping.save_figure(computed, places, figure, measured, told["laid_over"]["doping_1_per_m3"])
        else:
            from tegdesign.sheet.material import save_figure

            save_figure(material, figure, measured)
    output.emit(text, to)


def _value(option: str, text: str, unit: str) -> float:
    """Return the number of an option in ``unit``; what is wrong with it is said of the option."""
    from tegdesign.quantity import parse

    try:
        return parse(text, unit)
    except InputError as error:
        raise InputError(f"{option}: {error}") from error


def _description(material: Material) -> dict[str, Any]:
    share = dict(
        zip(("seebeck_coefficient", "resistivity", "thermal_conductivity"), material.uncertainty, strict=True)
    )
    return _summary(material) | {
        "compilation": material.compilation,
        "obtained": material.obtained,
        "relative_standard_uncertainty": share | {"basis": material.uncertainty_basis},
        "electronic_thermal_conductivity_basis": material.electronic_basis,
        "hazards": material.hazards,
        "notes": material.notes,
        "path": material.path,
    }


@materials.command()
def check(
    files: Annotated[list[Path], typer.Argument(metavar="FILE...", help="Material files to look at.")],
    json: output.JsonOption = False,
    csv: output.CsvOption = False,
    to: output.OutputOption = None,
) -> None:
    """Say all that is wrong (error) or doubtful (warning) in material files; exit code 2 when one has errors.

    \b
    Example:
      tegdesign materials check materials/skutterudite-n.toml
    """
    from tegdesign.material.check import check as findings_of

    style = output.style(json, csv)
    keys = ("line", "severity", "what", "value", "limit", "mend")
    found = [(path, finding) for path in files for finding in findings_of(path)]
    records = [{"file": str(path)} | {key: getattr(finding, key) for key in keys} for path, finding in found]
    if style == "json":
        output.emit(output.json_text(records), to)
    elif style == "csv":
        output.emit(output.csv_text(["file", *keys], [list(record.values()) for record in records]), to)
    else:
        output.emit("\n".join(f"{path}:{f.line}: {f.severity}: {f.text}" for path, f in found), to)
    errors = sum(finding.severity == "error" for _, finding in found)
    output.note(f"{len(files)} file(s) checked: {errors} error(s), {len(found) - errors} warning(s)")
    if errors:
        raise typer.Exit(2)


@materials.command()
def schema(to: output.OutputOption = None) -> None:
    """Print the JSON Schema of material files, for editors that complete and check while you type.

    \b
    Example:
      tegdesign materials schema -o material.schema.json
    """
    from tegdesign.material.file import schema as schema_of

    output.emit(output.json_text(schema_of()), to)


materials.command()(fit)


def _temperatures(text: str) -> list[float]:
    """Return kelvin of a list such as ``300 K, 500 K`` or ``300, 500 K`` (the last unit serves for all)."""
    from tegdesign.quantity import parse

    *items, last = (item.strip() for item in text.split(","))
    kelvin = parse(last, "K")
    unit = re.sub(r"^[+-]?[\d.]+([eE][+-]?\d+)?\s*", "", last)
    return [*(parse(f"{item} {unit}" if item[-1:].isdigit() else item, "K") for item in items), kelvin]


def _span(text: str) -> tuple[float, float]:
    ends = text.split("..")
    if len(ends) != 2:
        raise InputError(f"span '{text}' is not of the form '300 K..500 K'")
    low, high = _temperatures(",".join(ends))
    if not low < high:
        raise InputError(f"span '{text}' must rise")
    return low, high
