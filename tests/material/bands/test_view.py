"""What an engineer reads from a material given by bands."""

import mpmath
import numpy as np
import pytest
from numpy.testing import assert_allclose, assert_array_equal
from scipy.optimize import minimize_scalar

from tegdesign.errors import DataRangeError, InputError
from tegdesign.material import file, library
from tegdesign.material.bands import describe, view

EV, K = 1.602176634e-19, 1.380649e-23  # exact, SI

# One parabolic band with acoustic scattering, for which closed forms exist; not a real material.
ONE_BAND = """\
kind = "bands"
name = "one-band-n"
composition = "none"
polarity = "n"
service_limit = "800 K"
density = "8000 kg/m^3"
temperatures = ["300 K", "800 K"]
doping = "2e19 1/cm^3"
doping_bounds = ["1e18 1/cm^3", "1e21 1/cm^3"]

[[bands]]
name = "only"
carrier = "electron"
mass = 0.2
degeneracy = 4
[[bands.scattering]]
kind = "mobility"
mobility = "400 cm^2/V/s"

[lattice]
kind = "constant"
value = "1.5 W/m/K"
"""


@pytest.fixture
def material(made_up):
    return library.find(made_up())


@pytest.fixture
def one_band(tmp_path):
    path = tmp_path / "one-band-n.toml"
    path.write_text(ONE_BAND)
    return library.find(path)


def closed_forms(level):
    """Return F_0, |S| [k/e] and L [(k/e)^2] of one acoustic band by polylogarithms: F_j = -j! Li_(j+1)(-e^level).

    S = 2 F_1 / F_0 - level, L = (3 F_0 F_2 - 4 F_1^2) / F_0^2; May and Snyder 2012, in Rowe (ed.), Materials,
    Preparation, and Characterization in Thermoelectrics, chapter 11 (memory).
    """
    zeroth, first, second = (
        float(mpmath.re(-mpmath.factorial(j) * mpmath.polylog(j + 1, -mpmath.exp(level)))) for j in range(3)
    )
    return zeroth, 2 * first / zeroth - level, (3 * zeroth * second - 4 * first**2) / zeroth**2


def test_one_acoustic_band_by_closed_forms(one_band):
    table = view.at_doping(one_band, [300.0, 500.0, 800.0], [1e25, 2e25, 8e26])
    for k in range(3):
        zeroth, s, lorenz = closed_forms(table["reduced_level_kT"][k])
        assert_allclose(table["seebeck_coefficient_k_per_e"][k], -s, rtol=1e-9)
        assert_allclose(table["lorenz_number_W_ohm_per_K2"][k], lorenz * (K / EV) ** 2, rtol=1e-9)
        # zT = S^2 / (L + 1 / (B F_0)): quality factor and figure of merit of one band, arXiv 1710.06896
        z = s**2 / (lorenz + 1 / (table["quality_factor"][k] * zeroth))
        assert_allclose(table["figure_of_merit"][k], z, rtol=1e-8)
    # definition: mobility of the band times its valleys times mass^1.5, at any doping and temperature
    assert_allclose(table["weighted_mobility_m2_per_V_s"], 400e-4 * 4 * 0.2**1.5, rtol=1e-8)
    assert_allclose(table["level_above_edge_J"], table["reduced_level_kT"] * K * table["temperature_K"], rtol=1e-12)
    assert_array_equal(table["bipolar_share"], 0.0)
    assert_array_equal(table["minority_density_1_per_m3"], 0.0)
    assert np.isnan(table["gap_J"]).all()


def test_best_dopings_of_one_band_are_where_the_closed_forms_peak(one_band):
    t = 600.0
    quality = float(view.properties(one_band, [t])["quality_factor"][0])

    def power(level):
        zeroth, s, _ = closed_forms(level)
        return -zeroth * s**2

    def merit(level):
        zeroth, s, lorenz = closed_forms(level)
        return -(s**2) / (lorenz + 1 / (quality * zeroth))

    records = {record["aim"]: record for record in view.best(one_band, t)}
    for aim, function in (("figure of merit", merit), ("power factor", power)):
        best = minimize_scalar(function, bounds=(-3, 4), method="bounded", options={"xatol": 1e-6})
        # the doping is sought to 1e-4 of itself; near a peak the level follows it about one to one
        assert_allclose(records[aim]["reduced_level_kT"], best.x, rtol=0, atol=1e-3)
        if aim == "figure of merit":
            assert_allclose(records[aim]["figure_of_merit"], -best.fun, rtol=1e-7)
    assert records["as made"]["doping_1_per_m3"] == 2e25
    assert [record["at_bound"] for record in records.values()] == ["", "", ""]


