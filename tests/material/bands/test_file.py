"""The file of kind bands: read, written back, prepared for the solver, refused with one clear message."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.errors import InputError
from tegdesign.leg.exact import solve_leg
from tegdesign.material import file
from tegdesign.material.bands.crystal import Doping
from tegdesign.material.check import check


def test_reads_back_what_it_writes(made_up, tmp_path):
    content = file.read(made_up())
    content.write(tmp_path / "again.toml")
    assert file.read(tmp_path / "again.toml") == content


def test_curves_follow_the_integrals_to_1e_8(made_up):
    material = file.read(made_up()).to_material()
    t = np.linspace(*material.range, 501)
    s, rho, kappa = material.crystal.properties(t, material.doping.at(t), material.grain_size)
    for curve, exact in (
        (material.seebeck_coefficient, s),
        (material.resistivity, rho),
        (material.thermal_conductivity, kappa),
    ):
        assert_allclose(curve(t), exact, rtol=1e-8)
        low, high = material.range  # the integral as well, against a fine Gauss rule on each interval
        x, w = np.polynomial.legendre.leggauss(12)
        ends = curve.temperature
        fine = ends[:-1, None] + (x + 1) / 2 * np.diff(ends)[:, None]
        assert_allclose(curve.integral(high), (curve(fine) * w).sum(axis=1) @ np.diff(ends) / 2, rtol=1e-12)
        assert low == ends[0]


def test_kappa_apart_adds_up(made_up):
    material = file.read(made_up()).to_material()
    t = np.linspace(*material.range, 7)
    parts = material.electronic_thermal_conductivity(t) + material.lattice_thermal_conductivity(t)
    assert_allclose(parts, material.thermal_conductivity(t), rtol=1e-12)
    assert_allclose(
        material.lattice_thermal_conductivity(t),
        material.crystal.lattice.conductivity(t, material.grain_size),
        rtol=1e-7,
    )


def test_leg_balances_and_does_not_depend_on_the_intervals(made_up):
    material = file.read(made_up()).to_material()
    hot, cold = np.full(3, 830.0), np.full(3, 310.0)
    current = np.array([0.0, 1.0, 2.0]) * 300.0
    coarse, fine = (solve_leg(material, hot, cold, current, subdivide=n) for n in (1, 4))
    assert_allclose(coarse.hot_heat, fine.hot_heat, rtol=1e-8)
    assert_allclose(coarse.hot_heat - coarse.cold_heat, coarse.power, rtol=1e-10, atol=1e-9 * coarse.hot_heat[0])


def test_graded_doping_is_the_local_doping(made_up):
    material = file.read(made_up()).to_material()
    graded = material.made(Doping(2e25, 8e25, (350.0, 750.0)))
    for t, doping in ((320.0, 2e25), (550.0, 5e25), (820.0, 8e25)):
        even = material.made(Doping(doping))
        assert_allclose(graded.seebeck_coefficient(t), even.seebeck_coefficient(t), rtol=1e-7)
        assert_allclose(graded.thermal_conductivity(t), even.thermal_conductivity(t), rtol=1e-7)


def test_smaller_grains_conduct_less_heat_and_less_current(made_up):
    material = file.read(made_up()).to_material()
    fine = material.made(grain_size=100e-9)
    assert fine.lattice_thermal_conductivity(400.0) < material.lattice_thermal_conductivity(400.0)
    assert fine.resistivity(400.0) > material.resistivity(400.0)


WRONG = {
    "negative mass": (('mass = 0.4', 'mass = -0.4'), ":34: bands.1.mass: -0.4 (limit: above 0)"),
    "gap below zero": (('value = "0.18 eV"\nslope = "0.4', 'value = "-0.3 eV"\nslope = "0.4'), "gap [J] is"),
    "doping out of bounds": (('doping = "5e19', 'doping = "5e21'), "doping 5e+21 1/cm^3 is outside its bounds"),
    "bounds upside down": (('["1e18', '["1e21'), "doping_bounds must rise"),
    "unknown scattering": (('kind = "mobility"', 'kind = "mobilty"'), "'mobilty' (limit: one of 'acoustic'"),
    "unknown key": (('deformation_potential = "20', 'deform_potential = "20'), "closest: deformation_potential"),
    "missing unit": (('deformation_potential = "20 eV"', "deformation_potential = 20"), "has no unit"),
    "no grains": (('grain_size = "2 um"\n', ""), "grain_size and grain_size_bounds are needed exactly where"),
    "table too short": (('["0.14 eV", ', "["), "2 values for 3 temperatures"),
    "table falls back": (('["300 K", "500 K", "850 K"]', '["300 K", "900 K", "850 K"]'), "must increase"),
    "table ends early": (('["300 K", "500 K", "850 K"]', '["300 K", "500 K", "800 K"]'), "its table goes from 300 K"),
    "no lattice": (('kind = "debye-callaway"', 'kind = "debye"'), "lattice.kind: 'debye' (limit: one of 'constant'"),
}


@pytest.mark.parametrize("name", WRONG)
def test_refuses(made_up, name):
    change, words = WRONG[name]
    with pytest.raises(InputError) as caught:
        file.read(made_up(change))
    assert words in str(caught.value), str(caught.value)


def test_refuses_a_polarity_without_its_bands(made_up):
    with pytest.raises(InputError, match="polarity n needs a band with carrier = 'electron'"):
        file.read(made_up(('polarity = "p"', 'polarity = "n"'), ('carrier = "electron"', 'carrier = "hole"')))


def test_check_names_the_line(made_up):
    found = check(made_up(("mass = 0.4", "mass = -0.4")))
    assert [(f.severity, f.what) for f in found] == [("error", "bands.1.mass")]


def test_doping_and_grain_size_keep_their_bounds(made_up):
    material = file.read(made_up()).to_material()
    with pytest.raises(InputError, match="outside its bounds"):
        material.made(Doping(1e28))
    with pytest.raises(InputError, match="outside its bounds"):
        material.made(Doping(5e25, 1e28, (300.0, 800.0)))
    with pytest.raises(InputError, match="grain size 10 nm is outside"):
        material.made(grain_size=10e-9)
    with pytest.raises(InputError, match="second must be hotter"):
        Doping(1e25, 2e25, (800.0, 300.0))
