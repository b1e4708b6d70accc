from dataclasses import replace

import numpy as np
import pytest

from tegdesign.material.curve import Curve
from tegdesign.material.library import find
from tegdesign.material.material import Material, Stated
from tegdesign.module.module import Modules

ZERO = np.array([0], dtype=np.intp)
ONE = np.array([1], dtype=np.intp)


@pytest.fixture(scope="session")
def constant():
    """Make a material of constant properties."""

    def make(polarity, seebeck, rho, kappa):
        t = np.array([100.0, 2000.0])
        curves = [Curve(t, np.full(2, v)) for v in (seebeck, rho, kappa)]
        return Material(
            f"constant-{polarity}", "", polarity, *curves, Stated(1900.0), Stated(7000.0), "made for this test"
        )

    return make


@pytest.fixture(scope="session")
def ideal(constant):
    """One module of constant legs without any loss."""
    pair = [constant("n", -190e-6, 1.1e-5, 1.6), constant("p", 210e-6, 0.9e-5, 1.3)]
    side = np.array([1.4e-3])
    return Modules(
        pair, ZERO, ONE, np.array([1.6e-3]), side, np.array([1.6e-3]), np.array([2.2e-3]), 100.0, np.array([1.1e-3])
    )


@pytest.fixture(scope="session")
def random_modules():
    """Make B modules with every loss on, mixed from three pairs of the library."""
    names = ("bismuth-telluride-{}", "lead-telluride-{}", "skutterudite-{}")
    endings = (("n-se0.3", "p-sb1.54"), ("n", "p"), ("n", "p"))
    pool = [find(name.format(e)) for name, pair in zip(names, endings, strict=True) for e in pair]

    def make(size, seed=0):
        r = np.random.default_rng(seed)
        first = 2 * r.integers(0, 3, size)
        side_n = r.uniform(1e-3, 3e-3, size)
        side_p = side_n * r.uniform(0.8, 1.25, size)
        pitch = np.maximum(side_n, side_p) * 1.1 + r.uniform(0.2e-3, 1.5e-3, size)
        couples = r.integers(4, 300, size).astype(float)
        parts = {
            "contact_resistivity_n": 10 ** r.uniform(-10, -8, size),
            "contact_resistivity_p": 10 ** r.uniform(-10, -8, size),
            "contact_thermal": r.uniform(0, 2e-5, size),
            "electrode_thickness": r.uniform(0.05e-3, 0.6e-3, size),
            "electrode_resistivity": 1.7241e-8,
            "electrode_coefficient": 0.00393,
            "substrate_thickness_hot": r.uniform(0.2e-3, 2e-3, size),
            "substrate_conductivity_hot": r.uniform(10, 200, size),
            "substrate_thickness_cold": r.uniform(0.2e-3, 2e-3, size),
            "substrate_conductivity_cold": r.uniform(10, 200, size),
            "interface_hot": r.uniform(0, 2e-4, size),
            "interface_cold": r.uniform(0, 2e-4, size),
            "filler_conductivity": r.uniform(0, 0.05, size),
            "filler_exponent": r.uniform(0, 1, size),
            "emittance_hot": r.uniform(0.1, 1, size),
            "emittance_cold": r.uniform(0.1, 1, size),
            "edge_conductance": r.uniform(0, 1e-3, size),
            "lead_resistance": r.uniform(0, 0.02, size),
        }
        return Modules(
            pool,
            first,
            first + 1,
            10 ** r.uniform(-3.3, -2.2, size),
            side_n,
            side_p,
            pitch,
            couples,
            2 * couples * pitch**2 * r.uniform(1, 1.2, size),
            **parts,
        )

    return make


@pytest.fixture
def change():
    """Return a module with some members exchanged."""
    return replace
