"""Wetted surface: base area with fins behind a film and fouling."""

from __future__ import annotations

from typing import Annotated

import numpy as np
from pydantic import Field, model_validator

from tegdesign.quantity import Measure
from tegdesign.system.model import Part

Enlargement = Annotated[float, Measure(""), Field(ge=1)]
FinEfficiency = Annotated[float, Measure(""), Field(gt=0, le=1)]
Fouling = Annotated[float, Measure("m^2*K/W"), Field(ge=0, lt=1)]
_Size = Annotated[float, Measure("m", "mm"), Field(gt=0, lt=10)]


class Fins(Part):
    """Straight fins of rectangular section on the base: one each ``spacing`` from middle to middle."""

    spacing: _Size
    thickness: _Size
    height: _Size
    conductivity: Annotated[float, Measure("W/m/K"), Field(gt=0, lt=5000)]

    @model_validator(mode="after")
    def _apart(self) -> Fins:
        if self.thickness >= self.spacing:
            raise ValueError(
                f"thickness {self.thickness * 1e3:.6g} mm leaves no room within the spacing "
                f"{self.spacing * 1e3:.6g} mm; mend one of them"
            )
        return self

    def efficiency(self, coefficient: float) -> float:
        """Return the fin efficiency tanh(m l) / (m l), m = sqrt(2 h / (k t)), for a coefficient [W/m^2/K].

        The tip is counted by l = height + thickness/2 (Harper and Brown 1922, NACA report 158, (memory)): within
        0.3 % of the exact fin while h t / k is below 1/16 and the height above the thickness.
        """
        x = np.sqrt(2 * coefficient / (self.conductivity * self.thickness)) * (self.height + self.thickness / 2)
        return float(np.tanh(x) / x)

    def factor(self, coefficient: float) -> float:
        """Return wetted area that counts over base area: bare base between the fins, and fins by their efficiency."""
        fin = 2 * self.height + self.thickness
        return (self.spacing - self.thickness + self.efficiency(coefficient) * fin) / self.spacing


def fin_factor(area_enlargement: float, fin_efficiency: float) -> float:
    """Return wetted area that counts over base area: 1 + efficiency (enlargement - 1).

    The fins add (enlargement - 1) base areas, each worth ``fin_efficiency``; the base area itself counts in full.
    """
    return 1 + fin_efficiency * (area_enlargement - 1)


def on_base(
    coefficient: float,
    area_enlargement: float,
    fin_efficiency: float,
    fouling_resistance: float | None,
    fins: Fins | None,
) -> float:
    """Return the conductance over base area [W/m^2/K] of a film [W/m^2/K] with fouling [m^2 K/W] on its wetted area."""
    through = 1 / (1 / coefficient + (fouling_resistance or 0.0))
    return through * (fins.factor(through) if fins else fin_factor(area_enlargement, fin_efficiency))


def fins_once(area_enlargement: float, fin_efficiency: float, fins: Fins | None) -> None:
    """Refuse fins that are given twice."""
    if fins is not None and (area_enlargement != 1 or fin_efficiency != 1):
        raise ValueError(
            f"fins are given twice: by dimensions and by area_enlargement {area_enlargement:g}, fin_efficiency "
            f"{fin_efficiency:g}; drop one"
        )
