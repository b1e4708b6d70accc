"""Results as words, tables, figures and pages."""

from __future__ import annotations

import os
import sys
from pathlib import Path
from types import ModuleType
from typing import TYPE_CHECKING

from tegdesign.errors import InputError

if TYPE_CHECKING:
    from tegdesign.design.design import Design
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


def write_sheet(rating: Rating | Design | str | os.PathLike[str], path: str | os.PathLike[str]) -> None:
    """Write the sheet of a rating, a design or a design file, whole or not at all, as PDF or Markdown by the suffix.

    Raises
    ------
    InputError
        Another suffix than .pdf or .md, or a place that cannot be written to.
    """
    from tegdesign.design.rate import rate
    from tegdesign.design.rating import Rating
    from tegdesign.document import write_whole

    suffix = check_suffix(path)
    if not isinstance(rating, Rating):
        rating = rate(rating)
    if suffix == ".pdf":
        from tegdesign.sheet.pdf import sheet_pdf

        write_whole(path, sheet_pdf(rating))
    else:
        from tegdesign.sheet.markdown import sheet_markdown

        write_whole(path, sheet_markdown(rating))


class _Room(ModuleType):
    """This room as the twin of ``tegdesign sheet``: ``tegdesign.sheet(rating, "sheet.pdf")``."""

    def __call__(self, rating: Rating | Design | str | os.PathLike[str], path: str | os.PathLike[str]) -> None:
        """Do what ``write_sheet`` does."""
        write_sheet(rating, path)


sys.modules[__name__].__class__ = _Room
