import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal

from tegdesign.errors import DataRangeError
from tegdesign.material import library
from tegdesign.material.material import to_frame


def test_properties_by_hand():
    # skutterudite-n at 500 K: S = -158 uV/K, sigma = 178900 S/m, kappa = 2.633 W/m/K (row of the data set)
    table = library.find("skutterudite-n").properties([500.0])
    assert_allclose(table["power_factor_W_per_m_K2"], 158e-6**2 * 178900, rtol=1e-14)
    assert_allclose(table["figure_of_merit"], 158e-6**2 * 178900 * 500 / 2.633, rtol=1e-14)


def test_compatibility_factor_has_the_sign_of_the_seebeck_coefficient():
    material = library.find("skutterudite-n")
    z = float(material.figure_of_merit(500))
    # s = (sqrt(1 + zT) - 1) / (S T), doi 10.1103/PhysRevLett.91.148301
    assert_allclose(material.compatibility_factor(500), (np.sqrt(1 + z) - 1) / (-158e-6 * 500), rtol=1e-14)


def test_frame_carries_units_in_its_names():
    frame = to_frame(library.find("clathrate-n"), [500.0, 600.0])
    assert list(frame.columns) == [
        "temperature_K",
        "seebeck_coefficient_V_per_K",
        "resistivity_ohm_m",
        "thermal_conductivity_W_per_m_K",
        "power_factor_W_per_m_K2",
        "figure_of_merit",
    ]
    assert_array_equal(frame["temperature_K"], [500.0, 600.0])


@pytest.mark.parametrize("temperature", [416.9, 810.1, np.nan])
def test_outside_the_data_there_is_no_answer(temperature):
    with pytest.raises(DataRangeError, match="known from 417 K to 810 K"):
        library.find("clathrate-n").properties([500.0, temperature])


def test_outside_counts_kelvin_beyond_each_end():
    below, above = library.find("clathrate-n").outside([400.0, 500.0], [800.0, 850.0])
    assert_array_equal(below, [17.0, 0.0])
    assert_array_equal(above, [0.0, 40.0])
