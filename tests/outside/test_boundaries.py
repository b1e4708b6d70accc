"""Boundaries against the libraries ht (heat transfer) and CoolProp (fluid properties), both open, and scipy."""

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.optimize import brentq

from tegdesign.system.boundary import Film, Irradiance, NaturalConvection, Radiation, Stream
from tegdesign.system.boundary.exchanger import Fins

ht = pytest.importorskip("ht")
CoolProp = pytest.importorskip("CoolProp.CoolProp")

ONE = np.ones(1)


def heat(boundary, face, area=1.0):
    """Return the heat that one module of an area draws, of laws that are straight in the heat."""
    own = boundary.law(area * ONE, ONE)
    missing, _, by_heat = own.evaluate(np.array([face]), np.zeros(1))
    return float(-missing[0] / by_heat[0])


# Where the film of a stream of flue gas takes 0.1 to 8 transfer units: effectiveness of ht at C_min / C_max = 0.
@pytest.mark.parametrize("units", [0.1, 0.5, 1.0, 2.5, 8.0])
@pytest.mark.parametrize("fouling", ["0 m2 K/W", "5e-3 m2 K/W"])
def test_effectiveness(units, fouling):
    rate, coefficient = 0.03 * 1100, 60.0
    through = 1 / (1 / coefficient + float(fouling.split()[0]))
    gas = Stream(
        inlet_temperature="700 K", mass_flow="30 g/s", heat_capacity="1100 J/kg/K", coefficient="60 W/m2/K",
        area=f"{units * rate / through!r} m2", fouling_resistance=fouling,
    )  # fmt: skip
    effectiveness = ht.effectiveness_from_NTU(NTU=units, Cr=0.0, subtype="counterflow")
    assert_allclose(heat(gas, 400.0), effectiveness * rate * 300, rtol=1e-12)


def test_stream_of_steps_is_the_stream():
    """March the gas over 20 000 steps of film area at one face temperature, the outlet with it."""
    gas = Stream(
        inlet_temperature="700 K", mass_flow="30 g/s", heat_capacity="1100 J/kg/K", coefficient="60 W/m2/K", area="1 m2"
    )
    t, steps = 700.0, 20_000
    for _ in range(steps):
        t -= 60 / steps / 33 * (t - 400)
    assert_allclose(gas.outlet_temperature(heat(gas, 400.0)), t, rtol=1e-4)


@pytest.mark.parametrize("emittance", [0.05, 0.4, 1.0])
@pytest.mark.parametrize(("body", "face"), [(1200.0, 500.0), (290.0, 340.0), (4.0, 250.0)])
def test_radiation(emittance, body, face):
    expected = ht.q_rad(emissivity=emittance, T=body, T2=face)
    own = Radiation(temperature=f"{body} K", emittance=emittance)
    assert_allclose(heat(own, face), expected, rtol=2e-6)  # ht has the Stefan-Boltzmann constant of CODATA 2014


# An absorber that nothing draws heat from (stagnation): balance of light, radiation and air written here, by brentq.
@pytest.mark.parametrize("concentration", [1.0, 20.0, 200.0])
@pytest.mark.parametrize("film", [0.0, 8.0])
def test_stagnation_of_an_absorber(concentration, film):
    def balance(t):
        lost = 0.15 * 5.670374419e-8 * (t**4 - 285.0**4) + film * (t - 300.0)
        return 900 * 0.9 * 0.94 * concentration - lost

    sun = Irradiance(
        irradiance="900 W/m2", aperture="0.5 m2", concentration=concentration, transmittance=0.9, absorptance=0.94,
        emittance=0.15, surroundings_temperature="285 K", coefficient=f"{film} W/m2/K",
        air_temperature="300 K" if film else None,
    )  # fmt: skip
    expected = brentq(balance, 200.0, 5000.0, xtol=1e-11)
    assert_allclose(sun.law(ONE, ONE).open_temperature, expected, rtol=1e-11)


