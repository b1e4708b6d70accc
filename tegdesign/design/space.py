"""Where the search looks: the unit box of each problem, its geometries, and how good they are."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.brief import Brief
from tegdesign.design.evaluate import HARD, Candidates, Evaluation, Job
from tegdesign.leg.closed_form import area_ratio_of_best_efficiency
from tegdesign.material.curve import Array

_RATIO_SPAN = np.log(4.0)  # the area ratio is sought within a factor four of its closed form


@dataclass(frozen=True)
class Problems:
    """Material indices and connection of modules of each problem, arrays (P,)."""

    n: NDArray[np.intp]
    p: NDArray[np.intp]
    series: Array
    parallel: Array
    grid: Array | None = None  # (P, 2) columns and rows of legs, where they are given

    def take(self, which: NDArray[np.intp]) -> Problems:
        """Return the problems ``which``, repeated where asked."""
        grid = None if self.grid is None else self.grid[which]
        return Problems(self.n[which], self.p[which], self.series[which], self.parallel[which], grid)


class Space:
    """Unit box of the unknowns of each problem: ln leg length, ln area ratio, leg side, ln couples.

    Couples are free numbers on a pitch that fills the plate, unless the problems give the grid of legs.
    """

    def __init__(self, brief: Brief, job: Job, problems: Problems) -> None:
        """Work out what stays the same: room for legs, area ratios to seek around, bounds of the couples."""
        limits = brief.limits
        self.job, self.problems = job, problems
        self.limits = limits
        self.width, self.depth = (side - 2 * limits.edge_margin for side in limits.footprint)
        self.footprint = limits.footprint[0] * limits.footprint[1]
        mean = _mean_temperature(job)
        properties = np.array(
            [
                (m.resistivity(t), m.thermal_conductivity(t))
                for m in job.materials
                for t in [np.clip(mean, *m.range)]
            ],
            dtype=float,
        )
        (rn, kn), (rp, kp) = properties[problems.n].T, properties[problems.p].T
        self.ratio = area_ratio_of_best_efficiency(rn, rp, kn, kp)
        most = self.width * self.depth / (2 * (limits.leg_side[0] + limits.gap) ** 2)
        self.most_couples = max(min(float(limits.couples[1]), most), 1.0)
        self.least_couples = min(float(max(limits.couples[0], 1)), self.most_couples)

    def candidates(self, which: NDArray[np.intp], u: Array) -> Candidates:
        """Return geometries at positions u (B, 4) of the boxes of problems ``which`` (B,)."""
        low, high = np.log(self.limits.leg_length)
        length = np.exp(low + u[:, 0] * (high - low))
        root = np.sqrt(self.ratio[which] * np.exp((2 * u[:, 1] - 1) * _RATIO_SPAN))
        thin, thick = self.limits.leg_side
        root = np.clip(root, thin / thick, thick / thin)
        part = self.problems.take(which)
        if part.grid is None:
            couples, footprint = self.couples_of(u), np.full(which.size, self.footprint)
            pitch = np.sqrt(self.width * self.depth / (2 * couples))
        else:
            (columns, rows), edge = part.grid.T, 2 * self.limits.edge_margin
            couples, pitch = columns * rows / 2, np.minimum(self.width / columns, self.depth / rows)
            footprint = (columns * pitch + edge) * (rows * pitch + edge)
        # mean side between the thinnest and the thickest legs that can be cut and fit, the smaller leg decides below
        smallest = self.limits.leg_side[0] * (1 + root) / (2 * np.minimum(root, 1.0))
        thickest = np.minimum(self.limits.leg_side[1], pitch - self.limits.corner)
        largest = np.minimum(pitch - self.limits.gap, thickest * (1 + root) / (2 * np.maximum(root, 1.0)))
        smallest = np.minimum(smallest, largest)
        side = np.exp(np.log(smallest) + u[:, 2] * np.log(largest / smallest))
        side_p = 2 * side / (1 + root)
        return Candidates(
            part.n, part.p, length, root * side_p, side_p, pitch, couples, footprint, part.series, part.parallel
        )

    def leg_area(self, which: NDArray[np.intp], u: Array) -> Array:
        """Return the logarithm of all leg area at positions u (B, 4), in units of the first axis (leg length)."""
        c = self.candidates(which, u)
        low, high = np.log(self.limits.leg_length)
        return np.asarray(np.log(c.couples * (c.side_n**2 + c.side_p**2)) / max(high - low, 1e-9))

    def place(self, which: NDArray[np.intp], centre: Array, offsets: Array) -> Array:
        """Return positions (B, 4) at offsets from centres; leg length follows leg area, so that conductance stays.

        The thermal conductance of all legs is what most limits hang on. Moving sides and couples at constant
        conductance lets the search slide along them.
        """
        u = np.clip(centre + offsets, 0.0, 1.0)
        u[:, 0] = np.clip(
            centre[:, 0] + offsets[:, 0] + self.leg_area(which, u) - self.leg_area(which, centre), 0.0, 1.0
        )
        return u

    def frame(self, which: NDArray[np.intp], centre: Array, u: Array) -> Array:
        """Return the offsets that ``place`` takes to reach u."""
        offsets = u - centre
        offsets[:, 0] -= self.leg_area(which, u) - self.leg_area(which, centre)
        return np.asarray(offsets)

    @property
    def grid(self) -> Array:
        """Columns and rows of each problem (P, 2), 0 where they are free."""
        return np.zeros((self.problems.n.size, 2)) if self.problems.grid is None else self.problems.grid

    def couples_of(self, u: Array) -> Array:
        """Return the number of couples at positions u."""
        return np.asarray(self.least_couples * (self.most_couples / self.least_couples) ** u[:, 3])

    def position_of_couples(self, couples: Array) -> Array:
        """Return the position in the box of a number of couples."""
        span = np.log(self.most_couples / self.least_couples)
        return (
            np.clip(np.log(couples / self.least_couples) / span, 0.0, 1.0)
            if span > 0
            else np.zeros(couples.size)
        )


def buildable(brief: Brief, e: Evaluation) -> Array:
    """Return by how much limits of the workshop are broken (0 when none): thin or slender legs, crowded pitch."""
    c, limits = e.candidates, brief.limits
    thin = np.minimum(c.side_n, c.side_p)
    over = np.maximum(limits.leg_side[0] / thin - 1, c.leg_length / thin / limits.slenderness - 1)
    return np.maximum(over, 0.0)


def score(brief: Brief, e: Evaluation) -> Array:
    """Return the score of the candidates, workshop limits included."""
    broken = buildable(brief, e)
    return np.where(broken > 1e-9, np.minimum(e.score, 0.0) + HARD * (1 + broken), e.score)


def _mean_temperature(job: Job) -> float:
    hot, cold = job.rated.source.reference_temperature, job.rated.sink.reference_temperature
    return float((max(hot, cold + 50.0) + cold) / 2)
