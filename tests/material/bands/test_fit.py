"""Fits of bands to tables: made-up tables give their parameters back, uncertainties are those of refits, refusals."""

from dataclasses import replace

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.errors import ConvergenceError, InputError
from tegdesign.material import library
from tegdesign.material.bands.fit import fit
from tegdesign.material.bands.fit_file import bands_file, save
from tegdesign.material.bands.fit_model import Model, Prediction
from tegdesign.material.bands.fit_start import starts
from tegdesign.material.bands.overlay import overlay
from tegdesign.material.check import check
from tegdesign.material.curve import Curve
from tegdesign.material.transport.derived import weighted_mobility

PROPERTIES = ("seebeck_coefficient", "resistivity", "thermal_conductivity")
EV = 1.602176634e-19  # J, exact by the definition of the SI
ONE = {"doping": 4e25, "mobility": 0.03, "mobility_exponent": -1.3, "lattice": 2.2, "lattice_exponent": 0.8}
ACROSS = {"gap": 0.25 * EV, "minority_mobility_ratio": 0.7}
SECOND = {"second_mass_ratio": 4.0, "second_mobility_ratio": 0.13, "second_offset": 0.12 * EV}


def table_of(model, values, temperatures):
    """Return all values of a made-up model and the table it gives, each property at its own temperatures [K]."""
    full = {name: values.get(name, parameter.start) for name, parameter in model.parameters().items()}
    curves = [Curve(t, Prediction(model, t)(full)[k]) for k, t in enumerate(temperatures)]
    base = replace(library.find("lead-telluride-p"), polarity=model.polarity, name="made-up")
    base = replace(base, uncertainty=(0.05, 0.06, 0.08))
    return full, replace(base, **dict(zip(PROPERTIES, curves, strict=True)))


def made_up(polarity="p", last=750.0, points=11, change=None, **form):
    """Return values and table of a made-up model of a form, points of all properties at the same temperatures."""
    model = Model(polarity, (300.0, last), **form)
    values = ONE | ACROSS | SECOND | (change or {})
    return table_of(model, values, [np.linspace(300.0, last, points)] * 3)


FORMS = {
    "one band": ("n", {"minority": False}, {}),
    "with minority": ("p", {}, {"doping": 2e25}),
    "kane": ("n", {"dispersion": "kane"}, {"doping": 2e25}),
    "two bands": ("p", {"bands": 2, "minority": False}, {"doping": 6e25}),
    "polar, alloy": (
        "n", {"scattering": "polar", "lattice": "alloy"}, {"mobility_exponent": -0.8, "lattice": 6.0, "disorder": 0.3},
    ),
    "impurities, constant": (
        "p", {"scattering": "ionised", "lattice": "constant", "minority": False}, {"mobility_exponent": 0.5},
    ),
    "alloy, 1/T": ("p", {"scattering": "alloy", "lattice": "inverse"}, {"doping": 2e25}),
}  # fmt: skip


@pytest.mark.parametrize("name", FORMS)
def test_a_made_up_table_gives_its_parameters_back(name):
    polarity, form, change = FORMS[name]
    model = Model(polarity, (300.0, 750.0), **form)
    usual = {one.name: one.start for one in model.parameters().values() if not one.free}
    values, table = made_up(polarity, change=change | usual, **form)
    found = fit(table, **form)
    assert sum(not one.held for one in found.parameters) >= 4
    for one in found.parameters:
        assert_allclose(one.value, values[one.name], rtol=1e-5, err_msg=one.name)  # aim: 1e-2
    assert found.chi_square < 1e-8
    assert found.failures == []


def test_starts_are_near_where_one_band_is_enough():
    values, table = made_up("n", minority=False)
    model = Model("n", table.range, minority=False)
    (first,) = starts(model, table, {"mass": 0.4})
    assert_allclose(first["doping"], values["doping"] * 0.4**1.5, rtol=0.02)
    assert_allclose(first["mobility"], values["mobility"] / 0.4**1.5, rtol=0.05)
    assert_allclose(first["lattice"], values["lattice"], rtol=0.1)
    (first,) = starts(model, table, {"doping": values["doping"] * 0.4**1.5})
    assert_allclose(first["mass"], 0.4, rtol=0.02)


