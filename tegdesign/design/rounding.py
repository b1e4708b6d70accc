"""From the free optimum to something a workshop can make: whole steps, an even grid of legs, rated again as rounded."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import product

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.brief import Brief
from tegdesign.design.evaluate import Candidates, evaluate
from tegdesign.design.search import Found, on_grids
from tegdesign.design.space import Space, score
from tegdesign.errors import InputError
from tegdesign.material.curve import Array

_GRIDS = 12  # grids tried
_FINALISTS = 4  # of them that are rounded
_ROUNDS = 8  # at most, of steps to neighbours
_GAIN = 1e-4  # of a round, of the logarithm of the aim; less ends the steps
_EXACT = 12  # geometries that are told apart by an exact evaluation in the end


@dataclass(frozen=True)
class Built:
    """Buildable geometries with their grids, and the place in an earlier batch that each comes from."""

    candidates: Candidates
    columns: Array
    rows: Array
    parent: NDArray[np.intp]

    def take(self, which: NDArray[np.intp]) -> Built:
        """Return the geometries ``which``."""
        return Built(self.candidates.take(which), self.columns[which], self.rows[which], self.parent[which])


def build(brief: Brief, found: Found) -> Built:
    """Return the best buildable geometry near the answers of a search.

    On many even grids the best legs are sought anew; the best few are then rounded to whole workshop steps, and
    improved by such steps until no neighbour is better.

    Raises
    ------
    InputError
        No geometry of whole steps keeps the limits.
    """
    job = found.space.job
    parent, grid = _grids(brief, found)
    if not parent.size:
        raise _impossible()
    found = on_grids(brief, found, parent, grid)
    best = np.argsort(-found.scores, kind="stable")[:_FINALISTS]
    place = found.space.grid[best]
    tried = Built(found.space.candidates(best, found.u[best]), place[:, 0], place[:, 1], best)
    guess, top = found.guess.take(best), -np.inf
    which = np.arange(best.size)
    for number in range(_ROUNDS):
        near = _assemble(brief, found.space, tried, _steps(brief, tried, which, 2 if number else 1))
        if not near.columns.size:
            raise _impossible()
        e = evaluate(job, near.candidates, rough=True, guess=guess.take(near.parent))
        tried, guess, values = near, e.guess, score(brief, e)
        if values.max() <= top + _GAIN:
            break
        top, which = values.max(), _different(tried, values, 1 if number else 2)
    best = np.argsort(-values, kind="stable")[:_EXACT]
    tried = tried.take(best)
    values = score(brief, evaluate(job, tried.candidates, guess=guess.take(best)))
    return tried.take(np.array([np.argmax(values)]))


def _impossible() -> InputError:
    return InputError(
        "no design with whole workshop steps fits the limits; allow finer steps in [workshop] or wider limits for "
        "leg_side, leg_length, gap or footprint"
    )


def _grids(brief: Brief, found: Found) -> tuple[NDArray[np.intp], Array]:
    """Return even grids near the answers of a search, best first: numbers of the answers and (columns, rows)."""
    limits, space, scores = brief.limits, found.space, found.scores
    near = scores >= scores.max() - 0.05 if scores.max() > -1e3 else np.arange(scores.size) == np.argmax(scores)
    cell = limits.leg_side[0] + limits.gap
    most = [int(room / cell + 1e-9) for room in (space.width, space.depth)]
    columns, rows = (v.ravel() for v in np.meshgrid(*(np.arange(1.0, m + 1) for m in most), indexing="ij"))
    made = columns * rows / 2
    fits = (made % 1 == 0) & (limits.couples[0] <= made) & (made <= limits.couples[1])
    pitch = np.minimum(space.width / columns, space.depth / rows)
    alike = np.where(fits, np.round(made * 1e6) + pitch, -1.0)  # grids turned by a right angle
    _, first = np.unique(alike, return_index=True)
    fits &= np.isin(np.arange(made.size), first)
    columns, rows, made, pitch = columns[fits], rows[fits], made[fits], pitch[fits]
    used = pitch**2 * 2 * made / (space.width * space.depth)
    unlike = 0.25 * np.abs(np.log(made / space.couples_of(found.u[near])[:, None])) - np.log(used)
    unlike += scores.max() - scores[near][:, None]
    chosen = np.argsort(unlike.ravel(), kind="stable")[:_GRIDS]
    k = chosen % max(made.size, 1)
    return np.flatnonzero(near)[chosen // max(made.size, 1)], np.stack([columns[k], rows[k]], axis=1)


def _steps(brief: Brief, built: Built, which: NDArray[np.intp], reach: int) -> Array:
    """Return rows of the neighbours by whole workshop steps, themselves included; leg length follows leg area.

    A row is leg length, side of n, side of p, columns, rows, parent.
    """
    c, steps = built.candidates, brief.workshop
    size = np.array([steps.leg_length_step, steps.leg_side_step, steps.leg_side_step])
    moves = np.array(list(product(range(-reach, reach + 1), repeat=3)))
    out = []
    for k in which:
        sides = np.round(np.array([c.side_n[k], c.side_p[k]]) / size[1:]) + moves[:, 1:]
        sides = np.maximum(sides, 1) * size[1:]
        length = c.leg_length[k] * (sides**2).sum(axis=1) / (c.side_n[k] ** 2 + c.side_p[k] ** 2)
        length = np.maximum(np.round(length / size[0]) + moves[:, 0], 1) * size[0]
        rest = np.tile([built.columns[k], built.rows[k], k], (len(moves), 1))
        out.append(np.concatenate([length[:, None], sides, rest], axis=1))
    return np.concatenate(out)


def _different(built: Built, values: Array, count: int) -> NDArray[np.intp]:
    """Return the best geometry of each of the best ``count`` grids and connections."""
    c = built.candidates
    order = np.argsort(-values, kind="stable")
    keys = np.stack([built.columns, built.rows, c.series, c.parallel], axis=1)[order]
    _, first = np.unique(keys, axis=0, return_index=True)
    return order[np.sort(first)[:count]]


def _assemble(brief: Brief, space: Space, like: Built, table: Array) -> Built:
    """Return the geometries of these rows that keep the limits of the workshop; the last number of a row is its parent.

    Each at the widest pitch of its grid, and also on the smallest plate where that is much smaller.
    """
    limits, step = brief.limits, brief.workshop.gap_step
    length, sn, sp, columns, rows = table[:, :5].T
    parent = table[:, 5].astype(np.intp)
    mean, thin, thick = (sn + sp) / 2, np.minimum(sn, sp), np.maximum(sn, sp)
    most = np.minimum(space.width / columns, space.depth / rows)
    widest = np.floor((most - mean) / step + 1e-6) * step
    closest = np.ceil(np.maximum(limits.gap, thick - mean + limits.corner) / step - 1e-6) * step
    fits = (limits.leg_side[0] - 1e-9 <= thin) & (thick <= limits.leg_side[1] + 1e-9)
    fits &= (limits.leg_length[0] - 1e-9 <= length) & (length <= limits.leg_length[1] + 1e-9)
    fits &= (length <= limits.slenderness * thin + 1e-9) & (widest >= closest - 1e-9)
    smaller = fits & (mean + widest > 1.05 * (mean + closest))
    kept = np.concatenate([np.flatnonzero(fits), np.flatnonzero(smaller)])
    gap = np.concatenate([widest[fits], closest[smaller]])
    length, sn, sp, pitch = (_tidied(v) for v in (length[kept], sn[kept], sp[kept], mean[kept] + gap))
    columns, rows, parent = columns[kept], rows[kept], parent[kept]
    edge, own = 2 * limits.edge_margin, like.candidates.take(parent)
    candidates = Candidates(
        own.n, own.p, length, sn, sp, pitch, columns * rows / 2, (columns * pitch + edge) * (rows * pitch + edge),
        own.series, own.parallel,
    )  # fmt: skip
    return Built(candidates, columns, rows, parent)


def _tidied(values: Array) -> Array:
    """Remove the last-digit noise of adding steps, so that the file shows 1.4 mm; to a tenth of a nanometre."""
    return np.array([float(f"{v:.9g}") for v in np.unique(values)])[np.unique(values, return_inverse=True)[1]]
