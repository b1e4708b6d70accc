"""Picture of a material."""

import pytest
from numpy.testing import assert_allclose, assert_array_equal

from tegdesign.errors import InputError
from tegdesign.material import library
from tegdesign.sheet.material import figure, save_figure


def test_points_curves_limits_and_units():
    material = library.find("skutterudite-n")
    drawing = figure(material)
    assert [axes.get_ylabel() for axes in drawing.axes] == [
        "Seebeck coefficient S [uV/K]",
        "resistivity [mohm cm]",
        "thermal conductivity [W/m/K]",
        "figure of merit zT [1]",
    ]
    assert {axes.get_xlabel() for axes in drawing.axes} == {"temperature [K]"}
    curve, points, service, air = drawing.axes[0].get_lines()
    assert_array_equal(points.get_xdata(), material.seebeck_coefficient.temperature)
    assert_allclose(points.get_ydata(), material.seebeck_coefficient.value * 1e6, rtol=1e-14)
    assert_allclose(curve.get_xdata()[[0, -1]], [302, 847], rtol=1e-15)
    assert service.get_label() == "service limit 850 K (memory)"
    assert air.get_label() == "air limit 653 K"
    # in grey the lines are told apart by their kind, not their colour
    assert len({line.get_linestyle() for line in (curve, points, service, air)}) == 4


def test_warnings_and_source_are_on_the_page():
    words = " ".join(figure(library.find("tin-selenide-p"))._supxlabel.get_text().split())
    assert "USE WITH CARE" in words
    assert "doi 10.1021/acs.chemmater.0c03657" in words


@pytest.mark.parametrize("ending", ["png", "pdf", "svg"])
def test_same_bytes_each_time(tmp_path, ending):
    material = library.find("clathrate-n")
    for name in ("a", "b"):
        save_figure(material, tmp_path / f"{name}.{ending}")
    first = (tmp_path / f"a.{ending}").read_bytes()
    assert first == (tmp_path / f"b.{ending}").read_bytes()
    assert len(first) > 5000


def test_other_endings_are_refused(tmp_path):
    with pytest.raises(InputError, match=r"a\.bmp: a figure ends in \.png, \.pdf, \.svg"):
        save_figure(library.find("clathrate-n"), tmp_path / "a.bmp")
    assert list(tmp_path.iterdir()) == []
