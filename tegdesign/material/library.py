"""Finding materials by name: user folders first, then the library that comes with the program."""

from __future__ import annotations

import os
from collections.abc import Iterable
from dataclasses import replace
from functools import lru_cache
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from tegdesign.errors import InputError, closest
from tegdesign.material.material import Material, Polarity

if TYPE_CHECKING:
    import pandas as pd

VARIABLE = "TEGDESIGN_MATERIALS"
Folder = str | os.PathLike[str]


def shipped() -> Path:
    """Return the folder of the library: inside the installed package, or beside it in a checkout.

    Raises
    ------
    InputError
        The installation lacks its materials.
    """
    package = Path(__file__).resolve().parent.parent
    if (package / "materials").is_dir():
        return package / "materials"
    if (package.parent / "pyproject.toml").is_file() and (package.parent / "materials").is_dir():
        return package.parent / "materials"
    raise InputError(
        f"{package / 'materials'}: the library of materials is missing; install the package again"
    )


def search_path(folders: Iterable[Folder] = ()) -> list[Path]:
    """Return the folders in which materials are looked for, in order: given, environment, shipped.

    Raises
    ------
    InputError
        A given folder is none.
    """
    given = [(Path(folder), "") for folder in folders]
    named = os.environ.get(VARIABLE, "").split(os.pathsep)
    given += [
        (Path(folder), f" (named in the environment variable {VARIABLE})") for folder in named if folder
    ]
    for folder, why in given:
        if not folder.is_dir():
            raise InputError(f"{folder}: no such folder of materials{why}")
    return [*(folder for folder, _ in given), shipped()]


def _catalogue(folders: Iterable[Folder]) -> dict[str, list[Path]]:
    """Return the files of each name, the one that wins first."""
    found: dict[str, list[Path]] = {}
    seen: set[Path] = set()
    for folder in search_path(folders):
        if (real := folder.resolve()) in seen:
            continue
        seen.add(real)
        for path in sorted(folder.glob("*.toml")):
            found.setdefault(path.stem, []).append(path)
    return found


def names(folders: Iterable[Folder] = ()) -> list[str]:
    """Return the names of all materials that ``find`` knows, sorted."""
    return sorted(_catalogue(folders))


class Materials(tuple[Material, ...]):
    """Materials in the order of their names."""

    __slots__ = ()

    def to_frame(self) -> pd.DataFrame:
        """Return one row a material: polarity, composition, range and service limit [K], best zT, hazards."""
        import pandas as pd

        rows = []
        for m in self:
            first, last = m.range
            best = float(np.max(m.figure_of_merit(np.linspace(first, last, 201))))
            rows.append((m.name, m.polarity, m.composition, first, last, m.service_limit.value, best, m.hazard_tags))
        columns = ["name", "polarity", "composition", "T_first_K", "T_last_K", "service_limit_K", "best_zT"]
        columns.append("hazard_tags")
        return pd.DataFrame(rows, columns=columns).set_index("name")


def materials(polarity: Polarity | None = None, folders: Iterable[Folder] = ()) -> Materials:
    """Return all materials that ``find`` knows, of one polarity where asked.

    Raises
    ------
    InputError
        A file of the folders cannot be used.
    """
    folders = tuple(folders)
    every = (find(name, folders) for name in names(folders))
    return Materials(m for m in every if polarity in (None, m.polarity))


def find(name: str | os.PathLike[str], folders: Iterable[Folder] = ()) -> Material:
    """Return a material by its name in the library, or by a path that ends in ``.toml``.

    Parameters
    ----------
    name : str or path
        Name as listed by ``names``, or path of a material file.
    folders : iterable of path
        Folders searched before those of the environment variable ``TEGDESIGN_MATERIALS`` and the library.

    Raises
    ------
    InputError
        Unknown name (with the closest ones), or a file that cannot be used.
    """
    if Path(name).suffix == ".toml":
        return _load(Path(name))
    known = _catalogue(folders)
    if name not in known:
        near = closest(str(name), list(known))
        raise InputError(f"unknown material '{name}'{near or '; tegdesign materials lists all'}")
    first, *others = known[str(name)]
    material = _load(first)
    if material.name != name:
        raise InputError(f"{first}: its key name says '{material.name}'; make file name and name agree")
    if others:
        hidden = ", ".join(str(path) for path in others)
        warning = f"{name}: taken from {first}, which hides the one of the same name in {hidden}"
        material = replace(material, warnings=(*material.warnings, warning))
    return material


def _load(path: Path) -> Material:
    try:
        stamp = path.stat().st_mtime_ns
    except OSError:
        stamp = 0  # reading it words the error
    return _cached(path, path.absolute(), stamp)


@lru_cache(maxsize=512)
def _cached(path: Path, place: Path, stamp: int) -> Material:
    from tegdesign.material.file import read

    return read(path).to_material(str(path))
