"""Drawings into files: the ending chooses the format, the same bytes each time."""

from __future__ import annotations

import io
import os
from pathlib import Path
from typing import TYPE_CHECKING, Any

from tegdesign.document import write_whole
from tegdesign.errors import InputError

if TYPE_CHECKING:
    from matplotlib.figure import Figure

FORMATS = (".png", ".pdf", ".svg")


def plain(text: str) -> str:
    """Return a text that a drawing shows letter by letter: no formulas, no characters without a shape."""
    from tegdesign.sheet.page import printable

    return printable(text).replace("$", r"\$")


def check_ending(path: str | os.PathLike[str]) -> str:
    """Return the format of a figure file.

    Raises
    ------
    InputError
        Another ending than .png, .pdf or .svg.
    """
    ending = Path(path).suffix.lower()
    if ending not in FORMATS:
        raise InputError(f"{path}: a figure ends in {', '.join(FORMATS)}")
    return ending


def save_drawing(drawing: Figure, path: str | os.PathLike[str], salt: str = "tegdesign") -> None:
    """Write a drawing whole or not at all, without time stamps.

    Raises
    ------
    InputError
        Another ending than .png, .pdf or .svg, or a place that cannot be written to.
    """
    import matplotlib as mpl

    ending = check_ending(path)
    stream = io.BytesIO()
    metadata: dict[str, Any] = {".png": {}, ".pdf": {"CreationDate": None}, ".svg": {"Date": None}}[ending]
    with mpl.rc_context({"svg.hashsalt": salt}):
        drawing.savefig(stream, format=ending[1:], dpi=150, metadata=metadata)
    write_whole(path, stream.getvalue())
