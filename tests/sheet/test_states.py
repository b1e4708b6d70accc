"""The table of states, the words on each, and the picture of their temperatures."""

import pytest
from matplotlib.figure import Figure
from numpy.testing import assert_allclose

from tegdesign.design.condition import OPEN
from tegdesign.design.design import Design
from tegdesign.design.rate import rate
from tegdesign.errors import InputError
from tegdesign.sheet import ladders, performance, states
from tegdesign.sheet.section import Facts, Table
from tegdesign.sheet.text import rating_report


@pytest.fixture(scope="module")
def several(ratings):
    return ratings["states"]


def blocks(section, kind):
    return next(block for block in section.blocks if isinstance(block, kind))


@pytest.fixture(scope="module")
def table(several):
    return blocks(states.section_of_states(several), Table)


def column(table, head, which=0):
    """Return what stands under a head, by the name of the state."""
    k = [k for k, name in enumerate(table.heads) if name == head][which]
    return {row[0]: row[k] for row in table.rows}


def test_only_with_named_states(plain):
    assert states.section_of_states(plain) is None
    assert performance.nominal(plain).title == "States"


def test_what_differs_is_told(several):
    told = dict(blocks(states.section_of_states(several), Facts).pairs)
    only = "limits only, no required power or voltage"
    assert told == {
        "winter": "source coefficient 700 W/m^2/K, sink temperature 5 degC",
        "over-fired for a while after the charge": "source temperature 340 degC; for 20 min, so held to the limits for "
        f"a short time; {only}",
        "unplugged": f"load lost, open circuit; {only}",
        "shorted": f"load shorted; {only}",
        "start of the week": "source temperature 60 degC; of the requirements only voltage",
        "other converter": "load efficiency 0.8",
        "by water": "sink surface, temperature 45 degC",
    }


def test_a_reversed_state_is_told(several):
    thaw = {"name": "thaw", "source": {"temperature": "10 degC"}, "sink": {"temperature": "30 degC"}}
    data = several.design.model_dump(exclude_none=True)
    for load, words in ((data["load"], ", which the load blocks"), ({"kind": "matched"}, "")):
        rating = rate(Design.model_validate(data | {"load": load, "states": [thaw]}))
        section = states.section_of_states(rating)
        assert dict(blocks(section, Facts).pairs)["thaw"] == (
            "source temperature 10 degC, sink temperature 30 degC, so the sink is the hotter side, heat and voltage "
            f"are reversed{words}"
        )
        assert float(column(blocks(section, Table), "open [V]")["thaw"]) < 0


def test_one_row_a_state(several, table):
    names = ["rated", *(s.name for s in several.design.states)]
    assert [row[0] for row in table.rows] == names
    for c in several.loaded:
        s = several.state(c.name)
        opened = several.state(c.name if c.load is OPEN else c.opened)
        assert_allclose(float(column(table, "hot junction [degC]")[c.name]), s.T_hot_junction_K - 273.15, atol=0.051)
        assert_allclose(float(column(table, "cold junction [degC]")[c.name]), s.T_cold_junction_K - 273.15, atol=0.051)
        assert_allclose(float(column(table, "open [V]")[c.name]), opened.voltage_V, rtol=1e-3)
        assert_allclose(float(column(table, "current [A]")[c.name]), s.current_A, rtol=1e-3)
        assert_allclose(float(column(table, "power [W]")[c.name]), s.power_W, rtol=1e-3, atol=1e-9)
        assert_allclose(float(column(table, "power to user [W]")[c.name]), s.delivered_power_W, rtol=1e-3, atol=1e-9)
        broken = [k for k in several.failed if k.state in (c.name, c.opened)]
        assert column(table, "")[c.name] == ("MISSED" if broken else "holds")
    assert column(table, "load [V]")["unplugged"] == "-"
    assert {"holds", "MISSED"} == set(column(table, "").values())


def test_room_of_each_joint_is_that_of_its_nearest_limit(several, table):
    service = min(m.service_limit.value for m in several.materials)
    last = min(m.range[1] for m in several.materials) + 60
    for c in several.loaded:
        hot = max(s.T_hot_junction_K for s in several.around(c))
        asked = 553.15 if c.short_time else 513.15  # 280 and 240 degC of the requirements
        assert_allclose(float(column(table, "room [K]")[c.name]), min(service, last, asked) - hot, atol=0.051)
        cold = min(s.T_cold_junction_K for s in several.around(c))
        first = max(m.range[0] for m in several.materials) - 60
        assert_allclose(float(column(table, "room [K]", 1)[c.name]), cold - first, atol=0.051)


def test_held_data(several, table):
    held = column(table, "data held [K]")
    for c in several.loaded:
        own = [d for d in several.data if d.state in (c.name, c.opened)]
        assert_allclose(float(held[c.name]), max(max(d.above_K, d.below_K) for d in own), atol=0.051)
    assert len(set(held.values())) > 3


