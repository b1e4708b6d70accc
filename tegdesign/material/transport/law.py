"""Parameters that may depend on temperature, and the checks they share."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.errors import DataRangeError, InputError
from tegdesign.material.curve import Array, Curve

Law = float | Callable[[ArrayLike], Array]


@dataclass(frozen=True)
class Linear:
    """``value + slope (T - reference)``: value in the unit of the parameter, slope per kelvin, reference
    [K].
    """

    value: float
    slope: float = 0.0
    reference: float = 0.0

    def __call__(self, temperature: ArrayLike) -> Array:
        """Return the parameter at a temperature [K] of any shape."""
        return np.asarray(self.value + self.slope * (np.asarray(temperature, dtype=float) - self.reference))


@dataclass(frozen=True)
class Power:
    """``value (T / reference)^exponent``: value in the unit of the parameter, reference [K] above 0."""

    value: float
    exponent: float
    reference: float = 300.0

    def __post_init__(self) -> None:
        """Refuse a reference temperature that is not above 0."""
        above_zero(self.reference, "reference temperature of a power law [K]")

    def __call__(self, temperature: ArrayLike) -> Array:
        """Return the parameter at a temperature [K] of any shape."""
        ratio = np.asarray(temperature, dtype=float) / self.reference
        return np.asarray(self.value * ratio**self.exponent)


def at_temperature(law: Law, temperature: Array, what: str) -> Array:
    """Return a parameter (number, law or measured curve) at temperatures [K], in their shape.

    Raises
    ------
    DataRangeError
        The law is a measured curve and a temperature lies outside of it.
    """
    if isinstance(law, (int, float)):
        return np.full_like(temperature, law)
    if isinstance(law, Curve):
        first, last = law.range
        wrong = temperature[~((temperature >= first) & (temperature <= last))]
        if wrong.size:
            raise DataRangeError(
                f"{what} at {wrong[0]:.6g} K: its table goes from {first:.6g} K to {last:.6g} K; "
                "ask inside or add points"
            )
    return np.asarray(law(temperature), dtype=float)


def positive_at(law: Law, temperature: Array, what: str) -> Array:
    """Return a parameter at temperatures [K] that must be above 0.

    Raises
    ------
    InputError
        It is zero, negative or not a number at one of the temperatures.
    """
    value = at_temperature(law, temperature, what)
    if isinstance(law, (int, float)) and 0 < law < np.inf:
        return value
    wrong = ~((value > 0) & np.isfinite(value))
    if wrong.any():
        k = np.unravel_index(np.argmax(wrong), wrong.shape)
        raise InputError(
            f"{what} is {value[k]:.6g} at {temperature[k]:.6g} K but must be finite and above 0; "
            "mend the parameter or narrow the temperatures"
        )
    return value


def above_zero(value: ArrayLike, what: str) -> None:
    """Raise InputError unless the number, or every number of the array, is finite and above 0."""
    numbers = np.asarray(value, dtype=float)
    wrong = numbers[~((numbers > 0) & np.isfinite(numbers))]
    if wrong.size:
        raise InputError(f"{what} is {wrong[0]:.6g} but must be finite and above 0; give a positive number")


def temperatures(value: ArrayLike) -> Array:
    """Return temperatures [K] as an array; InputError unless all are finite and above 0."""
    above_zero(value, "temperature [K]")
    return np.asarray(value, dtype=float)
