"""From a measured table to the bands and the lattice that have its properties, by weighted least squares."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from functools import partial
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from tegdesign.errors import ConvergenceError, InputError
from tegdesign.material.bands.fit_model import Model, Parameter, Prediction
from tegdesign.material.bands.fit_result import CONVENTION, Fit, Fitted, Points
from tegdesign.material.bands.fit_start import starts
from tegdesign.material.bands.material import BandMaterial
from tegdesign.material.curve import Array
from tegdesign.material.material import Material

if TYPE_CHECKING:
    from scipy.optimize import OptimizeResult

# Where |S| is smaller than this share of its largest, its uncertainty stays: it does not vanish where S changes sign.
SMALL_SEEBECK = 0.1
_STEP = 1e-6  # of what is adjusted, for the slopes
_LOST = 1e3  # residual [sigma] of values for which there is no answer, so that the search turns back
_FIRST_LOOK = 8  # evaluations for each start; the best goes on
_RIVAL = 2.0  # so much worse than the best may the second be to go on as well
_NEAR_BOUND = 1e-2  # of what is adjusted
USUAL = {"mass": 1.0}  # held when neither mass nor doping is known: that of the weighted mobility


def fit(
    table: Material,
    *,
    bands: int = 1,
    minority: bool = True,
    dispersion: str = "parabolic",
    scattering: str = "acoustic",
    lattice: str = "inverse power",
    hold: Mapping[str, float] | None = None,
    free: Iterable[str] = (),
    evaluations: int = 200,
    progress: Callable[[float], None] = lambda share: None,
) -> Fit:
    """Return the parameters of bands and lattice that meet S, rho and kappa of a measured material best.

    S, rho and kappa tell doping over mass^1.5 and mobility times mass^1.5, never the three apart. So either mass or
    doping is held: what ``hold`` says; a mass of 1 m_e, the convention of the weighted mobility, when it says neither.

    Parameters
    ----------
    table : Material
        A measured material; each property is compared at its own temperatures.
    bands, minority, dispersion, scattering, lattice
        Form of the model, see ``Model``.
    hold : mapping
        Values [SI] of parameters that are known, such as ``doping`` [1/m^3] (the Hall density of the paper), ``mass``
        [m_e] or ``gap`` [J].
    free : iterable of str
        Parameters to adjust that are usually held, such as ``mass_exponent`` or ``gap_slope``.
    evaluations : int
        Most evaluations of the model for the last run.
    progress : callable
        Takes the share done, 0 to 1.

    Raises
    ------
    InputError
        The material is computed, the table has fewer values than there are parameters, an unknown parameter or word,
        or both mass and doping are to be adjusted.
    ConvergenceError
        The search did not settle.
    """
    if isinstance(table, BandMaterial):
        raise InputError(f"{table.name} is computed from bands already; take a table of measured values")
    model = Model(table.polarity, table.range, bands, minority, dispersion, scattering, lattice)
    held, basis = _held(model, dict(hold or {}), tuple(free))
    adjusted = [parameter for name, parameter in model.parameters().items() if name not in held]
    points = _points(table)
    _check_count(table, points, len(adjusted))
    search = _Search(model, points, adjusted, held)
    best, used = search.run(starts(model, table, held), evaluations, progress)
    return _result(table, model, search, best, used, held, basis)


def _held(model: Model, hold: dict[str, float], free: tuple[str, ...]) -> tuple[dict[str, float], dict[str, str]]:
    """Return values of what is held and why."""
    for name in free:
        model.parameter(name)
        if name in hold:
            raise InputError(f"'{name}' is to be held and to be free; say one of the two")
    held = {name: model.parameter(name).checked(value) for name, value in hold.items()}
    basis = dict.fromkeys(held, "held as given")
    known = [name for name in ("mass", "doping") if name in hold]
    if not known:
        if "mass" in free:
            raise InputError(
                "mass and doping cannot both be free: S, rho and kappa tell only doping / mass^1.5; hold one of them"
            )
        held |= USUAL
        basis |= dict.fromkeys(USUAL, CONVENTION)
    for name, parameter in model.parameters().items():
        freed = parameter.free or name in free or (name == "mass" and known == ["doping"])
        if name not in held and not freed:
            held[name], basis[name] = parameter.start, "held: usual value"
    return held, basis


def _points(table: Material) -> Points:
    """Return the measured values with their uncertainty at all temperatures, nan where one was not measured."""
    t = table.measured_temperatures
    measured = np.full((3, t.size), np.nan)
    for k, curve in enumerate((table.seebeck_coefficient, table.resistivity, table.thermal_conductivity)):
        measured[k, np.searchsorted(t, curve.temperature)] = curve.value
    share = np.array(table.uncertainty)[:, None]
    size = np.abs(measured)
    size[0] = np.maximum(size[0], SMALL_SEEBECK * np.nanmax(size[0]))
    return Points(t, measured, share * size)


def _check_count(table: Material, points: Points, adjusted: int) -> None:
    each = [int(known.sum()) for known in points.known]
    if adjusted > sum(each):
        raise InputError(
            f"{table.name} has {sum(each)} values (S {each[0]}, rho {each[1]}, kappa {each[2]}) but the model has "
            f"{adjusted} parameters to adjust; hold some, leave out a band or add points"
        )


class _Run(NamedTuple):
    scaled: Array
    cost: float
    jacobian: Array
    converged: bool
    message: str


@dataclass(frozen=True)
class _Search:
    """Least squares in what is adjusted, between bounds."""

    model: Model
    points: Points
    adjusted: list[Parameter]
    held: dict[str, float]

    def values(self, scaled: Array) -> dict[str, float]:
        """Return all values [SI], in the order of the model."""
        found = {p.name: p.value(float(x)) for p, x in zip(self.adjusted, scaled, strict=True)} | self.held
        return {name: found[name] for name in self.model.parameters()}

    @property
    def bounds(self) -> tuple[Array, Array]:
        """Least and most of what is adjusted."""
        low, high = ([p.scaled(end) for p in self.adjusted for end in [getattr(p, side)]] for side in ("low", "high"))
        return np.array(low), np.array(high)

    def residuals(self, predict: Prediction, scaled: Array) -> Array:
        """Return model less measured in units of the uncertainty, of rho and kappa in the logarithm."""
        try:
            model = predict(self.values(scaled))
        except (InputError, ConvergenceError):  # bands that have met, a level out of reach: no place to stay
            return np.full(int(self.points.known.sum()), _LOST)
        return self.points.residuals(model)[self.points.known]

    def slopes(self, predict: Prediction, scaled: Array) -> Array:
        """Return the change of the residuals with what is adjusted, steps away from the nearer bound."""
        here, columns = self.residuals(predict, scaled), []
        low, high = self.bounds
        for k, middle in enumerate((low + high) / 2):
            step = _STEP if scaled[k] < middle else -_STEP
            moved = scaled.copy()
            moved[k] += step
            columns.append((self.residuals(predict, moved) - here) / step)
        return np.stack(columns, axis=1)

    def run(
        self, first: list[dict[str, float]], evaluations: int, progress: Callable[[float], None]
    ) -> tuple[_Run, int]:
        """Look briefly from every start, go on with the best; return its end and the number of starts."""
        predict = Prediction(self.model, self.points.temperature)
        looks = []
        for k, values in enumerate(first):
            looks.append(self._settle(predict, self._inside(values), _FIRST_LOOK))
            progress((k + 1) / (len(first) + 2))
        looks.sort(key=lambda run: run.cost)
        near = [run for run in looks[1:2] if run.cost < _RIVAL * looks[0].cost]
        ends = [self._settle(predict, run.scaled, evaluations) for run in [looks[0], *near]]
        progress(1.0)
        best = min(ends, key=lambda run: run.cost)
        if not best.converged:
            raise ConvergenceError(
                f"the fit did not settle in {evaluations} evaluations ({best.message}); hold a parameter that the "
                "table does not tell, leave out a band or allow more"
            )
        return best, len(first)

    def _inside(self, values: Mapping[str, float]) -> Array:
        low, high = self.bounds
        scaled = np.array([p.scaled(values[p.name]) for p in self.adjusted])
        return np.asarray(np.clip(scaled, low + 1e-3 * (high - low), high - 1e-3 * (high - low)))

    def _settle(self, predict: Prediction, scaled: Array, evaluations: int) -> _Run:
        from scipy.optimize import least_squares

        found: OptimizeResult = least_squares(
            partial(self.residuals, predict), scaled, jac=partial(self.slopes, predict), bounds=self.bounds,
            x_scale="jac", max_nfev=evaluations, ftol=1e-5, xtol=1e-9, gtol=1e-12,
        )  # fmt: skip
        low, high = self.bounds
        close = 1e-6 * (high - low)  # an end that was only approached
        ends = np.where(found.x - low < close, low, np.where(high - found.x < close, high, found.x))
        return _Run(ends, float(found.cost), found.jac, found.status > 0, str(found.message))


def _result(
    table: Material,
    model: Model,
    search: _Search,
    best: _Run,
    used: int,
    held: dict[str, float],
    basis: dict[str, str],
) -> Fit:
    low, high = search.bounds
    at_bound = (best.scaled - low < _NEAR_BOUND) | (high - best.scaled < _NEAR_BOUND)
    single, common = _covariances(best.jacobian[:, ~at_bound], search.points.known)
    values = search.values(best.scaled)
    inner = tuple(p.name for p, bound in zip(search.adjusted, at_bound, strict=True) if not bound)
    told = []
    for name, parameter in model.parameters().items():
        if name in held:
            told.append(Fitted(parameter, values[name], basis[name], held=True))
        elif name not in inner:
            told.append(Fitted(parameter, values[name], "adjusted, ended at its bound", held=False, at_bound=True))
        else:
            k = inner.index(name)
            spreads = [float(np.sqrt(matrix[k, k])) for matrix in (single, common)]
            told.append(Fitted(parameter, values[name], "adjusted", False, False, *spreads))
    modelled = Prediction(model, search.points.temperature)(values)
    return Fit(table, model, tuple(told), inner, single, common, search.points, modelled, used)


def _covariances(jacobian: Array, known: NDArray[np.bool_]) -> tuple[Array, Array]:
    """Return the covariance of what is adjusted: every point with its own error, and all of a property with one."""
    u, s, vt = np.linalg.svd(jacobian, full_matrices=False)
    s = np.maximum(s, 1e-12 * s.max(initial=1e-300))  # a direction the table does not tell: a huge uncertainty
    inverse = vt.T / s @ u.T
    property_of = np.repeat(np.arange(3), known.sum(axis=1))
    shared = np.stack([inverse[:, property_of == k].sum(axis=1) for k in range(3)], axis=1)
    return inverse @ inverse.T, shared @ shared.T
