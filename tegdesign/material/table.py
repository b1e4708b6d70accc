"""Material file of kind ``table``: the three properties as measured points."""

from __future__ import annotations

from collections.abc import Mapping
from functools import cached_property
from typing import Literal

import numpy as np
from pydantic import Field, ValidationInfo, field_validator
from pydantic_core import PydanticCustomError

from tegdesign.document import Finding
from tegdesign.material.curve import Curve
from tegdesign.material.file import MaterialFile
from tegdesign.material.points import Points, parse_points


class TableFile(MaterialFile):
    """A material whose properties are given at measured temperatures, each property at its own if need be."""

    kind: Literal["table"]
    points: str = Field(
        description="header 'temperature [K], seebeck_coefficient [uV/K], resistivity [mohm cm] or "
        "conductivity [S/cm], thermal_conductivity [W/m/K]' in any units, then one row a temperature; "
        "a blank cell or - says not measured"
    )

    @field_validator("points")
    @classmethod
    def _usable(cls, text: str, info: ValidationInfo) -> str:
        points = parse_points(text)
        findings = points.findings or [
            *_nothing_shared(points),
            *_wrong_sign(points, info.data.get("polarity", "")),
        ]
        if findings:
            raise PydanticCustomError(
                "points", "{reason}", {"reason": findings[0].text, "findings": findings}
            )
        return text

    @cached_property
    def _parsed(self) -> Points:
        return parse_points(self.points)

    def curves(self) -> tuple[Curve, Curve, Curve]:
        """Return Seebeck coefficient [V/K], resistivity [ohm m] and thermal conductivity [W/m/K]."""
        s, rho, kappa = (
            Curve(*self._parsed.values[name][:2])
            for name in ("seebeck_coefficient", "resistivity", "thermal_conductivity")
        )
        return s, rho, kappa

    def point_lines(self) -> Mapping[str, list[int]]:
        """Return the lines of the points of each property, counted from the first line of ``points``."""
        return {name: lines for name, (_, _, lines) in self._parsed.values.items()}


def _nothing_shared(points: Points) -> list[Finding]:
    """Refuse properties that are nowhere known together."""
    ranges = {name: (t[0], t[-1]) for name, (t, _, _) in points.values.items()}
    last = min(ranges, key=lambda name: ranges[name][1])
    first = max(ranges, key=lambda name: ranges[name][0])
    if ranges[first][0] < ranges[last][1]:
        return []
    got = f"{last} ends at {ranges[last][1]:.6g} K, {first} begins at {ranges[first][0]:.6g} K"
    return [Finding(0, "error", "the properties share no temperatures", got, mend="add points")]


def _wrong_sign(points: Points, polarity: str) -> list[Finding]:
    """Refuse a Seebeck coefficient that has the sign of the other polarity everywhere."""
    _, value, lines = points.values["seebeck_coefficient"]
    sign = {"n": -1.0, "p": 1.0}.get(polarity, 0.0)
    if sign == 0.0 or np.any(sign * value >= 0):
        return []
    limit = f"{'below' if sign < 0 else 'above'} 0 for polarity {polarity}"
    got = f"{value[0] * 1e6:.4g} uV/K"
    return [
        Finding(
            lines[0],
            "error",
            "seebeck_coefficient has the wrong sign everywhere",
            got,
            limit,
            "mend the sign or the polarity",
        )
    ]
