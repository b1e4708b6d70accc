"""The collocation nodes of a batch of legs, cold end first: what the equations need to know of the material."""

from __future__ import annotations

from functools import lru_cache
from typing import NamedTuple

import numpy as np

from tegdesign.leg.panels import Panels, gauss_rule
from tegdesign.material.curve import Array, horner

_DENSE = 200_000  # products of a matrix up to here; beyond, panels one by one are quicker and keep to one core
_PIECES, _RATIO = 8, 4.0  # ``own_nodes``: pieces towards the hot end, each that many times smaller than the last


class End(NamedTuple):
    """Temperature [K], S [V/K], Thomson integral [V], rho [ohm m] and kappa [W/m/K] at one end of each leg (B,)."""

    temperature: Array
    seebeck: Array
    thomson: Array
    resistivity: Array
    conductivity: Array

    @property
    def voltage(self) -> Array:
        """Integral of S dT up to this end [V], from the same temperature for all."""
        return self.thomson + self.seebeck * self.temperature


class Integration(NamedTuple):
    """Integrals from the cold end of arrays (nodes, B) such as ``product``, on equal numbers of nodes in each panel."""

    matrix: Array  # (nodes + 1, nodes): to every node and, in the last row, to the hot end
    to_node: Array  # (points, points): to every node of one panel
    weight: Array  # (points,): over one panel

    def running(self, values: Array, out: Array | None = None) -> Array:
        """Return the integrals to every node and to the hot end, (nodes + 1, B)."""
        nodes, size = values.shape
        if self.matrix.size * size < _DENSE:
            return np.matmul(self.matrix, values, out=out)
        out = np.empty((nodes + 1, size)) if out is None else out
        panels = values.reshape(-1, self.weight.size, size)
        inside = out[:-1].reshape(panels.shape)
        np.matmul(self.to_node, panels, out=inside)
        whole = np.matmul(self.weight, panels).cumsum(axis=0)
        inside[1:] += whole[:-1, None]
        out[-1] = whole[-1]
        return out

    def whole(self, values: Array) -> Array:
        """Return the integrals over the whole leg (B,)."""
        return np.asarray(np.einsum("n,nb->b", self.matrix[-1], values))


class Nodes(NamedTuple):
    """Node data of B legs, arrays (nodes, B).

    ``conductivity`` is kappa times panel width and Gauss weight, ``product`` rho kappa times width, ``thomson`` the
    integral of S dT less S T; ``cumulative`` integrates such arrays from the cold end.
    """

    conductivity: Array
    product: Array
    thomson: Array
    cumulative: Integration
    cold: End
    hot: End


@lru_cache(maxsize=64)
def integration(points: int, panels: int) -> Integration:
    """Return the integrals over legs of ``panels`` panels."""
    _, w, to_node = gauss_rule(points)
    before = np.tril(np.ones((panels + 1, panels)), -1)
    full = np.kron(np.repeat(before, points, axis=0)[: panels * points + 1], w)
    full[:-1] += np.kron(np.eye(panels), to_node)
    return Integration(np.ascontiguousarray(full), to_node, w)


