"""Every shipped material against numbers frozen at its conversion."""

from pathlib import Path

import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.material import library
from tegdesign.material.check import check
from tegdesign.material.file import read

# Name, column sums, (temperature K, S uV/K, conductivity S/m, kappa W/m/K) of first, middle and last row, and
# (peak zT, its temperature K). The sums change with any single value. Source: the published data sets named
# in each file (source.compilation), copied from the data as handed over; the peaks were worked out there,
# before and apart from this program.
FROZEN = [
    (
        "bismuth-oxyselenide-p",
        (3567, 969.36, 142274, 3.0651),
        [(347, 117.0, 38400, 0.65), (640, 167.11, 18641, 0.4839), (850, 212.0, 12800, 0.408)],
        (1.20, 850),
    ),
    (
        "bismuth-telluride-n-sb0.2",
        (5261, -2310.8, 1008350, 13.199),
        [(301, -171.8, 122800, 1.054), (451, -199.9, 77360, 1.039), (575, -193.5, 59940, 1.346)],
        (1.36, 426),
    ),
    (
        "bismuth-telluride-n-se0.3",
        (2688, -871.5, 486220, 7.9256),
        [(323, -132.2, 107200, 1.33), (473, -153.0, 73550, 1.27), (573, -145.2, 60700, 1.4196)],
        (0.64, 473),
    ),
    (
        "bismuth-telluride-p-sb1.54",
        (2000, 1121.99, 200460, 4.9423),
        [(300, 229.0, 54942, 0.885), (400, 241.93, 37164, 0.9346), (500, 186.74, 30882, 1.19)],
        (1.06, 350),
    ),
    (
        "bismuth-telluride-p-sb1.58",
        (2688, 1262.9, 201637, 6.811),
        [(323, 224.5, 51064, 0.934), (473, 217.8, 27930, 1.115), (573, 155.2, 26064, 1.551)],
        (0.90, 373),
    ),
    (
        "calcium-cobaltite-p",
        (3400, 1200.5, 26076, 10.164),
        [(300, 178.2, 4300, 2.3), (700, 248.0, 5226, 2.012), (1000, 281.0, 6050, 1.79)],
        (0.27, 1000),
    ),
    (
        "calcium-titanate-n",
        (3887, -701.7, 771682, 19.873),
        [(321, -52.0, 339247, 4.273), (740, -132.7, 54840, 2.958), (1016, -200.0, 26000, 2.61)],
        (0.40, 1016),
    ),
    (
        "clathrate-n",
        (4348, -823, 433225, 10.7108),
        [(417, -80.8, 85500, 1.563), (663, -129.8, 55000, 1.506), (810, -143.1, 45500, 1.5258)],
        (0.49, 810),
    ),
    (
        "copper-selenide-p",
        (4250, 993.2, 288806, 6.22),
        [(450, 98.4, 84343, 1.22), (750, 177.7, 38500, 1.0), (1000, 236.84, 21802, 0.868)],
        (1.41, 1000),
    ),
    (
        "germanium-telluride-p",
        (3911, 1199.01, 604675, 11.674),
        [(298, 92.58, 114433, 2.01), (598, 192.9, 82474, 1.617), (773, 213.9, 70103, 1.49)],
        (1.66, 773),
    ),
    (
        "half-heusler-n",
        (6078, -1300.2, 1640800, 39.48),
        [(297, -93.6, 236100, 4.976), (673, -154.4, 174600, 4.174), (1070, -170.0, 147700, 4.35)],
        (1.05, 1070),
    ),
    (
        "half-heusler-p-fenbsb",
        (7500, 1797.73, 2355236, 54.581),
        [(300, 93.72, 590700, 8.32), (800, 195.63, 154300, 4.83), (1200, 246.1, 82946, 4.186)],
        (1.44, 1200),
    ),
    (
        "half-heusler-p-tafesb",
        (4994, 1351.2, 1722338, 35.061),
        [(304, 105.0, 409100, 5.493), (670, 183.6, 162953, 4.135), (970, 224.0, 100700, 3.522)],
        (1.39, 970),
    ),
    (
        "lead-telluride-n",
        (7916, -2036.5, 1195080, 23.08),
        [(310, -66.2, 194500, 3.683), (610, -161.0, 81470, 1.396), (895, -231.1, 27440, 1.27)],
        (1.35, 754),
    ),
    (
        "lead-telluride-p",
        (7912, 2449.7, 1006610, 20.947),
        [(310, 70.3, 200200, 3.377), (609, 217.7, 48540, 1.254), (895, 240.7, 36490, 1.187)],
        (1.73, 804),
    ),
    (
        "magnesium-antimonide-n",
        (2500, -1459.73, 57083, 3.5554),
        [(300, -275.82, 11040, 0.7972), (500, -298.26, 11689, 0.7069), (700, -302.17, 11567, 0.6319)],
        (1.17, 700),
    ),
    (
        "magnesium-silicide-n",
        (4019, -1195.4, 613300, 31.332),
        [(315, -95.7, 108200, 6.277), (570, -171.1, 91230, 4.102), (857, -253.1, 55040, 3.446)],
        (0.88, 857),
    ),
    (
        "magnesium-silicide-tin-n",
        (3300, -1110.58, 713643, 14.034),
        [(300, -136.0, 177000, 2.682), (600, -198.0, 104100, 2.19), (800, -224.48, 74610, 2.266)],
        (1.33, 800),
    ),
    (
        "magnesium-silver-antimonide-p",
        (3840, 1724.2, 528210, 8.722),
        [(309, 187.4, 56860, 0.82), (426, 208.7, 49900, 0.918), (544, 162.6, 81030, 1.273)],
        (1.01, 426),
    ),
    (
        "neodymium-telluride-n",
        (4938, -919.74, 270213, 6.4699),
        [(373, -58.0, 94460, 1.3869), (973, -190.0, 28900, 0.95), (1173, -213.84, 20823, 0.883)],
        (1.26, 1173),
    ),
    (
        "silicon-germanium-n",
        (9935, -2625.6, 673930, 30.363),
        [(315, -109.7, 82260, 2.318), (920, -263.1, 41310, 2.408), (1170, -241.1, 56120, 2.909)],
        (1.31, 1170),
    ),
    (
        "silicon-germanium-p",
        (9940, 2352.5, 628860, 28.524),
        [(325, 110.4, 87340, 2.252), (920, 205.0, 48570, 2.424), (1165, 258.6, 28230, 2.393)],
        (1.03, 1070),
    ),
    (
        "skutterudite-n",
        (6899, -1977.3, 2075300, 31.685),
        [(302, -126.3, 240700, 2.692), (600, -171.2, 160500, 2.589), (847, -194.7, 134200, 2.639)],
        (1.63, 847),
    ),
    (
        "skutterudite-p",
        (6050, 1922.9, 850800, 21.307),
        [(300, 128.1, 93910, 1.973), (550, 183.7, 75080, 1.811), (800, 196.5, 67640, 2.353)],
        (0.98, 700),
    ),
    (
        "tags-85-p",
        (5390, 1580.2, 1109030, 16.432),
        [(325, 99.3, 153100, 1.61), (563, 170.0, 105200, 1.691), (754, 187.5, 84580, 1.639)],
        (1.38, 707),
    ),
    (
        "tetrahedrite-p",
        (2592, 841.2, 109605, 3.5739),
        [(323, 136.4, 16380, 0.6315), (517, 172.6, 23550, 0.716), (715, 194.2, 23875, 0.7934)],
        (0.81, 715),
    ),
    (
        "tin-selenide-p",
        (5234, 3154.94, 34412, 5.2695),
        [(300, 314.57, 2286, 1.016), (573, 392.7, 2460, 0.4969), (873, 310.6, 7413, 0.4149)],
        (1.50, 873),
    ),
    (
        "ytterbium-magnesium-antimonide-p",
        (5983, 1325.33, 143557, 6.0761),
        [(400, 81.5, 27500, 0.81), (800, 182.26, 15441, 0.7365), (1083, 237.0, 12050, 0.71)],
        (1.03, 1083),
    ),
    (
        "ytterbium-manganese-antimonide-p",
        (7257, 1524.15, 242577, 6.7936),
        [(300, 28.2, 43750, 0.72), (773, 173.75, 19060, 0.655), (1173, 238.4, 12520, 0.6883)],
        (1.21, 1173),
    ),
    (
        "zinc-antimonide-p",
        (2363, 978.7, 146342, 5),
        [(323, 146.3, 26580, 0.862), (398, 163.2, 24034, 0.83), (473, 182.3, 22700, 0.805)],
        (0.44, 473),
    ),
]


