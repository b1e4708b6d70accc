"""The equations of the leg on given nodes: conducted heat and resistance by iteration, and their derivatives.

With b = a - mean(a) and H = G - j b the heat equation reads H dH/dT = -j^2 rho kappa (1 - j b / G), so

    H(T)^2 = C - 2 j^2 integral rho kappa dT + 2 j^3 integral b rho kappa / G dT,   integral of kappa / G dT = 1

Joule heat stands there in full; only its product with the uneven part of the Thomson heat waits for G. So an
iteration gains one to three digits, and the constant C follows G by one step of Newton's method in each.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from tegdesign.leg.nodes import Nodes
from tegdesign.material.curve import Array

_FLOOR = 0.2  # smallest H^2 of the start, in units of the conducted heat squared
_BEST_GAIN = 0.01  # an iteration is never trusted to lower the error by more than this factor


class Slopes(NamedTuple):
    """Derivatives of one result by hot temperature, cold temperature and scaled current."""

    hot: Array
    cold: Array
    current: Array


class State(NamedTuple):
    """Solved legs (B,): heat leaving at the cold end [W/m], resistance [ohm m], 1/G at the nodes (nodes, B).

    ``misfit`` is what the two ways to the conducted heat at the hot end differ by, relative to the heat conducted
    without current: the error of the integration on these nodes.
    """

    flow: Array
    resistance: Array
    inverse: Array
    misfit: Array
    settled: NDArray[np.bool_]
    iterations: int


def solve_nodes(nodes: Nodes, j: Array, tolerance: float, max_iterations: int, strong: bool = False) -> State:
    """Iterate until the estimated error of the heat, relative to the conducted heat, is below ``tolerance``.

    ``strong`` takes b from the hot end instead of the mean where else H would vanish before G does; that is slower.
    """
    kappa, product, cumulative = nodes.conductivity, nodes.product, nodes.cumulative
    conducted = kappa.sum(axis=0)
    square = conducted**2
    level = np.einsum("nb,nb->b", kappa, nodes.thomson) / conducted
    if strong:
        level = np.where(j * (nodes.hot.thomson - level) > 0, nodes.hot.thomson, level)
    drift = nodes.thomson - level
    drift *= j
    twice = 2 * j * j
    coupling = product * drift
    coupling *= twice
    joule = cumulative.running(product)
    joule *= -twice
    # start: G^2 to first order in j, scaled so that kappa / G integrates to 1
    g = drift * (2 * conducted)
    g += joule[:-1]
    g += square - np.einsum("nb,nb->b", kappa, g) / conducted
    np.maximum(g, _FLOOR * square, out=g)
    np.sqrt(g, out=g)
    u = np.divide(1.0, g)
    scale = np.einsum("nb,nb->b", kappa, u)
    u /= scale
    g *= scale
    v = coupling * u
    rest = cumulative.running(v)
    rest += joule
    np.subtract(g, drift, out=v)
    v *= v
    last = v[-1].copy()
    v -= rest[:-1]
    constant = np.einsum("nb,nb->b", kappa, v) / conducted
    constant = np.maximum(constant, _FLOOR * square - rest[-1])
    least, before = 1e-6 * square, np.full_like(j, 1e-300)
    for iteration in range(1, max_iterations + 1):
        np.maximum(constant, least - rest[-1], out=constant)
        np.add(rest[:-1], constant, out=g)
        np.sqrt(g, out=g)
        np.add(g, drift, out=u)
        np.divide(1.0, u, out=u)
        np.divide(u, g, out=v)
        v *= u
        step = 2 * (np.einsum("nb,nb->b", kappa, u) - 1.0) / np.einsum("nb,nb->b", kappa, v)
        np.maximum(step, -0.7 * (constant + rest[-1]), out=step)  # H stays above zero at the hot end
        constant += step
        if strong:  # 1/G is too far from a straight line
            u = 1.0 / np.maximum(np.sqrt(rest[:-1] + constant) + drift, 1e-3 * conducted)
        else:
            v *= step / 2
            u -= v
        end = rest[-2] + constant
        change = (np.abs(step) + np.abs(end - last)) / (2 * square)  # of H
        settled = change * np.maximum(np.minimum(change / before, 1.0), _BEST_GAIN) < tolerance
        if iteration == max_iterations or (settled | ~np.isfinite(change)).all():
            break
        before, last = np.maximum(change, 1e-300), end
        np.multiply(coupling, u, out=v)
        if strong:  # half way, or it may swing
            rest = (rest + joule + cumulative.running(v)) / 2
        else:
            cumulative.running(v, out=rest)
            rest += joule
    np.multiply(product, u, out=v)
    resistance = cumulative.whole(v)
    at_cold, at_hot = np.sqrt(constant), np.sqrt(constant + rest[-1])
    misfit = np.abs(at_cold - j * j * resistance - at_hot) / conducted
    sound = settled & (u.min(axis=0) > 0)
    return State(at_cold - j * (level - nodes.cold.voltage), resistance, u, misfit, sound, iteration)


def slopes_of(nodes: Nodes, j: Array, state: State, at_hot: Array, at_cold: Array) -> tuple[Slopes, Slopes]:
    """Return the derivatives of the heat leaving at the cold end and of the resistance; G at both ends is given.

    With G = D + j a - j^2 W a change s(T) of the right-hand side moves G by s + mu integral(p s / mu),
    p = j^2 rho kappa / G^2, mu = exp(integral p).
    """
    cold, hot = nodes.cold, nodes.hot
    cumulative = nodes.cumulative
    u = state.inverse
    weight = nodes.product * u
    source = cumulative.running(weight)[:-1]
    source *= -2 * j
    source += nodes.thomson - cold.voltage  # derivative of the right-hand side by j
    weight *= u
    kernel = weight * (j * j)
    growth = np.exp(cumulative.running(kernel)[:-1])
    kernel /= growth
    kernel *= source
    by_current = cumulative.running(kernel)[:-1]
    by_current *= growth
    by_current += source
    pull = nodes.conductivity * u
    pull *= u
    m_flow = np.einsum("nb,nb->b", pull, growth)
    m_current = np.einsum("nb,nb->b", pull, by_current)
    growth *= weight
    by_current *= weight
    r_flow, r_current = cumulative.whole(growth), cumulative.whole(by_current)
    k_h, k_c = hot.conductivity / at_hot, cold.conductivity / at_cold
    moved = -j * cold.seebeck + j * j * cold.resistivity * k_c
    flow = Slopes(k_h / m_flow, -k_c / m_flow - moved, -m_current / m_flow)
    resistance = Slopes(
        -r_flow * flow.hot + hot.resistivity * k_h,
        -r_flow * (flow.cold + moved) - cold.resistivity * k_c,
        -r_flow * flow.current - r_current,
    )
    return flow, resistance
