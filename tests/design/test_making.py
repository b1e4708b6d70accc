"""Materials made for a brief: doping, grade and grain size chosen, against plain scans of the same numbers."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.design.brief import Brief
from tegdesign.design.compare import compare
from tegdesign.design.rate import rate
from tegdesign.design.size import size
from tegdesign.errors import InputError
from tegdesign.material.bands.crystal import Doping
from tegdesign.material.bands.optimum import best_doping, power_factor
from tegdesign.material.library import find

# A plate between two films, our own invention.
JOB = {
    "source": {"kind": "film", "temperature": "560 degC", "coefficient": "800 W/m^2/K"},
    "sink": {"kind": "film", "temperature": "40 degC", "coefficient": "3000 W/m^2/K"},
    "limits": {"footprint": ["60 mm", "60 mm"]},
}


def brief(**materials):
    use = {"n": "lead-telluride-n-bands", "p": "lead-telluride-p-bands"} | materials
    return Brief.model_validate(JOB | {"materials": {k: v for k, v in use.items() if v is not None}})


@pytest.fixture(scope="module")
def free():
    return size(brief(make_n={"free": ["doping"]}, make_p={"free": ["doping"]}))


def test_no_scanned_doping_is_better(free):
    # each doping moved by 25 % both ways, with its own best geometry: free answers, before rounding
    n, p = (m.doping.cold for m in free.rating.materials)
    for factor_n, factor_p in ((1.25, 1.0), (0.8, 1.0), (1.0, 1.25), (1.0, 0.8)):
        making = {
            f"make_{side}": {"doping": f"{doping * factor} 1/m^3"}
            for side, doping, factor in (("n", n, factor_n), ("p", p, factor_p))
        }
        other = size(brief(**making))
        assert other.objective_before_rounding < free.objective_before_rounding * 1.0005


def test_gain_over_the_best_figure_of_merit_is_that_of_sizing_with_it(free):
    choices = free.making.choices
    making = {f"make_{c.leg}": {"doping": f"{c.doping_for_figure_of_merit_per_m3} 1/m^3"} for c in choices}
    other = size(brief(**making))
    assert_allclose(other.objective_before_rounding, free.making.power_with_best_figure_of_merit_W, rtol=2e-3)
    assert free.making.power_gained_W > 0
    assert_allclose(free.objective_before_rounding, free.making.power_W, rtol=2e-3)


def test_design_alone_reproduces_the_numbers(free, tmp_path):
    free.design.save(tmp_path / "design.toml")
    again = rate(tmp_path / "design.toml")
    assert again.rated.power_W == free.rating.rated.power_W
    assert [m.doping for m in again.materials] == [m.doping for m in free.rating.materials]


def test_bounds_of_the_brief_hold():
    bounded = size(brief(make_n={"free": ["doping"], "doping_bounds": ["2e19 1/cm^3", "4e19 1/cm^3"]}))
    assert_allclose(bounded.rating.materials[0].doping.cold, 2e25, rtol=1e-3)  # the best is below


def test_grade_gains_or_is_left_out():
    graded = size(brief(make_n={"free": ["doping", "grade"]}, make_p={"free": ["doping", "grade"]}))
    gained = graded.making.power_gained_by_grade_W
    assert gained >= 0
    hot = [choice.doping_hot_per_m3 for choice in graded.making.choices]
    assert (gained == 0) == (hot == [None, None])
    if gained:
        assert all(h is None or h > c.doping_per_m3 for h, c in zip(hot, graded.making.choices, strict=True))


def test_grain_size_is_chosen_within_its_bounds():
    material = find("half-heusler-p-fenbsb-bands")
    chosen = size(brief(p="half-heusler-p-fenbsb-bands", make_p={"free": ["grain size"]}))
    grains = chosen.making.choices[0].grains
    finer = chosen.making.choices[0].grain_size_m < material.grain_size
    lattice, filed = (getattr(grains, f"lattice_thermal_conductivity_{end}W_per_m_K") for end in ("", "as_filed_"))
    assert finer == (lattice < filed)
    assert finer == (grains.mobility_m2_per_V_s < grains.mobility_as_filed_m2_per_V_s)
    low, high = material.grain_bounds
    grain = chosen.rating.materials[1].grain_size
    assert low <= grain <= high
    plain = size(brief(p="half-heusler-p-fenbsb-bands"))
    assert chosen.objective_before_rounding >= plain.objective_before_rounding * 0.999


def test_compare_makes_each_material(free):
    ranks = compare(brief(n=None, p=None, make_n={"free": ["doping"]}, make_p={"free": ["doping"]})).ranks
    same = next(r for r in ranks if (r.n, r.p) == ("lead-telluride-n-bands", "lead-telluride-p-bands"))
    assert all(r.n.endswith("-bands") and r.doping_n_per_m3 for r in ranks)
    assert_allclose(same.power_W, free.objective_before_rounding, rtol=5e-3)


def test_table_cannot_be_made_otherwise():
    with pytest.raises(InputError, match=r"materials.make_n: 'lead-telluride-n' is a table of one sample"):
        size(brief(n="lead-telluride-n", make_n={"free": ["doping"]}))
    with pytest.raises(InputError, match="outside its bounds"):
        size(brief(make_n={"doping": "1e23 1/cm^3"}))
    with pytest.raises(InputError, match="outside its bounds"):
        size(brief(make_n={"free": ["doping"], "doping_bounds": ["1e10 1/cm^3", "2e19 1/cm^3"]}))
    with pytest.raises(InputError, match="has no grains in its model"):
        size(brief(n="magnesium-silicide-tin-n-bands", make_n={"free": ["grain size"]}))


@pytest.mark.parametrize("span", [(600.0, 600.0), (330.0, 780.0)])
def test_best_doping_against_a_fine_scan(span):
    material = find("lead-telluride-p-bands")
    doping, best = best_doping(material, *span)
    t = np.linspace(*span, 201) if span[1] > span[0] else np.array([span[0]])
    scan = np.geomspace(*material.doping_bounds, 60)
    means = [np.mean(material.made(Doping(float(d))).figure_of_merit(t)) for d in scan]
    assert best >= max(means) * (1 - 2e-3)
    assert abs(np.log(doping / scan[np.argmax(means)])) < 1.5 * np.log(scan[1] / scan[0])


def test_best_doping_for_power_factor_is_heavier():
    material = find("magnesium-silicide-tin-n-bands")
    assert best_doping(material, 600.0, 600.0, power_factor)[0] > best_doping(material, 600.0, 600.0)[0]


def test_what_is_given_stays_given():
    # the other number of the same leg is free
    chosen = size(
        brief(p="half-heusler-p-fenbsb-bands", make_p={"free": ["grain size"], "doping": "1.6e21 1/cm^3"})
    )
    assert_allclose(chosen.design.materials.make_p.doping, 1.6e27)
    assert_allclose(chosen.rating.materials[1].doping.cold, 1.6e27)
    assert_allclose(chosen.objective, chosen.objective_before_rounding, rtol=0.05)


def test_partner_may_be_a_table():
    chosen = size(brief(n="lead-telluride-n", make_p={"free": ["doping"]}))
    assert [choice.leg for choice in chosen.making.choices] == ["p"]
    assert chosen.design.materials.make_n is None
