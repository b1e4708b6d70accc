"""Drawings to scale and graphs: what they show, labels, units."""

import itertools

import numpy as np
import pytest
from matplotlib.figure import Figure
from numpy.testing import assert_allclose

from tegdesign.design.scan import against_hot, curve
from tegdesign.sheet import figures, plan


def axes_of(width=300.0, height=300.0):
    """Return axes that fill a page of so many points."""
    return Figure(figsize=(width / 72, height / 72)).add_axes((0, 0, 1, 1))


def paper_per_mm(axes):
    """Return millimetres of paper for one drawn millimetre, along both directions."""
    size = axes.figure.get_size_inches() * 25.4
    return size[0] / np.ptp(axes.get_xlim()), size[1] / np.ptp(axes.get_ylim())


def extents(axes, grey):
    """Return left, bottom, right, top of all rectangles of a grey."""
    found = []
    for collection in axes.collections:
        face = collection.get_facecolor()
        if len(face) and np.abs(face[0, :3] - float(grey)).max() < 1e-6 and face[0, 3] == 1:
            for p in collection.get_paths():
                box = p.get_extents()
                found.append((box.x0, box.y0, box.x1, box.y1))
    return np.array(found)


def labels(axes):
    return [t.get_text() for t in axes.texts if t.get_text()]


def test_path_visits_neighbours_in_turn(ratings):
    for rating in ratings.values():
        g = rating.design.module
        order = plan.path(g)
        assert len(set(order)) == len(order) == 2 * g.couples
        kinds = [plan.polarity(cell) for cell in order]
        assert kinds == ["n", "p"] * g.couples
        for (a, b), (c, d) in itertools.pairwise(order):
            assert abs(a - c) + abs(b - d) == 1


@pytest.mark.parametrize("name", ["plain", "heavy", "tiny"])
def test_plan_is_to_scale(ratings, name):
    design = ratings[name].design
    g, axes = design.module, axes_of()
    title = plan.plan(design, axes)
    scale = paper_per_mm(axes)
    assert_allclose(scale[0], scale[1], rtol=1e-9)
    assert_allclose(scale[0], {"plain": 2.0, "heavy": 2.0, "tiny": 20.0}[name], rtol=1e-9)
    assert f"scale {scale[0]:.0f} : 1" in title
    for grey, side in ((plan.N_LEG, g.leg_side_n), (plan.P_LEG, g.leg_side_p)):
        legs = extents(axes, grey)
        assert len(legs) == g.couples
        assert_allclose(legs[:, 2] - legs[:, 0], 1e3 * side, rtol=1e-9)
        assert_allclose(legs[:, 3] - legs[:, 1], 1e3 * side, rtol=1e-9)
        assert legs[:, :2].min() >= 0
        assert legs[:, 2].max() <= 1e3 * g.width + 1e-9
        assert legs[:, 3].max() <= 1e3 * g.depth + 1e-9
    assert_allclose(extents(axes, plan.CERAMIC)[0], [0, 0, 1e3 * g.width, 1e3 * g.depth], rtol=1e-9)
    # an electrode reaches from the outer edge of the n leg to that of the p leg, in two halves
    strips = extents(axes, plan.METAL)
    assert len(strips) == 2 * g.couples
    reach = 1e6 * np.array([s * (s + g.gap / 2) for s in (g.leg_side_n, g.leg_side_p)])
    area = (strips[:, 2] - strips[:, 0]) * (strips[:, 3] - strips[:, 1])
    assert_allclose(area.sum(), g.couples * reach.sum(), rtol=1e-9)
    assert {"+", "-", f"{1e3 * g.width:.4g} mm", f"{1e3 * g.depth:.4g} mm"} <= set(labels(axes))


def test_very_many_legs_are_not_drawn_one_by_one(plain):
    many = plain.design.module.model_copy(update={"columns": 100, "rows": 62})
    axes = axes_of()
    plan.plan(plain.design.model_copy(update={"module": many}), axes)
    assert sum(len(c.get_paths()) for c in axes.collections) < 10
    assert {"+", "-", "242 mm"} <= set(labels(axes))


def test_corner_names_its_dimensions(plain):
    axes = axes_of(200, 300)
    plan.corner(plain.design, axes)
    assert_allclose(*paper_per_mm(axes), rtol=1e-9)
    assert {"edge 1 mm", "n leg 1.4 mm", "gap 1.05 mm", "p leg 1.3 mm", "pitch 2.4 mm"} <= set(labels(axes))


