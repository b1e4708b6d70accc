"""A conductance function given as a table over energy."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.transport.constants import BOLTZMANN, CHARGE, PLANCK
from tegdesign.material.transport.law import above_zero, temperatures
from tegdesign.material.transport.response import Channel, Response
from tegdesign.material.transport.window import HALF_WIDTH, blocks, gauss

COVER = 10.0  # [kT] on both sides of the chemical potential that a table must reach
_PANEL = 2.0  # [kT]; widest panel of the quadrature
_NODES = 8  # a panel: 1e-13 of the window of one panel
_BLOCK = 64


@dataclass(frozen=True, eq=False)
class ConductanceFunction:
    """Transmission times number of modes (for one spin) at electron energies, of a sample of given length
    and area.

    sigma = (length / area) (2 e^2 / h) times the integral of transmission (-df/dE): Datta 1995, Electronic
    Transport in Mesoscopic Systems, chapter 2 (memory). Straight lines between the points. Beyond the ends
    nothing is assumed to conduct; of a constant function cut off 10 kT from the chemical potential that
    leaves out at most 0.01 % of sigma and 0.4 % of kappa_e.

    Parameters
    ----------
    energy : ndarray, shape (K,)
        Strictly increasing [J], K >= 2.
    transmission : ndarray, shape (K,)
        0 or above, without unit.
    length, area : float
        Of the sample [m], [m^2].
    """

    energy: Array
    transmission: Array
    length: float
    area: float

    def __post_init__(self) -> None:
        """Refuse lists that are not a function of energy, negative transmission and impossible samples."""
        e, m = np.array(self.energy, dtype=float), np.array(self.transmission, dtype=float)
        if e.ndim != 1 or e.shape != m.shape or e.size < 2:
            raise InputError(
                f"a conductance function needs equal lists of two or more energies and transmissions, got "
                f"{e.size} and {m.size}"
            )
        if not (np.all(np.isfinite(e)) and np.all(np.isfinite(m))):
            raise InputError("a conductance function has a value that is not finite; give numbers")
        if np.any(np.diff(e) <= 0):
            k = int(np.argmax(np.diff(e) <= 0))
            raise InputError(
                f"energies of a conductance function must increase: {e[k] / CHARGE:.6g} eV is followed by "
                f"{e[k + 1] / CHARGE:.6g} eV; sort the table and remove repeats"
            )
        if np.any(m < 0):
            k = int(np.argmax(m < 0))
            raise InputError(
                f"transmission of a conductance function is {m[k]:.6g} at {e[k] / CHARGE:.6g} eV but must "
                "not be negative"
            )
        above_zero(self.length, "length of the sample [m]")
        above_zero(self.area, "area of the sample [m^2]")
        e.setflags(write=False)
        m.setflags(write=False)
        object.__setattr__(self, "energy", e)
        object.__setattr__(self, "transmission", m)

    def at(self, temperature: ArrayLike, chemical_potential: ArrayLike) -> Response:
        """Return the response at temperatures [K] and chemical potentials [J] that broadcast.

        Raises
        ------
        InputError
            The table does not reach from 10 kT below to 10 kT above a chemical potential.
        """
        t, mu = np.broadcast_arrays(temperatures(temperature), np.asarray(chemical_potential, dtype=float))
        self._check_cover(t, mu)
        flat_t, flat_mu = t.ravel(), mu.ravel()
        order = np.argsort(flat_t, kind="stable")  # like temperatures share one set of panels
        result = np.empty((3, flat_t.size))
        for part in blocks(flat_t.size, _BLOCK):
            chosen = order[part]
            result[:, chosen] = self._moments(flat_t[chosen], flat_mu[chosen])
        conductance, distance, spread = result.reshape(3, *t.shape)
        return Response(t, mu, (Channel(conductance, distance, spread),))

    def _check_cover(self, t: Array, mu: Array) -> None:
        reach = COVER * BOLTZMANN * t
        wrong = (mu - reach < self.energy[0]) | (mu + reach > self.energy[-1])
        if wrong.any():
            k = np.unravel_index(np.argmax(wrong), wrong.shape)
            first, last, low, high = (
                value / CHARGE for value in (self.energy[0], self.energy[-1], mu[k] - reach[k], mu[k] + reach[k])
            )
            raise InputError(
                f"a conductance function at {t[k]:.6g} K and chemical potential {mu[k] / CHARGE:.6g} eV must "
                f"be known from {low:.6g} eV to {high:.6g} eV (10 kT on both sides) but goes from "
                f"{first:.6g} eV to {last:.6g} eV; add energies or lower the temperature"
            )

    def _moments(self, t: Array, mu: Array) -> Array:
        """Return conductance, distance and spread of a block, shape (3, P), by Gauss panels of at most 2
        kT.
        """
        reach = HALF_WIDTH * BOLTZMANN * t.max()
        low, high = max(self.energy[0], mu.min() - reach), min(self.energy[-1], mu.max() + reach)
        inner = self.energy[(self.energy > low) & (self.energy < high)]
        points = np.concatenate([[low], inner, [high]])
        count = np.ceil(np.diff(points) / (_PANEL * BOLTZMANN * t.min())).astype(int)
        step = np.repeat(np.diff(points) / count, count)
        left = np.concatenate(
            [a + s / n * np.arange(n) for a, s, n in zip(points, np.diff(points), count, strict=False)]
        )
        node, weight = gauss(_NODES)
        energy = (left[:, None] + step[:, None] * node).ravel()
        part = (step[:, None] * weight).ravel() * np.interp(energy, self.energy, self.transmission)
        x = (energy - mu[:, None]) / (BOLTZMANN * t[:, None])
        tail = np.exp(-np.abs(x))
        w = part / (BOLTZMANN * t[:, None]) * tail / (1 + tail) ** 2
        total = w.sum(axis=-1)
        mean = np.divide(np.einsum("pn,pn->p", w, x), total, out=np.zeros_like(total), where=total > 0)
        spread = np.einsum("pn,pn->p", w, (x - mean[:, None]) ** 2)
        unit = 2 * CHARGE**2 / PLANCK * self.length / self.area
        return np.stack([unit * total, mean, unit * spread])
