"""Size a generator for a brief: the best buildable design, rated as built, and the limits that bind."""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator
from dataclasses import asdict, dataclass, fields
from itertools import product
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.assemble import material
from tegdesign.design.brief import Brief, as_brief
from tegdesign.design.design import Chosen, Design, Geometry, defaults
from tegdesign.design.evaluate import Candidates, Evaluation, Job, evaluate
from tegdesign.design.rate import rate
from tegdesign.design.rating import Check, Rating
from tegdesign.design.search import Problems, Space, score, search
from tegdesign.errors import ConvergenceError, InputError
from tegdesign.material.curve import Array
from tegdesign.quantity import write

if TYPE_CHECKING:
    import pandas as pd

UNIT_OF_AIM = {
    "power": "power_W",
    "efficiency": "efficiency",
    "power per footprint": "power_per_footprint_W_per_m2",
    "power per material mass": "power_per_material_mass_W_per_kg",
}


@dataclass(frozen=True)
class Binding:
    """A limit that the design has reached: more would need this limit to give way."""

    name: str
    value: str
    limit: str


@dataclass(frozen=True)
class Sizing:
    """The answer to a brief: the design, its rating, what binds, and what rounding to workshop steps cost."""

    brief: Brief
    design: Design
    rating: Rating
    binding: tuple[Binding, ...]
    objective_before_rounding: float
    objective: float

    @property
    def met(self) -> bool:
        """Whether the brief is met in every limit and requirement."""
        return self.rating.met

    @property
    def failed(self) -> tuple[Check, ...]:
        """What is missed, worst first."""
        return tuple(sorted(self.rating.failed, key=lambda c: c.margin / max(abs(c.limit), 1e-12)))

    @property
    def assumed_limits(self) -> dict[str, Any]:
        """Limits and workshop steps that the brief left at their defaults, as they would be written."""
        written = self.brief.model_dump(exclude_none=True)
        keys = [k.split(".") for k in defaults(self.brief.model_dump(exclude_unset=True), Brief)]
        return {f"{k[0]}.{k[1]}": written[k[0]][k[1]] for k in keys if k[0] in ("limits", "workshop")}

    def to_frame(self) -> pd.DataFrame:
        """Return the states of the design as a table."""
        return self.rating.to_frame()

    def to_dict(self) -> dict[str, Any]:
        """Return the answer as plain values for JSON; keys end in their unit."""
        unit = UNIT_OF_AIM[self.brief.aim]
        return {
            "met": self.met,
            "aim": self.brief.aim,
            f"aimed_{unit}": self.objective,
            f"aimed_before_rounding_{unit}": self.objective_before_rounding,
            "binding": [asdict(b) for b in self.binding],
            "assumed_limits": self.assumed_limits,
            "failed": [{**asdict(c), "margin": c.margin} for c in self.failed],
            "rating": self.rating.to_dict(),
        }


def silent(share: float) -> None:
    """Take progress and say nothing."""


def size(brief: Brief | str | os.PathLike[str], *, progress: Callable[[float], None] = silent) -> Sizing:
    """Return the best buildable design for a brief that names one n and one p material.

    Raises
    ------
    InputError
        The brief cannot be read, or names no or several materials (``compare`` ranks them).
    DataRangeError
        The best design would leave the data of its materials farther than the brief allows.
    ConvergenceError
        No candidate has an operating point.
    """
    brief = as_brief(brief)
    names = [_single(brief, side) for side in ("n", "p")]
    pair = [
        material(name, side, brief.materials.folder) for name, side in zip(names, ("n", "p"), strict=True)
    ]
    job = job_of(brief, pair)
    ways = list(connections(brief))
    count = len(ways)
    problems = Problems(
        np.zeros(count, dtype=np.intp),
        np.ones(count, dtype=np.intp),
        np.array([c[0] for c in ways], dtype=float),
        np.array([c[1] for c in ways], dtype=float),
    )

    def three_best(scores: Array) -> NDArray[np.intp]:
        return np.argsort(-scores, kind="stable")[:3]

    problems, space, u, scores = search(brief, job, problems, three_best, progress)
    if not np.any(np.isfinite(scores)):
        raise ConvergenceError(
            "no candidate of this brief has an operating point; widen limits.leg_length or check source and sink"
        )
    free = evaluate(job, space.candidates(np.arange(scores.size), u))
    built = _build(brief, job, space, free)
    k = int(np.argmax(scores))
    design = _design(brief, names[0], names[1], built.candidates)
    rating = rate(design)
    exact = float(_objective(brief, rating))
    return Sizing(
        brief, design, rating, tuple(_binding(brief, design, rating)), float(free.objective[k]), exact
    )


