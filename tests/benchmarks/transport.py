"""Speed of the transport integrals against adaptive quadrature a point, both in one run and at equal accuracy.

    python tests/benchmarks/transport.py            100 000 points, a minute
    python tests/benchmarks/transport.py --quick    1000 points, seconds

The other side is ``scipy.integrate.quad`` for what the batch gives: the carriers of every band, with ionised impurities
or polar phonons the screening from the density of states, then L_0, L_1 and L_2. The scattering rates of one energy are
written out in plain Python (no arrays, coefficients of the point worked out once): the quickest way to do it that way.
Processor time; the batch is the best of five.
"""

import argparse
import os
import platform
import sys
import time
from math import exp, log1p, sqrt
from pathlib import Path

import numpy as np
from scipy.integrate import quad

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from tegdesign.material.transport.band import Band
from tegdesign.material.transport.bands import Bands
from tegdesign.material.transport.constants import (
    BOLTZMANN,
    CHARGE,
    ELECTRON_MASS,
    HBAR,
    VACUUM_PERMITTIVITY,
)
from tegdesign.material.transport.scattering.acoustic import Acoustic
from tegdesign.material.transport.scattering.alloy import Alloy
from tegdesign.material.transport.scattering.ionised import IonisedImpurity
from tegdesign.material.transport.scattering.mobility import Mobility
from tegdesign.material.transport.scattering.polar import PolarOptical

PI = np.pi
ACOUSTIC, ALLOY = Acoustic(20 * CHARGE, 7e10), Alloy(1.1 * CHARGE, 0.2, 3.3e-29)
IONISED, POLAR = IonisedImpurity(60.0), PolarOptical(60.0, 20.0)
SIMPLE = Bands((Band("electron", 0.3, (Mobility(0.1),)),))
FULL = Bands(
    (
        Band("electron", 0.12, (ACOUSTIC, ALLOY, IONISED, POLAR), degeneracy=4, kane_gap=0.3 * CHARGE),
        Band("hole", 0.15, (ACOUSTIC, ALLOY, IONISED, POLAR), degeneracy=4, kane_gap=0.3 * CHARGE),
    ),
    gap=0.3 * CHARGE,
)


def simple_distribution(band, t, around):
    factor = CHARGE**2 / (3 * PI**2 * HBAR**3) * (2 * band.mass * ELECTRON_MASS) ** 1.5
    factor *= (BOLTZMANN * t) ** 1.5 * 0.1 / CHARGE
    return lambda z: factor * z


def full_distribution(band, t, around):
    """Xi(z) of acoustic, alloy, ionised and polar optical scattering in a Kane band, one energy at a time."""
    net, screening = around
    kt, m = BOLTZMANN * t, band.mass * ELECTRON_MASS
    a = kt / band.kane_gap
    static = POLAR.static_permittivity * VACUUM_PERMITTIVITY
    polar = 1 / (POLAR.optical_permittivity * VACUUM_PERMITTIVITY) - 1 / static
    q2 = CHARGE**2 / static * screening
    unit = (2 * m) ** 1.5 / (4 * PI**2 * HBAR**3)
    elastic = 2 * PI / HBAR * kt * ACOUSTIC.deformation_potential**2 / ACOUSTIC.elastic_constant
    elastic += 3 * PI**3 / (4 * HBAR) * ALLOY.fraction * (1 - ALLOY.fraction) * ALLOY.atomic_volume * ALLOY.potential**2
    coulomb = 2 * PI / HBAR * net * (2 * CHARGE**2 / (static * q2)) ** 2 / 2
    optical = 2 * PI / HBAR * CHARGE**2 * kt * polar * 2 / q2
    factor = band.degeneracy * CHARGE**2 / (3 * PI**2 * HBAR**3) * (2 * m) ** 1.5 / m
    per_gamma = 8 * m / HBAR**2 / q2

    def distribution(z):
        gamma, slope = kt * z * (1 + a * z), 1 + 2 * a * z
        root = sqrt(gamma)
        mixing = 0.5 - 0.5 / slope**2
        b = per_gamma * gamma
        if b < 0.02:
            first1, second1 = (
                1 / 2 - b / 3 + b**2 / 4 - b**3 / 5 + b**4 / 6,
                1 / 3 - b / 4 + b**2 / 5 - b**3 / 6,
            )
            first2, second2 = 1 / 2 - 2 * b / 3 + 3 * b**2 / 4 - 4 * b**3 / 5, 1 / 3 - b / 2 + 3 * b**2 / 5
        else:
            log = log1p(b) / b
            first1 = (1 - log) / b
            second1 = (0.5 - first1) / b
            first2 = (log - 1 / (1 + b)) / b
            second2 = (1 - 2 * log + 1 / (1 + b)) / b**2
        rate = elastic * (1 - 4 / 3 * mixing)
        rate += coulomb * (first2 - 2 * mixing * second2) + optical * (first1 - 2 * mixing * second1)
        return factor * gamma * root / (slope * rate * unit * root * slope)

    return distribution