def shared_nodes(panels: Panels, lower: Array, upper: Array) -> Nodes:
    """Return the nodes of legs between ``lower`` and ``upper`` (B,) [K]: whole panels as prepared, two end pieces.

    Panels that a leg does not reach get no weight in it; so legs that end in the same panels go best together.
    """
    m, edges = panels.points, panels.edges
    x, weight, _ = gauss_rule(m)
    k_cold = np.minimum(edges.searchsorted(lower, side="right") - 1, edges.size - 2)
    k_hot = np.maximum(edges.searchsorted(upper, side="left") - 1, k_cold)
    first, stop = int(k_cold.min(initial=edges.size)) + 1, int(k_hot.max(initial=0))
    inner = max(stop - first, 0)
    size, nodes = lower.size, (inner + 2) * m
    panel, left = np.empty((2, size), dtype=np.intp), np.empty((2, size))  # both end pieces at once
    panel[0], panel[1] = k_cold, k_hot
    cut = edges[panel]
    width = np.empty((2, size))
    np.subtract(np.minimum(edges[k_cold + 1], upper), lower, out=width[0])
    left[0], left[1] = lower, np.maximum(cut[1], lower + width[0])
    np.subtract(upper, left[1], out=width[1])
    left -= cut
    s = x[:, None, None] * width
    s += left
    c, rows = panels.pick(panel), panels.rows
    kappa = horner(c[rows.kappa], s)
    kappa *= width
    product = horner(c[rows.rho], s)
    product *= kappa
    kappa *= weight[:, None, None]
    pieces = kappa, product, horner(c[rows.thomson], s)
    left[1] += width[1]  # now the ends themselves
    ends = [horner(c[own], left) for own in (rows.seebeck, rows.thomson, rows.rho, rows.kappa)]
    cold, hot = End(lower, *(e[0] for e in ends)), End(upper, *(e[1] for e in ends))
    arrays = np.empty((3, nodes, size))
    for array, piece in zip(arrays, pieces, strict=True):
        array[:m], array[-m:] = piece[:, 0], piece[:, 1]
    if inner:
        body = arrays[:, m:-m]
        for array, whole in zip(body, (panels.conductivity, panels.product, panels.thomson), strict=True):
            array[:] = whole[first:stop].reshape(-1, 1)
        k = np.arange(first, stop)[:, None]
        below, unused = k <= k_cold, k >= k_hot
        unused |= below
        if unused.any():  # a Thomson integral between those at the ends keeps 1/G harmless there
            shape, where = (inner, m, size), unused[:, None, :]
            level = np.where(below, cold.thomson, hot.thomson)[:, None, :]
            for array in body[:2]:
                np.copyto(array.reshape(shape), 0.0, where=where)
            np.copyto(body[2].reshape(shape), level, where=where)
    return Nodes(arrays[0], arrays[1], arrays[2], integration(m, inner + 2), cold, hot)


def own_nodes(panels: Panels, lower: Array, upper: Array) -> Nodes:
    """Return nodes of each leg for itself, panels shrinking towards the hot end, for legs of very strong current.

    There the conducted heat nearly vanishes at the hot end and 1/G changes fast in the last few kelvin.
    """
    m, edges = panels.points, panels.edges
    x, weight, _ = gauss_rule(m)
    shrink = _RATIO ** -np.arange(1.0, _PIECES + 1)[:, None]
    cuts = np.concatenate([np.clip(edges[:, None], lower, upper), upper - (upper - lower) * shrink])
    cuts.sort(axis=0)
    width = np.diff(cuts, axis=0)
    keep = np.append((width[:-1] > 0).any(axis=1), True)  # the last even for equal ends, found unsolvable later
    start, width = cuts[:-1][keep], width[keep]
    panel = np.clip(edges.searchsorted(start + width / 2, side="right") - 1, 0, edges.size - 2)
    c, rows = panels.pick(panel)[:, :, None], panels.rows
    left = start - edges[panel]
    s = left[:, None] + x[:, None] * width[:, None]
    kappa = horner(c[rows.kappa], s) * width[:, None]
    flat = (-1, lower.size)
    cold, hot = (
        End(t, *(horner(c[own, k, 0], at) for own in (rows.seebeck, rows.thomson, rows.rho, rows.kappa)))
        for t, k, at in ((lower, 0, left[0]), (upper, -1, left[-1] + width[-1]))
    )
    return Nodes(
        (kappa * weight[:, None]).reshape(flat),
        (horner(c[rows.rho], s) * kappa).reshape(flat),
        horner(c[rows.thomson], s).reshape(flat),
        integration(m, start.shape[0]),
        cold,
        hot,
    )
