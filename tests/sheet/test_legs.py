"""What the legs are made of: doping, grade and grains to be ordered, carriers and lattice apart."""

import json

import numpy as np
import pytest
from numpy.testing import assert_allclose
from scipy.integrate import quad

from tegdesign.design.making import Choice, Making
from tegdesign.design.parts import Made
from tegdesign.sheet import legs
from tegdesign.sheet.markdown import sheet_markdown
from tegdesign.sheet.text import rating_report, section_text

N = "electrons 1e+19 (cold) to 2e+19 (hot) 1/cm3"
P = "holes 4e+19 1/cm3, grains 800 nm"


def flat(text):
    return " ".join(text.split())


def test_what_must_be_ordered(ratings):
    n, p = ratings["computed"].materials
    assert legs.order(n).startswith(N)
    assert legs.order(n).endswith(", straight between 50.0 degC and 250.0 degC")
    assert legs.order(p) == P
    assert [legs.order(m) for m in ratings["plain"].materials] == [None, None]
    report = flat(rating_report(ratings["computed"]))
    assert f"Order lead-telluride-n-bands with {N}" in report
    assert f"Order lead-telluride-p-bands with {P}." in report
    sheet = sheet_markdown(ratings["computed"])
    assert f"| to be made with | {P} |" in sheet
    assert "| computed | 26.9 degC (300.0 K) to" in sheet
    assert "themselves computed from bands (n and p leg)" in sheet
    assert "Order " not in rating_report(ratings["plain"])
    assert "computed from measured material data" in sheet_markdown(ratings["plain"])


def test_computed_materials_are_a_caution(ratings):
    hits = {c.id: c for c in ratings["computed"].cautions}
    for leg in "np":
        assert hits[f"material-care-{leg}"].value == "computed from bands, not measured"
    assert "material-care-n" not in {c.id for c in ratings["plain"].cautions}


def test_json_tells_how_they_are_made(ratings):
    n, p = json.loads(json.dumps(ratings["computed"].to_dict()))["materials"]
    assert (n["kind"], n["doping_per_m3"], n["doping_hot_per_m3"]) == ("bands", 1e25, 2e25)
    assert_allclose(n["graded_between_K"], [323.15, 523.15], rtol=1e-12)
    assert_allclose([p["doping_per_m3"], p["grain_size_m"]], [4e25, 8e-7], rtol=1e-12)
    assert p["doping_hot_per_m3"] is None
    assert "doping_per_m3" not in ratings["plain"].to_dict()["materials"][0]


@pytest.mark.parametrize("name", ["plain", "computed"])
def test_carriers_and_lattice_add_up_to_the_mean_over_the_rated_leg(ratings, name):
    rating = ratings[name]
    cold, hot = rating.rated.T_cold_junction_K, rating.rated.T_hot_junction_K
    for c, m in zip(rating.conduction, rating.materials, strict=True):
        # quad of scipy, on the same curves
        mean = quad(lambda t, m=m: float(m.thermal_conductivity(t)), cold, hot, limit=200)[0] / (hot - cold)
        assert_allclose(c.thermal_conductivity_W_per_m_K, mean, rtol=2e-5)
        t = np.linspace(cold, hot, 4001)
        carriers = np.trapezoid(m.electronic_thermal_conductivity(t), t) / (hot - cold)
        assert_allclose(c.electronic_thermal_conductivity_W_per_m_K, carriers, rtol=2e-4)
        parts = c.electronic_thermal_conductivity_W_per_m_K + c.lattice_thermal_conductivity_W_per_m_K
        assert_allclose(parts, mean, rtol=2e-5)
        assert c.basis == m.electronic_basis
    text = flat(section_text(legs.conduction(rating)))
    assert "[W/m/K]" in text
    assert flat(rating.conduction[0].basis) in text
    assert rating.to_dict()["conduction"][1]["leg"] == "p"


def test_heat_past_the_legs_stands_beside_the_efficiency(plain):
    lines = rating_report(plain).split("RATED STATE")[1].split("\n\n")[0].splitlines()
    told = {line[2:33].strip(): line[33:].strip() for line in lines if line.startswith("  ")}
    s = plain.rated
    assert_allclose(float(told["heat past the legs"].split()[0]), s.bypass_heat_W, rtol=1e-3)
    share = 100 * s.bypass_heat_W / s.heat_in_W
    assert_allclose(float(told["its share of the heat drawn"].split()[0]), share, atol=0.051)
    assert list(told).index("its share of the heat drawn") - list(told).index("efficiency") == 3


def test_words_of_given_heat_fit_every_source(ratings):
    for name in ("tiny", "computed"):  # a leak, a glowing absorber
        rating = ratings[name]
        report = rating_report(rating)
        lost = rating.design.source.given_heat - rating.rated.heat_in_W
        line = next(line for line in report.splitlines() if "heat lost before the module" in line)
        number, unit = line.split()[-2:]
        assert_allclose(float(number) * {"mW": 1e-3, "W": 1.0}[unit], lost, rtol=1e-3)
        assert "leak of the source" not in report


def making(grade, dopings=(2e25, None), free=2.5e25, gained=0.5):
    choice = Choice("n", "some-n", *dopings, free, 4e-7 if grade is None else None)
    even = None if grade is None else 10.0 - grade
    return Making({"n": Made()}, (choice,), 10.0, 10.0 - gained, even)


def test_materials_made_for_a_brief():
    text = flat(section_text(legs.making(making(None))))
    assert text.startswith("MATERIALS MADE FOR THIS BRIEF")
    assert "n some-n 2e+19 1/cm3 even 2.5e+19 1/cm3 400 nm" in text
    assert "gains 500.0 mW (5.26 %), before rounding." in text
    assert "10.00 W at the leads, doped for the best mean zT 9.500 W" in text
    assert "grade" not in text
    nothing = flat(section_text(legs.making(making(0.0))))
    assert "A grade along the legs gains nothing (0 W)" in nothing
    graded = flat(section_text(legs.making(making(0.2, (2e25, 4e25)))))
    assert "2e+19 1/cm3 4e+19 1/cm3 2.5e+19 1/cm3 as filed" in graded
    assert "The grade along the legs gains 200.0 mW (2.04 %) of it." in graded
    grains = flat(section_text(legs.making(making(None, (None, None), None))))
    assert "as filed even - 400 nm" in grains
    assert "as in their files 9.500 W" in grains
