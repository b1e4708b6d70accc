"""Every caution: a design or state that triggers it, and one that does not."""

import importlib.util
from dataclasses import replace
from pathlib import Path

import pytest

from tegdesign.design.caution import cautions
from tegdesign.design.caution.rules import RULES
from tegdesign.design.rate import rate
from tegdesign.design.rating import DataUse
from tegdesign.material.material import Stated

_SPEC = importlib.util.spec_from_file_location("oven", Path(__file__).with_name("oven.py"))
assert _SPEC
assert _SPEC.loader
oven = importlib.util.module_from_spec(_SPEC)
_SPEC.loader.exec_module(oven)
design = oven.design
found = oven.found
with_states = oven.with_states
with_design = oven.with_design
with_materials = oven.with_materials


@pytest.fixture(scope="module")
def base():
    return rate(design())


def test_ids_are_unique_in_kebab_case_and_all_defer_to_local_codes(base):
    many = with_states(base, open_circuit_voltage_V=200.0, T_hot_junction_K=900.0, T_cold_face_K=280.0)
    listed = cautions(many)
    assert len({c.id for c in listed}) == len(listed) > 8
    for c in listed:
        assert c.id == c.id.lower().replace(" ", "-").replace("_", "-")
        assert c.title
        assert c.value
        assert c.limit
        assert c.source
        assert c.text.endswith("Local codes and licensed practice decide.")


def test_every_rule_is_listed():
    assert len(set(RULES)) == len(RULES) == 26


# IEC 62368-1 table 42, metal, TS1, 25 degC air: 48, 51, 60 and 70 degC (321.15, 324.15, 333.15, 343.15 K).
@pytest.mark.parametrize("side", ["hot", "cold"])
@pytest.mark.parametrize(
    ("face", "exceeded"), [(321.0, 0), (322.15, 1), (325.15, 2), (334.15, 3), (344.15, 4)]
)
def test_touchable_face(base, side, face, exceeded):
    other = "cold" if side == "hot" else "hot"
    rating = with_states(base, **{f"T_{side}_face_K": face, f"T_{other}_face_K": 300.0})
    hits = found(rating)
    assert f"touchable-{other}-face" not in hits
    caution = hits.get(f"touchable-{side}-face")
    assert (caution is not None) == (exceeded > 0)
    if caution:
        assert caution.text.count(" for contact of ") == exceeded
        passed = ("48.0 degC", "51.0 degC", "60.0 degC", "70.0 degC")[exceeded - 1]
        assert f"{passed} for contact of" in caution.text
        assert "by 1.0 K" in caution.text  # over the highest limit passed
        assert "IEC 62368-1" in caution.source
        assert "ISO 13732-1" in caution.source


def test_touchable_face_names_the_hottest_state(base):
    rating = with_states(base, "open circuit", T_hot_face_K=480.0)
    assert found(rating)["touchable-hot-face"].value == "206.9 degC (480.0 K) (open circuit)"


@pytest.mark.parametrize(("face", "warned"), [(292.15, True), (293.65, False)])
def test_condensation(base, face, warned):
    hits = found(with_states(base, T_cold_face_K=face))
    assert ("condensation" in hits) == warned
    if warned:
        assert "1.0 K below a room" in hits["condensation"].text


# 35 V d.c. wet (IEC 61201), 60 V touchable in dry places (IEC 60204-1), 120 V SELV (IEC 61558-1).
@pytest.mark.parametrize(("voltage", "limits"), [(34.9, 0), (35.1, 1), (60.1, 2), (120.1, 3)])
def test_open_circuit_voltage(base, voltage, limits):
    rating = with_states(
        with_states(base, open_circuit_voltage_V=1.0), "open circuit", open_circuit_voltage_V=voltage
    )
    caution = found(rating).get("open-circuit-voltage")
    assert (caution is not None) == (limits > 0)
    if caution:
        assert caution.text.count(" by ") == limits
        assert caution.value == ("35.10 V", "60.10 V", "120.1 V")[limits - 1] + " (open circuit)"
        highest = ("35 V", "60 V", "120 V")[limits - 1]
        assert f"{highest} for" in caution.text
        assert "by 0.1000 V" in caution.text


@pytest.mark.parametrize(("current", "warned"), [(9.9, False), (10.1, True)])
def test_short_circuit_current(base, current, warned):
    hits = found(with_states(base, "short circuit", current_A=current))
    assert ("short-circuit-current" in hits) == warned
    if warned:
        assert hits["short-circuit-current"].value == "10.10 A (short circuit)"


