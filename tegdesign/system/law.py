"""What a boundary tells the solver: face temperature and heat that belong together, per module, arrays of the batch."""

from __future__ import annotations

from abc import ABC, abstractmethod
from collections.abc import Sequence
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from tegdesign.material.curve import Array

_HOTTEST = 1e5  # K, no face is looked for above


class Shape(ABC):
    """How a law departs from a straight line; equal shapes of a batch are evaluated together."""

    @abstractmethod
    def evaluate(self, numbers: Array, temperature: Array, heat: Array) -> tuple[Array, Array, Array]:
        """Return the term f and its derivatives by temperature [K] and heat [W]; ``numbers`` (k, M), others (M,)."""

    def known(self, numbers: Array, temperature: Array, heat: Array) -> NDArray[np.bool_]:
        """Tell where the shape is known; everywhere, unless it is a table."""
        return np.ones(heat.shape, dtype=bool)


class Term(NamedTuple):
    """A shape with its numbers (k, M) and the wall [K/W] (M,) before it, for the designs ``which`` (M,) of a batch."""

    shape: Shape
    numbers: Array
    wall: Array
    which: NDArray[np.intp]


class Law(NamedTuple):
    """A boundary law a T + b Q + terms(T + wall Q, Q) = c, with Q [W] the heat that one module draws.

    A surface held at T_s is (1, 0, T_s); a film of conductance g [W/K] at T_f is (g, 1, g T_f); a fixed heat is
    (leak, 1, Q + leak T_ambient). Radiation, natural convection and tables add a term; most batches have none. A
    design has at most one term of a shape.
    """

    a: Array
    b: Array
    c: Array
    terms: tuple[Term, ...] = ()

    def take(self, which: Any) -> Law:
        """Return the law of the designs ``which``."""
        straight = (self.a[which], self.b[which], self.c[which])
        if not self.terms:
            return Law(*straight)
        chosen = np.arange(self.a.size)[which]
        return Law(*straight, tuple(kept for t in self.terms if (kept := _pick(t, chosen, self.a.size)).which.size))

    def evaluate(self, face: Array, heat: Array) -> tuple[Array, Array, Array]:
        """Return the misfit of the law and its derivatives by face temperature [K] and heat [W]."""
        misfit = self.a * face + self.b * heat - self.c
        if not self.terms:
            return misfit, self.a, self.b
        by_face, by_heat = self.a.copy(), self.b.copy()
        for shape, numbers, wall, which in self.terms:
            q = heat[which]
            value, by_temperature, directly = shape.evaluate(numbers, face[which] + wall * q, q)
            misfit[which] += value
            by_face[which] += by_temperature
            by_heat[which] += directly + wall * by_temperature
        return misfit, by_face, by_heat

    def misfit(self, face: Array, heat: Array) -> Array:
        """Return what is missing in the law; zero where temperature and heat belong together."""
        return self.evaluate(face, heat)[0]

    def known(self, face: Array, heat: Array) -> NDArray[np.bool_]:
        """Tell which designs lie within the tables of their law."""
        inside = np.ones(self.a.shape, dtype=bool)
        for shape, numbers, wall, which in self.terms:
            q = heat[which]
            inside[which] &= shape.known(numbers, face[which] + wall * q, q)
        return inside

    def tangent(self, face: Array, heat: Array) -> Law:
        """Return the straight law that touches this one at a face temperature [K] and heat [W]; itself if straight."""
        if not self.terms:
            return self
        misfit, a, b = self.evaluate(face, heat)
        return Law(a, b, a * face + b * heat - misfit)

    def behind(self, wall: Array) -> Law:
        """Return the law on the near side of a wall of a thermal resistance per module [K/W]."""
        if not np.any(wall):
            return self
        terms = tuple(t._replace(wall=t.wall + wall[t.which]) for t in self.terms)
        return Law(self.a, self.b + self.a * wall, self.c, terms)

    @property
    def open_temperature(self) -> Array:
        """Face temperature without heat flow [K]; infinite for a fixed heat without leak."""
        with np.errstate(divide="ignore"):
            open_ = np.where(self.a > 0, self.c / np.where(self.a > 0, self.a, 1.0), np.inf)
        if self.terms:
            bent = np.unique(np.concatenate([t.which for t in self.terms]))
            open_[bent] = _root_without_heat(self.take(bent))
        return open_

    @property
    def resistance(self) -> Array:
        """Thermal resistance of a straight law per module [K/W]; infinite for a fixed heat without leak."""
        if self.terms:
            raise ValueError("a law with terms has no single resistance; ask its tangent")
        return np.where(self.a > 0, self.b / np.where(self.a > 0, self.a, 1.0), np.inf)


def law(a: Any, b: Any, c: Any, shape: Any) -> Law:
    """Return a straight law with its numbers spread over the batch."""
    full = [np.broadcast_to(np.asarray(v, dtype=float), np.shape(shape)).copy() for v in (a, b, c)]
    return Law(full[0], full[1], full[2])


def bent(straight: Law, shape: Shape, *numbers: Any) -> Law:
    """Return a law with one more term for every design; numbers are spread over the batch."""
    like = straight.a.shape
    rows = np.array([np.broadcast_to(np.asarray(v, dtype=float), like) for v in numbers])
    return straight._replace(terms=(*straight.terms, Term(shape, rows, np.zeros(like), np.arange(straight.a.size))))


def join(laws: Sequence[Law]) -> Law:
    """Return one law for the batch made of several batches, in their order."""
    a, b, c = (np.concatenate([item[k] for item in laws]) for k in range(3))
    grouped: dict[Shape, list[Term]] = {}
    start = 0
    for item in laws:
        for term in item.terms:
            grouped.setdefault(term.shape, []).append(term._replace(which=term.which + start))
        start += item.a.size
    terms = (
        Term(
            shape,
            np.concatenate([t.numbers for t in found], axis=1),
            *(np.concatenate([getattr(t, name) for t in found]) for name in ("wall", "which")),
        )
        for shape, found in grouped.items()
    )
    return Law(a, b, c, tuple(terms))


def _pick(term: Term, chosen: NDArray[np.intp], size: int) -> Term:
    """Return the term of the designs ``chosen`` of a batch of ``size``, counted anew."""
    place = np.full(size, -1, dtype=np.intp)
    place[term.which] = np.arange(term.which.size)
    old = place[chosen]
    here = np.flatnonzero(old >= 0)
    return Term(term.shape, term.numbers[:, old[here]], term.wall[old[here]], here)


def _root_without_heat(laws: Law) -> Array:
    """Return the face temperature [K] at which no heat flows: Newton's method, halving where it leaves its bracket."""
    none = np.zeros(laws.a.shape)
    low, high = none.copy(), np.full(none.shape, _HOTTEST)
    never = laws.misfit(high, none) < 0
    t = np.full(none.shape, 300.0)
    for _ in range(200):
        value, slope, _ = laws.evaluate(t, none)
        low, high = np.where(value <= 0, t, low), np.where(value >= 0, t, high)
        with np.errstate(divide="ignore", invalid="ignore"):
            step = -value / slope
        inside = (t + step > low) & (t + step < high)
        new = np.where(inside, t + step, (low + high) / 2)
        moved, t = np.abs(new - t), np.where(value == 0, t, new)
        if np.all((moved <= 1e-13 * t) | (value == 0) | never):
            break
    return np.where(never, np.inf, t)
