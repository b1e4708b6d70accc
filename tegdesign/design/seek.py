"""Where along a variable limits begin to break or to hold: brackets from a scan, drawn together in a few batches."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from tegdesign.design.evaluate import Evaluation, Guess
from tegdesign.design.variables import DIFFERENCE, HEAT, Look, Variable, Varying, violations
from tegdesign.material.curve import Array

BROKEN = 1e-9  # of a unit of violation, as in a rating
_ROUNDS, _NARROW = 14, 1e-4  # rounds at most; width of a bracket, as a ratio, at which it is done
_ASIDE = 0.02  # of a bracket: how far beside the foretold place it is looked
_SMOOTH = 0.01  # width at which a bracket is done whose place was foretold: what is left is about its square


@dataclass
class Bracket:
    """A stretch of ratios, from the present outwards, in which limits begin to break (``leaving``) or to hold.

    ``rows`` numbers the limits, ``near`` and ``far`` are the ends with the violations of these limits; nan where a
    state was not solved. ``group`` is None for a shape. ``from_near`` and ``from_far`` hold junctions and current of
    every state there, (3, states).
    """

    variable: Variable
    group: int | None
    rows: NDArray[np.intp]
    leaving: bool
    near: float
    far: float
    at_near: Array
    at_far: Array
    from_near: Array
    from_far: Array
    foretold: bool = False

    @property
    def width(self) -> float:
        """Distance of the ends."""
        return abs(self.far - self.near)

    @property
    def done(self) -> bool:
        """Whether the place is known well enough."""
        known = self.foretold or self.decisive is None  # to the end of what can be solved it need not be closer
        return self.variable.whole or self.width <= (_SMOOTH if known else _NARROW)

    def crossings(self) -> Array:
        """Return the ratio at which each limit that changes sides crosses its bound, were it straight; else nan."""
        broken, sound = (self.at_far, self.at_near) if self.leaving else (self.at_near, self.at_far)
        changes = (broken > BROKEN) & (sound <= BROKEN)
        with np.errstate(divide="ignore", invalid="ignore"):
            share = np.clip(self.at_near / (self.at_near - self.at_far), 0.0, 1.0)
        return np.where(changes, self.near + share * (self.far - self.near), np.nan)

    @property
    def decisive(self) -> int | None:
        """Which of ``rows`` decides: the first to break or the last to hold; None where a state is not solved."""
        x = self.crossings()
        if np.all(np.isnan(x)):
            return None
        away = np.abs(x - self.near)
        return int(np.nanargmin(away) if self.leaving else np.nanargmax(away))

    @property
    def place(self) -> float:
        """Ratio at which it happens, as far as known; the last number that holds where only whole ones count."""
        if self.variable.whole:
            return self.near if self.leaving else self.far
        k = self.decisive
        return self.near if k is None else float(self.crossings()[k])

    def aims(self) -> Array:
        """Return three ratios to look at next."""
        width = self.far - self.near
        if self.decisive is None:
            return self.near + width * np.array([0.25, 0.5, 0.75])
        share = np.clip((self.place - self.near) / width, 2 * _ASIDE, 1 - 2 * _ASIDE)
        return self.near + width * np.sort(np.array([share - _ASIDE, share + _ASIDE, 0.5]))

    def starts(self, ratios: Array) -> Array:
        """Return where to start at these ratios, (3, states, ratios)."""
        share = (ratios - self.near) / (self.far - self.near)
        between = self.from_near[..., None] + share * (self.from_far - self.from_near)[..., None]
        return np.where(np.isfinite(between), between, self.from_near[..., None])

    def draw_together(self, ratios: Array, values: Array, starts: Array) -> None:
        """Take violations (limits, 3) at three ratios, sorted outwards, with guesses (3, states, 3)."""
        before = self.width
        for k, ratio in enumerate(ratios):
            own = values[:, k]
            if changed(own, self.leaving):
                self.far, self.at_far, self.from_far = float(ratio), own, starts[:, :, k]
                break
            self.near, self.at_near, self.from_near = float(ratio), own, starts[:, :, k]
        self.foretold = self.width < 2.5 * _ASIDE * before


def changed(values: Array, leaving: bool) -> bool:
    """Tell whether limits have begun to break, or to hold; states that are not solved count as broken."""
    sound = bool(np.all(values <= BROKEN))
    return not sound if leaving else sound


@dataclass(frozen=True)
class Scan:
    """Violations along one side of one variable: ratios (groups, columns) outwards, values (limits, columns)."""

    variable: Variable
    ratios: Array
    values: Array
    guess: Array  # (3, states, columns)

    def bracket(
        self, rows: NDArray[np.intp], leaving: bool, present: Array, start: Array, group: int | None = None
    ) -> Bracket | None:
        """Return where the limits ``rows`` first change from how they are at present, None where they do not."""
        ratios = self.ratios[group or 0]
        near, at_near = 1.0, present[rows]
        for k, ratio in enumerate(ratios):
            own = self.values[rows, k]
            if changed(own, leaving):
                ends = near, float(ratio), at_near, own, start, self.guess[:, :, k]
                return Bracket(self.variable, group, rows, leaving, *ends)
            if not leaving and np.any(np.isnan(own)):
                return None
            near, at_near, start = float(ratio), own, self.guess[:, :, k]
        return None


def along(varying: Varying, variable: Variable, ratios: Array) -> Evaluation:
    """Return one variable over ratios (groups, columns), solved."""
    look = Look(variable, ratios)
    return varying.solve([look], Guess(*_from_present(varying, look)))


def scan(varying: Varying, wanted: Sequence[tuple[Variable, Array]]) -> list[Scan]:
    """Return scans of variables over ratios (groups, columns), solved in one rough batch."""
    if not wanted:
        return []
    looks = [Look(*one) for one in wanted]
    guesses = [_from_present(varying, look) for look in looks]
    e = varying.solve(looks, Guess(*(np.concatenate([g[k] for g in guesses], axis=1) for k in range(3))), rough=True)
    values, _ = violations(e)
    table, found, start = _table(e), [], 0
    for look in looks:
        here = slice(start, start + look.ratios.shape[1])
        found.append(Scan(look.variable, look.ratios, values[:, here], table[:, :, here]))
        start = here.stop
    return found


def present(varying: Varying) -> tuple[Array, Array]:
    """Return the violations now (limits,), and the guess of every state (3, states)."""
    return violations(varying.base)[0][:, 0], _table(varying.base)[:, :, 0]


def refine(varying: Varying, brackets: Sequence[Bracket]) -> None:
    """Draw brackets together (in place) until each is known: a few batches of all that are open.

    Those of one variable that belong to different groups share their columns.
    """
    for _ in range(_ROUNDS):
        slots = _slots([b for b in brackets if not b.done])
        if not slots:
            return
        own = _table(varying.base)[:, :, 0]
        looks, starts = [], []
        for slot in slots:
            ratios = np.ones((len(varying.groups), 3))
            start = np.repeat(own[:, :, None], 3, axis=2)
            for b in slot:
                aims = b.aims()
                ratios[slice(None) if b.group is None else b.group] = aims
                which = _states(varying, b)
                start[:, which] = b.starts(aims)[:, which]
            looks.append(Look(slot[0].variable, ratios))
            starts.append(start)
        e = varying.solve(looks, Guess(*np.concatenate(starts, axis=2)))
        values, _ = violations(e)
        table = _table(e)
        for k, (slot, look) in enumerate(zip(slots, looks, strict=True)):
            columns = slice(3 * k, 3 * k + 3)
            for b in slot:
                b.draw_together(look.ratios[b.group or 0], values[b.rows, columns], table[:, :, columns])


def _slots(brackets: Sequence[Bracket]) -> list[list[Bracket]]:
    """Return the brackets in sets that can share their columns: one variable, each group once."""
    slots: list[list[Bracket]] = []
    for b in brackets:
        for slot in slots:
            if slot[0].variable is b.variable and b.group is not None and all(b.group != o.group for o in slot):
                slot.append(b)
                break
        else:
            slots.append([b])
    return slots


def _states(varying: Varying, b: Bracket) -> NDArray[np.intp]:
    states = varying.base.job.states
    return np.array([k for k, s in enumerate(states) if b.group is None or varying.group_of[s.name] == b.group])


def _table(e: Evaluation) -> Array:
    """Return the states of an evaluation as guesses (3, states, B); those not solved as they are."""
    return np.stack(list(e.guess))


def _from_present(varying: Varying, look: Look) -> list[Array]:
    """Return where to start each column: from the present, junctions and current going with the source."""
    e, states = varying.base, varying.base.job.states
    own = e.guess
    ratio = np.ones((len(states), look.ratios.shape[1]))
    if look.variable is DIFFERENCE or look.variable is HEAT:
        ratio = look.ratios[[varying.group_of[s.name] for s in states]]
    sink = np.array([[s.sink.reference_temperature] for s in states])
    return [sink + ratio * (own.hot - sink), sink + ratio * (own.cold - sink), ratio * own.scaled_current]
