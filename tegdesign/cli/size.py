"""``tegdesign size``: from a brief to a buildable design."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from tegdesign.cli import output
from tegdesign.cli.progress import on_terminal


def size(
    brief: Annotated[Path, typer.Argument(metavar="BRIEF.toml", help="The brief.", show_default=False)],
    to: Annotated[
        Path | None,
        typer.Option(
            "--output",
            "-o",
            metavar="FILE",
            help="Where the design goes; BRIEF.design.toml in this folder if not given.",
        ),
    ] = None,
    sheet: Annotated[
        Path | None, typer.Option(metavar="FILE", help="Write the design sheet as well, .pdf or .md.")
    ] = None,
    json: output.JsonOption = False,
    quiet: Annotated[bool, typer.Option("--quiet", "-q", help="No progress.")] = False,
) -> None:
    """Size a generator for a brief, print its report and write the design file.

    Exit code 0: the brief is met. 1: it cannot be met; the report names the limit and the design is the best there is.

    \b
    Examples:
      tegdesign size examples/flue-gas-plate.toml -o plate.toml --sheet plate.pdf
      tegdesign size examples/flue-gas-plate.toml --json
    """
    from tegdesign.design.size import size as size_brief
    from tegdesign.sheet import check_suffix, write_sheet
    from tegdesign.sheet.sizing import sizing_report

    target = to or Path(f"{brief.stem}.design.toml")
    if sheet is not None:
        check_suffix(sheet)
    output.check_places(brief, target, sheet)
    result = size_brief(brief, progress=on_terminal("sizing", quiet))
    result.design.save(target)
    if sheet is not None:
        write_sheet(result.rating, sheet)
    output.emit(output.json_text(result.to_dict()) if json else sizing_report(result))
    output.note(f"design written to {target}" + (f", sheet to {sheet}" if sheet else ""))
    if not result.met:
        raise typer.Exit(1)