# A wall between a glowing body and a given face, radiation at its far side: the far side by brentq.
def test_radiation_through_a_wall():
    face, resistance = 400.0, 2e-3
    far = brentq(lambda t: 0.8 * 5.670374419e-8 * (1300.0**4 - t**4) - (t - face) / resistance, 400, 1300, xtol=1e-11)
    own = Radiation(temperature="1300 K", emittance=0.8, wall_areal_resistance="2e-3 m2 K/W").law(ONE, ONE)
    assert_allclose(own.misfit(np.array([face]), np.array([(far - face) / resistance])), 0, atol=1e-6)  # of 1e5 W


def film_of_still_air(difference, height, fluid="Air", ambient=293.15):
    """Return the film of a vertical plate by ht (Churchill and Chu 1975), air by CoolProp at the film temperature."""
    t = ambient + difference / 2

    def of(key):
        return CoolProp.PropsSI(key, "T", t, "P", 101325.0, fluid)

    prandtl, conductivity, viscosity = of("PRANDTL"), of("L"), of("V") / of("D")
    grashof = 9.80665 * of("ISOBARIC_EXPANSION_COEFFICIENT") * difference * height**3 / viscosity**2
    return float(ht.Nu_vertical_plate_Churchill(prandtl, grashof)) * conductivity / height, grashof * prandtl


# One point at 30 K carries the film to 10 K and 90 K: exponent 1/4 where the boundary layer is laminar, 1/3 where it is
# turbulent. The correlation of the whole range bends slowly between them, properties move with temperature: 8 %.
@pytest.mark.parametrize(
    ("height", "exponent", "laminar"), [(0.05, 0.25, True), (0.15, 0.25, True), (2.5, 1 / 3, False)]
)
def test_natural_convection_of_a_vertical_plate(height, exponent, laminar):
    reference, _ = film_of_still_air(30.0, height)
    own = NaturalConvection(
        temperature="293.15 K", coefficient=f"{reference!r} W/m2/K", reference_difference="30 K", exponent=exponent
    )
    assert_allclose(-heat(own, 323.15), 30 * reference, rtol=1e-12)
    for difference in (10.0, 20.0, 50.0, 90.0):
        film, rayleigh = film_of_still_air(difference, height)
        assert (rayleigh < 1e9) == laminar
        assert_allclose(-heat(own, 293.15 + difference), difference * film, rtol=0.08)


# Exact fin whose tip convects, Harper and Brown; the corrected length errs by less than 0.3 % below h t / k = 1/16.
def test_fin_efficiency_over_its_range():
    r = np.random.default_rng(3)
    for _ in range(300):
        k, t = 10 ** r.uniform(0.5, 2.6), 10 ** r.uniform(-3.5, -2)
        h, length = 10 ** r.uniform(-5, np.log10(1 / 16)) * k / t, t * 10 ** r.uniform(0, 2)
        m = np.sqrt(2 * h / (k * t))
        tip, x = h / (m * k), min(m * length, 300)
        carried = np.sqrt(2 * h * k * t) * (np.tanh(x) + tip) / (1 + tip * np.tanh(x))
        own = Fins.model_construct(spacing=2 * t, thickness=t, height=length, conductivity=k).efficiency(h)
        assert_allclose(own, carried / (h * (2 * length + t)), rtol=3e-3)


def test_film_of_water_in_a_channel_from_libraries_to_law():
    """Film by Dittus and Boelter of ht with water of CoolProp: what a user would enter, and the heat that follows."""
    speed, bore, t = 1.0, 0.01, 300.0
    density, viscosity, prandtl, conductivity = (
        CoolProp.PropsSI(key, "T", t, "P", 2e5, "Water") for key in ("D", "V", "PRANDTL", "L")
    )
    film = ht.conv_internal.turbulent_Dittus_Boelter(density * speed * bore / viscosity, prandtl) * conductivity / bore
    assert_allclose(heat(Film(temperature="300 K", coefficient=f"{film!r} W/m2/K"), 320.0), -20 * film, rtol=1e-12)
