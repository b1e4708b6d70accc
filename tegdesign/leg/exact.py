"""The exact leg: steady heat and current in one dimension with properties that depend on temperature, batched.

With j = J L and Q = q L the leg depends only on (T_hot, T_cold, j); length and area are pure scale factors.
Temperature is the independent variable and G = -kappa L dT/dx the unknown:

    Q = j S T + G,   dQ/dT = j S - j^2 rho kappa / G,   integral of kappa / G dT = 1

    =>  G(T) = Q_c + j a(T) - j^2 W(T),   a = integral_{Tc}^{T} S dT - S T,   W = integral_{Tc}^{T} rho kappa / G dT

Only S itself is needed, never dS/dT, and Q_h - Q_c = j (E - j r) with E = integral S dT, r = W(T_hot) holds by
construction: nothing is lost between heat and power. Gauss collocation on panels that end at the table points;
G found on the nodes (``iterate``) is held against the equation above, and legs where the two differ too much are
solved again on nodes of their own. Valid while T falls from hot to cold without a maximum inside (G > 0), which is
so beyond the short-circuit current for most materials; otherwise the solver says so.
Equations: standard one-dimensional thermoelectric transport, e.g. Domenicali 1954, Rev. Mod. Phys. 26, 237,
doi 10.1103/RevModPhys.26.237.
"""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tegdesign.errors import ConvergenceError
from tegdesign.leg.iterate import Slopes, slopes_of, solve_nodes
from tegdesign.leg.nodes import Nodes, own_nodes, shared_nodes
from tegdesign.leg.panels import Panels, prepare
from tegdesign.material.curve import Array
from tegdesign.material.material import Material

__all__ = ["LegSolution", "Slopes", "solve_leg"]