@pytest.mark.parametrize(("name", "sums", "points", "peak"), FROZEN, ids=[entry[0] for entry in FROZEN])
def test_shipped_values(name, sums, points, peak):
    material = library.find(name)
    s, rho, kappa = material.seebeck_coefficient, material.resistivity, material.thermal_conductivity
    found = (s.temperature.sum(), 1e6 * s.value.sum(), (1 / rho.value).sum(), kappa.value.sum())
    assert_allclose(found, sums, rtol=1e-12)
    for t, uv_per_k, sigma, w_per_m_k in points:
        assert t in s.temperature
        assert_allclose(s(t), uv_per_k * 1e-6, rtol=1e-14)
        assert_allclose(rho(t), 1 / sigma, rtol=1e-14)
        assert_allclose(kappa(t), w_per_m_k, rtol=1e-14)
    table = material.properties()
    best = np.argmax(table["figure_of_merit"])
    assert table["temperature_K"][best] == peak[1]
    assert round(float(table["figure_of_merit"][best]), 2) == peak[0]


def test_frozen_numbers_cover_the_whole_library():
    shipped = {name for name in library.names() if library.find(name).kind == "table"}
    assert shipped == {entry[0] for entry in FROZEN}
    assert len(shipped) == 30


@pytest.mark.parametrize("name", [entry[0] for entry in FROZEN])
def test_shipped_file_is_sound(name, tmp_path):
    path = library.shipped() / f"{name}.toml"
    assert [finding for finding in check(path) if finding.severity == "error"] == []
    material = library.find(name)
    assert material.polarity == ("n" if "-n" in name else "p")
    assert material.doi
    assert material.source
    assert material.verification
    assert material.compilation
    assert material.hazards
    assert material.density.basis
    assert material.service_limit.basis
    content = read(path)
    content.write(tmp_path / path.name)
    assert read(tmp_path / path.name) == content


