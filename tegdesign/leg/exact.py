"""The exact leg: steady heat and current in one dimension with properties that depend on temperature, batched.

With j = J L and Q = q L the leg depends only on (T_hot, T_cold, j); length and area are pure scale factors.
Temperature is the independent variable and G = -kappa L dT/dx the unknown:

    Q = j S T + G,   dQ/dT = j S - j^2 rho kappa / G,   integral of kappa / G dT = 1

    =>  G(T) = Q_c + j a(T) - j^2 W(T),   a = integral_{Tc}^{T} S dT - S T,   W = integral_{Tc}^{T} rho kappa / G dT

Only S itself is needed, never dS/dT, and Q_h - Q_c = j (E - j r) with E = integral S dT, r = W(T_hot) holds by
construction: nothing is lost between heat and power. Gauss collocation on panels that end at the table points.
Valid while T falls from hot to cold without a maximum inside (G > 0); otherwise the solver says so.
Equations: standard one-dimensional thermoelectric transport, e.g. Domenicali 1954, Rev. Mod. Phys. 26, 237,
doi 10.1103/RevModPhys.26.237.
"""

from __future__ import annotations

from dataclasses import dataclass, fields
from functools import lru_cache
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tegdesign.errors import ConvergenceError
from tegdesign.leg.panels import Panels, gauss_rule, prepare
from tegdesign.material.curve import Array
from tegdesign.material.material import Material

_CHUNK = 512  # legs solved together: the working arrays stay in the cache
_PLAIN = 16  # plain iterations before Newton's method takes over the legs that do not settle


class Slopes(NamedTuple):
    """Derivatives of one result by hot temperature, cold temperature and scaled current."""

    hot: Array
    cold: Array
    current: Array


@dataclass(frozen=True)
class LegSolution:
    """Legs of one material in scaled form; multiply heats and power by area/length, r by length/area.

    Attributes
    ----------
    cold_heat, hot_heat, power : ndarray (B,)
        q_c L, q_h L and j (E - j r) [W/m]; hot_heat = cold_heat + power to the last digit.
    voltage : ndarray (B,)
        E, integral of S dT from cold to hot [V]: the open-circuit voltage on this temperature profile.
    resistance : ndarray (B,)
        r, so that the leg has r length/area [ohm m].
    seebeck_hot, seebeck_cold : ndarray (B,)
        S at the two ends [V/K], the derivatives of the voltage.
    converged : ndarray of bool (B,)
    cold_heat_slopes, resistance_slopes : Slopes or None
        Exact derivatives of cold_heat and resistance.
    """

    cold_heat: Array
    hot_heat: Array
    power: Array
    voltage: Array
    resistance: Array
    seebeck_hot: Array
    seebeck_cold: Array
    converged: NDArray[np.bool_]
    iterations: int
    cold_heat_slopes: Slopes | None = None
    resistance_slopes: Slopes | None = None


def solve_leg(
    material: Material,
    hot: ArrayLike,
    cold: ArrayLike,
    scaled_current: ArrayLike,
    *,
    points: int = 4,
    tolerance: float = 1e-11,
    max_iterations: int = 60,
    slopes: bool = False,
    check: bool = True,
    subdivide: int = 1,
) -> LegSolution:
    """Solve a batch of legs of one material; arguments broadcast to one shape (B,).

    Parameters
    ----------
    hot, cold : array_like
        End temperatures [K]. A leg with hot below cold is solved as its mirror image. Outside the material's
        range the end values are held: whoever calls decides whether that may be used.
    scaled_current : array_like
        j = J L [A/m], J the current density from the hot to the cold end.
    tolerance : float
        Largest change of the last iteration relative to the conducted heat.
    slopes : bool
        Also return exact derivatives.
    check : bool
        Raise where a leg did not converge; otherwise look at ``converged``.

    Raises
    ------
    ConvergenceError
        The temperature inside the leg is not monotone (current too large) or the iteration did not settle.
    """
    hot_, cold_, j_ = np.broadcast_arrays(*(np.asarray(v, dtype=float) for v in (hot, cold, scaled_current)))
    shape = hot_.shape
    h, c, j = (v.ravel() for v in (hot_, cold_, j_))
    mirrored = h < c
    sign = np.where(mirrored, -1.0, 1.0)
    upper, lower, scaled = np.maximum(h, c), np.minimum(h, c), j * sign
    panels = prepare(material, points, subdivide)
    order, groups = _group(panels, lower, upper)
    parts = [
        _solve_chunk(panels, lower[g], upper[g], scaled[g], tolerance, max_iterations, slopes) for g in groups
    ]
    raw = _gather(parts, order)
    result = _reflect(raw, mirrored, sign, shape)
    if check and not np.all(result.converged):
        bad = np.flatnonzero(~result.converged.ravel())
        k = bad[0]
        raise ConvergenceError(
            f"leg of {material.name}: no steady solution with temperature falling from {h[k]:g} K to {c[k]:g} K at "
            f"J L = {j[k]:.6g} A/m ({bad.size} of {h.size} legs); the current is too large for this temperature "
            "difference, choose a smaller one"
        )
    return result


