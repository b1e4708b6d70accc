"""What each further row of modules along a stream still brings."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.module.module import Modules
from tegdesign.system.boundary import Boundary, Stream
from tegdesign.system.load.base import LoadLaw, MixedLoads
from tegdesign.system.rows import rows_point


@dataclass(frozen=True)
class Growth:
    """Power of 1 to N rows of the same kind, designs in the first axis, SI units.

    ``area`` [m^2] (B, N) is the footprint of all modules, ``power`` [W] (B, N) that of all rows together, ``limit`` [W]
    (B,) the most that any number of rows can have.
    """

    area: Array
    power: Array
    limit: Array

    @property
    def added(self) -> Array:
        """Power that the k-th row brings [W] (B, N)."""
        return np.diff(self.power, axis=1, prepend=0.0)

    def rows_for(self, share: float) -> NDArray[np.intp]:
        """Return the least number of rows that has ``share`` of the limit (B,).

        Raises
        ------
        InputError
            The share is not between 0 and 1, or the rows looked at do not reach it.
        """
        if not 0 < share < 1:
            raise InputError(f"share = {share:g} of the power is not between 0 and 1; choose 0.9, for example")
        there = self.power >= share * self.limit[:, None]
        short = np.flatnonzero(~there.any(axis=1))
        if short.size:
            k, most = short[0], self.power.shape[1]
            raise InputError(
                f"{most} rows reach {self.power[k].max() / self.limit[k]:.1%} of the power that can ever be had "
                f"(design {k}), not {share:.1%}; look at more rows"
            )
        return np.asarray(np.argmax(there, axis=1) + 1)


def growth(
    modules: Modules,
    source: Boundary,
    sink: Boundary,
    load: LoadLaw | MixedLoads,
    *,
    most: int,
    modules_per_row: ArrayLike = 1,
    counter_current: bool = False,
    one_current: bool = False,
    tolerance: float = 1e-11,
) -> Growth:
    """Return the power of 1 to ``most`` rows, each number of rows fitted from the inlet of the source on.

    Arguments as for ``rows_point`` with ``most`` places; ``load`` has the size of the batch and is that of every row,
    or of the string. The limit is the power of the last number with the geometric series of what the last two rows
    brought, which is exact once power falls as exp(-2 U A / C) along the stream. A string of one current loses power
    with rows that are too cold, so its limit is its highest power, which must lie among the rows looked at.

    Raises
    ------
    InputError
        Fewer than three rows, or too few to tell the limit.
    ConvergenceError
        A number of rows has no state.
    """
    if most < 3:
        raise InputError(f"most = {most} rows tell nothing of a trend; look at 3 or more")
    places, size = most, modules.size

    def solve(rows: int) -> Array:
        own = load if one_current else load.take(np.repeat(np.arange(size), rows))
        options: dict[str, Any] = {"modules_per_row": modules_per_row, "places": places, "tolerance": tolerance}
        options |= {"counter_current": counter_current, "one_current": one_current}
        return rows_point(modules, source, sink, own, rows=rows, **options).power

    if one_current or (counter_current and isinstance(sink, Stream)):
        power = np.stack([solve(rows).sum(axis=1) for rows in range(1, most + 1)], axis=1)
    else:  # a row knows nothing of those after it
        power = np.cumsum(solve(most), axis=1)
    last, before = power[:, -1] - power[:, -2], power[:, -2] - power[:, -3]
    falls = (last > 0) & (before > last)
    if np.any((last > 0) & (one_current | ~falls)):
        raise InputError(f"power still grows after {most} rows, so its limit cannot be told yet; look at more rows")
    ratio = np.where(falls, last, 0.0) / np.where(falls, before, 1.0)
    limit = np.maximum(power.max(axis=1), power[:, -1] + np.maximum(last, 0.0) * ratio / (1 - ratio))
    footprint = np.broadcast_to(np.asarray(modules.footprint, dtype=float), (size,))
    abreast = np.broadcast_to(np.asarray(modules_per_row, dtype=float), (size,))
    return Growth((footprint * abreast)[:, None] * np.arange(1, most + 1), power, limit)
