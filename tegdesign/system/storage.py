"""Storage between a charger and a user who draws in bursts: energy in and out, break-even, size."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Annotated

import numpy as np
from numpy.typing import ArrayLike
from pydantic import Field, model_validator

from tegdesign.material.curve import Array
from tegdesign.quantity import Measure
from tegdesign.system.model import Part


@dataclass(frozen=True)
class EnergyBalance:
    """Energies [J] of a repeated sequence of steps: fed to the storage bus, used, and what storage gains in all.

    ``time_short`` [s] is spent below break-even. ``storage`` [J] is the usable content that carries the user through
    every repetition; infinite where more is drawn than fed.
    """

    time: float
    fed: float
    used: float
    gained: float
    time_short: float
    storage: float

    @property
    def sustained(self) -> bool:
        """Whether as much comes in as goes out."""
        return self.gained >= 0


class Duty(Part):
    """A user that draws a burst once a period and little between, from storage that the generator fills.

    Power fed is used at once as far as it is drawn at that moment; only the rest passes the storage. Losses of the
    storage count while it is filled, so contents [J] are what can be drawn.
    """

    burst_power: Annotated[float, Measure("W"), Field(gt=0)]
    burst_time: Annotated[float, Measure("s"), Field(gt=0)]
    period: Annotated[float, Measure("s"), Field(gt=0)]
    rest_power: Annotated[float, Measure("W"), Field(ge=0)] = 0.0
    storage_efficiency: Annotated[float, Measure(""), Field(gt=0, le=1)]
    storage_leak: Annotated[float, Measure("W"), Field(ge=0)] = 0.0
    bridge_time: Annotated[float, Measure("s", "h"), Field(ge=0)] = 0.0

    @model_validator(mode="after")
    def _burst_in_period(self) -> Duty:
        if self.burst_time > self.period:
            raise ValueError(
                f"burst_time {self.burst_time:g} s is longer than the period, {self.period:g} s; shorten the burst"
            )
        if self.rest_power > self.burst_power:
            raise ValueError(
                f"rest_power {self.rest_power:g} W is above burst_power, {self.burst_power:g} W; exchange them"
            )
        return self

    @property
    def share(self) -> float:
        """Share of the time in bursts."""
        return self.burst_time / self.period

    @property
    def average_power(self) -> float:
        """Power that the user draws on average [W]."""
        return self.share * self.burst_power + (1 - self.share) * self.rest_power

    def net_power(self, power: ArrayLike) -> Array:
        """Return what the storage gains on average [W] at a steady feed ``power`` [W]; below zero it runs empty."""
        burst, rest = self._gain(power, self.burst_power), self._gain(power, self.rest_power)
        return np.asarray(self.share * burst + (1 - self.share) * rest)

    @property
    def break_even_power(self) -> float:
        """Least steady feed [W] that sustains the user: the zero of ``net_power``, which is straight between kinks."""
        kink = self.rest_power, self.burst_power
        net = [float(self.net_power(power)) for power in kink]
        if net[1] < 0:  # the leak takes more than the rest between bursts can fill
            return kink[1] - net[1] / self.storage_efficiency
        if net[1] == net[0]:
            return kink[1]
        return kink[0] - net[0] * (kink[1] - kink[0]) / (net[1] - net[0])

    def storage_needed(self, power: ArrayLike, time: float) -> Array:
        """Return the content [J] that lasts for a ``time`` [s] at a steady feed ``power`` [W], bursts at both ends."""
        net = self.net_power(power)
        return np.maximum(-net, 0.0) * time + self._swing(power, net)

    @property
    def bridge_storage(self) -> float:
        """Content [J] that lasts for ``bridge_time`` while nothing is fed."""
        return float(self.storage_needed(0.0, self.bridge_time))

    def balance(self, power: ArrayLike, time: ArrayLike) -> EnergyBalance:
        """Return the energies of steps of feed ``power`` [W] that last for ``time`` [s] each, such as those of a day.

        The sequence repeats for ever; steps are long against the period. Storage is the deepest mean fall of what it
        holds, from any step to any later one, and what one burst draws beyond the mean.
        """
        fed, span = np.broadcast_arrays(*(np.atleast_1d(np.asarray(x, dtype=float)) for x in (power, time)))
        net = self.net_power(fed)
        total = float(np.sum(net * span))
        twice = np.concatenate([[0.0], np.cumsum(np.tile(net * span, 2))])  # a fall may pass midnight
        fall = float(np.max(np.maximum.accumulate(twice) - twice))
        return EnergyBalance(
            time=float(np.sum(span)),
            fed=float(np.sum(fed * span)),
            used=self.average_power * float(np.sum(span)),
            gained=total,
            time_short=float(np.sum(span[net < 0])),
            storage=fall + float(np.max(self._swing(fed, net))) if total >= 0 else float("inf"),
        )

    def _gain(self, power: ArrayLike, drawn: float) -> Array:
        """Return what the storage gains [W] while so much is drawn."""
        spare = np.asarray(power, dtype=float) - drawn
        return np.asarray(np.where(spare > 0, self.storage_efficiency * spare, spare) - self.storage_leak)

    def _swing(self, power: ArrayLike, net: Array) -> Array:
        """Return what one burst takes beyond the mean fall [J]."""
        burst = self._gain(power, self.burst_power)
        return np.asarray(self.burst_time * np.maximum(np.minimum(net, 0.0) - burst, 0.0))

    def words(self) -> str:
        """Return the duty in words."""
        return (
            f"user of {self.average_power:.6g} W on average ({self.burst_power:.6g} W for {self.burst_time:.6g} s "
            f"every {self.period:.6g} s, else {self.rest_power:.6g} W) behind storage of efficiency "
            f"{self.storage_efficiency:.6g} and leak {self.storage_leak:.6g} W"
        )