def _group(panels: Panels, lower: Array, upper: Array) -> tuple[NDArray[np.intp], list[NDArray[np.intp]]]:
    """Sort legs so that those cutting the same panels are solved together; return order and chunks."""
    size = lower.size
    if size <= _CHUNK:
        everything = np.arange(size)
        return everything, [everything]
    kc = np.searchsorted(panels.edges, lower, side="right")
    kh = np.searchsorted(panels.edges, upper, side="left")
    order = np.argsort(kc * panels.edges.size + kh, kind="stable")
    return order, np.array_split(order, -(-size // _CHUNK))


def _gather(parts: list[LegSolution], order: NDArray[np.intp]) -> LegSolution:
    if len(parts) == 1:
        return parts[0]

    def back(values: list[Array]) -> Array:
        out = np.empty(order.size, dtype=values[0].dtype)
        out[order] = np.concatenate(values)
        return out

    merged: dict[str, object] = {}
    for f in fields(LegSolution):
        column = [getattr(p, f.name) for p in parts]
        if f.name == "iterations":
            merged[f.name] = max(column)
        elif column[0] is None:
            merged[f.name] = None
        elif isinstance(column[0], Slopes):
            merged[f.name] = Slopes(*(back([s[i] for s in column]) for i in range(3)))
        else:
            merged[f.name] = back(column)
    return LegSolution(**merged)  # type: ignore[arg-type]


def _reflect(raw: LegSolution, mirrored: NDArray[np.bool_], sign: Array, shape: tuple[int, ...]) -> LegSolution:
    """Turn legs solved as mirror images back: what left the cold end then enters the hot end, and so on."""

    def form(a: Array) -> Array:
        return a.reshape(shape)

    if not mirrored.any():
        cold, hot, qs, rs = raw.cold_heat, raw.hot_heat, raw.cold_heat_slopes, raw.resistance_slopes
        if len(shape) == 1:
            return raw
    else:
        cold = np.where(mirrored, -raw.hot_heat, raw.cold_heat)
        hot = np.where(mirrored, -raw.cold_heat, raw.hot_heat)
        qs, rs = raw.cold_heat_slopes, raw.resistance_slopes
        if qs is not None and rs is not None:
            raise ConvergenceError("derivatives of a leg are known only with the hot end hotter than the cold end")
    return LegSolution(
        form(cold),
        form(hot),
        form(raw.power),
        form(raw.voltage * sign),
        form(raw.resistance),
        form(np.where(mirrored, raw.seebeck_cold, raw.seebeck_hot)),
        form(np.where(mirrored, raw.seebeck_hot, raw.seebeck_cold)),
        raw.converged.reshape(shape),
        raw.iterations,
        None if qs is None else Slopes(*(form(s) for s in qs)),
        None if rs is None else Slopes(*(form(s) for s in rs)),
    )


def _solve_chunk(
    panels: Panels, lower: Array, upper: Array, j: Array, tolerance: float, max_iterations: int, slopes: bool
) -> LegSolution:
    """Solve legs (B,) in one go: node arrays have shape (nodes, B), cold end first."""
    m = panels.points
    x, _, _ = gauss_rule(m)
    edges = panels.edges
    last = edges.size - 2
    kc = np.minimum(np.searchsorted(edges, lower, side="right") - 1, last)
    kh = np.maximum(np.searchsorted(edges, upper, side="left") - 1, 0)
    low_end = np.minimum(edges[kc + 1], upper)
    high_start = np.maximum(edges[kh], low_end)
    first, stop = int(kc.min()) + 1, int(kh.max())
    inner = max(stop - first, 0)
    size, nodes = lower.size, (inner + 2) * m

    conductivity = np.empty((nodes, size))  # kappa times width
    product = np.empty((nodes, size))  # rho kappa times width
    thomson = np.empty((nodes, size))  # a(T)
    to_ends = np.concatenate([[0.0], x, [1.0]])[:, None]
    ends = []
    for rows, panel, start, width in (
        (slice(0, m), kc, lower, low_end - lower),
        (slice(nodes - m, nodes), kh, high_start, upper - high_start),
    ):
        t = start + to_ends * width
        seebeck, integral, resistivity, kappa = panels.at(panel, t)
        ends.append((seebeck, integral, resistivity, kappa.copy()))
        kappa *= width
        conductivity[rows] = kappa[1:-1]
        np.multiply(resistivity[1:-1], kappa[1:-1], out=product[rows])
        np.subtract(integral[1:-1], (seebeck * t)[1:-1], out=thomson[rows])
    seebeck_c, integral_c, resistivity_c, kappa_c = (v[0] for v in ends[0])
    seebeck_h, integral_h, resistivity_h, kappa_h = (v[-1] for v in ends[1])
    if inner:
        body = slice(m, nodes - m)
        width = np.diff(edges)[first:stop, None]
        conductivity[body] = (panels.conductivity[first:stop] * width).reshape(-1, 1)
        product[body] = (panels.product[first:stop] * width).reshape(-1, 1)
        thomson[body] = panels.thomson[first:stop].reshape(-1, 1)
        k = np.arange(first, stop)[:, None]
        below, above = k <= kc, k >= kh
        if below.any() or above.any():
            shape = (inner, m, size)
            unused = (below | above)[:, None, :]
            np.copyto(conductivity[body].reshape(shape), 0.0, where=unused)
            np.copyto(product[body].reshape(shape), 0.0, where=unused)
            level = np.where(below, integral_c - seebeck_c * lower, integral_h - seebeck_h * upper)
            np.copyto(thomson[body].reshape(shape), level[:, None, :], where=unused)
    thomson -= integral_c
    cumulative, total = _integration(m, inner + 2)
    conductivity *= total[:, None]
    with np.errstate(divide="ignore", over="ignore", invalid="ignore"):  # judged by ``settled`` below
        state = _iterate(conductivity, product, thomson, j, cumulative, total, tolerance, max_iterations)
    voltage = integral_h - integral_c
    flow, resistance = state.flow, state.resistance
    power = j * (voltage - j * resistance)
    end_c = flow - j * seebeck_c * lower  # G at the cold and at the hot end
    end_h = flow + power - j * seebeck_h * upper
    with np.errstate(invalid="ignore"):
        sound = state.settled & (state.inverse.min(axis=0) > 0) & (end_c > 0) & (end_h > 0)
    by_flow = by_resistance = None
    if slopes:
        with np.errstate(divide="ignore", over="ignore", invalid="ignore"):
            by_flow, by_resistance = _slopes(
                state, conductivity, product, thomson, j, cumulative, total,
                (kappa_h / end_h, resistivity_h), (kappa_c / end_c, resistivity_c), seebeck_c,
            )
    return LegSolution(
        flow, flow + power, power, voltage, resistance, seebeck_h, seebeck_c, sound, state.iterations,
        by_flow, by_resistance,
    )


@lru_cache(maxsize=64)
def _integration(points: int, panels: int) -> tuple[Array, Array]:
    """Return the matrix of integrals from the cold end to every node, and the weights of the whole integral."""
    _, w, to_node = gauss_rule(points)
    full = np.kron(np.tril(np.ones((panels, panels)), -1), np.tile(w, (points, 1)))
    return full + np.kron(np.eye(panels), to_node), np.tile(w, panels)


class _State(NamedTuple):
    flow: Array
    inverse: Array  # 1/G at the nodes
    joule: Array  # W at the nodes
    resistance: Array
    settled: NDArray[np.bool_]
    iterations: int


def _iterate(
    conductivity: Array,
    product: Array,
    thomson: Array,
    j: Array,
    cumulative: Array,
    total: Array,
    tolerance: float,
    max_iterations: int,
) -> _State:
    """Iterate W on G and one Newton step on Q_c in turn; the error falls by about Z dT / 4 or faster each time.

    Start: G^2 = K^2 + 2 (mean(phi) - phi), phi = j^2 integral rho kappa - j K a, right to first order in j.
    """
    conducted = conductivity.sum(axis=0)
    square, j_square = conducted**2, j * j
    drift = thomson * j
    heating = product * -j_square
    g = cumulative @ heating
    g += drift * conducted
    mean = np.einsum("nb,nb->b", conductivity, g) / conducted
    g += 0.5 * square - mean
    g *= 2.0
    np.maximum(g, 1e-4 * square, out=g)
    np.sqrt(g, out=g)
    u, v = np.divide(1.0, g), np.empty_like(g)
    level = np.einsum("nb,nb->b", conductivity, g) / conducted  # mean of G, to be kept by the first step
    flow = heated = conducted
    for iteration in range(1, max_iterations + 1):
        np.multiply(heating, u, out=v)
        before, heated = heated, total @ v
        np.matmul(cumulative, v, out=g)
        g += drift
        if iteration == 1:
            flow = level - np.einsum("nb,nb->b", conductivity, g) / conducted
        g += flow
        np.divide(1.0, g, out=u)
        np.multiply(conductivity, u, out=v)
        step = (np.einsum("nb,nb->b", conductivity, u) - 1.0) / np.einsum("nb,nb->b", v, u)
        flow = flow + step
        change = (np.abs(step) + np.abs(heated - before)) / conducted
        if iteration > 1 and change.max() < tolerance:
            break
        if iteration == _PLAIN and not change.max() < 1e-3:
            break
        np.multiply(u, u, out=v)  # let the next W know of the step in Q_c
        v *= step
        u -= v
    settled = change < tolerance
    if not settled.all():  # only strong currents, far above those of best power and efficiency
        late = ~settled
        flow[late], u[:, late], settled[late], more = _newton(
            conductivity[:, late], heating[:, late], drift[:, late], cumulative, tolerance, max_iterations
        )
        iteration += more
    np.multiply(product, u, out=v)
    return _State(flow, u, cumulative @ v, total @ v, settled, iteration)


def _newton(
    conductivity: Array,
    heating: Array,
    drift: Array,
    cumulative: Array,
    tolerance: float,
    max_iterations: int,
) -> tuple[Array, Array, NDArray[np.bool_], int]:
    """Solve the legs of strong current by Newton's method on G, its steps limited so that G stays positive.

    The linear equation dG = D + integral p dG, p = j^2 rho kappa / G^2, has one integrating factor.
    """
    conducted = conductivity.sum(axis=0)
    g = np.repeat(conducted[None, :], conductivity.shape[0], axis=0)
    flow = conducted.copy()
    for iteration in range(1, max_iterations + 1):  # noqa: B007
        u = 1.0 / g
        v = heating * u
        misfit = flow + drift + cumulative @ v - g
        kernel = -v * u
        growth = np.exp(np.minimum(cumulative @ kernel, 50.0))
        response = misfit + growth * (cumulative @ (kernel * misfit / growth))
        weight = conductivity * u
        pull = weight * u
        step = (weight.sum(axis=0) - 1.0 - (pull * response).sum(axis=0)) / (pull * growth).sum(axis=0)
        change = response + growth * step
        limit = np.minimum(1.0, 0.7 / np.max(-change * u, axis=0, initial=1e-9))
        limit = np.minimum(limit, 3.0 / np.max(change * u, axis=0, initial=1e-9))
        g += limit * change
        flow += limit * step
        size = (np.abs(change).max(axis=0) + np.abs(step)) / conducted
        if size.max() < tolerance:
            break
    u = 1.0 / (flow + drift + cumulative @ (heating / g))
    return flow, u, size < tolerance, iteration


def _slopes(
    state: _State,
    conductivity: Array,
    product: Array,
    thomson: Array,
    j: Array,
    cumulative: Array,
    total: Array,
    hot: tuple[Array, Array],
    cold: tuple[Array, Array],
    seebeck_cold: Array,
) -> tuple[Slopes, Slopes]:
    """Differentiate the leg: G answers to a source D as D + mu integral(p D / mu), mu = exp(integral p)."""
    u_square = state.inverse**2
    weight = product * u_square
    kernel = weight * (j * j)
    growth = np.exp(cumulative @ kernel)
    source = thomson - 2 * j * state.joule
    by_current = source + growth * (cumulative @ (kernel * source / growth))
    conductivity = conductivity * u_square
    m_flow = np.einsum("nb,nb->b", conductivity, growth)
    m_current = np.einsum("nb,nb->b", conductivity, by_current)
    r_flow, r_current = total @ (weight * growth), total @ (weight * by_current)
    (k_h, rho_h), (k_c, rho_c) = hot, cold
    end = -j * seebeck_cold + j * j * rho_c * k_c
    flow = Slopes(k_h / m_flow, -k_c / m_flow - end, -m_current / m_flow)
    resistance = Slopes(
        -r_flow * flow.hot + rho_h * k_h,
        -r_flow * (flow.cold + end) - rho_c * k_c,
        -r_flow * flow.current - r_current,
    )
    return flow, resistance