# 1.4 mm x 0.3 mm of copper: 20 A/mm2 are 8.4 A; two strings share the current
@pytest.mark.parametrize(("current", "strings", "warned"), [(8.3, 1, False), (8.5, 1, True), (8.5, 2, False)])
def test_electrode_current_density(base, current, strings, warned):
    module = base.design.module.model_copy(update={"modules_in_parallel": strings})
    rating = replace(base, design=base.design.model_copy(update={"module": module}))
    hits = found(with_states(rating, current_A=current))
    assert ("electrode-current-density" in hits) == warned
    if warned:
        assert hits["electrode-current-density"].value.startswith("20.24 A/mm2")


@pytest.mark.parametrize("thickness", ["0 mm"])
def test_no_electrodes_no_current_density(base, thickness):
    rating = with_design(base, stack={"electrode_thickness": thickness})
    assert "electrode-current-density" not in found(with_states(rating, current_A=1e4))


@pytest.mark.parametrize(("density", "warned"), [(4.9e6, False), (5.1e6, True)])
def test_leg_current_density(base, density, warned):
    rating = with_states(base, "rated", current_density_p_A_per_m2=density)
    assert "leg-current-density" not in found(with_states(base, "short circuit", current_density_n_A_per_m2=9e6))
    hits = found(rating)
    assert ("leg-current-density" in hits) == warned
    if warned:
        assert hits["leg-current-density"].value == "5.100 A/mm2 (rated)"


@pytest.mark.parametrize(("hot", "warned"), [(489.9, False), (490.1, True), (499.9, True), (500.1, False)])
def test_near_service_limit(base, hot, warned):
    rating = with_materials(base, service_limit=Stated(500.0, "our furnace test"))
    hits = found(with_states(rating, T_hot_junction_K=hot))
    for leg in "np":
        assert (f"near-service-limit-{leg}" in hits) == warned
        assert (f"over-service-limit-{leg}" in hits) == (hot > 500)
    if warned:
        assert f"{500 - hot:.1f} K left" in hits["near-service-limit-n"].value


@pytest.mark.parametrize(("rise", "warned"), [(4.9, False), (5.1, True)])
def test_loss_of_load(base, rise, warned):
    rated = with_states(base, T_hot_junction_K=430.0)
    hits = found(with_states(rated, "open circuit", T_hot_junction_K=430.0 + rise))
    assert ("loss-of-load" in hits) == warned
    if warned:
        assert hits["loss-of-load"].value.startswith("5.1 K hotter")


def test_coolant_loss(base):
    # both service limits are 523 K; a source of 200 degC cannot bring more
    assert "coolant-loss" not in found(base)
    hot = {"kind": "film", "temperature": "260 degC", "coefficient": "900 W/m2/K"}
    assert found(with_design(base, source=hot))["coolant-loss"].value == "260.0 degC (533.1 K)"
    heat = {"kind": "heat", "heat": "60 W"}
    assert "no bound" in found(with_design(base, source=heat))["coolant-loss"].value
    # 60 W over a leak of 0.5 W/K lift the source by 120 K over 293.15 K, less than the limits
    leaking = heat | {"leak_conductance": "0.5 W/K"}
    assert "coolant-loss" not in found(with_design(base, source=leaking))
    # 0.25 W/K: by 240 K to 533.15 K
    leaking = heat | {"leak_conductance": "0.25 W/K"}
    assert found(with_design(base, source=leaking))["coolant-loss"].value == "260.0 degC (533.1 K)"


def test_air_limit(base):
    assert not {"air-limit-n", "air-limit-p"} & set(found(with_materials(base, air_limit=None)))
    rating = with_states(
        with_materials(base, air_limit=Stated(450.0, "thermogravimetry")), T_hot_junction_K=449.0
    )
    assert not {"air-limit-n", "air-limit-p"} & set(found(rating))
    hits = found(with_states(rating, "open circuit", T_hot_junction_K=452.0))
    for leg in "np":
        assert "2.0 K above" in hits[f"air-limit-{leg}"].text
        assert "thermogravimetry" in hits[f"air-limit-{leg}"].limit


def test_data_held(base):
    none = replace(base, data=tuple(replace(d, below_K=0.0, above_K=0.0) for d in base.data))
    assert not {"data-held-n", "data-held-p"} & set(found(none))
    uses = (
        DataUse("p", "some-p", "rated", 300.0, 500.0, 0.0, 12.0),
        DataUse("p", "some-p", "open circuit", 300.0, 500.0, 4.0, 25.0),
        DataUse("n", "some-n", "rated", 300.0, 600.0, 0.0, 0.0),
    )
    hits = found(replace(base, data=uses))
    assert "data-held-n" not in hits
    assert hits["data-held-p"].value == (
        "rated 12.0 K above; open circuit 25.0 K above; open circuit 4.0 K below"
    )
    assert hits["data-held-p"].limit == "some-p is known from 300.0 K to 500.0 K"