def test_the_file_has_the_form_that_was_asked_for():
    form = {"bands": 2, "dispersion": "kane", "lattice": "alloy"}
    model = Model("n", (300.0, 700.0), **form)
    values = {name: one.start for name, one in model.parameters().items()} | {"second_offset_slope": 1e-23, "mass": 0.5}
    parts = model.parts(values)
    conduction, second, valence = parts["bands"]
    assert [band.carrier for band in parts["bands"]] == ["electron", "electron", "hole"]
    assert conduction.kane_gap == valence.kane_gap == parts["gap"]
    assert second.kane_gap is None
    assert [band.mass.value for band in parts["bands"]] == [0.5, 1.5, 0.5]
    # J, J/K: offset and slope at 300 K
    assert (second.offset.value, second.offset.slope, second.offset.reference) == (0.1 * EV, 1e-23, 300.0)
    assert_allclose([band.scattering[0].mobility for band in parts["bands"]], [0.01, 0.002, 0.01], rtol=1e-12)
    assert (parts["lattice"].kind, parts["lattice"].pure.exponent) == ("alloy", 1.0)
    assert Model("p", (300.0, 700.0), minority=False).parts(values)["gap"] is None


def test_properties_are_compared_at_their_own_temperatures():
    model = Model("p", (320.0, 680.0))
    own = [np.linspace(300.0, 700.0, 9), np.linspace(310.0, 690.0, 6), np.linspace(320.0, 680.0, 5)]
    values, table = table_of(model, ONE | ACROSS | {"doping": 2e25}, own)
    found = fit(table)
    assert found.points.known.sum(axis=1).tolist() == [9, 6, 5]
    assert found.degrees_of_freedom == 20 - 7
    for name in ("doping", "mobility", "gap", "minority_mobility_ratio", "lattice"):
        assert_allclose(found.values[name], values[name], rtol=1e-5)


def test_a_change_of_sign_of_s_does_no_harm():
    values, table = made_up("p", 800.0, 25, {"doping": 3e24, "gap": 0.2 * EV, "minority_mobility_ratio": 3.0})
    s = table.seebeck_coefficient.value
    assert s[0] > 0 > s[-1]
    found = fit(table)
    assert_allclose(found.values["gap"], values["gap"], rtol=1e-5)
    # a tenth of the largest S is the least that an uncertainty is a share of
    least = 0.1 * np.abs(s).max()
    assert np.abs(s).min() < 0.7 * least
    assert_allclose(found.points.sigma[0], 0.05 * np.maximum(np.abs(s), least), rtol=1e-12)
    assert np.abs(found.percent[0]).max() < 1e-3


def test_mass_doping_and_mobility_are_told_only_together():
    _, table = made_up("n", minority=False)
    by_convention, light = fit(table, minority=False), fit(table, minority=False, hold={"mass": 0.3})
    known = fit(table, minority=False, hold={"doping": 4e25 * 0.3**1.5})  # a Hall density frees the mass
    assert "convention" in next(one.basis for one in by_convention.parameters if one.name == "mass")
    assert any("by convention" in remark for remark in by_convention.remarks)
    for found in (light, known):
        assert not any("by convention" in remark for remark in found.remarks)
        assert_allclose(found.values["mass"], 0.3, rtol=1e-5)
        assert_allclose(found.values["doping"], by_convention.values["doping"] * 0.3**1.5, rtol=1e-5)
        assert_allclose(found.values["mobility"], by_convention.values["mobility"] / 0.3**1.5, rtol=1e-5)
        for one, other in zip(found.combinations, by_convention.combinations, strict=True):
            for key in ("value", "uncertainty", "uncertainty_common_error"):
                assert_allclose(one[key], other[key], rtol=1e-3, err_msg=one["name"])


def test_weighted_mobility_is_that_of_s_and_rho():
    # exact for one parabolic band with acoustic scattering, by another way: level from S, then rho
    _, table = made_up("p", minority=False)
    s, rho = table.seebeck_coefficient(300.0), table.resistivity(300.0)
    found = fit(table, minority=False, hold={"mass": 0.7}).combinations[0]
    assert found["name"] == "weighted_mobility"
    assert_allclose(found["value"], weighted_mobility(s, rho, 300.0), rtol=1e-5)


