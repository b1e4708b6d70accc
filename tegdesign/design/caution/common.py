"""What the rules share: who decides in the end, and the name of rules of the trade."""

from __future__ import annotations

from tegdesign.design.rating import Caution

DEFER = "Local codes and licensed practice decide."
PRACTICE = "common practice, no source"


def caution(id: str, title: str, value: str, limit: str, text: str, source: str) -> Caution:
    """Return a caution whose text ends by deferring to local codes and licensed practice."""
    return Caution(id, title, value, limit, f"{text} {DEFER}", source)
