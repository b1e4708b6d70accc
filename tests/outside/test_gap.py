"""Conductivity of the gases in the gap against the CoolProp property library (open source, reference correlations)."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.module.gap import FILLERS

CoolProp = pytest.importorskip("CoolProp.CoolProp")


@pytest.mark.parametrize(("filler", "fluid"), [("air", "Air"), ("nitrogen", "Nitrogen"), ("argon", "Argon")])
def test_gas_conductivity_from_300_to_900_kelvin(filler, fluid):
    t = np.linspace(300.0, 900.0, 61)
    expected = CoolProp.PropsSI("L", "T", t, "P", 1e5, fluid)
    law = FILLERS[filler]
    # 2 %: the best power law leaves 1.2 to 1.8 %
    assert_allclose(law.conductivity * (t / 300) ** law.exponent, expected, rtol=0.02)
