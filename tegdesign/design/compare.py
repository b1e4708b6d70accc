"""Compare pairs: every allowed n with every allowed p, each with its own best geometry for one brief."""

from __future__ import annotations

import os
from collections.abc import Callable, Sequence
from dataclasses import asdict, dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.assemble import computed, material
from tegdesign.design.brief import Brief, as_brief
from tegdesign.design.deciding import deciding, only
from tegdesign.design.evaluate import Candidates, Evaluation, evaluate
from tegdesign.design.limits import Limit
from tegdesign.design.search import refine, search
from tegdesign.design.size import AFTER_MAKING, UNIT_OF_AIM, connections, job_of, silent
from tegdesign.design.space import Problems, score
from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.library import find, names
from tegdesign.material.material import Material

if TYPE_CHECKING:
    import pandas as pd


@dataclass(frozen=True)
class Rank:
    """One pair at its own best geometry (free dimensions, not rounded to workshop steps)."""

    n: str
    p: str
    met: bool
    limit: str
    power_W: float
    efficiency: float
    power_per_footprint_W_per_m2: float
    power_per_material_mass_W_per_kg: float
    material_mass_kg: float
    voltage_V: float
    open_circuit_voltage_V: float
    leg_length_m: float
    leg_side_n_m: float
    leg_side_p_m: float
    area_ratio_n_to_p: float
    couples_per_module: float
    modules_in_series: int
    modules_in_parallel: int
    T_hot_junction_K: float
    T_hot_junction_open_K: float
    T_cold_junction_K: float
    penalty_of_equal_areas: float
    compatibility_spread: float
    outside_data_K: float
    hazards: str
    doping_n_per_m3: float | None = None
    doping_p_per_m3: float | None = None


@dataclass(frozen=True)
class Dropped:
    """A pair that cannot serve the brief: the material and the limit that no geometry can hold, and by how much."""

    n: str
    p: str
    culprit: str
    reason: str


@dataclass(frozen=True)
class Comparison:
    """Pairs in the order of the aim, then those that drop out."""

    brief: Brief
    ranks: tuple[Rank, ...]
    dropped: tuple[Dropped, ...]

    @property
    def met(self) -> bool:
        """Whether any pair meets the brief."""
        return any(r.met for r in self.ranks)

    def to_frame(self) -> pd.DataFrame:
        """Return the ranked pairs as a table, the best first."""
        import pandas as pd

        frame = pd.DataFrame([asdict(r) for r in self.ranks])
        frame.index = pd.RangeIndex(1, len(frame) + 1, name="rank")
        return frame

    def to_dict(self) -> dict[str, Any]:
        """Return everything as plain values for JSON; keys end in their unit."""
        return {
            "title": self.brief.title,
            "aim": self.brief.aim,
            "met": self.met,
            "pairs": [asdict(r) for r in self.ranks],
            "dropped": [asdict(d) for d in self.dropped],
        }


def compare(
    brief: Brief | str | os.PathLike[str], *, progress: Callable[[float], None] = silent
) -> Comparison:
    """Rank every allowed pair of materials for a brief; lists left empty mean all measured materials.

    Where a side has something free, its computed materials are ranked, each made as suits the brief with its best
    partner.

    Raises
    ------
    InputError
        The brief cannot be read, or names an unknown material or one of the wrong polarity.
    """
    brief = as_brief(brief)
    sides = {side: _allowed(brief, side) for side in ("n", "p")}
    materials = [*sides["n"], *sides["p"]]
    whole = job_of(brief, materials)
    first_p = len(sides["n"])
    pairs = [(i, first_p + k) for i in range(first_p) for k in range(len(sides["p"]))]
    ways = list(connections(brief))
    table = np.array([(n, p, series, parallel) for n, p in pairs for series, parallel in ways])
    problems = Problems(table[:, 0], table[:, 1], table[:, 2].astype(float), table[:, 3].astype(float))

    def best_of_each_pair(_: Problems, scores: Array) -> NDArray[np.intp]:
        blocks = scores.reshape(len(pairs), len(ways))
        return np.asarray(np.arange(len(pairs)) * len(ways) + np.argmax(blocks, axis=1))

    states = deciding(brief, whole, problems)
    found = search(brief, only(whole, states), problems, best_of_each_pair, False, progress)
    if any(brief.materials.making(side).free for side in ("n", "p")):
        from tegdesign.design.making import make_each

        materials = make_each(brief, only(whole, states), found)
        whole = replace(whole, materials=materials)
        found = refine(brief, only(whole, states), found.problems, found.u, found.guess, AFTER_MAKING)
    problems, which = found.problems, np.arange(len(pairs))
    guess = found.guess if len(states) == len(whole.states) else None
    best = evaluate(whole, found.space.candidates(which, found.u), guess=guess)
    equal = evaluate(whole, _equal_areas(best.candidates), guess=best.guess)
    values = score(brief, best)
    order = np.argsort(-values, kind="stable")
    ranks, dropped = [], []
    for k in order:
        reason = _impossible(best, int(k))
        if reason:
            n, p = materials[problems.n[k]].name, materials[problems.p[k]].name
            dropped.append(Dropped(n, p, p if "p leg" in reason else n if "n leg" in reason else "", reason))
        else:
            ranks.append(_rank(best, equal, materials, int(k)))
    return Comparison(brief, tuple(ranks), tuple(dropped))


