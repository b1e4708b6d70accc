"""Size a generator for a brief: the best buildable design, rated as built, and the limits that bind."""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator, Mapping
from dataclasses import asdict, dataclass, replace
from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.assemble import made_of, material
from tegdesign.design.brief import Brief, as_brief
from tegdesign.design.deciding import deciding, missed, only
from tegdesign.design.design import Chosen, Design, Geometry, defaults
from tegdesign.design.evaluate import Job, evaluate
from tegdesign.design.parts import Made
from tegdesign.design.rate import rate
from tegdesign.design.rating import Check, Rating
from tegdesign.design.rounding import Built, build
from tegdesign.design.search import refine, search
from tegdesign.design.space import Problems, score
from tegdesign.errors import ConvergenceError, InputError
from tegdesign.material.curve import Array
from tegdesign.material.material import Material
from tegdesign.quantity import write

if TYPE_CHECKING:
    import pandas as pd

    from tegdesign.design.making import Making

UNIT_OF_AIM = {
    "power": "power_W",
    "efficiency": "efficiency",
    "power per footprint": "power_per_footprint_W_per_m2",
    "power per material mass": "power_per_material_mass_W_per_kg",
}

AFTER_MAKING = 0.1  # of the box of the search: widest step once the materials are made
_MISSED = -1e3  # score below which a limit or requirement is missed
_SPARSE = 0.25  # fill factor below which a smaller plate is tried as well
_SHRINK = (0.7, 0.5)  # of its sides
_BETTER = 1e-3  # of the score, which is the logarithm of the aim
_WAYS = 6  # connections of modules that are looked into


@dataclass(frozen=True)
class Binding:
    """A limit that the design has reached: more would need this limit to give way."""

    name: str
    value: str
    limit: str


@dataclass(frozen=True)
class Sizing:
    """The answer to a brief: the design, its rating, what binds, what rounding to workshop steps cost.

    ``making`` tells how materials were made for the brief, None where all was given.
    """

    brief: Brief
    design: Design
    rating: Rating
    binding: tuple[Binding, ...]
    objective_before_rounding: float
    objective: float
    making: Making | None = None

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
            "making": None if self.making is None else self.making.to_dict(),
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
    names = {side: _single(brief, side) for side in ("n", "p")}
    use = brief.materials
    pair = [material(name, side, use.folder, use.making(side).given) for side, name in names.items()]
    answer = _solve(brief, pair, progress)
    # the search spreads the legs over the whole plate, so smaller ones are tried as long as that helps
    while answer.score < _MISSED or answer.fill < _SPARSE or answer.brief is not None:
        now = brief if answer.brief is None else answer.brief
        plates = [b for share in _SHRINK if (b := _smaller(now, share)) is not None]
        trials = (_solve(plate, pair, silent)._replace(brief=plate) for plate in plates)
        better = next((trial for trial in trials if trial.score > answer.score + _BETTER), None)
        if better is None:
            break
        answer = better
    made = None if answer.making is None else answer.making.made
    design = _design(brief, names, made, answer.built)
    rating = rate(design)
    exact = float(_objective(brief, rating))
    binding = tuple(_binding(brief, design, rating))
    return Sizing(brief, design, rating, binding, answer.free, exact, answer.making)


class _Answer(NamedTuple):
    """What was built, how its materials are made, the aim before rounding, score and fill factor as built.

    ``brief`` is the one with a smaller plate that it answers, None where it is that of the user.
    """

    built: Built
    making: Making | None
    free: float
    score: float
    fill: float
    brief: Brief | None = None


def _solve(brief: Brief, pair: list[Material], progress: Callable[[float], None]) -> _Answer:
    """Return the best buildable geometry that holds in every state, and how the materials are made for it."""
    whole, ways = job_of(brief, pair), np.array(list(connections(brief)), dtype=float)
    first = np.zeros(len(ways), dtype=np.intp)
    problems = Problems(first, first + 1, ways[:, 0], ways[:, 1])
    states = deciding(brief, whole, problems)
    making: Making | None = None
    while True:  # until no state that was left aside is missed
        found = search(brief, only(whole, states), problems, _one_of_each_series, True, progress)
        if not np.any(np.isfinite(found.scores)):
            raise ConvergenceError(
                "no candidate of this brief has an operating point; widen limits.leg_length or check source and sink"
            )
        if brief.materials.making("n").free or brief.materials.making("p").free:
            from tegdesign.design.making import make

            making = make(brief, only(whole, states), found, int(np.argmax(found.scores)))
            whole = replace(whole, materials=[made_of(m, making.made[m.polarity], m.polarity) for m in pair])
            found = refine(brief, only(whole, states), found.problems, found.u, found.guess, AFTER_MAKING)
        built = build(brief, found)
        k = np.array([np.argmax(found.scores)])
        near = found.guess.take(k) if len(states) == len(whole.states) else None
        made = evaluate(whole, built.candidates.take([0]), guess=near)
        forgotten = missed(made) - states
        if not forgotten:
            break
        states |= forgotten
    best = np.array([np.argmax(found.scores)])
    free = evaluate(only(whole, states), found.space.candidates(best, found.u[best]), guess=found.guess.take(best))
    c = built.candidates
    legs = c.couples[0] * (c.side_n[0] ** 2 + c.side_p[0] ** 2)
    return _Answer(
        built, making, float(free.objective[0]), float(score(brief, made)[0]), float(legs / c.footprint[0])
    )


