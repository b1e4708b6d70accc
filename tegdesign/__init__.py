"""Thermoelectric generator module design: from a heat source to a sized, rated and documented module.

Each command has its twin here; briefs and designs are given as typed objects or as paths of their files::

    import tegdesign

    sizing = tegdesign.size("examples/flue-gas-plate.toml")
    sizing.design.save("plate.toml")
    print(sizing.rating.rated.power_W, sizing.rating.to_frame())
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from tegdesign.design.array import array
    from tegdesign.design.brief import Brief, read_brief
    from tegdesign.design.compare import compare
    from tegdesign.design.design import Design, read_design
    from tegdesign.design.rate import rate
    from tegdesign.design.rows import rows
    from tegdesign.design.scan import curve, map_over, operating_table
    from tegdesign.design.size import size
    from tegdesign.errors import ConvergenceError, DataRangeError, InputError, TegdesignError
    from tegdesign.material.library import find as find_material
    from tegdesign.material.library import materials
    from tegdesign.material.library import names as material_names
    from tegdesign.sheet import write_sheet

__version__ = "0.1.0"

# Name here -> where it lives. Imported on first use, so that the command line starts without numpy and pydantic.
_HOMES = {
    "Brief": "design.brief:Brief",
    "ConvergenceError": "errors:ConvergenceError",
    "DataRangeError": "errors:DataRangeError",
    "Design": "design.design:Design",
    "InputError": "errors:InputError",
    "TegdesignError": "errors:TegdesignError",
    "array": "design.array:array",
    "compare": "design.compare:compare",
    "curve": "design.scan:curve",
    "find_material": "material.library:find",
    "map_over": "design.scan:map_over",
    "materials": "material.library:materials",
    "material_names": "material.library:names",
    "operating_table": "design.scan:operating_table",
    "rate": "design.rate:rate",
    "read_brief": "design.brief:read_brief",
    "read_design": "design.design:read_design",
    "rows": "design.rows:rows",
    "size": "design.size:size",
    "write_sheet": "sheet:write_sheet",
}

__all__ = [
    "Brief",
    "ConvergenceError",
    "DataRangeError",
    "Design",
    "InputError",
    "TegdesignError",
    "array",
    "compare",
    "curve",
    "find_material",
    "map_over",
    "material_names",
    "materials",
    "operating_table",
    "rate",
    "read_brief",
    "read_design",
    "rows",
    "size",
    "write_sheet",
]


def __getattr__(name: str) -> Any:
    """Import a name of ``__all__`` when it is first asked for."""
    from importlib import import_module

    if name == "sheet":  # the room itself is the twin of the command: it can be called
        return import_module("tegdesign.sheet")
    if name not in _HOMES:
        raise AttributeError(f"module 'tegdesign' has no attribute '{name}'")
    module, attribute = _HOMES[name].split(":")
    value = globals()[name] = getattr(import_module(f"tegdesign.{module}"), attribute)
    return value


def __dir__() -> list[str]:
    """List what is here, imported or not."""
    return sorted({*globals(), *__all__})
