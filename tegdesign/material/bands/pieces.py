"""Smooth functions of temperature as polynomials between edges, fine enough for a tolerance."""

from __future__ import annotations

from collections.abc import Callable
from functools import lru_cache
from typing import NamedTuple

import numpy as np

from tegdesign.errors import ConvergenceError
from tegdesign.material.curve import Array, Curve, horner

_DEGREE = 7
_WIDTH = 120.0  # [K] of the first intervals; physics of carriers changes over some hundred kelvin
_CHECKS = (0.02, 0.1, 0.31, 0.6, 0.98)  # places in an interval, between the nodes, where the polynomial is compared
_HALVINGS = 8


class _Rule(NamedTuple):
    """Nodes on 0..1, both ends among them, and the matrix from values there to power-series coefficients."""

    node: Array
    to_power: Array


@lru_cache(maxsize=1)
def _rule() -> _Rule:
    node = (1 - np.cos(np.pi * np.arange(_DEGREE + 1) / _DEGREE)) / 2
    return _Rule(node, np.asarray(np.linalg.inv(np.vander(node, increasing=True)), dtype=float))


def curves(
    function: Callable[[Array], Array], first: float, last: float, breaks: Array, tolerance: float = 1e-8
) -> list[Curve]:
    """Return one curve for each row of ``function``, all on the same intervals between ``first`` and ``last`` [K].

    Interpolation at Chebyshev points, intervals halved until the curves agree with the function between the points.

    Parameters
    ----------
    function : callable
        Takes temperatures [K], shape (T,), and returns the properties, shape (M, T).
    breaks : ndarray
        Temperatures [K] at which a property may have a kink; those inside become ends of intervals.
    tolerance : float
        Largest deviation, relative to the largest value of the property in the interval.

    Raises
    ------
    ConvergenceError
        The function is too rough, as one with a kink that is not among the breaks.
    """
    node, to_power = _rule()
    kinks = np.unique(np.concatenate([[first, last], breaks[(breaks > first) & (breaks < last)]]))
    parts = np.maximum(np.ceil(np.diff(kinks) / _WIDTH), 1).astype(int)
    stretches = zip(kinks[:-1], kinks[1:], parts, strict=True)
    edges = np.concatenate([np.linspace(start, end, n + 1)[:-1] for start, end, n in stretches])
    todo, ends = edges, np.append(edges[1:], last)
    found: list[tuple[Array, Array]] = []  # left edges with their coefficients (M, powers, K)
    probe = np.concatenate([node, _CHECKS])
    for _ in range(_HALVINGS):
        width = ends - todo
        values = function((todo[:, None] + width[:, None] * probe).ravel())
        values = values.reshape(len(values), todo.size, probe.size)
        known, asked = values[..., : node.size], values[..., node.size :]
        coefficients = np.einsum("pn,mkn->mpk", to_power, known)
        made = horner(np.moveaxis(coefficients, 1, 0)[..., None], np.array(_CHECKS))
        off = np.abs(made - asked).max(axis=2) / np.abs(known).max(axis=2)
        good = np.all(off <= tolerance / 2, axis=0)  # the checks may miss the worst place
        powers = width ** -np.arange(_DEGREE + 1.0)[:, None]
        found.append((todo[good], (coefficients * powers)[:, :, good]))
        if good.all():
            break
        middle = (todo + width / 2)[~good]
        todo, ends = np.concatenate([todo[~good], middle]), np.concatenate([middle, ends[~good]])
    else:
        raise ConvergenceError(
            f"properties near {todo[0]:.6g} K cannot be followed to {tolerance:g} by polynomials; look for a jump in "
            "a mass, gap or offset given as a table"
        )
    left = np.concatenate([edge for edge, _ in found])
    order = np.argsort(left)
    pieces = np.concatenate([piece for _, piece in found], axis=2)[:, :, order]
    t = np.append(left[order], last)
    at_end = horner(np.moveaxis(pieces[:, :, -1], 1, 0), t[-1] - t[-2])
    return [Curve(t, np.append(one[0], end), one) for one, end in zip(pieces, at_end, strict=True)]
