"""Cautions: one place for each warning, with its condition, value, limit, text and source.

A rule is a function from a rating to the cautions it triggers; a new rule is a new function in a file of this
folder and a line in ``RULES``.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from tegdesign.design.rating import Caution

if TYPE_CHECKING:
    from tegdesign.design.rating import Rating


def cautions(rating: Rating) -> tuple[Caution, ...]:
    """Return the cautions that a rating triggers, in the order of ``RULES``."""
    from tegdesign.design.caution.rules import RULES

    return tuple(found for rule in RULES for found in rule(rating))