def test_usual_states_stand_apart(several):
    section = performance.nominal(several)
    assert section.title == "States of the nominal case"
    assert section.blocks[0].heads[1:] == (
        "rated", "open circuit", "most power", "best efficiency", "short circuit"
    )  # fmt: skip


def test_of_many_limits_the_nearest_and_all_missed_are_listed(several):
    rows = performance.limits(several).blocks[0].rows
    assert len(rows) < len(several.checks)
    missed = {(c.name, c.state) for c in several.failed}
    assert missed == {(row[0], row[1]) for row in rows if row[-1] == "MISSED"}
    assert {c.name for c in several.checks} == {row[0] for row in rows}
    for name, state, *_, verdict in rows:
        if verdict == "holds":
            own = [c for c in several.checks if c.name == name]
            assert min(own, key=lambda c: c.margin).state == state
    kept = performance.nearest([c for c in several.checks if c.passed])
    assert len(kept) == len({(c.name, c.sense) for c in kept})


def test_what_the_load_needs_and_gives(several, plain):
    report = rating_report(several).split("RATED STATE")[1].split("TEMPERATURES FROM")[0]
    s, opened = several.rated, several.state("open circuit")
    assert f"power to the user               {s.delivered_power_W:.3f} W, " in report
    share = 100 * s.delivered_power_W / s.power_W
    assert f"{share:.1f} % of the power; the load takes {1e3 * (s.power_W - s.delivered_power_W):.1f} mW" in report
    assert f"voltage to start the converter  {opened.voltage_V:.3f} V (open circuit), at least 2.000 V: holds" in report
    assert f"{30 - opened.voltage_V:.2f} V of room" in report
    assert "power to the user" not in rating_report(plain)


def axes_of():
    return Figure(figsize=(7, 5)).add_axes((0.2, 0.1, 0.7, 0.7))


def test_ladders_of_all_states(several):
    axes = axes_of()
    ladders.ladders(several, axes)
    assert axes.get_xlabel() == "temperature [degC]"
    names = [" ".join(t.get_text().split()) for t in axes.get_yticklabels()]
    assert names == [c.name for c in several.loaded]
    solid = [line for line in axes.get_lines() if line.get_marker() == "o" and line.get_linestyle() == "-"]
    assert_allclose(
        [line.get_xdata() for line in solid],
        [[several.state(c.name).T_hot_junction_K - 273.15, several.state(c.name).T_cold_junction_K - 273.15]
         for c in several.loaded],
        rtol=1e-12,
    )  # fmt: skip
    dashed = [line for line in axes.get_lines() if line.get_linestyle() == "--"]
    assert len(dashed) == len(several.loaded) - 1  # the unplugged one is open itself
    low, _ = axes.get_xlim()
    assert min(line.get_xdata()[0] for line in axes.get_lines()) > low


def test_limits_of_both_joints_are_shaded(several):
    axes = axes_of()
    ladders.ladders(several, axes)
    low, high = axes.get_xlim()
    for row, c in enumerate(several.loaded):
        own = [p for p in axes.patches if row - 0.5 < p.get_y() < row + 0.4]
        hot = [p for p in own if p.get_hatch() is None]
        cold = [p for p in own if p.get_hatch()]
        asked = 280.0 if c.short_time else 240.0
        service = min(m.service_limit.value for m in several.materials) - 273.15
        assert_allclose([p.get_x() for p in hot], [min(asked, service)], rtol=1e-9)
        assert_allclose([p.get_x() + p.get_width() for p in hot], [high], rtol=1e-9)
        first = max(m.range[0] for m in several.materials) - 60 - 273.15
        assert_allclose([p.get_x() for p in cold], [low], rtol=1e-9)
        assert_allclose([p.get_x() + p.get_width() for p in cold], [first], rtol=1e-9, atol=1e-9)


def test_ladders_as_a_file(several, plain, tmp_path):
    ladders.draw_ladders(several, tmp_path / "a.svg")
    ladders.draw_ladders(plain, tmp_path / "b.png")
    assert "over-fired" in (tmp_path / "a.svg").read_text()
    assert (tmp_path / "b.png").read_bytes().startswith(b"\x89PNG")
    with pytest.raises(InputError, match="a figure ends in"):
        ladders.draw_ladders(plain, tmp_path / "c.bmp")


def test_checks_of_a_state_are_its_own(plain):
    assert {k.state for k in states.checks_of(plain, plain.loaded[0])} == {"rated", "open circuit"}
    cold = states.checks_of(plain, plain.loaded[0], states.COLD)
    assert {k.name for k in cold} == {"first data point of the n leg", "first data point of the p leg"}
