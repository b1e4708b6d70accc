"""How the materials of a pair are best made for a brief: doping, its grade along the leg, grain size."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from dataclasses import asdict, dataclass, replace
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.assemble import computed, made_of
from tegdesign.design.brief import Brief
from tegdesign.design.evaluate import Guess, Job, evaluate
from tegdesign.design.parts import Made
from tegdesign.design.search import Found, refine
from tegdesign.design.space import Problems
from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.material import Material

_STEPS = (0.6, 0.2)  # of the logarithms, one round of trials each
_GEOMETRY = 0.03  # widest step of the geometry that follows each trial, of the box of the search
_ROUGH = 1e-5  # of the properties while trying
_STEEPEST = np.log(10.0) / 2  # a grade changes the doping tenfold at most: beyond that it is hard to make
_WORTH = 1e-4  # of the objective; a grade that gains less is left out


class Variable(NamedTuple):
    """One free number: side of the couple, what it is, bounds of its logarithm."""

    side: str
    what: str  # "doping", "grade" or "grain size"
    low: float
    high: float


@dataclass(frozen=True)
class Grains:
    """What the grain size does at the mean temperature of the leg, beside that of the file of the material."""

    T_K: float
    lattice_thermal_conductivity_W_per_m_K: float
    lattice_thermal_conductivity_as_filed_W_per_m_K: float
    mobility_m2_per_V_s: float
    mobility_as_filed_m2_per_V_s: float


@dataclass(frozen=True)
class Choice:
    """What was chosen for the material of a leg, and the doping that the mean figure of merit alone would ask for.

    ``doping_for_figure_of_merit`` is best for the mean zT between the junctions. Gains are of the power, before
    rounding; that of the grade is 0 where an even leg is as good.
    """

    leg: str
    material: str
    doping_per_m3: float | None = None
    doping_hot_per_m3: float | None = None
    doping_for_figure_of_merit_per_m3: float | None = None
    grain_size_m: float | None = None
    grains: Grains | None = None


@dataclass(frozen=True)
class Making:
    """Materials of a brief made as suits it best, and what that is worth."""

    made: Mapping[str, Made]
    choices: tuple[Choice, ...]
    power_W: float
    power_with_best_figure_of_merit_W: float
    power_without_grade_W: float | None

    def to_dict(self) -> dict[str, Any]:
        """Return the numbers by their names with units."""
        return {
            "choices": [asdict(choice) for choice in self.choices],
            "power_W": self.power_W,
            "power_with_best_figure_of_merit_W": self.power_with_best_figure_of_merit_W,
            "power_gained_W": self.power_gained_W,
            "share_gained": self.share_gained,
            "power_gained_by_grade_W": self.power_gained_by_grade_W,
        }

    @property
    def power_gained_W(self) -> float:
        """What choosing for this brief gains over choosing for the mean figure of merit."""
        return self.power_W - self.power_with_best_figure_of_merit_W

    @property
    def share_gained(self) -> float:
        """The same as a share."""
        return self.power_gained_W / self.power_with_best_figure_of_merit_W

    @property
    def power_gained_by_grade_W(self) -> float | None:
        """What the grade gains, 0 where an even leg is as good; None where no grade was asked for."""
        return None if self.power_without_grade_W is None else self.power_W - self.power_without_grade_W


class _Start(NamedTuple):
    """Position of a geometry and its operating points."""

    u: Array
    guess: Guess


class _Trial(NamedTuple):
    """Logarithms of the free numbers (variables,) with what they give."""

    x: Array
    score: float
    u: Array
    guess: Guess
    power: float


class _Maker:
    """Tries ways to make the two materials; the geometry follows each try."""

    def __init__(self, brief: Brief, job: Job, problems: Problems, span: tuple[float, float]) -> None:
        self.brief, self.job, self.problems, self.span = brief, job, problems, span
        self.base = {"n": job.materials[int(problems.n[0])], "p": job.materials[int(problems.p[0])]}
        self.variables = [v for side in ("n", "p") for v in self._variables(side)]
        self.known: dict[tuple[str, ...], Material] = {}

    def _variables(self, side: str) -> Iterator[Variable]:
        making = self.brief.materials.making(side)
        if not making.free:
            return
        whole = computed(self.base[side], side)
        for what in dict.fromkeys(making.free):
            if what == "grade":
                yield Variable(side, what, -_STEEPEST, _STEEPEST)
            elif what == "doping":
                bounds = whole.doping_bounds
                asked = making.doping_bounds or bounds
                whole.check_doping(asked)
                yield Variable(side, what, *np.log(asked))
            elif whole.grain_bounds is None:
                raise InputError(
                    f"materials.make_{side}: grain size is free but {whole.name} has no grains in its model; leave "
                    "it out"
                )
            else:
                yield Variable(side, what, *np.log(whole.grain_bounds))

    def start(self) -> tuple[Array, dict[str, float]]:
        """Return where to begin, with the dopings of the best mean figure of merit [1/m^3]."""
        from tegdesign.material.bands.optimum import best_doping

        best: dict[str, float] = {}
        x = []
        for v in self.variables:
            whole = computed(self.base[v.side], v.side)
            if v.what == "doping":
                first, last = np.clip(self.span, *whole.range)
                best[v.side] = best_doping(whole, float(first), float(last), bounds=tuple(np.exp((v.low, v.high))))[0]
                x.append(np.log(best[v.side]))
            else:
                x.append(0.0 if v.what == "grade" else np.log(whole.grain_size or 1.0))
        return np.clip(x, [v.low for v in self.variables], [v.high for v in self.variables]), best

    def made(self, side: str, x: Array) -> Made:
        """Return how the material of a side is made at x."""
        given = self.brief.materials.making(side).given
        own = {v.what: float(value) for v, value in zip(self.variables, x, strict=True) if v.side == side}
        values: dict[str, Any] = {"doping": given.doping, "grain_size": given.grain_size}
        if {"doping", "grade"} & set(own):
            whole = computed(self.base[side], side)
            low, high = whole.doping_bounds
            middle = np.exp(own["doping"]) if "doping" in own else whole.doping.cold
            if grade := own.get("grade", 0.0):
                cold, hot = np.clip(middle * np.exp((-grade, grade)), low, high)
                values |= {"doping": cold, "doping_hot": hot, "graded_between": self.span}
            else:
                values["doping"] = middle
        if "grain size" in own:
            values["grain_size"] = np.exp(own["grain size"])
        if own:
            short = ("doping", "doping_hot", "grain_size")
            values |= {k: float(f"{values[k]:.3g}") for k in short if values.get(k) is not None}
        return Made.model_construct(**values)

    def grains(self, side: str, made: Made) -> Grains | None:
        """Return what the grain size of a side does, None where it was not free; both at the doping chosen."""
        if not any(v.side == side and v.what == "grain size" for v in self.variables):
            return None
        from tegdesign.material.transport.constants import CHARGE

        t = np.array([sum(self.span) / 2])
        at = []
        for grain in (made.grain_size, computed(self.base[side], side).grain_size):
            whole = computed(made_of(self.base[side], made.model_copy(update={"grain_size": grain}), side), side)
            response = whole.response(t)
            carriers = response.electron_density if side == "n" else response.hole_density
            mobility = response.conductivity / (CHARGE * carriers)
            at.append((float(whole.lattice_thermal_conductivity(t)[0]), float(mobility[0])))
        return Grains(float(t[0]), at[0][0], at[1][0], at[0][1], at[1][1])

    def _material(self, side: str, x: Array) -> Material:
        made = self.made(side, x)
        if made.as_filed:
            return self.base[side]
        key = (side, repr(made))
        if key not in self.known:
            self.known[key] = made_of(self.base[side], made, side, _ROUGH)
        return self.known[key]

    def try_all(self, places: Sequence[Array], start: _Start | _Trial, widest: float) -> list[_Trial]:
        """Return what the places give, each with its geometry sought from the same start by the same steps."""
        materials: list[Material] = []
        index: list[list[int]] = []
        for x in places:
            pair = [self._material(side, x) for side in ("n", "p")]
            materials += [m for m in pair if all(m is not known for known in materials)]
            index.append([next(k for k, known in enumerate(materials) if known is m) for m in pair])
        count = len(places)
        n, p = np.array(index, dtype=np.intp).T
        job = replace(self.job, materials=materials)
        same = Problems(n, p, np.repeat(self.problems.series, count), np.repeat(self.problems.parallel, count))
        found = refine(self.brief, job, same, np.tile(start.u, (count, 1)), start.guess.take([0] * count), widest)
        e = evaluate(job, found.space.candidates(np.arange(count), found.u), rough=True, guess=found.guess)
        power = (e.rated.power * e.candidates.modules).tolist()
        return [
            _Trial(x, float(found.scores[k]), found.u[k], found.guess.take([k]), power[k])
            for k, x in enumerate(places)
        ]

    def climb(self, start: _Trial, frozen: NDArray[np.bool_]) -> _Trial:
        """Return the best place from a known one on; ``frozen`` variables stay."""
        low, high = np.array([(v.low, v.high) for v in self.variables]).T
        free, best, x = np.flatnonzero(~frozen), start, start.x
        for step in _STEPS:
            axes = [sign * step * np.eye(x.size)[k] for k in free for sign in (-1, 1)]
            tried = self.try_all([x, *(np.clip(x + axis, low, high) for axis in axes)], best, _GEOMETRY)
            best = max(*tried, best, key=lambda t: t.score)
            moved = x.copy()
            for j, k in enumerate(free):
                three = (tried[0], tried[2 * j + 1], tried[2 * j + 2])
                moved[k] = _top(np.array([t.x[k] for t in three]), np.array([t.score for t in three]))
            x = np.clip(moved, low, high)
        return max(*self.try_all([x, best.x], best, _GEOMETRY), best, key=lambda t: t.score)


def _top(x: Array, score: Array) -> float:
    """Return where a parabola through three points is highest, within 1.5 times their reach, or the best of them."""
    best = float(x[np.argmax(score)])
    if np.unique(x).size < 3 or score.min() < -1e3:
        return best
    a, b, _ = np.polyfit(x - x[0], score, 2)
    reach = float(np.ptp(x)) / 2
    return float(x[0] + np.clip(-b / (2 * a), -1.5 * reach, 1.5 * reach)) if a < 0 else best


def make(brief: Brief, job: Job, found: Found, which: int) -> Making:
    """Return how the pair of one answer of the search is best made.

    The search climbs from the dopings of the best mean figure of merit by parabolas in the logarithm of each free
    number, the geometry following every try. A grade is kept only where it gains.

    Raises
    ------
    InputError
        A material that shall be made otherwise is a table of one sample.
    """
    k = np.array([which])
    start = _Start(found.u[which], found.guess.take(k))
    span = float(start.guess.cold[0, 0]), float(start.guess.hot[0, 0])
    maker = _Maker(brief, job, found.problems.take(k), span)
    x, best_for_merit = maker.start()
    plain = maker.try_all([x], start, 2 * _GEOMETRY)[0]
    grades = np.array([v.what == "grade" for v in maker.variables])
    even = plain if grades.all() else maker.climb(plain, grades)
    best = even
    if grades.any():
        graded = maker.climb(even, np.zeros(grades.size, dtype=bool))
        best = graded if graded.score > even.score + _WORTH else even
    made = {side: maker.made(side, best.x) for side in ("n", "p")}
    choices = tuple(
        Choice(
            side, maker.base[side].name, made[side].doping, made[side].doping_hot, best_for_merit.get(side),
            made[side].grain_size, maker.grains(side, made[side]),
        )
        for side in ("n", "p")
        if any(v.side == side for v in maker.variables)
    )  # fmt: skip
    return Making(made, choices, best.power, plain.power, even.power if grades.any() else None)


def make_each(brief: Brief, job: Job, found: Found) -> list[Material]:
    """Return the materials of a job, each that shall be made as suits the brief with its best partner.

    Raises
    ------
    InputError
        A material that shall be made otherwise is a table of one sample.
    """
    materials, problems = list(job.materials), found.problems
    known: dict[int, Making] = {}
    for k, m in enumerate(job.materials):
        own = np.flatnonzero((problems.n if m.polarity == "n" else problems.p) == k)
        if not brief.materials.making(m.polarity).free or not own.size:
            continue
        pair = int(own[np.argmax(found.scores[own])])
        if pair not in known:
            known[pair] = make(brief, job, found, pair)
        materials[k] = made_of(m, known[pair].made[m.polarity], m.polarity)
    return materials