def test_best_doping_says_when_it_is_a_bound(tmp_path):
    path = tmp_path / "one-band-n.toml"
    path.write_text(ONE_BAND.replace('["1e18 1/cm^3", "1e21 1/cm^3"]', '["1.9e19 1/cm^3", "2.1e19 1/cm^3"]'))
    records = view.best(library.find(path), [300.0, 800.0])
    # one acoustic band peaks in power factor near level 0.67 (test above), here at 1.1e19 and 4.9e19 1/cm^3 (pin)
    assert [record["at_bound"] for record in records if record["aim"] == "power factor"] == ["lower", "upper"]
    assert [record["at_bound"] for record in records if record["aim"] == "as made"] == ["", ""]
    assert_allclose([records[1]["doping_1_per_m3"], records[4]["doping_1_per_m3"]], [1.9e25, 2.1e25], rtol=1e-12)


def test_levels_differ_by_the_offset(material):
    light, heavy, conduction = view.bands(material, [500.0])
    # 500 K: offset 0.08 eV (file), gap 0.18 eV + 0.4 meV/K 500 K = 0.38 eV (file)
    assert_allclose(light["reduced_level_kT"] - heavy["reduced_level_kT"], 0.08 * EV / (K * 500), rtol=1e-12)
    assert_allclose(light["reduced_level_kT"] + conduction["reduced_level_kT"], -0.38 * EV / (K * 500), rtol=1e-12)
    assert_allclose(light["mass_electron_masses"], 0.1 * (500 / 300) ** 0.5, rtol=1e-14)
    assert_allclose(heavy["edge_offset_J"], 0.08 * EV, rtol=1e-14)
    assert_allclose(light["kane_gap_J"], 0.38 * EV, rtol=1e-14)
    assert np.isnan(heavy["kane_gap_J"]).all()
    share = sum(band["conductivity_share"] for band in (light, heavy, conduction))
    assert_allclose(share, 1.0, rtol=1e-14)


def test_columns_agree_with_those_of_a_design_and_with_each_other(material):
    table = view.properties(material)
    t = table["temperature_K"]
    assert_array_equal(t, np.arange(300.0, 851.0, 50.0))
    for name, column in material.properties(t).items():
        assert_array_equal(table[name], column)
    parts = table["electronic_thermal_conductivity_W_per_m_K"] + table["lattice_thermal_conductivity_W_per_m_K"]
    assert_allclose(parts, table["thermal_conductivity_W_per_m_K"], rtol=1e-7)  # curves: within 1e-8
    net = table["majority_density_1_per_m3"] - table["minority_density_1_per_m3"]
    assert_allclose(net, 5e25, rtol=1e-9)
    assert_array_equal(table["doping_1_per_m3"], 5e25)
    # of the two valence bands the one with more of the conductivity leads, never the conduction band
    light, heavy, _ = (band["conductivity_share"] for band in view.bands(material, t))
    assert_array_equal(table["leading_band"], np.where(light > heavy, "light", "heavy"))
    assert set(table["leading_band"]) == {"light", "heavy"}
    assert list(view.to_frame(material).columns) == list(table)


def test_parts_of_measured_materials():
    # skutterudite-n at 302 K: S = -126.3 uV/K, rho = 0.4155 mohm cm, kappa = 2.692 W/m/K (row of the data set);
    # L = (1.5 + exp(-126.3/116)) 1e-8 = 1.83662e-8 W ohm/K2 by hand, doi 10.1063/1.4908244
    table = view.properties(library.find("skutterudite-n"), [302.0])
    electronic = (1.5 + np.exp(-126.3 / 116)) * 1e-8 * 302 / 0.4155e-5
    assert_allclose(table["electronic_thermal_conductivity_W_per_m_K"], electronic, rtol=1e-3)
    assert_allclose(table["lattice_thermal_conductivity_W_per_m_K"], 2.692 - electronic, rtol=1e-3)