@pytest.mark.parametrize("name", ["plain", "heavy", "tiny"])
def test_section_is_to_scale(ratings, name):
    design = ratings[name].design
    axes = axes_of(510, 180)
    title = plan.section(design, axes)
    assert_allclose(*paper_per_mm(axes), rtol=1e-9)
    assert f"scale {paper_per_mm(axes)[0]:.3g} : 1" in title
    stack = extents(axes, plan.CERAMIC)
    height = 1e3 * ratings[name].module_height_m
    assert_allclose(stack[:, 3].max(), height, rtol=1e-9)
    legs = extents(axes, plan.N_LEG)
    assert_allclose(legs[:, 3] - legs[:, 1], 1e3 * design.module.leg_length, rtol=1e-9)
    metal = extents(axes, plan.METAL)
    assert_allclose(metal[:, 3] - metal[:, 1], 1e3 * design.stack.electrode_thickness, rtol=1e-9)
    # each leg touches one electrode above and one below
    for leg in (*legs, *extents(axes, plan.P_LEG)):
        for level in (leg[1], leg[3]):
            touching = [m for m in metal if min(abs(m[1] - level), abs(m[3] - level)) < 1e-9]
            assert any(m[0] <= leg[0] + 1e-9 and leg[2] <= m[2] + 1e-9 for m in touching)
    shown = labels(axes)
    assert f"{height:.4g} mm" in shown
    assert any(f"legs {1e3 * design.module.leg_length:.4g} mm long" in text for text in shown)


def lines_of(axes):
    return [line for a in axes.figure.axes for line in a.get_lines()]


def test_voltage_and_power_against_current(plain):
    sweep, axes = curve(plain.design, 7), axes_of()
    figures.voltage_current(sweep, plain.rated, axes)
    beside = axes.figure.axes[1]
    assert (axes.get_xlabel(), axes.get_ylabel(), beside.get_ylabel()) == (
        "current [A]",
        "voltage [V]",
        "power [W]",
    )
    voltage, rated = axes.get_lines()
    assert_allclose(voltage.get_ydata(), sweep.column("voltage_V"), rtol=1e-12)
    assert_allclose(rated.get_xydata(), [[plain.rated.current_A, plain.rated.voltage_V]], rtol=1e-12)
    power, _ = beside.get_lines()
    assert_allclose(power.get_ydata(), sweep.column("power_W"), rtol=1e-12)
    assert voltage.get_linestyle() != power.get_linestyle()  # told apart in grey
    assert [t.get_text() for t in axes.get_legend().get_texts()] == [
        "voltage",
        "power",
        "rated voltage",
        "rated power",
    ]


def test_power_and_efficiency_against_the_source(plain, ratings):
    sweep, axes = against_hot(plain.design, points=5), axes_of()
    figures.against_hot(sweep, axes)
    beside = axes.figure.axes[1]
    assert axes.get_xlabel() == "source temperature [degC]"
    assert (axes.get_ylabel(), beside.get_ylabel()) == ("power [W]", "efficiency [%]")
    power, held = axes.get_lines()
    assert_allclose(power.get_xdata()[-1], 300.0, rtol=1e-12)
    assert_allclose(
        beside.get_lines()[0].get_ydata()[-1], 100 * plain.state("most power").efficiency, rtol=1e-6
    )
    assert len(held.get_xdata()) == sum(outside > 0 for outside in sweep.outside_data_K) > 0
    assert power.get_marker() != beside.get_lines()[0].get_marker()
    other = axes_of()
    figures.against_hot(against_hot(ratings["tiny"].design, points=3), other)
    assert other.get_xlabel() == "source heat [W]"


def test_ladder(plain, ratings):
    axes = axes_of()
    figures.ladder(plain.rated, axes)
    assert axes.get_xlabel() == "temperature [degC]"
    (line,) = axes.get_lines()
    assert_allclose(line.get_xdata(), [r.T_K - 273.15 for r in plain.rated.ladder], rtol=1e-12)
    assert [t.get_text() for t in axes.get_yticklabels()] == [r.place for r in plain.rated.ladder]
    shown = labels(axes)
    assert f"{plain.rated.junction_difference_K:.1f}" in shown
    assert "300.0" in shown
    other = axes_of()
    figures.ladder(ratings["tiny"].rated, other)
    assert not any(text.startswith("-") for text in labels(other))  # no fall from the ambient to the hot face
