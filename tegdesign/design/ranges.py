"""Power and voltage of a design over each quantity in which its states differ, and a little beyond them."""

from __future__ import annotations

from dataclasses import asdict, dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from tegdesign.design.evaluate import Evaluation
from tegdesign.design.limits import Limit
from tegdesign.design.rating import Rating
from tegdesign.design.seek import along
from tegdesign.design.variables import DIFFERENCE, FILM, FLOW, HEAT, Variable, Varying

if TYPE_CHECKING:
    import pandas as pd

POINTS = 33
_BEYOND = 0.12  # of the span of the states, looked at on both sides
_ALONE = 0.3  # of the value, where all states share it
_LEAST = 0.02  # of the value of the rated state


@dataclass(frozen=True)
class Row:
    """One point of a range, or one state: totals of the whole generator, hottest junction loaded or open.

    ``value`` is that of the quantity, in its unit; ``room_K`` to the nearest temperature limit, open circuit included.
    """

    value: float
    delivered_power_W: float
    voltage_V: float
    open_circuit_voltage_V: float
    T_hot_junction_K: float
    room_K: float


@dataclass(frozen=True)
class Range:
    """The rated state over one quantity; ``states`` are the states as they are, all that differs in them included."""

    quantity: str
    key: str
    unit: str
    rows: tuple[Row, ...]
    states: dict[str, Row]

    def to_rows(self) -> list[dict[str, Any]]:
        """Return one mapping a point: quantity with its unit in the name, and the results."""
        return [_told(self.key, row, "") for row in self.rows] + [
            _told(self.key, row, name) for name, row in self.states.items()
        ]


def _told(key: str, row: Row, state: str) -> dict[str, Any]:
    values = asdict(row)
    return {"quantity": key, "state": state, key: values.pop("value"), **values}


@dataclass(frozen=True)
class Ranges:
    """A design over each quantity in which its states differ; over its source where they do not."""

    rating: Rating
    ranges: tuple[Range, ...]

    def rows(self) -> list[dict[str, Any]]:
        """Return one mapping a point of every range."""
        told = [row for each in self.ranges for row in each.to_rows()]
        names = list(dict.fromkeys(name for row in told for name in row))
        return [{name: row.get(name) for name in names} for row in told]

    def to_frame(self) -> pd.DataFrame:
        """Return the points as a table, column names with units."""
        import pandas as pd

        return pd.DataFrame(self.rows())

    def to_dict(self) -> dict[str, Any]:
        """Return plain values for JSON; keys end in their unit."""
        require = self.rating.design.require
        low, high = require.voltage or (None, None)
        return {
            "required_power_W": require.power,
            "voltage_window_V": [low, high],
            "open_circuit_voltage_limit_V": require.open_circuit_voltage,
            "ranges": [
                {
                    "quantity": each.quantity,
                    "points": [_told(each.key, row, "rated, varied") for row in each.rows],
                    "states": [_told(each.key, row, name) for name, row in each.states.items()],
                }
                for each in self.ranges
            ],
        }


def ranges(rating: Rating) -> Ranges:
    """Return power and voltage of a design over what its states change: source temperature, heat, flow, film.

    Without such states over the temperature or heat of its source.
    """
    whole = Varying(rating.evaluation)
    names = [state.name for state in rating.evaluation.job.states if whole.group_of[state.name] == 0]
    job = replace(rating.evaluation.job, states=rating.evaluation.job.states[: len(names)])
    points = {name: rating.evaluation.points[name] for name in names}
    rated = Varying(replace(rating.evaluation, job=job, points=points))
    found = [v for v in (DIFFERENCE, HEAT, FLOW, FILM) if _differs(whole, v)]
    variables = found or [v for v in (DIFFERENCE, HEAT) if rated.now(v) is not None]
    return Ranges(rating, tuple(_range(whole, rated, v) for v in variables))


def _differs(varying: Varying, variable: Variable) -> bool:
    values = [v for v in _values(varying, variable) if v is not None]
    own = _values(varying, variable)[0]
    return own is not None and any(abs(v / own - 1) > 1e-9 for v in values)


def _values(varying: Varying, variable: Variable) -> list[float | None]:
    """Return the value in every group; a source temperature itself where a difference is varied."""
    if variable is not DIFFERENCE:
        return [varying.now(variable, k) for k in range(len(varying.groups))]
    return [None if s.source.given_heat is not None else s.source.reference_temperature for s in varying.groups]


def _range(whole: Varying, rated: Varying, variable: Variable) -> Range:
    own = [v for v in _values(whole, variable) if v is not None]
    now, zero = rated.now(variable), 0.0
    assert now is not None
    names = variable.name, variable.key, variable.unit
    if variable is DIFFERENCE:
        zero = rated.groups[0].sink.reference_temperature
        names = "source temperature", "source_temperature_K", "K"
    low, high = min(own), max(own)
    beyond = _BEYOND * (high - low) or _ALONE * now
    low, high = min(low, max(low - beyond, zero + _LEAST * now)), high + beyond
    values = np.linspace(low, high, POINTS)
    e = along(rated, variable, ((values - zero) / now)[None, :])
    return Range(*names, tuple(_row(e, 0, float(v), k) for k, v in enumerate(values) if _solved(e, k)), {
        state.name: _row(whole.base, g, value, 0)
        for g, (state, value) in enumerate(zip(whole.groups, _values(whole, variable), strict=True))
        if value is not None
    })  # fmt: skip


def _solved(e: Evaluation, k: int) -> bool:
    return all(point.converged[k] for point in e.points.values())


def _room(limit: Limit, k: int) -> float:
    return float((-limit.violation * limit.scale)[k])


def _row(e: Evaluation, group: int, value: float, k: int) -> Row:
    loaded = [state for state in e.job.states if not state.of][group]
    own = [state.name for state in e.job.states if loaded.name in (state.name, state.of)]
    opened = e.points.get(loaded.opened, e.points[loaded.name])
    series = e.candidates.series[k]
    return Row(
        value,
        float(e.delivered(loaded)[k]),
        float(e.points[loaded.name].voltage[k] * series),
        float(opened.voltage[k] * series),
        max(float(e.points[name].hot_junction[k]) for name in own),
        min(_room(limit, k) for limit in e.limits if limit.hard and limit.state in own),
    )