def scattered(table, factors):
    curves = [getattr(table, name) for name in PROPERTIES]
    new = [Curve(c.temperature, c.value * f) for c, f in zip(curves, factors, strict=True)]
    return replace(table, **dict(zip(PROPERTIES, new, strict=True)))


def test_uncertainties_are_what_errors_of_the_points_do():
    """Each point in turn is moved by a little of its uncertainty and the table fitted anew."""
    _, table = made_up("n", points=5, minority=False)
    expected, small = fit(table, minority=False), 0.02  # so little that the model stays straight
    adjusted = [one for one in expected.parameters if not one.held]
    moved = np.empty((3, 5, len(adjusted)))
    for k, share in enumerate(table.uncertainty):
        for point in range(5):
            factors = np.ones((3, 5))
            factors[k, point] += small * share
            found = fit(scattered(table, factors), minority=False).values
            scaled = [one.parameter.scaled(found[one.name]) - one.parameter.scaled(one.value) for one in adjusted]
            moved[k, point] = np.array(scaled) / small
    own, common = np.sqrt((moved**2).sum(axis=(0, 1))), np.sqrt((moved.sum(axis=1) ** 2).sum(axis=0))
    flat = moved.reshape(15, -1)
    for k, one in enumerate(adjusted):
        assert_allclose(own[k], one.sigma, rtol=0.02, err_msg=one.name)
        assert_allclose(common[k], one.common_sigma, rtol=0.02, atol=2e-3, err_msg=one.name)
    assert_allclose(expected.correlation, flat.T @ flat / own / own[:, None], rtol=0.02, atol=0.01)


def test_chi_square_counts_in_units_of_the_uncertainty():
    # rho 2 sigma too high at one point: it is the only one beyond; a mean over thirds tells where
    _, table = made_up("n", minority=False)
    factors = np.ones((3, 11))
    factors[1, 5] += 4 * table.uncertainty[1]
    found = fit(scattered(table, factors), minority=False)
    assert [(one["property"], one["temperature_K"]) for one in found.failures] == [("resistivity", 525.0)]
    assert found.failures[0]["residual_sigma"] < -2
    assert_allclose(found.chi_square, np.nansum(found.residuals**2), rtol=1e-12)
    assert_allclose(found.reduced_chi_square, found.chi_square / (33 - 5), rtol=1e-12)
    assert found.trends[1]["middle_sigma"] < 0 < found.trends[1]["hot_sigma"]


REFUSED = {
    "unknown word": ({"scattering": "acustic"}, "scattering of a fit is 'acustic'; write acoustic or alloy"),
    "three bands": ({"bands": 3}, "bands of a fit is 3; write 1 or 2"),
    "unknown parameter": ({"hold": {"gapp": 1.0}}, "'gapp' is no parameter of this model"),
    "no such band": ({"minority": False, "hold": {"gap": EV}}, "'gap' is no parameter of this model"),
    "out of bounds": ({"hold": {"gap": 0.3}}, "gap = .* cannot be held: its bounds are 0.01 eV and 6 eV"),
    "mass and doping": ({"free": ("mass",)}, "mass and doping cannot both be free"),
    "hold and free": ({"hold": {"gap": EV}, "free": ("gap",)}, "'gap' is to be held and to be free"),
}


@pytest.mark.parametrize("name", REFUSED)
def test_refuses(name):
    settings, words = REFUSED[name]
    with pytest.raises(InputError, match=words):
        fit(library.find("bismuth-telluride-p-sb1.54"), **settings)


def test_refuses_fewer_values_than_parameters():
    _, table = made_up("n", points=2, minority=False)
    with pytest.raises(InputError, match=r"has 6 values \(S 2, rho 2, kappa 2\) but the model has 7 parameters"):
        fit(table)
    assert np.isnan(fit(table, minority=False, free=("mass_exponent",)).reduced_chi_square)  # six for six


def test_refuses_a_computed_material():
    with pytest.raises(InputError, match="is computed from bands already"):
        fit(library.find("lead-telluride-p-bands"))


