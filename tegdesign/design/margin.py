"""How far a design is from failing: break-even of every state, windows of dimensions, limits that exclude others."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Literal, NamedTuple

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.condition import OPEN, SHORT
from tegdesign.design.evaluate import Evaluation
from tegdesign.design.margin_result import BreakEven, End, Margins, Mend, Window
from tegdesign.design.seek import BROKEN, Bracket, Scan, present, refine, scan
from tegdesign.design.variables import (
    DIFFERENCE,
    FILM,
    FLOW,
    HOTTEST,
    PARALLEL,
    SERIES,
    SHAPES,
    SIDES,
    Variable,
    Varying,
)
from tegdesign.material.curve import Array

POWER, TEMPERATURES, EVERYTHING = "required power", "temperature limits", "all limits"
UNSOLVED = "no operating point"

Direction = Literal["down", "up"]
Rows = NDArray[np.intp]
Scans = Mapping[tuple[Variable, Direction], Scan]


class _Ask(NamedTuple):
    """A search in one group of states: the limits ``rows`` shall begin to break (``leaving``) or to hold.

    ``stops`` are limits of the material data: where one of them breaks first, the search ends.
    """

    variable: Variable
    group: int
    purpose: str
    rows: Rows
    leaving: bool
    direction: Direction
    stops: Rows


class _Shape(NamedTuple):
    """A search along a dimension: where what holds begins to break, or limits of one name all begin to hold."""

    variable: Variable
    direction: Direction
    mended: str  # name of the limits that shall hold; empty for what holds now


def _finer(ratios: Array) -> Array:
    """Return ratios with two more before each, evenly in their logarithms."""
    logs = np.log(np.concatenate([[1.0], ratios]))
    return np.asarray(np.exp(np.interp(np.arange(1, 3 * ratios.size + 1) / 3, np.arange(ratios.size + 1), logs)))


def margins(evaluation: Evaluation) -> Margins:
    """Return how far a design is from failing.

    Parameters
    ----------
    evaluation : Evaluation
        The design as a batch of one, solved in all its states.
    """
    return _Search(evaluation).margins()


class _Search:
    def __init__(self, evaluation: Evaluation) -> None:
        self.varying = Varying(evaluation)
        self.limits = evaluation.limits
        self.present, self.start = present(self.varying)
        self.holds = self.present <= BROKEN
        self.group = np.array([self.varying.group_of[limit.state] for limit in self.limits])
        self.hard = np.array([limit.hard for limit in self.limits])
        self.data = np.array(["data point" in limit.key for limit in self.limits])
        self.power = np.array([limit.key == POWER for limit in self.limits])

    @property
    def _failing(self) -> list[str]:
        """Names of the limits that are missed now."""
        return sorted({limit.key for limit, held in zip(self.limits, self.holds, strict=True) if not held})

    def margins(self) -> Margins:
        asks, variables = list(self._asks()), self._shapes()
        wanted: dict[tuple[Variable, Direction], Array] = {}
        for ask in asks:
            ratios = self._ratios(ask.variable, ask.direction)
            own = wanted.setdefault((ask.variable, ask.direction), np.ones_like(ratios))
            own[ask.group] = ratios[ask.group]
        sides: tuple[Direction, Direction] = ("down", "up")
        for key in ((v, d) for v in variables for d in sides):
            if (ratios := self._ratios(*key)).size:
                wanted[key] = ratios
        found = scan(self.varying, [(key[0], ratios) for key, ratios in wanted.items()])
        scans: Scans = dict(zip(wanted, found, strict=True))
        evens = [self._brackets(scans, ask) for ask in asks]
        shapes = self._shape_brackets(scans)
        refine(self.varying, [b for pair in evens for b in pair if b is not None] + list(shapes.values()))
        met = bool(self.holds.all())
        return Margins(
            tuple(self._break_even(scans, ask, *pair) for ask, pair in zip(asks, evens, strict=True)),
            tuple(self._window(scans, shapes, v) for v in variables) if met else (),
            () if met else tuple(self._mends(shapes)),
        )

    def _asks(self) -> Iterator[_Ask]:
        """Yield what is looked for in each group of states: power, temperatures, film of the sink."""
        for g in range(len(self.varying.groups)):
            own = self.group == g
            variables = [v for v in SIDES if self.varying.now(v, g) is not None]
            drives = [v for v in variables if v is not FILM]
            for variable in drives:
                if (own & self.power).any():
                    stops = np.flatnonzero(own & self.data & self.holds)
                    yield self._ask(variable, g, POWER, own & self.power, "down", stops)
            for variable in drives:
                if variable is not FLOW and (own & self.hard).any():
                    yield self._ask(variable, g, TEMPERATURES, own & self.hard, "up")
            if FILM in variables and own.any():
                yield self._ask(FILM, g, EVERYTHING, own, "down")

    def _ask(
        self, variable: Variable, group: int, purpose: str, which: NDArray[np.bool_], failing: Direction,
        stops: Rows | None = None,
    ) -> _Ask:  # fmt: skip
        """Return where limits break, or hold again if some are broken now; ``failing`` is the way they break."""
        broken = which & ~self.holds
        leaving = not broken.any()
        back: Direction = "up" if failing == "down" else "down"
        rows = np.flatnonzero(which if leaving else broken)
        none = np.empty(0, dtype=np.intp) if stops is None else stops
        return _Ask(variable, group, purpose, rows, leaving, failing if leaving else back, none)

    def _ratios(self, variable: Variable, direction: Direction) -> Array:
        """Return the ratios to look at (groups, columns)."""
        groups = self.varying.groups
        plain = variable.ratios(self.varying.base.candidates, direction)
        if variable.side == "shape" and not variable.whole and plain.size and not self.holds.all():
            plain = _finer(plain)  # what would mend a limit may lie on a narrow summit
        ratios = np.tile(plain, (len(groups), 1))
        if variable is not DIFFERENCE:
            return ratios
        sinks = [state.sink.reference_temperature for state in groups]
        now = [self.varying.now(variable, g) for g in range(len(groups))]
        most = [np.inf if d is None else (HOTTEST - t) / d for t, d in zip(sinks, now, strict=True)]
        return np.minimum(ratios, np.maximum(most, 1.0)[:, None])

    def _brackets(self, scans: Scans, ask: _Ask) -> tuple[Bracket | None, Bracket | None]:
        """Return the place of what is asked and that of the end of the data, where the scan met them."""
        along = scans[ask.variable, ask.direction]
        asked = along.bracket(ask.rows, ask.leaving, self.present, self.start, ask.group)
        if not ask.stops.size:
            return asked, None
        return asked, along.bracket(ask.stops, True, self.present, self.start, ask.group)

    def _break_even(self, scans: Scans, ask: _Ask, asked: Bracket | None, stop: Bracket | None) -> BreakEven:
        ratios = scans[ask.variable, ask.direction].ratios[ask.group]
        ended = stop is not None and (asked is None or abs(stop.place - 1) < abs(asked.place - 1))
        bracket = stop if ended else asked
        ratio, limit, state = float(ratios[-1]), "", ""
        outside = np.flatnonzero(self.data & ~self.holds & (self.group == ask.group))
        if ask.purpose == POWER and outside.size:  # what is held outside its data now is not carried on
            ratio, limit, state, ended = 1.0, self.limits[outside[0]].key, self.limits[outside[0]].state, True
        elif bracket is not None:
            ratio, limit, state = self._told(bracket)
        names = ask.variable.name, ask.variable.key, ask.variable.unit
        now = self.varying.now(ask.variable, ask.group)
        assert now is not None
        value, loaded = ratio * now, self.varying.groups[ask.group]
        source = None
        if ask.variable is DIFFERENCE:
            source = value + loaded.sink.reference_temperature
            if ask.purpose == TEMPERATURES:  # what an engineer reads off is the temperature
                names = "source temperature", "source_temperature_K", "K"
                now, value = loaded.source.reference_temperature, source
        failing = "down" if ask.leaving else "up"
        sense = "least" if ask.direction == failing else "most"
        reached = bracket is not None and not ended and limit != UNSOLVED
        return BreakEven(loaded.name, *names, sense, now, value, ask.purpose, limit, state, reached, source)

    def _told(self, bracket: Bracket) -> tuple[float, str, str]:
        """Return ratio, limit and state of a place that was found."""
        k = bracket.decisive
        if k is None:
            return bracket.place, UNSOLVED, self._unsolved(bracket)
        limit = self.limits[bracket.rows[k]]
        return bracket.place, limit.key, limit.state

    def _unsolved(self, bracket: Bracket) -> str:
        lost = np.flatnonzero(np.isnan(bracket.at_far))
        return self.limits[bracket.rows[lost[0]]].state if lost.size else ""

    def _shapes(self) -> list[Variable]:
        """Return the dimensions to look at; how modules are joined only where that makes a difference."""
        c, job = self.varying.base.candidates, self.varying.base.job
        adapting = all(state.load.adapts for state in job.states if not state.of and state.load not in (OPEN, SHORT))
        volts = any(limit.unit == "V" for limit in self.limits) or not adapting
        left_out = set()
        if not volts:
            left_out.add(PARALLEL if c.series[0] > 1 or c.parallel[0] == 1 else SERIES)
        return [v for v in SHAPES if v not in left_out]

    def _shape_brackets(self, scans: Scans) -> dict[_Shape, Bracket]:
        """Return where what holds begins to break along each dimension, and where what is missed begins to hold."""
        held = np.flatnonzero(self.holds)
        found: dict[_Shape, Bracket] = {}
        for (variable, direction), along in scans.items():
            if variable.side != "shape":
                continue
            searches = [("", held, True)] if held.size else []
            for key in self._failing:
                own = np.array([limit.key == key for limit in self.limits])
                searches.append((key, np.flatnonzero(own & ~self.holds), False))
            for name, rows, leaving in searches:
                bracket = along.bracket(rows, leaving, self.present, self.start)
                if bracket is not None:
                    found[_Shape(variable, direction, name)] = bracket
        return found

    def _window(self, scans: Scans, shapes: Mapping[_Shape, Bracket], variable: Variable) -> Window:
        now = self.varying.now(variable)
        assert now is not None
        low = self._end(scans, shapes, variable, "down", now)
        high = self._end(scans, shapes, variable, "up", now)
        return Window(variable.name, variable.key, variable.unit, now, low, high)

    def _end(
        self, scans: Scans, shapes: Mapping[_Shape, Bracket], variable: Variable, direction: Direction, now: float
    ) -> End:
        bracket = shapes.get(_Shape(variable, direction, ""))
        if bracket is not None:
            ratio, limit, state = self._told(bracket)
            return End(ratio * now, limit, state)
        if (variable, direction) not in scans:
            return End(now, variable.end if direction == "up" else "", "")
        ratio = float(scans[variable, direction].ratios[0, -1])
        most = variable.most(self.varying.base.candidates)
        natural = direction == "up" and abs(ratio / most - 1) < 1e-9
        return End(ratio * now, variable.end if natural else "", "")

    def _mends(self, shapes: Mapping[_Shape, Bracket]) -> Iterator[Mend]:
        """Yield for every limit that is missed where it would hold, with what breaks on the way or stays missed."""
        for shape, bracket in shapes.items():
            if not shape.mended:
                continue
            now = self.varying.now(shape.variable)
            assert now is not None
            ratio, limit, state = self._told(bracket)
            sense = "most" if shape.direction == "down" else "least"
            v = shape.variable
            others = (shape._replace(mended=key) for key in self._failing)
            still = tuple(other.mended for other in others if not self._mended_by(shapes, other, ratio))
            against = self._against(shapes, shape, ratio, now)
            yield Mend(limit, state, v.name, v.key, v.unit, now, sense, ratio * now, against, still)

    def _mended_by(self, shapes: Mapping[_Shape, Bracket], shape: _Shape, ratio: float) -> bool:
        """Tell whether the limits of a search hold from a ratio on."""
        return shape in shapes and abs(shapes[shape].place - 1) <= abs(ratio - 1) + 1e-9

    def _against(self, shapes: Mapping[_Shape, Bracket], shape: _Shape, ratio: float, now: float) -> End | None:
        """Return what breaks on the way to a mend, or what else is missed and needs the other way; None if nothing."""
        way = shapes.get(shape._replace(mended=""))
        if way is not None and abs(way.place - 1) < abs(ratio - 1):
            place, limit, state = self._told(way)
            return End(place * now, limit, state)
        back: Direction = "up" if shape.direction == "down" else "down"
        for other, bracket in shapes.items():
            opposite = other.variable is shape.variable and other.direction == back and other.mended
            if opposite and other.mended != shape.mended and shape._replace(mended=other.mended) not in shapes:
                place, limit, state = self._told(bracket)
                return End(place * now, limit, state)
        return None
