"""From the free optimum to something a workshop can make: whole steps, an even grid of legs, rated again as rounded."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, fields
from itertools import product

import numpy as np

from tegdesign.design.brief import Brief
from tegdesign.design.evaluate import Candidates, Evaluation, Job, evaluate
from tegdesign.design.search import Space, score
from tegdesign.errors import InputError
from tegdesign.material.curve import Array

_GRIDS = 20  # grids tried for each free answer
_FINALISTS = 5  # of them that are improved step by step
_SHARES = (1.0, 0.8)  # of the widest legs that the pitch leaves room for
_LENGTHS = (0.75, 1.0, 1.3)  # times the length that keeps the thermal resistance of the legs

Row = tuple[float, float, float, int, int]  # leg length, side of n, side of p, columns, rows


@dataclass(frozen=True)
class Built:
    """Buildable geometries with their grids."""

    candidates: Candidates
    columns: Array
    rows: Array

    def take(self, which: Array) -> Built:
        """Return the geometries ``which``."""
        return Built(self.candidates.take(which), self.columns[which], self.rows[which])

    def row(self, k: int) -> Row:
        """Return the free numbers of one geometry."""
        c = self.candidates
        return (
            float(c.leg_length[k]), float(c.side_n[k]), float(c.side_p[k]), int(self.columns[k]), int(self.rows[k]),
        )  # fmt: skip


def build(brief: Brief, job: Job, space: Space, free: Evaluation) -> Built:
    """Return the best buildable geometry near the free answers of one or several problems.

    Many even grids are tried, each with legs that keep the thermal resistance of the free answer; the best few are
    then improved by whole workshop steps until no neighbour is better.

    Raises
    ------
    InputError
        No geometry of whole steps keeps the limits.
    """
    scores = score(brief, free)
    worth = np.flatnonzero(scores >= scores.max() - 0.05) if scores.max() > -1e3 else np.array([int(np.argmax(scores))])
    tried = _join([_assemble(brief, space, free.candidates.take(worth[[k]]), _first(brief, space, free, int(worth[k])))
                   for k in range(worth.size)])  # fmt: skip
    if not tried.columns.size:
        raise InputError(
            "no design with whole workshop steps fits the limits; allow finer steps in [workshop] or wider limits for "
            "leg_side, leg_length, gap or footprint"
        )
    values = score(brief, evaluate(job, tried.candidates))
    best = [tried.take(np.array([k])) for k in _different(tried, values)]
    top = max(values)
    for reach in (1, 1, 2, 2, 2, 2, 2, 2):
        around = _join([_assemble(brief, space, b.candidates, _steps(brief, b.row(0), reach)) for b in best])
        values = score(brief, evaluate(job, around.candidates))
        if reach == 2 and max(values) <= top + 1e-9:
            break
        top = max(values)
        best = [around.take(np.array([k])) for k in _different(around, values)[: _FINALISTS if reach == 1 else 1]]
    return best[0]


def _first(brief: Brief, space: Space, free: Evaluation, k: int) -> Iterator[Row]:
    """Yield grids near a free answer, with leg sides scaled to their pitch and lengths round the one that fits."""
    limits, step = brief.limits, brief.workshop.leg_side_step
    c = free.candidates
    couples, sides = float(c.couples[k]), (float(c.side_n[k]), float(c.side_p[k]))
    own = (sides[0] + sides[1]) / 2 / max(float(c.pitch[k]) - limits.gap, 1e-9)
    area = couples * (sides[0] ** 2 + sides[1] ** 2)
    least, most_steps = np.ceil(limits.leg_side[0] / step - 1e-6), np.floor(limits.leg_side[1] / step + 1e-6)
    cell = limits.leg_side[0] + limits.gap
    grids: list[tuple[float, int, int, float]] = []
    for columns in range(1, int(space.width / cell + 1e-9) + 1):
        for rows in range(1, int(space.depth / cell + 1e-9) + 1):
            made = columns * rows / 2
            if columns * rows % 2 or not limits.couples[0] <= made <= limits.couples[1]:
                continue
            most = min(space.width / columns, space.depth / rows)
            used = most**2 * columns * rows / (space.width * space.depth)
            grids.append((0.25 * abs(np.log(made / couples)) - np.log(used), columns, rows, most))
    for _, columns, rows, most in sorted(grids)[:_GRIDS]:
        for share, towards in product((*_SHARES, own), (1.0, 0.4)):  # sides apart as they were, or less
            mean, root = share * (most - limits.gap), (sides[0] / sides[1]) ** towards
            ideal = (2 * mean * root / (1 + root), 2 * mean / (1 + root))
            sn, sp = (float(np.clip(np.floor(s / step + 1e-6), least, most_steps)) * step for s in ideal)
            for factor in _LENGTHS:
                fit = float(c.leg_length[k]) * columns * rows / 2 * (sn**2 + sp**2) / area
                length = float(np.clip(fit * factor, *limits.leg_length))
                yield _whole(length, brief.workshop.leg_length_step), sn, sp, columns, rows


def _steps(brief: Brief, row: Row, reach: int) -> Iterator[Row]:
    """Yield the neighbours of a geometry by whole workshop steps, itself included."""
    length, sn, sp, columns, rows = row
    along, across = brief.workshop.leg_length_step, brief.workshop.leg_side_step
    moves = range(-reach, reach + 1)
    for a, b, c in product(moves, moves, moves):
        yield length + a * along, sn + b * across, sp + c * across, columns, rows


def _whole(value: float, step: float) -> float:
    return max(round(value / step), 1) * step


def _different(built: Built, values: Array) -> list[int]:
    """Return the best geometry of each of the best few grids and connections."""
    found: dict[tuple[float, ...], int] = {}
    c = built.candidates
    for k in np.argsort(-values, kind="stable"):
        grid = sorted((float(built.columns[k]), float(built.rows[k])))  # turned by a right angle is no other grid
        key = (*grid, float(c.series[k]), float(c.parallel[k]))
        found.setdefault(key, int(k))
        if len(found) == _FINALISTS:
            break
    return list(found.values())


def _assemble(brief: Brief, space: Space, like: Candidates, rows: Iterable[Row]) -> Built:
    """Return the geometries of these rows that keep the limits of the workshop.

    Each at the widest pitch of its grid, and also on the smallest plate where that is much smaller.
    """
    limits, step = brief.limits, brief.workshop.gap_step
    length, sn, sp, columns, grid_rows = np.array(list(rows), dtype=float).reshape(-1, 5).T
    mean, thin, thick = (sn + sp) / 2, np.minimum(sn, sp), np.maximum(sn, sp)
    most = np.minimum(space.width / columns, space.depth / grid_rows)
    widest = np.floor((most - mean) / step + 1e-6) * step
    closest = np.ceil(np.maximum(limits.gap, thick - mean + limits.corner) / step - 1e-6) * step
    fits = (limits.leg_side[0] - 1e-9 <= thin) & (thick <= limits.leg_side[1] + 1e-9)
    fits &= (limits.leg_length[0] - 1e-9 <= length) & (length <= limits.leg_length[1] + 1e-9)
    fits &= (length <= limits.slenderness * thin + 1e-9) & (widest >= closest - 1e-9)
    smaller = fits & (mean + widest > 1.05 * (mean + closest))
    kept = np.concatenate([np.flatnonzero(fits), np.flatnonzero(smaller)])
    gap = np.concatenate([widest[fits], closest[smaller]])
    length_, sn_, sp_, pitch = (_tidied(v) for v in (length[kept], sn[kept], sp[kept], mean[kept] + gap))
    columns_, rows_ = columns[kept], grid_rows[kept]
    edge, count = 2 * limits.edge_margin, kept.size
    candidates = Candidates(
        np.repeat(like.n, count), np.repeat(like.p, count), length_, sn_, sp_, pitch, columns_ * rows_ / 2,
        (columns_ * pitch + edge) * (rows_ * pitch + edge), np.repeat(like.series, count),
        np.repeat(like.parallel, count),
    )  # fmt: skip
    return Built(candidates, columns_, rows_)


def _join(parts: list[Built]) -> Built:
    names = [f.name for f in fields(Candidates)]
    joined = {name: np.concatenate([getattr(p.candidates, name) for p in parts]) for name in names}
    return Built(
        Candidates(**joined), np.concatenate([p.columns for p in parts]), np.concatenate([p.rows for p in parts])
    )


def _tidied(values: Array) -> Array:
    """Remove the last-digit noise of adding steps, so that the file shows 1.4 mm; to a tenth of a nanometre."""
    return np.array([float(f"{v:.9g}") for v in np.unique(values)])[np.unique(values, return_inverse=True)[1]]
