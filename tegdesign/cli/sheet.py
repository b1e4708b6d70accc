"""``tegdesign sheet``: the design sheet of a given design, as PDF or Markdown."""

from __future__ import annotations

from pathlib import Path
from typing import Annotated

import typer

from tegdesign.cli import output


def sheet(
    design: Annotated[Path, typer.Argument(metavar="DESIGN.toml", help="The design.", show_default=False)],
    to: Annotated[
        Path | None,
        typer.Option(
            "--output",
            "-o",
            metavar="FILE",
            help="Where the sheet goes, .pdf or .md; Markdown on the screen if not given.",
        ),
    ] = None,
) -> None:
    """Write the sheet of a design: verdict, tables, drawings, curves, materials, cautions, assumptions.

    Exit code 1: the sheet is written, but a limit or requirement of the design is missed.

    \b
    Examples:
      tegdesign sheet plate.toml -o plate.pdf
      tegdesign sheet plate.toml > plate.md
    """
    from tegdesign.sheet import check_suffix, write_sheet

    screen = to is None or str(to) == "-"
    if to is not None and not screen:
        check_suffix(to)
    output.check_places(design, to)
    from tegdesign.design.rate import rate

    rating = rate(design)
    if to is None or screen:
        from tegdesign.sheet.markdown import sheet_markdown

        output.emit(sheet_markdown(rating))
    else:
        write_sheet(rating, to)
        output.note(f"sheet written to {to}")
    if not rating.met:
        raise typer.Exit(1)
