"""The command line: one module a command, imported only when that command is called."""

from __future__ import annotations

import os
import sys
from importlib import import_module
from typing import Annotated, Any

import typer
import typer.core
import typer.main

import tegdesign
from tegdesign.errors import TegdesignError

# One line a command: the module tegdesign.cli.<name> holds a function or a typer.Typer of the same name.
COMMANDS = {
    "size": "Size a generator for a brief: design file, report, sheet.",
    "rate": "Rate a given design: report, operating table, curves, maps.",
    "compare": "Rank pairs of materials for a brief.",
    "rows": "Stand the module of a design in rows along its source stream.",
    "array": "Join unequal modules: mismatch, faults, connections.",
    "sheet": "Write the design sheet of a given design, PDF or Markdown.",
    "materials": "List, show and check thermoelectric materials.",
}


class Commands(typer.core.TyperGroup):
    """Group that knows its commands by name alone and turns the errors of the package into one line."""

    def __init__(self, **settings: Any) -> None:
        """Fill the group with the names and short helps that its own help lists."""
        listed = {name: typer.core.TyperCommand(name, help=text) for name, text in COMMANDS.items()}
        super().__init__(**settings | {"commands": listed})

    def resolve_command(self, ctx: Any, args: list[str]) -> Any:
        """Import the module of the command called."""
        name, command, rest = super().resolve_command(ctx, args)
        return (name, _command(name), rest) if name else (name, command, rest)

    def invoke(self, ctx: Any) -> Any:
        """Run the command; an error raised on purpose becomes one line on stderr and its exit code."""
        try:
            return super().invoke(ctx)
        except TegdesignError as error:
            if ctx.params["debug"]:
                import traceback

                traceback.print_exc()
            typer.echo(f"tegdesign: {' '.join(str(error).split())}", err=True)
            raise typer.Exit(error.exit_code) from error


def _command(name: str) -> Any:
    found = getattr(import_module(f"tegdesign.cli.{name}"), name)
    if not isinstance(found, typer.Typer):
        single = typer.Typer(add_completion=False, rich_markup_mode=None)
        single.command(name)(found)
        found = single
    return typer.main.get_command(found)


def _print_version(wanted: bool) -> None:
    if wanted:
        typer.echo(f"tegdesign {tegdesign.__version__}")
        raise typer.Exit


app = typer.Typer(
    cls=Commands,
    add_completion=False,
    rich_markup_mode=None,
    no_args_is_help=True,
    context_settings={"help_option_names": ["-h", "--help"]},
)


@app.callback()
def tegdesign_command(
    version: Annotated[
        bool, typer.Option("--version", callback=_print_version, is_eager=True, help="Print the version.")
    ] = False,
    debug: Annotated[bool, typer.Option("--debug", help="Show the traceback of an error as well.")] = False,
) -> None:
    """Design thermoelectric generator modules, from a heat source to a sized, rated and documented module.

    \b
    Example:
      tegdesign size examples/flue-gas-plate.toml -o plate.toml --sheet plate.pdf
    """


def main() -> None:
    """Run the command line; exit code 0 done, 1 job failed, 2 wrong input."""
    # The matrices here are small: more threads only wait for each other. Set before numpy is imported.
    for library in ("OPENBLAS", "OMP", "MKL"):
        os.environ.setdefault(f"{library}_NUM_THREADS", "1")
    typer.main.get_command(app).main(args=sys.argv[1:], prog_name="tegdesign")
