"""What a fit found: parameters with their uncertainty, and how the model meets the measured points."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from tegdesign.material.bands.fit_model import REFERENCE, Model, Parameter
from tegdesign.material.bands.overlay import Deviation
from tegdesign.material.curve import Array
from tegdesign.material.material import Material

if TYPE_CHECKING:
    import pandas as pd

STRONG = 0.9  # correlation from which two parameters stand for each other
FAILS = 2.0  # [sigma] beyond which the model fails at a point
MISSED = 1.5  # chi-square per degree of freedom
CONVENTION = "held: convention of the weighted mobility, not known"
NOT_TOLD = 1.0  # uncertainty of the logarithm, or of the natural step, from which a parameter is not told
PROPERTIES = ("seebeck_coefficient", "resistivity", "thermal_conductivity")
UNITS = ("V_per_K", "ohm_m", "W_per_m_K")
Columns = dict[str, Any]


@dataclass(frozen=True)
class Points:
    """Measured S [V/K], rho [ohm m], kappa [W/m/K] and their uncertainty, shape (3, K), nan where not measured."""

    temperature: Array
    measured: Array
    sigma: Array

    @property
    def known(self) -> NDArray[np.bool_]:
        """Where there is a point, shape (3, K)."""
        return np.isfinite(self.measured)

    def residuals(self, modelled: Array) -> Array:
        """Return model less measured in units of the uncertainty, of rho and kappa in the logarithm, shape (3, K)."""
        s = (modelled[0] - self.measured[0]) / self.sigma[0]
        rest = np.log(modelled[1:] / self.measured[1:]) * self.measured[1:] / self.sigma[1:]
        return np.concatenate([s[None], rest])


@dataclass(frozen=True)
class Fitted:
    """One parameter as it came out; uncertainties (1 sigma) are of what is adjusted, nan where it was not.

    ``sigma`` takes the errors of all points as independent, ``common_sigma`` the error of a property as the same at
    all its points, as that of a sample's shape.
    """

    parameter: Parameter
    value: float
    basis: str
    held: bool
    at_bound: bool = False
    sigma: float = float("nan")
    common_sigma: float = float("nan")

    @property
    def name(self) -> str:
        """Name of the parameter."""
        return self.parameter.name

    @property
    def text(self) -> str:
        """Value to six digits, with its unit."""
        return self.parameter.text(self.parameter.rounded(self.value))

    @property
    def told(self) -> bool:
        """Whether the table tells it: held ones and those at a bound are not told by it."""
        return self.sigma < NOT_TOLD

    def to_dict(self) -> dict[str, Any]:
        """Return it with its unit [SI]."""
        spread = self.parameter.spread
        return {
            "name": self.name,
            "value": self.value,
            "unit": self.parameter.unit or "1",
            "uncertainty": spread(self.value, self.sigma),
            "uncertainty_common_error": spread(self.value, self.common_sigma),
            "held": self.held,
            "at_bound": self.at_bound,
            "told_by_table": self.told,
            "basis": self.basis,
            "meaning": self.parameter.meaning,
        }


@dataclass(frozen=True, eq=False)
class Fit:
    """The outcome of ``fit``.

    Parameters
    ----------
    table : Material
        What was fitted.
    model : Model
        Form of the model.
    parameters : tuple of Fitted
        In the order of the model, held ones as well.
    adjusted : tuple of str
        Names of those the covariances are of: adjusted, not at a bound.
    covariance, common_covariance : ndarray
        Of what is adjusted (logarithms, or values over their step), see ``Fitted``.
    points : Points
        Measured values.
    modelled : ndarray, shape (3, K)
        S [V/K], rho [ohm m], kappa [W/m/K] at the temperatures of the points.
    starts : int
        How many starts were tried.
    """

    table: Material
    model: Model
    parameters: tuple[Fitted, ...]
    adjusted: tuple[str, ...]
    covariance: Array
    common_covariance: Array
    points: Points
    modelled: Array
    starts: int

    @cached_property
    def values(self) -> dict[str, float]:
        """Values [SI] by name."""
        return {one.name: one.value for one in self.parameters}

    @cached_property
    def residuals(self) -> Array:
        """Model less measured in units of the uncertainty, shape (3, K), nan where not measured."""
        return self.points.residuals(self.modelled)

    @property
    def chi_square(self) -> float:
        """Sum of the squares of the residuals."""
        return float(np.nansum(self.residuals**2))

    @property
    def degrees_of_freedom(self) -> int:
        """Number of values less that of adjusted parameters."""
        return int(self.points.known.sum()) - sum(not one.held for one in self.parameters)

    @property
    def reduced_chi_square(self) -> float:
        """Chi-square per degree of freedom; nan without any."""
        return self.chi_square / self.degrees_of_freedom if self.degrees_of_freedom else float("nan")

    @property
    def correlation(self) -> Array:
        """Correlations between the ``adjusted``, errors of points independent."""
        spread = np.sqrt(np.diag(self.covariance))
        return np.asarray(self.covariance / spread / spread[:, None])

    @property
    def strong_correlations(self) -> list[tuple[str, str, float]]:
        """Pairs of parameters that stand for each other, the strongest first."""
        found = [
            (self.adjusted[i], self.adjusted[k], float(self.correlation[i, k]))
            for i, k in zip(*np.triu_indices(len(self.adjusted), 1), strict=True)
            if abs(self.correlation[i, k]) >= STRONG
        ]
        return sorted(found, key=lambda pair: -abs(pair[2]))

    @property
    def combinations(self) -> list[dict[str, Any]]:
        """What the table tells of doping, mass and mobility whichever of them is held, with uncertainties [SI]."""
        found = []
        for name, unit, main, power in (
            ("weighted_mobility", "m^2/V/s", "mobility", 1.5),
            ("doping_per_mass^1.5", "1/m^3", "doping", -1.5),
        ):
            value = self.values[main] * self.values["mass"] ** power
            weight = np.array([{main: 1.0, "mass": power}.get(one, 0.0) for one in self.adjusted])
            single, common = (
                value * float(np.sqrt(weight @ matrix @ weight)) for matrix in (self.covariance, self.common_covariance)
            )
            found.append(
                {"name": name, "value": value, "unit": unit, "uncertainty": single, "uncertainty_common_error": common}
            )
        return found

    @cached_property
    def percent(self) -> Array:
        """Model less measured [%] of S, conductivity and kappa, shape (3, K); of S at least of a tenth of its largest.

        A share of S itself means nothing where S changes sign.
        """
        s = (self.modelled[0] - self.points.measured[0]) * self.table.uncertainty[0] / self.points.sigma[0]
        sigma = self.points.measured[1] / self.modelled[1] - 1
        kappa = self.modelled[2] / self.points.measured[2] - 1
        return 100 * np.stack([s, sigma, kappa])

    @property
    def deviations(self) -> tuple[Deviation, ...]:
        """Largest and rms deviation of S, conductivity and kappa [%]."""
        found = []
        for name, percent in zip(("seebeck_coefficient", "conductivity", PROPERTIES[2]), self.percent, strict=True):
            k = int(np.nanargmax(np.abs(percent)))
            rms = float(np.sqrt(np.nanmean(percent**2)))
            found.append(Deviation(name, float(percent[k]), float(self.points.temperature[k]), rms))
        return tuple(found)

    @property
    def failures(self) -> list[dict[str, Any]]:
        """Points the model misses by more than twice their uncertainty."""
        return [
            {"property": name, "temperature_K": float(t), "residual_sigma": float(r)}
            for name, row in zip(PROPERTIES, self.residuals, strict=True)
            for t, r in zip(self.points.temperature, row, strict=True)
            if abs(r) > FAILS
        ]

    @property
    def trends(self) -> list[dict[str, Any]]:
        """Mean residual [sigma] of the cold, middle and hot third of the points of each property."""
        found = []
        for name, row in zip(PROPERTIES, self.residuals, strict=True):
            thirds = np.array_split(row[np.isfinite(row)], 3)
            means = [float(part.mean()) if part.size else float("nan") for part in thirds]
            found.append({"property": name, "cold_sigma": means[0], "middle_sigma": means[1], "hot_sigma": means[2]})
        return found

    @property
    def remarks(self) -> list[str]:
        """What to mind before the parameters are believed."""
        return list(self._remarks())

    def _remarks(self) -> Iterator[str]:
        by_name = {one.name: one for one in self.parameters}
        if by_name["mass"].basis == CONVENTION:
            yield (
                "mass, doping and mobility are not known apart: the mass is held at 1 m_e by convention; for another "
                "mass m multiply the doping by m^1.5, divide every mobility by it; hold mass or doping if one is known"
            )
        vague = [one.name for one in self.parameters if not one.held and not one.told]
        if self.model.minority and {"gap", "minority_mobility_ratio"} & set(vague):
            yield (
                "the table hardly shows the minority band: leave it out, or hold the gap to a published value; at "
                "other dopings its part is unproven"
            )
        ends = [f"{one.name} ({one.text})" for one in self.parameters if one.at_bound]
        if ends:
            yield f"ended at a bound, so the form of the model does not suit: {', '.join(ends)}"
        loose = [name for name in vague if not by_name[name].at_bound]
        if loose:
            yield f"not told by the table, so hold to a published value or leave a band out: {', '.join(loose)}"
        pairs = [f"{a} and {b} {share:+.3f}" for a, b, share in self.strong_correlations]
        if pairs:
            yield f"strong correlations, only a combination of the two is told: {', '.join(pairs)}"
        if self.reduced_chi_square > MISSED:
            yield (
                f"chi-square per degree of freedom is {self.reduced_chi_square:.3g}, above {MISSED:g}: the model "
                "misses the table by more than its uncertainty, and the uncertainties of the parameters are too small"
            )
        elif self.reduced_chi_square < 1:
            yield (
                "the points scatter less than the uncertainty of the table, so their errors are common to a property "
                "rather than independent: believe the wider of the two uncertainties"
            )

    def columns(self) -> Columns:
        """Return measured and modelled values as columns with their units, shape (K,), nan where not measured."""
        found: Columns = {"temperature_K": self.points.temperature}
        points = self.points
        rows = (PROPERTIES, UNITS, points.measured, points.sigma, self.modelled, self.residuals)
        for name, unit, measured, sigma, modelled, residual in zip(*rows, strict=True):
            found |= {
                f"{name}_measured_{unit}": measured,
                f"{name}_uncertainty_{unit}": sigma,
                f"{name}_modelled_{unit}": modelled,
                f"{name}_residual_sigma": residual,
            }
        return found

    def to_frame(self) -> pd.DataFrame:
        """Return ``columns`` as a table."""
        import pandas as pd

        return pd.DataFrame(self.columns())

    def to_dict(self) -> dict[str, Any]:
        """Return everything by names that carry the unit."""
        return {
            "table": self.table.name,
            "model": self.model.text,
            "reference_temperature_K": REFERENCE,
            "parameters": [one.to_dict() for one in self.parameters],
            "combinations": self.combinations,
            "correlation": {"of": self.adjusted, "matrix": self.correlation},
            "strong_correlations": [dict(zip(("first", "second", "correlation"), pair, strict=True))
                                    for pair in self.strong_correlations],
            "chi_square": self.chi_square,
            "degrees_of_freedom": self.degrees_of_freedom,
            "chi_square_per_degree_of_freedom": self.reduced_chi_square,
            "deviations": [vars(one) for one in self.deviations],
            "beyond_2_sigma": self.failures,
            "trends": self.trends,
            "remarks": self.remarks,
            "starts": self.starts,
            "points": self.columns(),
        }  # fmt: skip
