"""Modules of a design wired to arrays, each with its own surroundings: what is solved for every question about them."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from tegdesign.design import members
from tegdesign.design.assemble import modules_of
from tegdesign.design.design import Design
from tegdesign.errors import ConvergenceError, InputError
from tegdesign.material.curve import Array
from tegdesign.system.array import ArrayPoint, array_point, independent_power
from tegdesign.system.boundary import AnyBoundary, Stream
from tegdesign.system.driven import at_current
from tegdesign.system.law import Law, join
from tegdesign.system.load import AnyLoad, Matched, mixed
from tegdesign.system.rows import rows_point
from tegdesign.system.strings import Diode, strings

DIODE_RESISTANCE = 0.01  # ohm above the drop: common practice, no source


@dataclass(frozen=True)
class Failed:
    """Modules that have failed, counted from 0."""

    broken: tuple[int, ...] = ()
    shorted: tuple[int, ...] = ()
    cold: tuple[int, ...] = ()

    def whole(self, count: int) -> list[int]:
        """Return the modules of so many through which current flows as it should."""
        return [k for k in range(count) if k not in (*self.broken, *self.shorted)]


@dataclass(frozen=True)
class Case:
    """One array to be solved: the string of each module, what has failed, the load of all."""

    string: tuple[int, ...]
    failed: Failed
    load: AnyLoad


@dataclass(frozen=True)
class Solved:
    """One solved array, cut out of a batch."""

    point: ArrayPoint
    array: int
    modules: slice
    strings: slice

    def value(self, name: str) -> Array:
        """Return a quantity of the modules."""
        return np.asarray(getattr(self.point.module, name)[self.modules])

    @property
    def power(self) -> float:
        """Power at the load [W]."""
        return float(self.point.power[self.array])

    @property
    def voltage(self) -> float:
        """Voltage at the load [V]."""
        return float(self.point.voltage[self.array])

    @property
    def current(self) -> float:
        """Current of the load [A]."""
        return float(self.point.current[self.array])

    @property
    def string_current(self) -> Array:
        """Current of each string [A]."""
        return self.point.string_current[self.strings]

    @property
    def exact(self) -> NDArray[np.bool_]:
        """Modules that were solved with exact legs."""
        return self.point.exact[self.modules]

    @property
    def backwards(self) -> list[int]:
        """Modules that take power from the others."""
        power = self.value("power")
        return [int(k) for k in np.flatnonzero(power < -members.ROUNDING * np.abs(power).max())]


class Wiring:
    """The modules with their surroundings, and how arrays of them are solved."""

    def __init__(
        self,
        design: Design,
        count: int,
        hot: Sequence[float],
        cold: Sequence[float],
        bypass_drop: float | None,
        blocking_drop: float | None,
    ) -> None:
        """Take so many modules between source and sink temperatures [K], diodes by their drops [V]."""
        self.design, self.count, self.one = design, count, modules_of([design])
        self.diodes = {
            name: None if drop is None else Diode(drop, DIODE_RESISTANCE).checked(name)
            for name, drop in (("bypass", bypass_drop), ("blocking", blocking_drop))
        }
        along = self._along() if isinstance(design.source, Stream) and not (hot and cold) else {}
        self.hot = _temperatures("hot", hot, along, design.source, count)
        self.cold = _temperatures("cold", cold, along, design.sink, count)
        given = design.source.given_heat
        for k, (t, sink) in enumerate(zip(self.hot, self.cold, strict=True)):
            if given is None and t < sink:
                raise InputError(
                    f"module {k + 1}: source of {t:.6g} K is colder than its sink of {sink:.6g} K; mend one of them"
                )
        told = []
        for side, name, asked in (("source", "hot", hot), ("sink", "cold", cold)):
            told.append(
                f"{side} {'as asked for' if asked else 'along its stream' if name in along else 'of the design'}"
            )
        followed = any(name in along and not asked for name, asked in (("hot", hot), ("cold", cold)))
        self.words = ", ".join(told) + (" (rows of one module with matched loads)" if followed else "")
        warm = [self._law(design.source, t) for t in self.hot] if given is None else [self._heat(1.0)] * count
        chilled = [self._law(design.source, t) for t in self.cold] if given is None else [self._heat(0.0)] * count
        self.source = join([*warm, *chilled])  # those of cold modules behind all others
        self.sink = join([self._law(design.sink, t) for t in self.cold])

    def _along(self) -> dict[str, Array]:
        """Return the stream temperatures before each of as many rows as modules."""
        ones = np.ones(self.count)
        point = rows_point(self.one, self.design.source, self.design.sink, Matched().law(ones, ones), rows=self.count)
        told = {"hot": point.source_before[0], "cold": point.sink_before[0]}
        return {name: values for name, values in told.items() if not np.isnan(values).any()}

    def _law(self, boundary: AnyBoundary, temperature: float) -> Law:
        """Return the law of one module: its share of the boundary, of a stream the whole flow."""
        own: Any = boundary.at(temperature)
        if isinstance(own, Stream):
            own = own.model_copy(update={"mass_flow": own.mass_flow * self.count})
        return self._shared(own)

    def _heat(self, share: float) -> Law:
        return self._shared(self.design.source.scaled(share))

    def _shared(self, boundary: AnyBoundary) -> Law:
        g = self.design.module
        return boundary.law(np.array([g.width * g.depth]), np.array([float(self.count)]))

    def dead(self, string: Sequence[int], failed: Failed) -> str:
        """Return why no power can come out, or nothing."""
        failed = self._behind_diodes(string, failed)
        held = _inside(string)
        if any(set(modules) <= set(failed.shorted) for modules in held):
            return "a string of shorted modules alone shorts the array"
        broken = set(failed.broken)
        passed = [self.diodes["bypass"] is not None and not set(modules) <= broken for modules in held]
        if not any(free or not broken & set(modules) for free, modules in zip(passed, held, strict=True)):
            return "every string has an open joint, so no current can flow"
        return ""

    def _behind_diodes(self, string: Sequence[int], failed: Failed) -> Failed:
        """Return what has failed with strings of shorted modules alone as open ones, where a diode blocks them."""
        if self.diodes["blocking"] is None:
            return failed
        held = {k for modules in _inside(string) if set(modules) <= set(failed.shorted) for k in modules}
        return replace(
            failed,
            broken=(*failed.broken, *held),
            shorted=tuple(k for k in failed.shorted if k not in held),
        )

    def solve(self, cases: Sequence[Case]) -> list[Solved]:
        """Solve arrays all in one batch.

        Raises
        ------
        ConvergenceError
            One of them has no operating point.
        """
        n = self.count
        string, owner, broken, shorted, which = [], [], [], [], []
        start = 0
        for k, case in enumerate(cases):
            string += [start + s for s in case.string]
            size = max(case.string) + 1
            owner += [k] * size
            start += size
            failed = self._behind_diodes(case.string, case.failed)
            broken += [k * n + b for b in failed.broken]
            shorted += [k * n + b for b in failed.shorted]
            which += [b + n * (b in case.failed.cold) for b in range(n)]
        one = np.ones(1)
        point = array_point(
            self.one.take(np.zeros(n * len(cases), dtype=np.intp)),
            self.source.take(np.array(which)),
            self.sink.take(np.tile(np.arange(n), len(cases))),
            strings(string, owner, broken=broken, shorted=shorted, **self.diodes),
            mixed([case.load.law(one, one) for case in cases]),
        )
        bounds = np.cumsum([0, *(max(case.string) + 1 for case in cases)])
        return [
            Solved(point, k, slice(k * n, (k + 1) * n), slice(int(bounds[k]), int(bounds[k + 1])))
            for k in range(len(cases))
        ]

    def solve_each(self, cases: Sequence[Case]) -> list[Solved | str]:
        """Solve arrays of which some may be dead or without a state; what is the matter stands in their place."""
        out: list[Solved | str] = [self.dead(case.string, case.failed) for case in cases]
        alive = [k for k, words in enumerate(out) if not words]
        try:
            found: Iterable[Solved | str] = self.solve([cases[k] for k in alive]) if alive else []
        except ConvergenceError:  # of one of them, so each by itself
            found = [self._solved(cases[k]) for k in alive]
        for k, result in zip(alive, found, strict=True):
            out[k] = result
        return out

    def _solved(self, case: Case) -> Solved | str:
        try:
            return self.solve([case])[0]
        except ConvergenceError:
            return "no operating point found"

    def without_current(self) -> tuple[Array, Array]:
        """Return hot and cold junctions of each module when no current passes it [K] (M,)."""
        n = self.count
        modules, source = self.one.take(np.zeros(n, dtype=np.intp)), self.source.take(np.arange(n))
        point, _ = at_current(modules, source, self.sink, np.zeros(n), exact=np.ones(n, dtype=bool))
        return point.hot_junction, point.cold_junction

    def own_power(self) -> Array:
        """Return what each module would give with a matched load of its own [W] (M,)."""
        n = self.count
        alone = strings(range(n), range(n))
        return independent_power(
            self.one.take(np.zeros(n, dtype=np.intp)), self.source.take(np.arange(n)), self.sink, alone
        )


def _inside(string: Sequence[int]) -> list[list[int]]:
    """Return the modules of each string."""
    held: list[list[int]] = [[] for _ in range(max(string) + 1)]
    for k, s in enumerate(string):
        held[s].append(k)
    return held


def _temperatures(
    name: str, given: Sequence[float], along: dict[str, Array], boundary: AnyBoundary, count: int
) -> list[float]:
    """Return one temperature [K] for every module."""
    if given and boundary.given_heat is not None:
        raise InputError(
            f"{name}: a source of kind '{boundary.kind}' gives its heat, its temperature is a result; leave {name} out"
        )
    values = list(given) or (along[name].tolist() if name in along else [boundary.reference_temperature])
    if len(values) not in (1, count):
        raise InputError(f"{name}: {len(values)} temperatures for {count} modules; give {count}, or one for all")
    return [float(v) for v in values] * (count if len(values) == 1 else 1)