_CHUNK = 512  # legs solved together: the working arrays stay in the cache
_QUICK = 8  # iterations before a leg is taken for one of very strong current
_FINE, _TIGHT = 8, 1e-10  # Gauss points a panel and tolerance for those
_MISFIT = 3e-8  # largest error of integration, relative to the conducted heat; about 4e-7 in power


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
        End temperatures [K], not equal. A leg with hot below cold is solved as its mirror image. Outside the
        material's range the end values are held: whoever calls decides whether that may be used.
    scaled_current : array_like
        j = J L [A/m], J the current density from the hot to the cold end.
    points, subdivide : int
        Gauss points in each panel, and into how many panels each table interval is split. 3 points give about 1e-6
        in power, 4 about 1e-8; a table that turns sharply costs up to two digits.
    tolerance : float
        Estimated error left by the iteration, relative to the conducted heat.
    max_iterations : int
        No more than 8 spare the second try, on finer panels, that legs of very strong current need.
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
        _solve_chunk(material, panels, lower[g], upper[g], scaled[g], tolerance, max_iterations, slopes) for g in groups
    ]
    raw = _gather(parts, order)
    result = _reflect(raw, scaled, mirrored, shape)
    if check and not np.all(result.converged):
        bad = np.flatnonzero(~result.converged.ravel())
        k = bad[0]
        what = (
            "its two ends have the same temperature; give it a difference"
            if h[k] == c[k]
            else "the current is too large for this temperature difference; choose a smaller one"
        )
        raise ConvergenceError(
            f"leg of {material.name}: no steady state with temperature falling all the way between {h[k]:g} K (hot) "
            f"and {c[k]:g} K (cold) at J L = {j[k]:.6g} A/m ({bad.size} of {h.size} legs): {what}"
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

    merged: dict[str, Any] = {}
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
    return LegSolution(**merged)


def _reflect(raw: LegSolution, j: Array, mirrored: NDArray[np.bool_], shape: tuple[int, ...]) -> LegSolution:
    """Turn legs solved as mirror images back: what left the cold end then enters the hot end, and so on."""
    if not mirrored.any():
        if len(shape) == 1:
            return raw
        out = {f.name: getattr(raw, f.name) for f in fields(raw)}
    else:

        def pick(image: Array, own: Array) -> Array:
            return np.where(mirrored, image, own)

        q, r = raw.cold_heat_slopes, raw.resistance_slopes
        if q is not None and r is not None:
            by_hot = q.hot + j * (raw.seebeck_hot - j * r.hot)  # of the heat entering at the hotter end
            by_cold = q.cold - j * (raw.seebeck_cold + j * r.cold)
            by_current = q.current + raw.voltage - j * (2 * raw.resistance + j * r.current)
            q = Slopes(pick(-by_cold, q.hot), pick(-by_hot, q.cold), pick(by_current, q.current))
            r = Slopes(pick(r.cold, r.hot), pick(r.hot, r.cold), pick(-r.current, r.current))
        out = {
            "cold_heat": pick(-raw.hot_heat, raw.cold_heat),
            "hot_heat": pick(-raw.cold_heat, raw.hot_heat),
            "power": raw.power,
            "voltage": pick(-raw.voltage, raw.voltage),
            "resistance": raw.resistance,
            "seebeck_hot": pick(raw.seebeck_cold, raw.seebeck_hot),
            "seebeck_cold": pick(raw.seebeck_hot, raw.seebeck_cold),
            "converged": raw.converged,
            "iterations": raw.iterations,
            "cold_heat_slopes": q,
            "resistance_slopes": r,
        }
    for name, value in out.items():
        if isinstance(value, Slopes):
            out[name] = Slopes(*(v.reshape(shape) for v in value))
        elif isinstance(value, np.ndarray):
            out[name] = value.reshape(shape)
    return LegSolution(**out)


def _solve_chunk(
    material: Material,
    panels: Panels,
    lower: Array,
    upper: Array,
    j: Array,
    tolerance: float,
    max_iterations: int,
    slopes: bool,
) -> LegSolution:
    """Solve legs (B,) in one go, those of very strong current a second time on nodes of their own."""
    first = _solve_on(shared_nodes(panels, lower, upper), j, tolerance, min(_QUICK, max_iterations), slopes)
    if max_iterations <= _QUICK or first.converged.all():
        return first
    hard = ~first.converged
    nodes = own_nodes(prepare(material, _FINE), lower[hard], upper[hard])
    again = _solve_on(nodes, j[hard], min(tolerance, _TIGHT), max_iterations, slopes, strong=True)
    for f in fields(first):
        old, new = getattr(first, f.name), getattr(again, f.name)
        if isinstance(old, np.ndarray):
            old[hard] = new
        elif isinstance(old, Slopes):
            for a, b in zip(old, new, strict=True):
                a[hard] = b
    return replace(first, iterations=first.iterations + again.iterations)


def _solve_on(
    nodes: Nodes, j: Array, tolerance: float, max_iterations: int, slopes: bool, strong: bool = False
) -> LegSolution:
    cold, hot = nodes.cold, nodes.hot
    with np.errstate(divide="ignore", over="ignore", invalid="ignore"):  # judged by ``sound``
        state = solve_nodes(nodes, j, tolerance, max_iterations, strong)
        voltage = hot.voltage - cold.voltage
        power = j * (voltage - j * state.resistance)
        at_cold = state.flow - j * cold.seebeck * cold.temperature  # G at the two ends
        at_hot = state.flow + power - j * hot.seebeck * hot.temperature
        sound = state.settled & (state.misfit < max(_MISFIT, tolerance)) & (at_cold > 0) & (at_hot > 0)
        by_flow, by_resistance = slopes_of(nodes, j, state, at_hot, at_cold) if slopes else (None, None)
    return LegSolution(
        state.flow,
        state.flow + power,
        power,
        voltage,
        state.resistance,
        hot.seebeck,
        cold.seebeck,
        sound,
        state.iterations,
        by_flow,
        by_resistance,
    )
