"""Boundaries that are no straight lines, walls before boundaries, decay, fouling and fins: each law by hand."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from pydantic import TypeAdapter, ValidationError
from scipy.optimize import brentq

from tegdesign.errors import InputError
from tegdesign.system.boundary import (
    AnyBoundary,
    Film,
    FixedHeat,
    HeatSink,
    Irradiance,
    NaturalConvection,
    Radiation,
    Stream,
    Surface,
)
from tegdesign.system.boundary.exchanger import Fins
from tegdesign.system.law import join, law

SIGMA = 5.670374419e-8  # W/m^2/K^4, CODATA 2018
FOOTPRINT = np.array([1.6e-3, 4e-3, 2.5e-3])
COUNT = np.array([4.0, 4.0, 1.0])
FACE = np.array([420.0, 430.0, 350.0])

GLOW = Radiation(temperature="900 K", emittance=0.7, coefficient="20 W/m2/K", air_temperature="800 K")
SUN = Irradiance(
    irradiance="1 kW/m2", aperture="2 m2", concentration=50, transmittance=0.9, absorptance=0.95, emittance=0.1,
    surroundings_temperature="290 K", coefficient="5 W/m2/K", air_temperature="300 K",
)  # fmt: skip
STILL = NaturalConvection(
    temperature="300 K", coefficient="5 W/m2/K", reference_difference="20 K", area_enlargement=6, fin_efficiency=0.8,
    emittance=0.85,
)  # fmt: skip
SINK = HeatSink(temperature="300 K", heat=["20 W", "50 W", "100 W"], resistance=["1.5 K/W", "1.2 K/W", "1 K/W"])
ALL = {"glow": GLOW, "sun": SUN, "still": STILL, "sink": SINK}


def drawn(boundary, face=FACE):
    """Return the heat that one module draws at a face temperature, by root finding in the heat alone."""
    own = boundary.law(FOOTPRINT, COUNT)
    heats = []
    for k in range(face.size):
        alone = own.take([k])
        heats.append(brentq(lambda q, o=alone, t=face[k]: o.misfit(np.array([t]), np.array([q]))[0], -1e6, 1e6,
                            xtol=1e-13, rtol=1e-14))  # fmt: skip
    return np.array(heats)


def test_radiation_by_hand():
    expected = FOOTPRINT * (0.7 * SIGMA * (900.0**4 - FACE**4) + 20 * (800 - FACE))
    assert_allclose(drawn(GLOW), expected, rtol=1e-11)
    bare = Radiation(temperature="900 K", emittance=0.7, area="100 cm2")
    assert_allclose(drawn(bare), 0.01 / COUNT * 0.7 * SIGMA * (900.0**4 - FACE**4), rtol=1e-11)


def test_irradiance_by_hand():
    absorber = 2 / 50
    losses = absorber * (0.1 * SIGMA * (FACE**4 - 290.0**4) + 5 * (FACE - 300))
    assert_allclose(drawn(SUN), (2000 * 0.9 * 0.95 - losses) / COUNT, rtol=1e-11)
    assert SUN.given_heat == 2000


def test_irradiance_without_emittance_is_a_straight_law():
    black = SUN.model_copy(update={"emittance": 0.0})
    faint = SUN.model_copy(update={"emittance": 1e-14})
    assert black.law(FOOTPRINT, COUNT).terms == ()
    assert_allclose(drawn(black), drawn(faint), rtol=1e-11)


def test_natural_convection_by_hand():
    difference = 300 - FACE
    film = 5 * (np.abs(difference) / 20) ** 0.25 * (1 + 0.8 * 5) * difference
    assert_allclose(drawn(STILL), FOOTPRINT * (film + 0.85 * SIGMA * (300.0**4 - FACE**4)), rtol=1e-11)


def test_heat_sink_passes_through_its_points_and_shares_its_heat():
    for heat, resistance in ((20, 1.5), (50, 1.2), (100, 1.0)):
        face = np.full(3, 300 + heat * resistance)
        assert_allclose(drawn(SINK, face), -heat / COUNT, rtol=1e-9)
        assert_allclose(drawn(SINK, 600 - face), heat / COUNT, rtol=1e-9)


def test_heat_sink_between_its_points_is_a_monotone_cubic():
    """Against scipy.interpolate.PchipInterpolator, from no heat on."""
    from scipy.interpolate import PchipInterpolator

    other = PchipInterpolator([0, 20, 50, 100], [0, 30, 60, 100])
    own = SINK.law(np.ones(60), np.full(60, 2.0))
    total = np.linspace(0, 100, 60)
    assert_allclose(own.misfit(np.full(60, 300.0), total / 2), other(total), rtol=1e-12, atol=1e-12)
    assert_allclose(own.evaluate(np.full(60, 300.0), total / 2)[2], 2 * other.derivative()(total), rtol=1e-10)


def test_heat_sink_by_any_two_columns():
    by_difference = HeatSink(temperature="300 K", heat=["20 W", "50 W", "100 W"], difference=["30 K", "60 K", "100 K"])
    no_heat = HeatSink(
        temperature="300 K", difference=["30 K", "60 K", "100 K"], resistance=["1.5 K/W", "1.2 K/W", "1 K/W"]
    )
    face = np.array([315.0, 347.0, 390.0])
    assert_allclose(drawn(by_difference, face), drawn(SINK, face), rtol=1e-10)
    assert_allclose(drawn(no_heat, face), drawn(SINK, face), rtol=1e-10)


def test_heat_sink_is_known_up_to_its_last_point():
    own = SINK.law(FOOTPRINT, COUNT)
    assert own.known(FACE, np.array([-25.0, -25.1, -100.0])).tolist() == [True, False, True]
    assert own.take([1, 2]).known(FACE[:2], np.array([26.0, 0.0])).tolist() == [False, True]


@pytest.mark.parametrize("name", ALL)
@pytest.mark.parametrize("wall", [None, "0.3 K/W"])
def test_slopes_follow_the_law(name, wall):
    own = ALL[name].model_copy(update={"wall_resistance": 0.3 if wall else None}).law(FOOTPRINT, COUNT)
    heat = np.array([3.0, -9.0, 14.0])
    _, by_face, by_heat = own.evaluate(FACE, heat)
    d = 1e-3
    assert_allclose(by_face, (own.misfit(FACE + d, heat) - own.misfit(FACE - d, heat)) / (2 * d), rtol=1e-7)
    assert_allclose(by_heat, (own.misfit(FACE, heat + d) - own.misfit(FACE, heat - d)) / (2 * d), rtol=1e-7)


@pytest.mark.parametrize("name", ALL)
def test_tangent_touches(name):
    own, heat = ALL[name].law(FOOTPRINT, COUNT), np.array([3.0, -9.0, 14.0])
    straight = own.tangent(FACE, heat)
    assert straight.terms == ()
    for value, other in zip(straight.evaluate(FACE, heat), own.evaluate(FACE, heat), strict=True):
        assert_allclose(value, other, rtol=1e-12, atol=1e-9)
    assert straight.tangent(FACE, heat) is straight


@pytest.mark.parametrize("name", ALL)
def test_open_temperature_has_no_heat(name):
    own = ALL[name].law(FOOTPRINT, COUNT)
    for k in range(3):
        alone = own.take([k])
        expected = brentq(lambda t, o=alone: o.misfit(np.array([t]), np.zeros(1))[0], 1.0, 1e4, xtol=1e-12)
        assert_allclose(own.open_temperature[k], expected, rtol=1e-6 if name == "still" else 1e-11)


def test_heat_that_nothing_takes_away_has_no_open_temperature():
    dark = SUN.model_copy(update={"emittance": 0.0, "coefficient": 0.0, "air_temperature": None})
    assert np.all(np.isinf(dark.law(FOOTPRINT, COUNT).open_temperature))


def test_joined_and_taken_laws_stay_themselves():
    parts = [b.law(FOOTPRINT, COUNT) for b in (GLOW, Surface(temperature="500 K"), STILL, SUN, SINK, GLOW)]
    whole = join(parts)
    assert len(whole.terms) == 3  # equal shapes are evaluated together
    face, heat = np.tile(FACE, 6), np.arange(18.0)
    apart = np.concatenate([p.misfit(face[3 * k : 3 * k + 3], heat[3 * k : 3 * k + 3]) for k, p in enumerate(parts)])
    assert_allclose(whole.misfit(face, heat), apart, rtol=1e-13)
    mask = np.arange(18) % 2 == 0
    for which in ([17, 0, 3, 8, 8], np.arange(5, 12), mask, slice(2, 15, 3)):
        part = whole.take(which)
        assert_allclose(part.misfit(face[which], heat[which]), apart[which], rtol=1e-13)
        again = join([part, whole]).take(np.arange(part.a.size))
        assert_allclose(again.misfit(face[which], heat[which]), apart[which], rtol=1e-13)
    assert whole.take([4, 5]).terms == ()


def test_resistance_is_asked_of_a_tangent():
    own = GLOW.law(FOOTPRINT, COUNT)
    with pytest.raises(ValueError, match="ask its tangent"):
        _ = own.resistance
    slope = FOOTPRINT * (4 * 0.7 * SIGMA * FACE**3 + 20)
    assert_allclose(own.tangent(FACE, drawn(GLOW)).resistance, 1 / slope, rtol=1e-12)


@pytest.mark.parametrize(
    "boundary",
    [Surface(temperature="400 K"), Film(temperature="400 K", coefficient="50 W/m2/K"), GLOW, SUN, STILL, SINK,
     FixedHeat(heat="9 W", leak_conductance="0.01 W/K")],
)  # fmt: skip
def test_a_wall_lies_between_boundary_and_face(boundary):
    """The heat through wall and boundary is that of the boundary at the far side of the wall."""
    walled = boundary.model_copy(update={"wall_areal_resistance": 2e-4, "wall_resistance": 0.05})
    wall = (2e-4 / (FOOTPRINT * COUNT) + 0.05) * COUNT  # per module
    heat = drawn(walled)
    far = FACE + wall * heat
    assert_allclose(boundary.law(FOOTPRINT, COUNT).misfit(far, heat), 0, atol=1e-8)
    name, told = walled.stations(FACE, heat * COUNT, FOOTPRINT * COUNT)[-1]
    assert name == "far side of wall"
    assert_allclose(told, far, rtol=1e-12)
    assert "far side of wall" not in dict(boundary.stations(FACE, heat * COUNT, FOOTPRINT * COUNT))
    nothing = boundary.model_copy(update={"wall_resistance": 1e-14})
    assert_allclose(
        nothing.law(FOOTPRINT, COUNT).misfit(FACE, heat), boundary.law(FOOTPRINT, COUNT).misfit(FACE, heat), rtol=1e-9
    )


def test_body_heat_through_tissue():
    skin = Surface(temperature="37 degC", wall_areal_resistance="300 cm2 K/W")
    expected = (310.15 - 303.15) / (0.03 / FOOTPRINT)
    assert_allclose(drawn(skin, np.full(3, 303.15)), expected, rtol=1e-10)


def stream(**more):
    keys = {"inlet_temperature": "500 K", "mass_flow": "20 g/s", "heat_capacity": "1050 J/kg/K"}
    return Stream(**{**keys, "coefficient": "200 W/m^2/K", **more})


def test_areal_wall_of_a_stream_is_part_of_its_exchanger():
    own = stream(area="100 cm2", area_enlargement=5, fin_efficiency=0.8, wall_areal_resistance="1e-3 m2 K/W")
    film = 200 * 0.01 * (1 + 0.8 * 4)
    transfer = 1 / (1 / film + 1e-3 / (FOOTPRINT * COUNT))
    expected = 21 * (1 - np.exp(-transfer / 21)) * (500 - FACE) / COUNT
    assert_allclose(drawn(own), expected, rtol=1e-10)
    assert len(own.stations(FACE, expected, FOOTPRINT)) == 2


def test_much_flow_behind_a_wall_is_a_film_behind_a_wall():
    wall = {"wall_areal_resistance": "1e-3 m2 K/W", "wall_resistance": "0.1 K/W"}
    plenty = stream(mass_flow="1e9 kg/s", fouling_resistance="1e-4 m2 K/W", **wall)
    film = plenty.inlet_end()
    assert isinstance(film, Film)
    assert film == Film(temperature="500 K", coefficient="200 W/m2/K", fouling_resistance="1e-4 m2 K/W", **wall)
    assert_allclose(drawn(plenty), drawn(film), rtol=1e-8)


def test_fouling_is_in_series_with_the_film():
    clean, dirty = (Film(temperature="500 K", coefficient=f"{h!r} W/m2/K") for h in (100.0, 1 / (1 / 100 + 2e-3)))
    fouled = clean.model_copy(update={"fouling_resistance": 2e-3})
    assert_allclose(drawn(fouled), drawn(dirty), rtol=1e-11)


def test_stream_as_sink_warms():
    """A coolant that takes 1 kW with 100 W/K leaves 10 K warmer."""
    cold = Stream(
        inlet_temperature="290 K", mass_flow="25 g/s", heat_capacity="4000 J/kg/K", coefficient="3000 W/m2/K",
        most_outlet_temperature="350 K",
    )  # fmt: skip
    heat = np.array([-1000.0])
    assert [name for name, _ in cold.stations(np.array([330.0]), heat, np.ones(1))] == ["stream inlet", "stream outlet"]
    assert_allclose(cold.outlet_temperature(heat), 300, rtol=1e-12)
    assert_allclose(cold.outcomes(heat)["outlet_temperature_K"], 300, rtol=1e-12)
    assert cold.bounds() == [("outlet_temperature_K", "most", 350.0)]


def test_acid_dew_point_is_told_as_a_bound():
    assert stream(least_outlet_temperature="140 degC").bounds() == [("outlet_temperature_K", "least", 413.15)]
    assert stream().bounds() == []
    assert GLOW.bounds() == []
    assert GLOW.outcomes(FACE) == {}


def test_plutonium_decay():
    """Half-life 87.7 years (plutonium-238: decay data tables, e.g. IAEA Nuclear Data Section, (memory))."""
    young = FixedHeat(heat="4400 W", half_life="87.7 year", age="0 s")
    old = FixedHeat(heat="4400 W", half_life="87.7 year", age="23 year")
    assert young.given_heat == 4400
    # a generator in space after 23 years: 83.4 % by decay alone (0.787 % a year compounded: 0.99213^23 = 0.834)
    assert_allclose(old.given_heat / 4400, 0.834, rtol=1e-3)
    assert_allclose(FixedHeat(heat="1 W", half_life="10 year", age="30 year").given_heat, 1 / 8, rtol=1e-12)
    assert_allclose(drawn(old), old.given_heat / COUNT, rtol=1e-10)
    assert old.words() == (
        "heat, heat 4400 W, leak conductance 0 W/K, ambient temperature 20 degC, half life 87.7 year, age 23 year, "
        f"heat now {old.given_heat:.6g} W"
    )


@pytest.mark.parametrize("source", [FixedHeat(heat="80 W", half_life="9 year", age="18 year"), SUN])
def test_a_share_of_a_given_heat(source):
    assert_allclose(source.scaled(0.25).given_heat, 0.25 * source.given_heat, rtol=1e-14)


def test_a_temperature_has_no_share():
    with pytest.raises(InputError, match=r"'film' has no given heat to take 0\.5 of"):
        Film(temperature="400 K", coefficient="50 W/m2/K").scaled(0.5)


@pytest.mark.parametrize("boundary", [GLOW, STILL, SINK, stream(wall_resistance="1 K/W")])
def test_reference_temperature_can_be_moved(boundary):
    moved = boundary.at(350.0)
    assert moved.reference_temperature == 350.0
    assert moved.at(boundary.reference_temperature) == boundary


def test_an_absorber_has_no_temperature_to_move():
    with pytest.raises(InputError, match=r"no temperature that could be set to 350 K.*source\.irradiance"):
        SUN.at(350.0)


def test_fins_by_dimensions():
    """Against the exact fin with a tip that convects (textbook, e.g. Incropera and DeWitt, table of fins)."""
    fins = Fins(spacing="4 mm", thickness="0.8 mm", height="25 mm", conductivity="180 W/m/K")
    h, k, t, length = 60.0, 180.0, 0.8e-3, 25e-3
    m = np.sqrt(2 * h / (k * t))
    tip = h / (m * k)
    carried = np.sqrt(2 * h * k * t) * (np.sinh(m * length) + tip * np.cosh(m * length)) / (
        np.cosh(m * length) + tip * np.sinh(m * length)
    )  # W/m/K, per width of one fin
    assert_allclose(fins.efficiency(h), carried / (h * (2 * length + t)), rtol=1e-4)
    expected = (h * (4e-3 - t) + carried) / (h * 4e-3)
    assert_allclose(fins.factor(h), expected, rtol=1e-4)
    film = Film(temperature="300 K", coefficient="60 W/m2/K", fins=fins.model_dump())
    assert_allclose(drawn(film), 60 * FOOTPRINT * fins.factor(60) * (300 - FACE), rtol=1e-10)
    # fouling makes the film on the fins weaker, and the fins more efficient
    fouled = film.model_copy(update={"fouling_resistance": 1 / 60})
    assert_allclose(drawn(fouled), 30 * FOOTPRINT * fins.factor(30) * (300 - FACE), rtol=1e-10)


def test_fins_of_perfect_metal_count_in_full():
    fins = Fins(spacing="4 mm", thickness="1 mm", height="10 mm", conductivity="4999 W/m/K")
    assert_allclose(fins.factor(1e-6), 1 + 2 * 10 / 4, rtol=1e-9)


KIND = TypeAdapter(AnyBoundary)
TABLE = {"kind": "heat-sink", "temperature": "300 K", "heat": ["20 W", "50 W"]}
FILM = {"kind": "film", "temperature": "300 K", "coefficient": "9 W/m2/K"}
FINS = {"spacing": "4 mm", "thickness": "1 mm", "height": "10 mm", "conductivity": "200 W/m/K"}
SUNNY = {"kind": "irradiance", "irradiance": "1 kW/m2", "aperture": "1 m2", "absorptance": 0.9, "emittance": 0.1}


@pytest.mark.parametrize(
    ("data", "words"),
    [
        (TABLE, "the table has heat; give two of heat, difference, resistance"),
        ({**TABLE, "heat": None}, "the table has no column; give two"),
        ({**TABLE, "difference": ["9 K", "12 K"], "resistance": ["1 K/W"] * 2}, "heat and difference and resistance"),
        ({**TABLE, "heat": ["9 W"], "difference": ["9 K"]}, "two or more points; .* a surface and wall_resistance"),
        ({**TABLE, "difference": ["9 K", "12 K", "15 K"]}, "heat has 2 values, difference has 3"),
        ({**TABLE, "difference": ["9 K", "8 K"]}, "difference must rise from point to point: 9 K is followed by 8 K"),
        ({**TABLE, "resistance": ["3 K/W", "1 K/W"]}, "difference must rise .* 60 K is followed by 50 K"),
        ({**TABLE, "heat": ["50 W", "20 W"], "difference": ["9 K", "12 K"]}, "heat must rise .*50 W is followed by 20"),
        ({**TABLE, "heat": ["0 W", "20 W"], "difference": ["9 K", "12 K"]}, "greater than 0"),
        ({**FILM, "fins": FINS, "area_enlargement": 3}, "fins are given twice: .* area_enlargement 3"),
        ({**FILM, "fins": {**FINS, "thickness": "4 mm"}}, "thickness 4 mm leaves no room within the spacing 4 mm"),
        ({**FILM, "fouling_resistance": "-1e-4 m2 K/W"}, "greater than or equal to 0"),
        ({**FILM, "wall_resistance": "-1 K/W"}, "greater than or equal to 0"),
        ({"kind": "radiation", "temperature": "900 K", "emittance": 1.2}, "less than or equal to 1"),
        ({"kind": "radiation", "temperature": "900 K", "emittance": 0}, "greater than 0"),
        ({"kind": "radiation", "temperature": "900 K", "emittance": 0.5, "air_temperature": "300 K"}, "counts only"),
        ({**SUNNY, "air_temperature": "300 K"}, "air_temperature counts only with a coefficient"),
        ({**SUNNY, "absorptance": 0}, "greater than 0"),
        ({"kind": "heat", "heat": "9 W", "age": "1 year"}, "age needs a half_life"),
        ({"kind": "heat", "heat": "9 W", "age": "1 year", "half_life": "1 s"}, "nothing is left of the heat"),
        (
            {
                "kind": "natural-convection", "temperature": "300 K", "coefficient": "5 W/m2/K",
                "reference_difference": "20 K", "exponent": 1.5,
            },
            "less than or equal to 1",
        ),
        (
            {
                "kind": "stream", "inlet_temperature": "600 K", "mass_flow": "1 g/s", "heat_capacity": "1 kJ/kg/K",
                "coefficient": "9 W/m2/K", "least_outlet_temperature": "450 K", "most_outlet_temperature": "400 K",
            },
            "least_outlet_temperature 450.00 K is not below",
        ),
    ],
)  # fmt: skip
def test_bad_boundaries_are_refused_in_one_message(data, words):
    with pytest.raises(ValidationError, match=words) as caught:
        KIND.validate_python(data)
    assert caught.value.error_count() == 1


@pytest.mark.parametrize("boundary", [*ALL.values(), Film(**{**FILM, "fins": FINS, "wall_resistance": "1 K/W"})])
def test_written_back_it_reads_the_same(boundary):
    assert KIND.validate_python(boundary.model_dump(exclude_none=True)) == boundary


def test_words_of_tables_and_walls():
    walled = SINK.model_copy(update={"wall_resistance": 0.1})
    assert walled.words() == (
        "heat-sink, temperature 26.85 degC, heat 20 W | 50 W | 100 W, resistance 1.5 K/W | 1.2 K/W | 1 K/W, "
        "wall resistance 0.1 K/W"
    )
    assert Film(**{**FILM, "fins": FINS}).words() == (
        "film, temperature 26.85 degC, coefficient 9 W/m^2/K, fins (spacing 4 mm, thickness 1 mm, height 10 mm, "
        "conductivity 200 W/m/K)"
    )


def test_straight_laws_cost_no_copies():
    own = law(1.0, 0.5, 300.0, np.ones(2))
    _, by_face, by_heat = own.evaluate(np.ones(2), np.ones(2))
    assert by_face is own.a
    assert by_heat is own.b
    assert own.behind(np.zeros(2)) is own