def job_of(brief: Brief, materials: list[Any]) -> Job:
    """Return what all candidates of a brief share."""
    return Job(
        brief.source, brief.sink, brief.load, brief.stack, brief.losses, brief.require, brief.aim,
        brief.materials.hold_outside_data, materials,
    )  # fmt: skip


def _single(brief: Brief, side: str) -> str:
    names: tuple[str, ...] = getattr(brief.materials, side)
    if len(names) != 1:
        what = "no" if not names else f"{len(names)}"
        raise InputError(
            f"materials.{side} names {what} materials, size needs exactly one; name one, or rank them with "
            "tegdesign compare"
        )
    return names[0]


def connections(brief: Brief) -> Iterator[tuple[int, int]]:
    """Yield modules in series and in parallel, at most 24 numbers of modules from one to the limit.

    All in series where the load adapts and no voltage is asked for, else every way that divides evenly.
    """
    most = brief.limits.modules
    counts = (
        range(1, most + 1)
        if most <= 8
        else sorted({round(most * f) for f in (0.1, 0.2, 0.35, 0.5, 0.65, 0.8, 1)})
    )
    for count in counts:
        if count < 1:
            continue
        ways = [s for s in range(1, count + 1) if count % s == 0]
        if brief.require.voltage is None and brief.require.open_circuit_voltage is None:
            ways = [count]
        for series in ways:
            yield series, count // series


def _build(brief: Brief, job: Job, space: Space, free: Evaluation) -> Evaluation:
    """Round to workshop steps and an even grid, then try the neighbours once more; all in two batches."""
    count = free.candidates.n.size
    first = evaluate(
        job, _join([_rounded(brief, space, free.candidates.take(np.array([k]))) for k in range(count)])
    )
    best = first.candidates.take(np.array([int(np.argmax(score(brief, first)))]))
    second = evaluate(job, _neighbours(brief, space, best))
    k = np.array([int(np.argmax(score(brief, second)))])
    return evaluate(job, second.candidates.take(k))


def _join(parts: list[Candidates]) -> Candidates:
    return Candidates(
        **{f.name: np.concatenate([getattr(p, f.name) for p in parts]) for f in fields(Candidates)}
    )


def _rounded(brief: Brief, space: Space, free: Candidates) -> Candidates:
    """Return the grids nearest to the free answer, each with its dimensions rounded up and down."""
    limits, workshop = brief.limits, brief.workshop
    couples, pitch = float(free.couples[0]), float(free.pitch[0])
    grids: list[tuple[float, int, int, float]] = []
    for columns in _near(space.width / pitch):
        for rows in _near(space.depth / pitch):
            if columns * rows % 2 or not limits.couples[0] <= columns * rows // 2 <= limits.couples[1]:
                continue
            most = min(space.width / columns, space.depth / rows)
            used = most**2 * columns * rows / (space.width * space.depth)
            grids.append((abs(np.log(columns * rows / (2 * couples))) - np.log(used), columns, rows, most))
    rows_out = []
    for _, columns, rows, most in sorted(grids)[:12]:
        scale = min(1.0, (most - limits.gap) / (pitch - limits.gap)) if pitch > limits.gap else 1.0
        sides = [_both(float(s[0]) * scale, workshop.leg_side_step) for s in (free.side_n, free.side_p)]
        # the thermal resistance of all legs together is kept: it, not the length, is what the optimum sets
        length = float(free.leg_length[0]) * scale**2 * columns * rows / (2 * couples)
        length = float(np.clip(length, *limits.leg_length))
        for built, sn, sp in product(_both(length, workshop.leg_length_step), *sides):
            rows_out.append((built, sn, sp, most, columns, rows))
    return _assemble(brief, free, rows_out)