def test_says_when_it_does_not_settle():
    with pytest.raises(ConvergenceError, match="did not settle in 1 evaluations"):
        fit(library.find("bismuth-telluride-p-sb1.54"), evaluations=1)


@pytest.fixture(scope="module")
def telluride():
    return fit(library.find("bismuth-telluride-p-sb1.54"))


def test_a_table_of_the_library(telluride):
    # values of bismuth telluride alloys near 300 K: gap 0.13 to 0.2 eV, lattice part 0.5 to 1 W/m/K, weighted mobility
    # 300 to 500 cm2/V/s (memory)
    assert 0.13 < telluride.values["gap"] / EV < 0.2
    assert 0.5 < telluride.values["lattice"] < 1.0
    assert 0.03 < telluride.combinations[0]["value"] < 0.05
    for one, limit in zip(telluride.deviations, (10, 15, 15), strict=True):
        assert abs(one.largest_percent) < limit
    assert telluride.reduced_chi_square < 1
    pairs = telluride.strong_correlations
    assert [pair[:2] for pair in pairs] == [("gap", "minority_mobility_ratio"), ("doping", "mobility")]
    assert all(0.9 <= abs(share) < 1 for *_, share in pairs)


def test_what_it_says_is_what_its_file_does(telluride, tmp_path):
    path = tmp_path / "fitted-p.toml"
    save(telluride, path)
    assert check(path) == []
    material = library.find(path)
    assert material.laid_over == telluride.table.name
    over = overlay(material, telluride.table)
    for found, said in zip(over.deviations, telluride.deviations, strict=True):
        assert_allclose(found.largest_percent, said.largest_percent, rtol=1e-3)
        assert_allclose(found.rms_percent, said.rms_percent, rtol=1e-3)
        assert f"{abs(said.largest_percent):.1f} %" in material.warnings[0]
    assert_allclose(material.doping_bounds, np.array([0.2, 5.0]) * material.doping.cold, rtol=1e-5)
    assert "convention of the weighted mobility" in material.doping_basis
    assert material.hazard_tags == telluride.table.hazard_tags


def test_a_poor_fit_is_said_in_its_file_and_in_the_remarks():
    found = fit(library.find("bismuth-telluride-p-sb1.54"), minority=False)
    content = bands_file(found, "poor-p")
    assert "the model misses the table: seebeck coefficient: largest +" in content.caution
    assert "(limit 10 %)" in content.caution
    assert any("above 1.5: the model misses" in remark for remark in found.remarks)
    assert any("suit: lattice_exponent (" in remark for remark in found.remarks)  # at its bound


def test_what_a_table_does_not_show_is_said():
    _, table = made_up("n", 600.0, change={"gap": 1.5 * EV})
    assert any("hardly shows the minority band" in remark for remark in fit(table).remarks)


def test_file_keeps_its_rules(telluride, tmp_path):
    with pytest.raises(InputError, match="is the name of the measured material"):
        bands_file(telluride, telluride.table.name)
    with pytest.raises(InputError, match=r"doping 1.26\d*e\+19 1/cm\^3 is outside its bounds"):
        bands_file(telluride, "fitted-p", (1e26, 2e26))
    assert bands_file(telluride, "fitted-p", (1e24, 2e26)).doping_bounds == (1e24, 2e26)
    for name, words in (("Fitted.toml", "is no name for a material"), ("fitted.txt", "ends in .toml")):
        with pytest.raises(InputError, match=words):
            save(telluride, tmp_path / name)
    assert list(tmp_path.iterdir()) == []


def test_frame_holds_points_and_model(telluride):
    frame = telluride.to_frame()
    table = telluride.table
    assert_allclose(frame["seebeck_coefficient_measured_V_per_K"], table.seebeck_coefficient.value, rtol=1e-12)
    assert_allclose(frame["resistivity_uncertainty_ohm_m"], table.uncertainty[1] * table.resistivity.value, rtol=1e-12)
    off = (frame["seebeck_coefficient_modelled_V_per_K"] - frame["seebeck_coefficient_measured_V_per_K"]) / frame[
        "seebeck_coefficient_uncertainty_V_per_K"
    ]
    assert_allclose(frame["seebeck_coefficient_residual_sigma"], off, rtol=1e-12)
