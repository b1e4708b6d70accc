from dataclasses import replace

import numpy as np
import pytest

from tegdesign.material.curve import Curve
from tegdesign.material.library import find
from tegdesign.material.material import Material, Stated
from tegdesign.module.module import Modules


def constant(polarity, seebeck, rho, kappa):
    """Return a material of constant properties."""
    t = np.array([100.0, 3000.0])
    curves = [Curve(t, np.full(2, v)) for v in (seebeck, rho, kappa)]
    return Material(f"constant-{polarity}", "", polarity, *curves, Stated(3000.0), Stated(7000.0), "made for this test")


@pytest.fixture(scope="session")
def equal_legs():
    """Make B couples of mirror-image legs without losses: Seebeck coefficient S each, rho, kappa, lengths [m] (B,)."""

    def make(seebeck, rho, kappa, length):
        length = np.atleast_1d(np.asarray(length, dtype=float))
        pair = [constant("n", -seebeck, rho, kappa), constant("p", seebeck, rho, kappa)]
        size = length.size
        index = np.zeros(size, dtype=np.intp)
        side, pitch, footprint = (np.full(size, v) for v in (1e-3, 1.2e-3, 2 * 1.2e-3**2))
        return Modules(pair, index, index + 1, length, side, side, pitch, 1.0, footprint)

    return make


@pytest.fixture(scope="session")
def random_modules():
    """Make B modules with every loss on, mixed from three pairs of the library."""
    names = (
        "bismuth-telluride-n-se0.3", "bismuth-telluride-p-sb1.54", "lead-telluride-n", "lead-telluride-p",
        "skutterudite-n", "skutterudite-p",
    )  # fmt: skip
    pool = [find(name) for name in names]

    def make(size, seed=0):
        r = np.random.default_rng(seed)
        first = 2 * r.integers(0, 3, size)
        side_n = r.uniform(0.8e-3, 3e-3, size)
        side_p = side_n * r.uniform(0.8, 1.25, size)
        pitch = np.maximum(side_n, side_p) * 1.1 + r.uniform(0.2e-3, 1.5e-3, size)
        couples = r.integers(4, 300, size).astype(float)
        return Modules(
            pool, first, first + 1, 10 ** r.uniform(-3.3, -2.2, size), side_n, side_p, pitch, couples,
            2 * couples * pitch**2 * r.uniform(1, 1.2, size),
            contact_resistivity_n=10 ** r.uniform(-10, -8, size),
            contact_resistivity_p=10 ** r.uniform(-10, -8, size),
            electrode_thickness=r.uniform(0.05e-3, 0.6e-3, size),
            electrode_resistivity=1.7241e-8,
            electrode_coefficient=0.00393,
            substrate_thickness_hot=r.uniform(0.2e-3, 2e-3, size),
            substrate_conductivity_hot=r.uniform(10, 200, size),
            substrate_thickness_cold=r.uniform(0.2e-3, 2e-3, size),
            substrate_conductivity_cold=r.uniform(10, 200, size),
            interface_hot=r.uniform(0, 2e-4, size),
            interface_cold=r.uniform(0, 2e-4, size),
            filler_conductivity=r.uniform(0, 0.05, size),
            filler_exponent=0.8,
            emittance_hot=r.uniform(0.1, 1, size),
            emittance_cold=r.uniform(0.1, 1, size),
            edge_conductance=r.uniform(0, 1e-3, size),
            lead_resistance=r.uniform(0, 0.02, size),
        )  # fmt: skip

    return make


@pytest.fixture(scope="session")
def change():
    """Return a module with some members exchanged."""
    return replace