def _neighbours(brief: Brief, space: Space, best: Candidates) -> Candidates:
    workshop = brief.workshop
    pitch, couples = float(best.pitch[0]), round(float(best.couples[0]))
    columns, rows = next(
        (c, 2 * couples // c)
        for c in sorted(range(1, 2 * couples + 1), key=lambda c: abs(c - (space.width + 1e-9) // pitch))
        if 2 * couples % c == 0
        and c * pitch <= space.width + 1e-9
        and 2 * couples // c * pitch <= space.depth + 1e-9
    )
    most = min(space.width / columns, space.depth / rows)
    around = (-2, -1, 0, 1, 2)
    grid = product(
        (float(best.leg_length[0]) + k * workshop.leg_length_step for k in around),
        (float(best.side_n[0]) + k * workshop.leg_side_step for k in around),
        (float(best.side_p[0]) + k * workshop.leg_side_step for k in around),
    )
    return _assemble(brief, best, [(length, sn, sp, most, columns, rows) for length, sn, sp in grid])


def _near(value: float) -> list[int]:
    middle = round(value)
    return [k for k in range(middle - 3, middle + 4) if k >= 1]


def _both(value: float, step: float) -> list[float]:
    low = float(np.floor(value / step + 1e-6)) * step
    return [v for v in (low, low + step) if v > 0]


def _assemble(
    brief: Brief, like: Candidates, rows: list[tuple[float, float, float, float, int, int]]
) -> Candidates:
    """Return candidates of given length, sides, widest pitch and grid that keep the limits of the workshop."""
    limits, step = brief.limits, brief.workshop.gap_step
    kept = []
    for length, sn, sp, most, columns, rows_ in rows:
        mean = (sn + sp) / 2
        gap = _tidy(np.floor((most - mean) / step + 1e-6) * step)
        fits = (
            gap >= limits.gap - 1e-9
            and limits.leg_side[0] - 1e-9 <= min(sn, sp)
            and max(sn, sp) <= min(limits.leg_side[1], mean + gap - limits.gap / 2) + 1e-9
            and limits.leg_length[0] - 1e-9 <= length <= limits.leg_length[1] + 1e-9
            and length <= limits.slenderness * min(sn, sp) + 1e-9
        )
        if fits:
            kept.append((_tidy(length), _tidy(sn), _tidy(sp), _tidy(mean + gap), columns, rows_))
    if not kept:
        raise InputError(
            "no design with whole workshop steps fits the limits; allow finer steps in [workshop] or wider limits for "
            "leg_side, gap or footprint"
        )
    length, sn, sp, pitch, columns, depth_rows = np.array(kept).T
    edge = 2 * limits.edge_margin
    size_ = length.size
    return Candidates(
        np.repeat(like.n, size_), np.repeat(like.p, size_), length, sn, sp, pitch, columns * depth_rows / 2,
        (columns * pitch + edge) * (depth_rows * pitch + edge), np.repeat(like.series, size_),
        np.repeat(like.parallel, size_),
    )  # fmt: skip


def _tidy(value: float) -> float:
    """Remove the last-digit noise of adding steps, so that the file shows 1.4 mm."""
    return round(1e3 * float(value), 6) / 1e3


def _design(brief: Brief, n: str, p: str, c: Candidates) -> Design:
    limits = brief.limits
    couples, pitch = round(float(c.couples[0])), float(c.pitch[0])
    width = limits.footprint[0] - 2 * limits.edge_margin
    footprint = float(c.footprint[0])
    columns = next(
        k
        for k in sorted(range(1, 2 * couples + 1), key=lambda k: -k)
        if 2 * couples % k == 0
        and k * pitch <= width + 1e-9
        and abs(
            (k * pitch + 2 * limits.edge_margin) * (2 * couples // k * pitch + 2 * limits.edge_margin)
            - footprint
        )
        < 1e-9 * footprint
    )
    geometry = Geometry.model_construct(
        columns=columns,
        rows=2 * couples // columns,
        leg_length=float(c.leg_length[0]),
        leg_side_n=float(c.side_n[0]),
        leg_side_p=float(c.side_p[0]),
        pitch=pitch,
        edge_margin=limits.edge_margin,
        modules_in_series=round(float(c.series[0])),
        modules_in_parallel=round(float(c.parallel[0])),
    )
    shared = {
        name: getattr(brief, name)
        for name in ("title", "revision", "aim", "source", "sink", "load", "require")
    }
    use = brief.materials
    chosen = Chosen.model_construct(n=n, p=p, hold_outside_data=use.hold_outside_data, folder=use.folder)
    made = Design.model_construct(
        **shared,
        materials=chosen,
        module=geometry,
        stack=brief.stack,
        losses=brief.losses,
        assumed=_assumed(brief),
    )
    return Design.model_validate(made.model_dump(exclude_none=True))


def _assumed(brief: Brief) -> tuple[str, ...]:
    """Return the keys of the stack that the brief left at their defaults."""
    return tuple(key for key in defaults(brief.model_dump(exclude_unset=True), Brief) if key.startswith("stack."))


def _objective(brief: Brief, rating: Rating) -> float:
    power = rating.rated.power_W
    g = rating.design.module
    return {
        "power": power,
        "efficiency": rating.rated.efficiency,
        "power per footprint": power / (g.modules * g.width * g.depth),
        "power per material mass": power / sum(m.mass_kg for m in rating.masses),
    }[brief.aim]


def _binding(brief: Brief, design: Design, rating: Rating) -> Iterator[Binding]:
    """Yield the limits that the design touches, to within a workshop step or 2 % of a requirement."""
    limits, workshop, g = brief.limits, brief.workshop, design.module
    thin = min(g.leg_side_n, g.leg_side_p)
    spans = (
        ("leg length", g.leg_length, limits.leg_length, workshop.leg_length_step),
        ("thinnest leg side", thin, (limits.leg_side[0], np.inf), workshop.leg_side_step),
        (
            "thickest leg side",
            max(g.leg_side_n, g.leg_side_p),
            (0.0, limits.leg_side[1]),
            workshop.leg_side_step,
        ),
        ("gap between legs", g.gap, (limits.gap, np.inf), workshop.gap_step),
    )
    for name, value, (low, high), step in spans:
        for bound, word in ((low, "least"), (high, "most")):
            if np.isfinite(bound) and bound > 0 and abs(value - bound) < 1.01 * step:
                yield Binding(name, f"{value * 1e3:.6g} mm", f"{word} {bound * 1e3:.6g} mm")
    slender = g.leg_length / thin
    if slender > 0.95 * limits.slenderness:
        yield Binding("slenderness of the legs", f"{slender:.3g}", f"most {limits.slenderness:g}")
    if g.modules == limits.modules:
        yield Binding("number of modules", f"{g.modules}", f"most {limits.modules}")
    if max(limits.footprint[0] - g.width, limits.footprint[1] - g.depth) < g.pitch:
        used = f"{g.width * 1e3:.4g} mm x {g.depth * 1e3:.4g} mm"
        yield Binding("footprint", used, " x ".join(write(s, "m", "mm") for s in limits.footprint))
    for check in rating.checks:
        near = 1.0 if check.unit == "K" else 0.02 * abs(check.limit)
        if check.margin < near:
            yield Binding(
                f"{check.name} ({check.state})",
                f"{check.value:.5g} {check.unit}".removesuffix(" 1"),
                f"{check.sense} {check.limit:.5g} {check.unit}".removesuffix(" 1"),
            )