def test_shipped_words_that_must_not_get_lost():
    # one fact of each sort, as it stood in the data handed over
    skutterudite = library.find("skutterudite-n")
    assert skutterudite.service_limit.value == 850
    assert skutterudite.service_limit.basis == "coated or sealed (memory)"
    assert skutterudite.air_limit is not None
    assert skutterudite.air_limit.value == 653
    assert "10.3390/cryst13060880" in skutterudite.air_limit.basis
    assert "USE WITH CARE" in library.find("tin-selenide-p").warnings[0]
    assert "COMPOSITION DOUBTFUL" in library.find("zinc-antimonide-p").warnings[0]
    assert set(library.find("tin-selenide-p").hazard_tags) == {"lead", "cadmium", "selenium"}
    assert library.find("calcium-titanate-n").hazard_tags == ()
    assert library.find("half-heusler-p-tafesb").density.value == 10700


def test_default_uncertainty_is_the_round_robin():
    # Alleno et al. 2015, Rev. Sci. Instrum. 86, 011301 (volume from memory): S 6 %, rho 8 %, kappa 11 %
    material = library.find("lead-telluride-n")
    assert material.uncertainty == (0.06, 0.08, 0.11)
    assert "(volume from memory)" in material.uncertainty_basis


def test_shipped_folder_holds_nothing_else():
    assert {path.suffix for path in Path(library.shipped()).iterdir()} == {".toml"}
