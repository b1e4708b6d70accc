"""Pictures of a material given by bands."""

import pytest
from numpy.testing import assert_allclose, assert_array_equal

from tegdesign.errors import InputError
from tegdesign.material import library
from tegdesign.material.bands.crystal import Doping
from tegdesign.sheet import material_doping
from tegdesign.sheet.material import figure

NAME = "lead-telluride-p-bands"


@pytest.fixture(scope="module")
def computed():
    return library.find(NAME)


@pytest.fixture(scope="module")
def measured():
    return library.find("lead-telluride-p")


def labels(axes):
    return [text.get_text() for text in axes.get_legend().get_texts()]


def lines(axes, start):
    return [line for line in axes.get_lines() if line.get_label().startswith(start)]


def test_measured_points_are_those_of_the_measured_material(computed, measured):
    panels = figure(computed, measured).axes
    assert labels(panels[0])[:2] == ["computed", "measured: lead-telluride-p"]
    for axes, name, factor in (
        (panels[0], "seebeck_coefficient", 1e6),
        (panels[1], "resistivity", 1e5),
        (panels[2], "thermal_conductivity", 1.0),
    ):
        (points,) = lines(axes, "measured")
        curve = getattr(measured, name)
        assert_array_equal(points.get_xdata(), curve.temperature)
        assert_allclose(points.get_ydata(), factor * curve.value, rtol=1e-14)
        assert axes.get_ylim()[1] >= points.get_ydata().max()
    (zt,) = lines(panels[3], "measured")
    assert_allclose(zt.get_ydata(), measured.figure_of_merit(zt.get_xdata()), rtol=1e-14)


def test_knots_of_a_computed_material_are_not_drawn_as_measured(computed):
    assert "measured" not in " ".join(label for axes in figure(computed).axes[:1] for label in labels(axes))


@pytest.mark.parametrize("name", [NAME, "skutterudite-n"])
def test_parts_of_kappa_are_drawn_and_told_apart_in_grey(name):
    material = library.find(name)
    drawing = figure(material)
    axes = drawing.axes[2]
    assert labels(axes) == ["whole", "carriers", "lattice"]
    (carriers,), (lattice,) = lines(axes, "carriers"), lines(axes, "lattice")
    t = carriers.get_xdata()
    assert_allclose(carriers.get_ydata() + lattice.get_ydata(), material.thermal_conductivity(t), rtol=1e-7)
    assert len({line.get_linestyle() for line in (axes.get_lines()[0], carriers, lattice)}) == 3
    assert material.electronic_basis[:30] in " ".join(drawing._supxlabel.get_text().split())


def test_against_doping(computed, measured):
    made = computed.made(Doping(5e25))
    drawing = material_doping.figure(made, [400.0, 800.0], measured, computed.doping.cold)
    *panels, below = drawing.axes
    assert [axes.get_ylabel().split("[")[1] for axes in panels] == [
        "uV/K]", "S/cm]", "W/m/K]", "W/m/K]", "mW/m/K2]", "1]",
    ]  # fmt: skip
    assert {axes.get_xlabel() for axes in panels} == {"doping [1/cm3]"}
    assert {axes.get_xscale() for axes in panels} == {"log"}
    for axes in panels:
        cold, hot = lines(axes, "400 K")[0], lines(axes, "800 K")[0]
        assert cold.get_linestyle() != hot.get_linestyle()
        assert_allclose(cold.get_xdata()[[0, -1]], [bound * 1e-6 for bound in computed.doping_bounds], rtol=1e-12)
        assert_allclose(lines(axes, "doping as made")[0].get_xdata(), 5e19, rtol=1e-12)
        assert "outside the doping bounds" in [patch.get_label() for patch in axes.patches]
    point = measured.properties([400.0])
    for axes, value in (
        (panels[0], 1e6 * point["seebeck_coefficient_V_per_K"]),
        (panels[1], 1e-2 / point["resistivity_ohm_m"]),
        (panels[2], point["thermal_conductivity_W_per_m_K"]),
        (panels[4], 1e3 * point["power_factor_W_per_m_K2"]),
        (panels[5], point["figure_of_merit"]),
    ):
        (dot,) = lines(axes, "lead-telluride-p measured, 400 K")
        assert_allclose(dot.get_xdata(), computed.doping.cold * 1e-6, rtol=1e-12)
        assert_allclose(dot.get_ydata(), value, rtol=1e-12)
    assert lines(panels[3], "lead") == []
    assert {"400 K", "800 K", "doping as made", "outside the doping bounds"} <= set(labels(below))
    assert labels(panels[3]) == ["carriers", "lattice"]
    words = " ".join(drawing._supxlabel.get_text().split())
    assert "computed from bands, not measured" in words


def test_points_only_where_the_measured_material_is_known(computed, measured):
    assert measured.range[0] > 300
    panels = material_doping.figure(computed, [300.0], measured, computed.doping.cold).axes
    assert all(lines(axes, "lead") == [] for axes in panels)


def test_seebeck_coefficient_of_an_n_type_material_stays_in_sight():
    axes = material_doping.figure(library.find("lead-telluride-n-bands"), [500.0]).axes[0]
    low, high = axes.get_ylim()
    values = lines(axes, "500 K")[0].get_ydata()
    assert low < values.min() < values.max() < high


def test_too_many_temperatures(computed):
    with pytest.raises(InputError, match="5 temperatures are too many for one drawing"):
        material_doping.figure(computed, [400.0, 500.0, 600.0, 700.0, 800.0])


def test_same_bytes_each_time(computed, tmp_path):
    for name in ("a", "b"):
        material_doping.save_figure(computed, [500.0], tmp_path / f"{name}.svg")
    assert (tmp_path / "a.svg").read_bytes() == (tmp_path / "b.svg").read_bytes()