def integral(shape, level, j=0):
    """Shape times (z - level)^j over the Fermi window, by quad from the edge to the level and on to 40 kT above it."""

    def integrand(z):
        x = z - level
        tail = exp(-abs(x))
        return shape(z) * tail / (1 + tail) ** 2 * x**j

    middle, total = max(level, 0.0), 0.0
    for low, high in ((max(middle - 40, 0.0), middle), (middle, middle + 40)):
        if high > low:
            total += quad(integrand, low, high, epsrel=1e-10, epsabs=0, limit=100)[0]
    return total


def adaptive(bands, distribution, t, mu):
    """L_j in units of (kT/e)^j, with the carriers and the screening that they need."""
    net, screening, levels = 0.0, 0.0, []
    for band, edge in zip(bands.bands, bands.edges(t), strict=True):
        level = float(band.sign * (mu - edge) / (BOLTZMANN * t))
        a = BOLTZMANN * t / band.kane_gap if band.kane_gap else 0.0
        unit = band.degeneracy * (2 * band.mass * ELECTRON_MASS * BOLTZMANN * t) ** 1.5 / (3 * PI**2 * HBAR**3)
        net += band.sign * unit * integral(lambda z, a=a: (z * (1 + a * z)) ** 1.5, level)
        if bands._screened:
            density = integral(lambda z, a=a: 1.5 * sqrt(z * (1 + a * z)) * (1 + 2 * a * z), level)
            screening += unit / (BOLTZMANN * t) * density
        levels.append(level)
    total = np.zeros(3)
    for band, level in zip(bands.bands, levels, strict=True):
        xi = distribution(band, t, (abs(net), screening))
        total += [band.sign**j * integral(xi, level, j) for j in range(3)]
    return total


def best(job, times=5):
    """Least processor time [s] of a few runs."""
    spent = []
    for _ in range(times):
        began = time.process_time()
        job()
        spent.append(time.process_time() - began)
    return min(spent)


def run(name, bands, distribution, points, checked):
    rng = np.random.default_rng(1)
    t, mu = rng.uniform(300, 900, points), rng.uniform(-0.1, 0.4, points) * CHARGE
    bands.at(t[:5000], mu[:5000])
    found = bands.at(t, mu)
    batch = best(lambda: bands.at(t, mu)) / points
    began = time.process_time()
    expected = [adaptive(bands, distribution, t[k], mu[k]) for k in range(checked)]
    single = (time.process_time() - began) / checked
    got = (found.transport_integrals / (BOLTZMANN * t / CHARGE) ** np.arange(3)[:, None])[:, :checked].T
    expected = np.array(expected)
    scale = np.stack([expected[:, 0], np.sqrt(expected[:, 0] * expected[:, 2]), expected[:, 2]], axis=1)
    worst = np.max(np.abs(got - expected) / scale)
    print(f"{name:34} {points:8d} {batch * 1e6:12.2f} {single * 1e6:12.0f} {single / batch:9.0f} {worst:12.1e}")
    return worst


def main():
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--quick", action="store_true", help="few points, to see that it runs")
    quick = parser.parse_args().quick
    points, checked = (1000, 5) if quick else (100_000, 200)
    load = os.getloadavg()[0] if hasattr(os, "getloadavg") else float("nan")
    print(f"{platform.processor() or platform.machine()}, {os.cpu_count()} cores, load {load:.1f}")
    print(f"{'':34} {'points':>8} {'batch us':>12} {'quad us':>12} {'ratio':>9} {'worst':>12}")
    worst = [
        run("one parabolic band", SIMPLE, simple_distribution, points, checked),
        run("two Kane bands, four mechanisms", FULL, full_distribution, points, checked),
    ]
    rng = np.random.default_rng(2)
    t, doping = rng.uniform(300, 900, points // 10), 10 ** rng.uniform(23, 26, points // 10)
    spent = best(lambda: FULL.doped(t, doping))
    print(f"{'the same from doping, neutrality':34} {t.size:8d} {spent / t.size * 1e6:12.2f}")
    t = np.linspace(300, 900, 61)
    print(f"{'61 temperatures of one doping':34} {t.size:8d} {best(lambda: FULL.doped(t, 1e25)) * 1e3:9.1f} ms in all")
    if max(worst) > 2e-9:
        raise SystemExit(f"the two ways differ by {max(worst):.1e}, more than 2e-9")


if __name__ == "__main__":
    main()
