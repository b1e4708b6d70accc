import importlib.util
import sys
from pathlib import Path
from types import ModuleType

import numpy as np
import pytest

from tegdesign.material.curve import Curve
from tegdesign.material.material import Material, Stated


@pytest.fixture(scope="session")
def reference() -> ModuleType:
    spec = importlib.util.spec_from_file_location("leg_reference", Path(__file__).with_name("reference.py"))
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    sys.modules[spec.name] = module
    spec.loader.exec_module(module)
    return module


@pytest.fixture(scope="session")
def make():
    """Return a function that makes a material from (temperatures, values) of S, rho and kappa."""

    def material(seebeck, rho, kappa, name="made-up"):
        curves = [Curve(np.asarray(t, dtype=float), np.asarray(v, dtype=float)) for t, v in (seebeck, rho, kappa)]
        polarity = "p" if curves[0].value.mean() > 0 else "n"
        return Material(name, "X", polarity, *curves, Stated(900.0), Stated(7000.0), "own example")

    return material