def _smaller(brief: Brief, share: float) -> Brief | None:
    """Return the brief with a share of the sides of its plate, None where no couple fits it any more."""
    limits = brief.limits
    width, depth = (side * share for side in limits.footprint)
    cell, room = limits.leg_side[0] + limits.gap, (width - 2 * limits.edge_margin, depth - 2 * limits.edge_margin)
    if min(room) < cell or max(room) < 2 * cell:
        return None
    return brief.model_copy(update={"limits": limits.model_copy(update={"footprint": (width, depth)})})


def _one_of_each_series(problems: Problems, scores: Array) -> NDArray[np.intp]:
    """Return the best connections, one for a number of modules in series."""
    order = np.argsort(-scores, kind="stable")
    _, first = np.unique(problems.series[order], return_index=True)
    return order[np.sort(first)[:_WAYS]]


def job_of(brief: Brief, materials: list[Any]) -> Job:
    """Return what all candidates of a brief share."""
    return Job(
        brief.conditions, brief.stack, brief.losses, brief.require, brief.aim,
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
    counts = sorted({round(k) for k in np.linspace(1, most, min(most, 24))})
    free = brief.require.voltage is None and brief.require.open_circuit_voltage is None and brief.load.adapts
    for count in counts:
        for series in [count] if free else [s for s in range(1, count + 1) if count % s == 0]:
            yield series, count // series


def _design(brief: Brief, names: dict[str, str], made: Mapping[str, Made] | None, built: Built) -> Design:
    c, limits = built.candidates, brief.limits
    geometry = Geometry.model_construct(
        columns=int(built.columns[0]),
        rows=int(built.rows[0]),
        leg_length=float(c.leg_length[0]),
        leg_side_n=float(c.side_n[0]),
        leg_side_p=float(c.side_p[0]),
        pitch=float(c.pitch[0]),
        edge_margin=limits.edge_margin,
        modules_in_series=round(float(c.series[0])),
        modules_in_parallel=round(float(c.parallel[0])),
    )
    shared = {
        name: getattr(brief, name)
        for name in ("title", "revision", "aim", "source", "sink", "load", "require", "states")
    }
    use = brief.materials
    makes = {f"make_{side}": (made or {}).get(side) or use.making(side).given for side in names}
    values: dict[str, Any] = {key: None if make.as_filed else make for key, make in makes.items()}
    values |= {**names, "hold_outside_data": use.hold_outside_data, "folder": use.folder}
    chosen = Chosen.model_construct(**values)
    bare = Design.model_construct(
        **shared,
        materials=chosen,
        module=geometry,
        stack=brief.stack,
        losses=brief.losses,
        assumed=_assumed(brief),
    )
    return Design.model_validate(bare.model_dump(exclude_none=True))


def _assumed(brief: Brief) -> tuple[str, ...]:
    """Return the keys of the stack that the brief left at their defaults."""
    return tuple(key for key in defaults(brief.model_dump(exclude_unset=True), Brief) if key.startswith("stack."))


def _objective(brief: Brief, rating: Rating) -> float:
    power = rating.rated.delivered_power_W
    g = rating.design.module
    return {
        "power": power,
        "efficiency": rating.rated.efficiency_of_given_heat or rating.rated.efficiency,
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
    corner = g.pitch - max(g.leg_side_n, g.leg_side_p)
    if corner < limits.corner + workshop.gap_step:
        yield Binding(
            "clearance of legs corner to corner", f"{corner * 1414.2:.3g} mm", f"least {limits.gap * 1e3:.6g} mm"
        )
    slender = g.leg_length / thin
    if slender > 0.95 * limits.slenderness:
        yield Binding("slenderness of the legs", f"{slender:.3g}", f"most {limits.slenderness:g}")
    for bound, word in zip(limits.couples, ("least", "most"), strict=True):
        if abs(g.couples - bound) <= 1 and limits.couples[0] < limits.couples[1]:
            yield Binding("couples of a module", f"{g.couples}", f"{word} {bound}")
    if g.modules == limits.modules > 1:
        yield Binding("number of modules", f"{g.modules}", f"most {limits.modules}")
    if max(limits.footprint[0] - g.width, limits.footprint[1] - g.depth) < g.pitch:
        used = f"{g.width * 1e3:.4g} mm x {g.depth * 1e3:.4g} mm"
        yield Binding("footprint", used, " x ".join(write(s, "m", "mm") for s in limits.footprint))
    for check in rating.checks:
        if not check.passed:
            continue  # missed, not binding
        near = 1.0 if check.unit == "K" else 0.02 * abs(check.limit)
        if check.margin < near:
            yield Binding(
                f"{check.name} ({check.state})",
                f"{check.value:.5g} {check.unit}".removesuffix(" 1"),
                f"{check.sense} {check.limit:.5g} {check.unit}".removesuffix(" 1"),
            )
