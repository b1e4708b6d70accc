"""``tegdesign materials``: list the library, show one material, check a file, print the schema of files."""

from __future__ import annotations

import re
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Annotated, Any, Literal

import typer
import typer.core

from tegdesign.cli import output
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
    given = (polarity, covers, service_above, with_, without, folder, json, csv, to)
    if context.invoked_subcommand is not None:
        if any(given):
            raise typer.BadParameter(f"options of '{context.invoked_subcommand}' go behind it")
        return
    from tegdesign.quantity import parse

    style = output.style(json, csv)
    span = _span(covers) if covers else None
    limit = parse(service_above, "K") if service_above else 0.0
    wanted = []
    for material in _checked_tags(_all(folder or ()), [*(with_ or ()), *(without or ())]):
        tags = set(material.hazard_tags)
        if (
            polarity in (None, material.polarity)
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
    "peak_figure_of_merit", "peak_temperature_K", "hazard_tags", "source", "doi", "verification", "warnings",
)  # fmt: skip


def _summary(material: Material) -> dict[str, Any]:
    import numpy as np

    table = material.properties()
    peak = int(np.nanargmax(table["figure_of_merit"]))
    air = material.air_limit
    values = (
        material.name, material.polarity, material.composition, *material.range, material.service_limit.value,
        material.service_limit.basis, air.value if air else None, air.basis if air else "",
        material.density.value, material.density.basis,
        float(table["figure_of_merit"][peak]), float(table["temperature_K"][peak]), material.hazard_tags,
        material.source, material.doi, material.verification, material.warnings,
    )  # fmt: skip
    return dict(zip(_SUMMARY, values, strict=True))


@materials.command()
def show(
    name: Annotated[
        str, typer.Argument(metavar="NAME", help="Name in the library, or path of a .toml file.")
    ],
    at: Annotated[
        str | None,
        typer.Option(metavar="LIST", help='Temperatures instead of the measured ones, "300 K, 400 K".'),
    ] = None,
    figure: Annotated[
        Path | None, typer.Option(metavar="FILE", help="Draw the four curves into a .png, .pdf or .svg file.")
    ] = None,
    folder: FolderOption = None,
    json: output.JsonOption = False,
    csv: output.CsvOption = False,
    to: output.OutputOption = None,
) -> None:
    """Show one material: what it is, where its values come from, what to mind, and the values.

    \b
    Examples:
      tegdesign materials skutterudite-n
      tegdesign materials skutterudite-n --at "300, 500, 700 K" --csv
      tegdesign materials skutterudite-n --figure skutterudite-n.png
    """
    from tegdesign.material import library

    style = output.style(json, csv)
    material = library.find(name, folder or ())
    table = material.properties(_temperatures(at) if at else None)
    if style == "json":
        text = output.json_text(_description(material) | {"properties": table})
    elif style == "csv":
        text = output.csv_text(list(table), list(zip(*table.values(), strict=True)))
    else:
        text = _card(material) + "\n\n" + _values(table)
    if figure is not None:
        from tegdesign.sheet.material import save_figure

        save_figure(material, figure)
    output.emit(text, to)


def _description(material: Material) -> dict[str, Any]:
    share = dict(
        zip(("seebeck_coefficient", "resistivity", "thermal_conductivity"), material.uncertainty, strict=True)
    )
    return _summary(material) | {
        "compilation": material.compilation,
        "obtained": material.obtained,
        "relative_standard_uncertainty": share | {"basis": material.uncertainty_basis},
        "hazards": material.hazards,
        "notes": material.notes,
        "path": material.path,
    }


def _card(material: Material) -> str:
    import textwrap

    s, rho, kappa = (f"{100 * share:.3g} %" for share in material.uncertainty)
    air = material.air_limit
    entries = [
        ("composition", material.composition),
        ("polarity", material.polarity),
        *(("warning", warning) for warning in material.warnings),
        ("known", f"from {material.range[0]:g} K to {material.range[1]:g} K"),
        ("service limit", f"{material.service_limit.value:g} K; {material.service_limit.basis}"),
        ("air limit", f"{air.value:g} K; {air.basis}" if air else "not stated"),
        ("density", f"{material.density.value:g} kg/m3; {material.density.basis}"),
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
    indent = " " * 17
    lines = [material.name]
    for label, words in entries:
        if words:
            text = words.rstrip("; ")
            lines.append(textwrap.fill(text, 110, initial_indent=f"  {label:<15}", subsequent_indent=indent,
                                       break_long_words=False, break_on_hyphens=False))  # fmt: skip
    return "\n".join(lines)


def _values(table: dict[str, Any]) -> str:
    heads = ["T [K]", "S [uV/K]", "rho [mohm cm]", "kappa [W/m/K]", "power factor [mW/m/K2]", "zT [1]"]
    factors, digits = (1.0, 1e6, 1e5, 1.0, 1e3, 1.0), (2, 2, 4, 4, 3, 3)
    columns = [
        ["-" if value != value else f"{value * factor:.{places}f}" for value in column]
        for column, factor, places in zip(table.values(), factors, digits, strict=True)
    ]
    return output.table_text(heads, list(zip(*columns, strict=True)), right=range(6))


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
