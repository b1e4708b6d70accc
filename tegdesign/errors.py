"""Exceptions of the package; every message says where, what value, which limit and how to mend it."""

from __future__ import annotations


class TegdesignError(Exception):
    """Base of all errors that tegdesign raises on purpose; ``exit_code`` is what the command line returns."""

    exit_code = 1


class InputError(TegdesignError):
    """What the user wrote cannot be used: unknown key, wrong unit, impossible value, missing file."""

    exit_code = 2


class DataRangeError(InputError):
    """A material would be used at temperatures where its properties were not measured."""


class ConvergenceError(TegdesignError):
    """A solver did not reach its tolerance, so there is no answer."""


def closest(name: str, known: list[str] | tuple[str, ...]) -> str:
    """Return the words ``; closest: a, b`` for an unknown name, or an empty text when nothing is near."""
    import difflib

    near = difflib.get_close_matches(name, list(known), n=3, cutoff=0.5)
    starts = [other for other in known if other.startswith(name) and other not in near][:3]
    near = (near + starts)[:4]
    return f"; closest: {', '.join(near)}" if near else ""