def test_parts_are_blank_where_a_property_is_not_known(tmp_path):
    text = (library.shipped() / "clathrate-n.toml").read_text()
    head, points = text.split('points = """')
    first = points.splitlines()[2]  # below the line of heads
    cells = first.split(",")
    cells[1] = " -"
    path = tmp_path / "clathrate-n.toml"
    path.write_text(f'{head}points = """{points}'.replace(first, ",".join(cells)))
    table = view.properties(library.find(path))
    assert_array_equal(np.isnan(table["electronic_thermal_conductivity_W_per_m_K"]).nonzero()[0], [0])
    assert_array_equal(np.isnan(table["lattice_thermal_conductivity_W_per_m_K"]).nonzero()[0], [0])
    assert np.isfinite(table["thermal_conductivity_W_per_m_K"]).all()


def test_against_doping_runs_between_the_bounds(material):
    table = view.against_doping(material, [400.0, 600.0], 5)
    assert_array_equal(table["temperature_K"], [400.0] * 5 + [600.0] * 5)
    assert_allclose(table["doping_1_per_m3"][[0, 4, 5, 9]], [1e24, 2e26, 1e24, 2e26], rtol=1e-12)
    assert_allclose(np.diff(np.log(table["doping_1_per_m3"][:5])), np.log(200) / 4, rtol=1e-9)
    there = material.made(view.Doping(float(table["doping_1_per_m3"][2]))).properties([400.0])
    assert_allclose(table["seebeck_coefficient_V_per_K"][2], there["seebeck_coefficient_V_per_K"][0], rtol=1e-7)


def test_wrong_wishes_are_refused(material):
    with pytest.raises(DataRangeError, match=r"at 200 K: its properties are known from 300 K to 850 K"):
        view.at_doping(material, [200.0], [1e25])
    with pytest.raises(InputError, match=r"doping 1e\+21 1/cm\^3 is outside its bounds"):
        view.at_doping(material, [400.0], [1e27])
    with pytest.raises(InputError, match=r"--doping: skutterudite-n is a table of measured values"):
        view.made(library.find("skutterudite-n"), 1e25)


def test_parameters_in_words(made_up):
    told = describe.parameters(library.find(made_up()))
    assert describe.words(told["gap"]) == "linear (value 0.18 eV, slope 0.4 meV/K, reference 0 K)"
    assert describe.words(told["bands"][0]["scattering"]) == (
        "acoustic (deformation potential 22 eV, elastic constant 71 GPa) + grain boundary (path per size 1)"
    )
    assert describe.words(told["lattice"]) == (
        "debye-callaway (branches (velocity 1770 m/s, upper 136 K, lower 0 K, weight 1, scattering "
        "umklapp (coefficient 1.5e-17 s/K, freezing 0 K) + grain boundary (path per size 1)))"
    )


def test_parameters_need_a_file(made_up):
    with pytest.raises(InputError, match="made-up-p was not read from a file"):
        describe.parameters(file.read(made_up()).to_material())


def test_laid_over_is_that_of_the_file_whatever_is_looked_at(tmp_path, one_band):
    whole = library.find("lead-telluride-p-bands")
    told = describe.laid_over(whole)
    properties = ["seebeck_coefficient", "conductivity", "thermal_conductivity"]
    assert [one["name"] for one in told["deviations"]] == properties
    assert describe.laid_over(view.made(whole, 3e25)) == told
    assert describe.measured_twin(whole).name == told["measured"] == "lead-telluride-p"
    assert describe.laid_over(one_band)["words"] == ["nothing: its file names no measured material"]
    assert describe.measured_twin(one_band) is None
    path = tmp_path / "gone.toml"
    path.write_text(ONE_BAND.replace("one-band-n", "gone").replace("[[bands]]", 'laid_over = "no-such"\n[[bands]]', 1))
    told = describe.laid_over(library.find(path))
    assert told["deviations"] == []
    assert told["words"] == ["no-such: not compared, unknown material 'no-such'; tegdesign materials lists all"]
    assert describe.measured_twin(library.find(path)) is None