def _allowed(brief: Brief, side: str) -> list[Material]:
    """Return the materials named for a side, or all measured ones; all computed ones where they shall be made."""
    folder, making = brief.materials.folder, brief.materials.making(side)
    wanted: tuple[str, ...] = getattr(brief.materials, side)
    folders = [folder] if folder else []
    kind = "table" if making.as_filed else "bands"
    listed = wanted or [
        name for name in names(folders) if (m := find(name, folders)).polarity == side and m.kind == kind
    ]
    if not listed:
        raise InputError(f"materials.{side}: the library has no {side}-type material of kind {kind}")
    allowed = [material(name, side, folder, making.given) for name in dict.fromkeys(listed)]
    if making.free:
        for m in allowed:
            computed(m, side)
    return allowed


def _equal_areas(c: Candidates) -> Candidates:
    """Return the same geometries with both legs of the mean area."""
    side = np.sqrt((c.side_n**2 + c.side_p**2) / 2)
    return Candidates(
        c.n, c.p, c.leg_length, side, side, c.pitch, c.couples, c.footprint, c.series, c.parallel
    )


_HARD = ("service limit", "data point", "required hot junction", "required cold junction")


def _impossible(e: Evaluation, k: int) -> str:
    """Return why a pair cannot serve at all: a temperature limit that its best geometry still breaks."""
    if not np.isfinite(e.violation[k]):
        return "no operating point found at any geometry within the limits"
    hard = [item for item in e.limits if any(word in item.key for word in _HARD)]
    worst = max(hard, key=lambda item: float(item.violation[k]))
    return _broken(worst, k) if worst.violation[k] > 1e-9 else ""


def _broken(limit: Limit, k: int) -> str:
    value, bound = float(limit.value[k]), float(limit.bound[k])
    word = "above" if limit.sense == "most" else "below"
    unit, miss = limit.unit, abs(value - bound)
    return f"{limit.key}, {limit.state}: {value:.4g} {unit} is {miss:.3g} {unit} {word} {bound:.4g} {unit}"


def _tightest(e: Evaluation, k: int) -> str:
    """Return the limit with the least room, or nothing where all have plenty."""
    worst = max(e.limits, key=lambda item: float(item.violation[k]))
    violation = float(worst.violation[k])
    if violation > 1e-9:
        return _broken(worst, k)
    return f"{worst.key}, {worst.state}" if violation > -0.02 else ""


def _rank(e: Evaluation, equal: Evaluation, materials: Sequence[Material], k: int) -> Rank:
    c, n, p = e.candidates, materials[e.candidates.n[k]], materials[e.candidates.p[k]]
    count = float(c.modules[k])
    power = float(e.power[k])
    hot, cold = float(e.rated.hot_junction[k]), float(e.rated.cold_junction[k])
    opened = float(e.opened.hot_junction[k])
    mass = float(e.material_mass[k])
    outside = max(
        float(max(m.outside(min(cold, float(e.opened.cold_junction[k])), max(hot, opened)))) for m in (n, p)
    )
    return Rank(
        n=n.name,
        p=p.name,
        met=bool(e.violation[k] <= 1e-9),
        limit=_tightest(e, k),
        power_W=power,
        efficiency=float(e.efficiency[k]),
        power_per_footprint_W_per_m2=power / (count * float(c.footprint[k])),
        power_per_material_mass_W_per_kg=power / mass,
        material_mass_kg=mass,
        voltage_V=float(e.rated.voltage[k] * c.series[k]),
        open_circuit_voltage_V=float(e.opened.voltage[k] * c.series[k]),
        leg_length_m=float(c.leg_length[k]),
        leg_side_n_m=float(c.side_n[k]),
        leg_side_p_m=float(c.side_p[k]),
        area_ratio_n_to_p=float((c.side_n[k] / c.side_p[k]) ** 2),
        couples_per_module=float(c.couples[k]),
        modules_in_series=round(float(c.series[k])),
        modules_in_parallel=round(float(c.parallel[k])),
        T_hot_junction_K=hot,
        T_hot_junction_open_K=opened,
        T_cold_junction_K=cold,
        penalty_of_equal_areas=float(1 - equal.objective[k] / e.objective[k]),
        compatibility_spread=_compatibility(n, p, hot, cold),
        outside_data_K=outside,
        hazards=", ".join(dict.fromkeys([*n.hazard_tags, *p.hazard_tags])),
        doping_n_per_m3=n.majority_doping,
        doping_p_per_m3=p.majority_doping,
    )


def _compatibility(n: Material, p: Material, hot: float, cold: float) -> float:
    """Return the largest over the smallest |compatibility factor| of both legs between the junctions.

    Snyder and Ursell 2003, doi 10.1103/PhysRevLett.91.148301; above about 2 a leg is driven far from its best
    current over part of its length (factor 2: common practice, no source).
    """
    spread = []
    for m in (n, p):
        s = np.abs(m.compatibility_factor(np.linspace(cold, hot, 41)))
        spread.append((s.min(), s.max()))
    return float(max(v[1] for v in spread) / min(v[0] for v in spread))


def aimed(rank: Rank, aim: str) -> float:
    """Return the quantity aimed at."""
    return float(getattr(rank, UNIT_OF_AIM[aim]))