def test_losses_off(base):
    assert "losses-off" not in found(base)
    off = found(with_design(base, losses={"contacts": False, "radiation": False}))["losses-off"]
    assert off.value == "radiation, contacts"


@pytest.mark.parametrize(("efficiency", "warned"), [(0.149, False), (0.151, True)])
def test_efficiency_implausible(base, efficiency, warned):
    assert (
        "efficiency-implausible" in found(with_states(base, "best efficiency", efficiency=efficiency))
    ) == warned


@pytest.mark.parametrize(("share", "warned"), [(1.049, False), (1.051, True), (None, False)])
def test_ceiling_passed(base, share, warned):
    rating = replace(base, ceiling=replace(base.ceiling, share_reached=share))
    assert ("ceiling-passed" in found(rating)) == warned


# largest standard deviations of laboratories: 27.2 % power, 25.9 % efficiency (Ziolkowski et al. 2022)
@pytest.mark.parametrize(
    ("require", "warned"),
    [
        ({}, "no required power"),
        ({"power": "8 W"}, ""),  # 10.2 W are 27.5 % above
        ({"power": "8.1 W"}, "power 25.9 % above the required 8.100 W"),
        ({"power": "12 W"}, "power 15.0 % below the required 12.00 W"),
        ({"power": "8 W", "efficiency": 0.04}, "efficiency 25.0 % above the required 4.0 %"),
        ({"efficiency": 0.039}, ""),  # 5 % are 28 % above
    ],
)
def test_measured_spread(base, require, warned):
    rating = with_states(with_design(base, require=require), "rated", delivered_power_W=10.2, efficiency=0.05)
    caution = found(rating).get("measured-spread")
    assert (caution is not None) == bool(warned)
    if caution:
        assert warned in caution.value
        assert "doi 10.3390/ma15051627" in caution.source


def test_clamping(base):
    # 16.4 mm square: 1 MPa is 269 N, 1.5 MPa 403 N
    caution = found(base)["clamping"]
    assert caution.value == "269 N to 403 N on each module"
    assert caution.source == "common practice, no source"
    assert "0.025 mm, or each" not in caution.text
    soldered = {"hot": {"interface": "0 m2 K/W"}, "cold": {"interface": "0 m2 K/W"}}
    assert "clamping" not in found(with_design(base, stack=soldered))
    module = base.design.module.model_copy(update={"modules_in_series": 2})
    two = replace(base, design=base.design.model_copy(update={"module": module}))
    assert "must agree in height within 0.025 mm" in found(two)["clamping"].text


@pytest.mark.parametrize(("length", "warned"), [("6.9 mm", False), ("7.1 mm", True)])
def test_slender_legs(base, length, warned):
    module = {
        "columns": 6,
        "rows": 6,
        "leg_length": length,
        "leg_side_n": "2 mm",
        "leg_side_p": "1.4 mm",
        "pitch": "2.4 mm",
    }
    hits = found(with_design(base, module=module))
    assert ("slender-legs" in hits) == warned
    if warned:
        assert hits["slender-legs"].value == "5.07 times as long as wide (7.1 mm by 1.4 mm)"


@pytest.mark.parametrize(
    ("tags", "toxic", "reactive"),
    [
        (("copper",), "", ""),
        (("lead", "toxic-vapour", "copper"), "lead, toxic-vapour", ""),
        (("burning-dust",), "", "burning-dust"),
        (("cobalt", "reacts-with-moisture"), "cobalt", "reacts-with-moisture"),
        (("thallium",), "thallium", ""),  # a tag that the library does not have
    ],
)
def test_hazards(base, tags, toxic, reactive):
    hits = found(with_materials(base, hazard_tags=tags, hazards="harmful (H302)"))
    for leg in "np":
        for name, value in ((f"toxic-elements-{leg}", toxic), (f"reactive-material-{leg}", reactive)):
            assert (name in hits) == bool(value)
            if value:
                assert hits[name].value == value
        words = [
            hits[name].text for name in hits if name in (f"toxic-elements-{leg}", f"reactive-material-{leg}")
        ]
        assert sum("harmful (H302)" in text for text in words) == bool(words)  # said once


def test_words_of_care(base):
    assert not {"material-care-n", "material-care-p"} & set(found(base))
    marked = found(with_materials(base, notes=("COMPOSITION DOUBTFUL: half of it", "all is well")))
    assert marked["material-care-p"].value == "COMPOSITION DOUBTFUL"
    assert "all is well" not in marked["material-care-p"].text
    computed = found(with_materials(base, warnings=("x-bands: computed from bands, not measured; unproven",)))
    assert computed["material-care-p"].value == "computed from bands, not measured"
    warned = found(with_materials(base, warnings=("USE WITH CARE: phase change",)))["material-care-n"]
    assert (warned.value, warned.text[:28]) == ("USE WITH CARE", "USE WITH CARE: phase change.")
