"""Conduction and valence bands together: carriers, chemical potential and response of a crystal."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.transport.band import Band, Edge, states_above
from tegdesign.material.transport.constants import BOLTZMANN
from tegdesign.material.transport.law import Law, above_zero, positive_at, temperatures
from tegdesign.material.transport.neutrality import solve
from tegdesign.material.transport.response import Channel, Response
from tegdesign.material.transport.scattering.states import States, Surroundings
from tegdesign.material.transport.window import Window, blocks, fermi_window


@dataclass(frozen=True, eq=False)
class BandResponse(Response):
    """Response of bands, with their carriers.

    Parameters
    ----------
    bands : tuple of Band
        In the order of the first axis of what follows.
    density : ndarray, shape (B, ...)
        Carriers in every band, electrons or holes [1/m^3].
    reduced_level : ndarray, shape (B, ...)
        Chemical potential above the edge of every band, counted into the band, in kT.
    """

    bands: tuple[Band, ...]
    density: Array
    reduced_level: Array

    @property
    def electron_density(self) -> Array:
        """n of all conduction bands [1/m^3]."""
        return self._sum("electron")

    @property
    def hole_density(self) -> Array:
        """p of all valence bands [1/m^3]."""
        return self._sum("hole")

    @property
    def net_doping(self) -> Array:
        """n - p, the density of donors less that of acceptors, all ionised [1/m^3]."""
        return self.electron_density - self.hole_density

    def _sum(self, carrier: str) -> Array:
        chosen = [k for k, band in enumerate(self.bands) if band.carrier == carrier]
        return np.asarray(self.density[chosen].sum(axis=0))


class _Counted(NamedTuple):
    """Of one block of points: quadrature and states of every band, its carriers and their change with mu,
    (B, P).
    """

    windows: list[Window]
    states: list[States]
    density: Array
    slope: Array


@dataclass(frozen=True)
class Bands:
    """Bands of a crystal; energies are counted from the principal valence edge, without one from the
    conduction edge.

    Dopants are taken as fully ionised at every temperature: incomplete ionisation is left out, so do not use
    the doping form below the temperature at which carriers freeze out (measured carrier densities already
    show it).

    Parameters
    ----------
    bands : tuple of Band
        One or more, of one or both kinds.
    gap : float or law, optional
        Energy [J] between the principal valence and conduction edges; needed if there are bands of both
        kinds.
    """

    bands: tuple[Band, ...]
    gap: Law | None = None

    def __post_init__(self) -> None:
        """Refuse an empty set, and bands of both kinds without a gap."""
        if not self.bands:
            raise InputError("bands is empty; give one or more bands")
        if len({band.carrier for band in self.bands}) == 2 and self.gap is None:
            raise InputError("gap is missing but there are conduction and valence bands; give the gap")
        if isinstance(self.gap, (int, float)):
            above_zero(self.gap, "gap [J]")

    def edges(self, temperature: ArrayLike) -> Array:
        """Return the energies of the band edges [J], shape (B, ...), at temperatures [K].

        Raises
        ------
        InputError
            The gap, or what the offsets leave of it, is not above 0.
        """
        t = temperatures(temperature)
        offsets = [band.edge_offset(t) for band in self.bands]
        if self.gap is None:
            return np.stack([band.sign * offset for band, offset in zip(self.bands, offsets, strict=True)])
        gap = positive_at(self.gap, t, "gap [J]")
        edge = np.stack(
            [gap + o if band.carrier == "electron" else -o for band, o in zip(self.bands, offsets, strict=True)]
        )
        electron = np.array([band.carrier == "electron" for band in self.bands])
        if electron.any() and not electron.all():
            left = edge[electron].min(axis=0) - edge[~electron].max(axis=0)
            positive_at(lambda _: np.asarray(left), t, "gap left by the offsets of the bands [J]")
        return edge

    def at(
        self, temperature: ArrayLike, chemical_potential: ArrayLike, grain_size: ArrayLike | None = None
    ) -> BandResponse:
        """Return response and carriers at temperatures [K] and chemical potentials [J].

        A grain size [m] takes the place of the one in the grain-boundary mechanisms; all arguments broadcast.

        Raises
        ------
        InputError
            No carriers, no scattering, or a parameter out of bounds at a temperature.
        """
        t, mu = temperatures(temperature), np.asarray(chemical_potential, dtype=float)
        grains = 1.0 if grain_size is None else np.asarray(grain_size, dtype=float)
        above_zero(grains, "grain_size [m]")
        t, mu, grains = np.broadcast_arrays(t, mu, grains)
        level = self._levels(t, mu)
        flat_t, flat_level = t.ravel(), level.reshape(len(self.bands), t.size)
        flat_grains = None if grain_size is None else grains.ravel()
        density = np.empty((len(self.bands), t.size))
        result = np.empty((3, len(self.bands), t.size))
        edges = self._edges(flat_t)
        for part in blocks(t.size):
            density[:, part], result[:, :, part] = self._block(
                [edge.part(part) for edge in edges],
                flat_level[:, part],
                None if flat_grains is None else flat_grains[part],
            )
        channels = tuple(Channel(*(value.reshape(t.shape) for value in result[:, b])) for b in range(len(self.bands)))
        return BandResponse(t, mu, channels, self.bands, density.reshape(level.shape), level)

    def doped(self, temperature: ArrayLike, net_doping: ArrayLike, grain_size: ArrayLike | None = None) -> BandResponse:
        """Return response and carriers at temperatures [K] and net dopings [1/m^3], donors positive; see
        ``at``.
        """
        t, doping = np.broadcast_arrays(temperatures(temperature), np.asarray(net_doping, dtype=float))
        return self.at(t, self.chemical_potential(t, doping), grain_size)

    def carriers(self, temperature: ArrayLike, chemical_potential: ArrayLike) -> Array:
        """Return the carrier density of every band [1/m^3], shape (B, ...), at [K] and [J] that broadcast."""
        t, mu = np.broadcast_arrays(temperatures(temperature), np.asarray(chemical_potential, dtype=float))
        level = self._levels(t, mu)
        flat = level.reshape(len(self.bands), t.size)
        return self._densities(self._edges(t.ravel()), flat)[0].reshape(level.shape)

    def chemical_potential(self, temperature: ArrayLike, net_doping: ArrayLike) -> Array:
        """Return the chemical potential [J] from net doping [1/m^3] (donors less acceptors, all ionised) at
        [K].

        Raises
        ------
        InputError
            The doping needs carriers that no band has.
        ConvergenceError
            Neutrality was not reached.
        """
        t, doping = np.broadcast_arrays(temperatures(temperature), np.asarray(net_doping, dtype=float))
        kinds = {band.carrier for band in self.bands}
        for carrier, wrong, sign in (
            ("electron", doping <= 0, "above 0 (donors)"),
            ("hole", doping >= 0, "below 0 (acceptors)"),
        ):
            if kinds == {carrier} and wrong.any():
                raise InputError(
                    f"no carriers: net doping {doping[wrong].flat[0]:.6g} 1/m^3 with bands of kind "
                    f"'{carrier}' only must be {sign}; mend its sign or add bands of the other kind"
                )
        flat_t, edge = t.ravel(), self.edges(t).reshape(len(self.bands), t.size)

        signs, at_edge = self._signs, self._edges(flat_t)

        def count(mu: Array, chosen: NDArray[np.intp]) -> tuple[Array, Array]:
            level = signs * (mu - edge[:, chosen]) / (BOLTZMANN * flat_t[chosen])
            return self._densities([one.part(chosen) for one in at_edge], level)

        return solve(count, flat_t, doping.ravel(), edge, signs[:, 0]).reshape(t.shape)

    def transport_distribution(self, energy: ArrayLike, temperature: float, chemical_potential: float) -> Array:
        """Return Xi [S/m] of every band, shape (B, ...), at electron energies [J], 0 in the gap.

        One temperature [K] and one chemical potential [J], on which screening and impurities depend.
        """
        e, t = np.asarray(energy, dtype=float), temperatures([temperature])
        level = self._levels(t, np.array([chemical_potential]))
        around = self._surroundings(t, level, self._count(self._edges(t), level, slopes=True), None)
        result = np.zeros((len(self.bands), e.size))
        for b, (band, edge) in enumerate(zip(self.bands, self.edges(t), strict=True)):
            above = band.sign * (e.ravel() - edge) / (BOLTZMANN * t)
            inside = above > 0
            if inside.any():
                result[b, inside] = band.distribution(band.states(t, above[None, inside]), around)[0]
        return result.reshape(len(self.bands), *e.shape)

    @property
    def _signs(self) -> Array:
        return np.array([[float(band.sign)] for band in self.bands])

    def _levels(self, t: Array, mu: Array) -> Array:
        signs = self._signs.reshape(-1, *([1] * t.ndim))
        return np.asarray(signs * (mu - self.edges(t)) / (BOLTZMANN * t))

    def _edges(self, t: Array) -> list[Edge]:
        return [band.edge(t) for band in self.bands]

    def _count(self, edges: list[Edge], level: Array, slopes: bool) -> _Counted:
        """Return quadrature, states and carriers of one block of points, levels (B, P)."""
        windows = [fermi_window(one) for one in level]
        states = [states_above(edge, w.energy) for edge, w in zip(edges, windows, strict=True)]
        density, slope = np.empty_like(level), np.zeros_like(level)
        for b, (band, window, state) in enumerate(zip(self.bands, windows, states, strict=True)):
            density[b] = band.carriers(state, window)
            if slopes:
                slope[b] = band.carriers_slope(state, window)
        return _Counted(windows, states, density, slope)

    def _densities(self, edges: list[Edge], level: Array) -> tuple[Array, Array]:
        """Return carrier densities [1/m^3] and their change with the level [1/(J m^3)], shape (B, P) each."""
        density, slope = np.empty_like(level), np.empty_like(level)
        for part in blocks(level.shape[1]):
            counted = self._count([edge.part(part) for edge in edges], level[:, part], slopes=True)
            density[:, part], slope[:, part] = counted.density, counted.slope
        return density, slope

    def _surroundings(self, t: Array, level: Array, counted: _Counted, grains: Array | None) -> Surroundings:
        empty = counted.density.sum(axis=0) == 0
        if empty.any():
            k = int(np.argmax(empty))
            raise InputError(
                f"no carriers at {t[k]:.6g} K: the chemical potential lies {-level[:, k].max():.4g} kT "
                "outside of every band but must be nearer than 700 kT; raise the temperature or move it towards a band"
            )
        net = np.abs((self._signs * counted.density).sum(axis=0))
        return Surroundings(
            net[:, None],
            counted.slope.sum(axis=0)[:, None],
            None if grains is None else grains[:, None],
        )

    @property
    def _screened(self) -> bool:
        return any(mechanism.screened for band in self.bands for mechanism in band.scattering)

    def _block(self, edges: list[Edge], level: Array, grains: Array | None) -> tuple[Array, Array]:
        """Return densities (B, P) and conductance, distance, spread (3, B, P) of one block of points."""
        counted = self._count(edges, level, self._screened)
        around = self._surroundings(edges[0].temperature[:, 0], level, counted, grains)
        result = np.empty((3, *level.shape))
        for b, (band, window, state) in enumerate(zip(self.bands, counted.windows, counted.states, strict=True)):
            result[:, b] = band.conduction(state, around, window)
            result[1, b] *= band.sign
        return counted.density, result
