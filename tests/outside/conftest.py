from dataclasses import replace

import pytest

from tegdesign.material.curve import Curve


@pytest.fixture(scope="session")
def conducting():
    """Return a material whose thermal conductivity is ``factor`` times as large."""

    def make(material, factor):
        kappa = material.thermal_conductivity
        return replace(material, thermal_conductivity=Curve(kappa.temperature, factor * kappa.value))

    return make
