"""Progress of a long job: one line on the terminal, nothing elsewhere."""

from __future__ import annotations

import sys
from collections.abc import Callable


def on_terminal(what: str, quiet: bool) -> Callable[[float], None]:
    """Return a function that shows the share done on a terminal, and is silent in a pipe or with ``quiet``."""
    if quiet or sys.stderr is None or not sys.stderr.isatty():
        return lambda share: None

    def show(share: float) -> None:
        end = "\r" if share < 1 else "\r" + " " * (len(what) + 6) + "\r"
        sys.stderr.write(f"\r{what} {share:4.0%}{end}")
        sys.stderr.flush()

    return show
