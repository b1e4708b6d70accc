"""Results as words, tables, figures and pages."""

from __future__ import annotations

import os
from pathlib import Path
from typing import TYPE_CHECKING

from tegdesign.errors import InputError

if TYPE_CHECKING:
    from tegdesign.design.rating import Rating

SUFFIXES = (".pdf", ".md")


def check_suffix(path: str | os.PathLike[str]) -> str:
    """Return the suffix of a sheet's path in small letters.

    Raises
    ------
    InputError
        Another suffix than .pdf or .md.
    """
    suffix = Path(path).suffix.lower()
    if suffix not in SUFFIXES:
        raise InputError(f"{path}: a sheet ends in {' or '.join(SUFFIXES)}; change the ending")
    return suffix


def write_sheet(rating: Rating, path: str | os.PathLike[str]) -> None:
    """Write the sheet of a rating whole or not at all, as PDF or Markdown by the suffix of the path.

    Raises
    ------
    InputError
        Another suffix than .pdf or .md, or a place that cannot be written to.
    """
    from tegdesign.document import write_whole

    if check_suffix(path) == ".pdf":
        from tegdesign.sheet.pdf import sheet_pdf

        write_whole(path, sheet_pdf(rating))
    else:
        from tegdesign.sheet.markdown import sheet_markdown

        write_whole(path, sheet_markdown(rating))
