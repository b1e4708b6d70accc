import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.errors import InputError
from tegdesign.system.boundary import Film, FixedHeat, Stream, Surface
from tegdesign.system.boundary.exchanger import fin_factor
from tegdesign.system.law import join, law

FOOTPRINT = np.array([1.6e-3, 4e-3])
COUNT = np.array([4.0, 4.0])
FACE = np.array([420.0, 430.0])


def drawn(boundary, face=FACE, footprint=FOOTPRINT, count=COUNT):
    """Return the heat that one module draws at a face temperature: solve a T + b Q = c for Q."""
    own = boundary.law(footprint, count)
    return (own.c - own.a * face) / own.b


def film(**more):
    return Film(**{"temperature": "500 K", "coefficient": "200 W/m^2/K", **more})


def stream(**more):
    return Stream(
        **{
            "inlet_temperature": "500 K",
            "mass_flow": "20 g/s",
            "heat_capacity": "1050 J/kg/K",
            "coefficient": "200 W/m^2/K",
            **more,
        }
    )


def test_surface_holds_its_temperature():
    own = Surface(temperature="227 degC").law(FOOTPRINT, COUNT)
    assert_allclose(own.misfit(np.full(2, 500.15), np.array([0.0, 99.0])), 0, atol=1e-12)
    assert_allclose(own.resistance, 0)


def test_film_on_the_footprint_and_on_an_area_of_its_own():
    assert_allclose(drawn(film()), 200 * FOOTPRINT * (500 - FACE), rtol=1e-12)
    # a given area is shared by the four modules
    assert_allclose(drawn(film(area="200 cm^2")), 200 * 0.02 / 4 * (500 - FACE), rtol=1e-12)


def test_fins_by_hand():
    # 8 base areas of surface of which 7 are fins of efficiency 0.75: 1 + 0.75 * 7 = 6.25 base areas count
    assert fin_factor(8.0, 0.75) == 6.25
    assert_allclose(drawn(film(area_enlargement=8, fin_efficiency=0.75)), 6.25 * drawn(film()), rtol=1e-12)


def test_stream_is_an_exchanger_with_one_side_isothermal():
    # effectiveness 1 - exp(-NTU) for C_min/C_max = 0 (e.g. Kays and London, Compact Heat Exchangers; textbook form)
    rate, transfer = 0.02 * 1050, 200 * FOOTPRINT * COUNT
    expected = rate * (1 - np.exp(-transfer / rate)) * (500 - FACE) / 4
    assert_allclose(drawn(stream()), expected, rtol=1e-12)


def test_stream_of_much_capacity_is_a_film():
    assert_allclose(drawn(stream(mass_flow="1e9 kg/s")), drawn(film()), rtol=1e-9)


def test_stream_of_many_transfer_units_gives_all_it_has():
    expected = 0.02 * 1050 * (500 - FACE) / 4
    assert_allclose(drawn(stream(area="1e6 m^2")), expected, rtol=1e-12)


def test_stream_leaves_with_what_the_modules_left_it():
    name, outlet = stream().stations(FACE, np.array([210.0, 420.0]), COUNT * FOOTPRINT)[1]
    assert name == "stream outlet"
    assert_allclose(outlet, [500 - 10, 500 - 20], rtol=1e-12)  # 21 W/K


def test_fixed_heat_with_leak():
    source = FixedHeat(heat="800 W", leak_conductance="0.4 W/K", ambient_temperature="300 K")
    assert_allclose(drawn(source), (800 - 0.4 * (FACE - 300)) / 4, rtol=1e-12)
    own = source.law(FOOTPRINT, COUNT)
    assert_allclose(own.open_temperature, 300 + 800 / 0.4, rtol=1e-12)
    assert_allclose(own.resistance, 4 / 0.4, rtol=1e-12)


def test_fixed_heat_without_leak_has_no_open_temperature():
    own = FixedHeat(heat="800 W").law(FOOTPRINT, COUNT)
    assert np.all(np.isinf(own.open_temperature))
    assert np.all(np.isinf(own.resistance))


@pytest.mark.parametrize(
    "boundary", [Surface(temperature="500 K"), film(), stream()]
)
def test_reference_temperature_can_be_moved(boundary):
    moved = boundary.at(350.0)
    assert moved.reference_temperature == 350.0
    assert moved.at(boundary.reference_temperature) == boundary


def test_a_given_heat_has_no_temperature_to_move():
    with pytest.raises(InputError, match=r"no temperature that could be set to 350 K.*source\.heat"):
        FixedHeat(heat="9 W", leak_conductance="1 W/K").at(350.0)


def test_joined_laws_keep_their_order():
    both = join([law(1.0, 0.0, 500.0, np.zeros(2)), film().law(FOOTPRINT, COUNT)])
    assert_allclose(both.b, [0, 0, 1, 1])
    assert_allclose(both.take([3, 0]).c, [200 * 4e-3 * 500, 500], rtol=1e-12)
