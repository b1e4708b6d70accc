"""Ideal pairs of the library against forecasts of others and against devices built and measured.

Ideal: junctions held at the stated temperatures, no joints, metal, plates or bypass; best efficiency over load and
area ratio. A device of the same materials must stay below that, and both below Carnot. Where the device has other
materials than the library, the comparison is widened and says so.
"""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.material.library import find
from tegdesign.module.module import Modules
from tegdesign.system.law import law
from tegdesign.system.load import BestEfficiency
from tegdesign.system.operating_point import operating_point


def ideal_efficiency(n, p, hot, cold, held):
    """Return the best efficiency of a pair; its data may be held outside their range by ``held`` kelvin, no more."""
    pair = [find(n), find(p)]
    for m in pair:
        assert max(float(v) for v in m.outside(cold, hot)) <= held
    ratio = np.exp(np.linspace(-1.6, 1.6, 129))  # of the areas n to p
    ones, first = np.ones(ratio.size), np.zeros(ratio.size, dtype=np.intp)
    side_n, side_p = 1.5e-3 * ratio**0.25, 1.5e-3 * ratio**-0.25
    m = Modules(pair, first, first + 1, 2e-3 * ones, side_n, side_p, 5e-3 * ones, 1.0, side_n**2 + side_p**2)
    ends = (law(1.0, 0.0, t, ones) for t in (hot, cold))
    efficiency = operating_point(m, *ends, BestEfficiency().law(ones, ones)).efficiency
    assert 0 < np.argmax(efficiency) < ratio.size - 1
    return efficiency.max()


def test_lead_telluride_module_forecast():
    """Hu et al. 2016, Energy Environ. Sci. 9, 517, doi 10.1039/C5EE02979A: 12.2 % by finite elements, 873/303 K.

    Same legs as our files (one paper). Assumed: their forecast leaves out joints and bypass; areas free. The data
    begin at 310 K, held below. Tolerance 3 %: reading of their curves into the tables.
    """
    assert_allclose(ideal_efficiency("lead-telluride-n", "lead-telluride-p", 873.0, 303.0, 7.0), 0.122, rtol=0.03)


def test_silicon_germanium_between_two_cold_ends():
    """El-Genk, Saber, Caillat 2003, Energy Convers. Manage. 44, 1755: 5.03 % (973/573 K), 7.39 % (973/300 K).

    Their SiGe is the conventional alloy, ours nanostructured, with a zT about a third higher (memory): our values are a
    third above theirs (so 8 % is out of reach), but what the colder sink brings must agree within 8 %.
    Data begin at 325 K, held below.
    """
    small, large = (
        ideal_efficiency("silicon-germanium-n", "silicon-germanium-p", 973.0, cold, 25.0) for cold in (573.0, 300.0)
    )
    assert_allclose(large / small, 7.39 / 5.03, rtol=0.08)
    for ours, theirs in ((small, 0.0503), (large, 0.0739)):
        assert theirs < ours < 1.45 * theirs


# name: pair, hot, cold [K], kelvin held, lowest and highest measured efficiency, most that ideal may be above it.
DEVICES = {
    # Space generator of 572 SiGe couples, 1273/573 K, 285 W of 4400 to 4500 W: 6.2 to 6.8 % (ESA page on the Ulysses
    # power source; Bennett et al. 2006 (memory)). Heat lost by insulation and frame counts in the measured value, the
    # alloy is the conventional one; data held 108 K at the hot end. A bound, hence twice.
    "space generator": ("silicon-germanium-n", "silicon-germanium-p", 1273.0, 573.0, 108.0, 0.062, 0.068, 2.0),
    # Skutterudite modules, 600/50 degC: 7.2 %, with better materials 8.5 % (J. Electron. Mater. 2016,
    # doi 10.1007/s11664-016-4849-y), of peak zT 1.0 n and 0.75 p; ours reach 1.6 and 1.0, held 73 K. A bound.
    "skutterudite": ("skutterudite-n", "skutterudite-p", 873.15, 323.15, 74.0, 0.072, 0.085, 2.0),
    # Mg3Sb2 / MgAgSb: 7.3 %, hot side 593 K (memory), cold side assumed 298 K (Liu et al. 2021, Joule 5, 1196,
    # doi 10.1016/j.joule.2021.03.017). Near relatives of our files; p data held 49 K.
    "magnesium": ("magnesium-antimonide-n", "magnesium-silver-antimonide-p", 593.0, 298.0, 50.0, 0.072, 0.073, 1.25),
}  # fmt: skip


@pytest.mark.parametrize("device", DEVICES)
def test_measured_device_lies_between_nothing_and_the_ideal_pair(device):
    *pair, hot, cold, held, low, high, most = DEVICES[device]
    ideal = ideal_efficiency(*pair, hot, cold, held)
    assert high < ideal < most * low
    assert ideal < 1 - cold / hot


def test_cascade_with_lead_telluride():
    """Jood, Ohta, Yamamoto, Kanatzidis 2018, Joule 2, 1339, doi 10.1016/j.joule.2018.04.025: 12 % over 590 K.

    A cascade of nanostructured PbTe on a colder stage; hot side 873 K assumed. Here PbTe alone does the whole span,
    without losses, held 27 K at the cold end: what the second stage brings and the losses take nearly cancel. 10 %.
    """
    assert_allclose(ideal_efficiency("lead-telluride-n", "lead-telluride-p", 873.0, 283.0, 27.0), 0.12, rtol=0.1)


def test_module_near_room_temperature():
    """Liu et al. 2022, Nat. Commun. 13, 1120, doi 10.1038/s41467-022-28798-4: about 2.8 % over 95 K.

    393/298 K assumed. Their n leg Mg3.2Bi1.5Sb0.5 is better than our magnesium-antimonide-n near room temperature, so
    our ideal pair only comes as far as their module with its losses: comparison within 10 %, no bound. p held 11 K.
    """
    ideal = ideal_efficiency("magnesium-antimonide-n", "magnesium-silver-antimonide-p", 393.0, 298.0, 11.0)
    assert_allclose(ideal, 0.028, rtol=0.1)
