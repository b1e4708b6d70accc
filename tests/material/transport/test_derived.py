import numpy as np
import pytest
from numpy.testing import assert_allclose

from tegdesign.errors import InputError
from tegdesign.material.transport.constants import SEEBECK_UNIT
from tegdesign.material.transport.derived import (
    level_from_seebeck,
    quality_factor,
    single_band,
    weighted_mobility,
)
from tegdesign.material.transport.fermi import fermi_integral


@pytest.mark.parametrize("exponent", [-1.2, -0.5, 0.0, 0.4, 1.5])
def test_level_and_seebeck_coefficient_belong_together(exponent):
    level = np.concatenate([np.linspace(-60, 60, 121), [300.0, 3000.0]]).reshape(3, 41)
    seebeck = single_band(level, exponent)[1] * SEEBECK_UNIT
    assert_allclose(level_from_seebeck(-seebeck, exponent), level, rtol=1e-9, atol=1e-9)


# Formulae of one parabolic band by Fermi integrals, as in A5 of the published checks.
@pytest.mark.parametrize("exponent", [-0.5, 0.0, 1.5])
def test_single_band_equals_fermi_integrals(exponent):
    level, p = np.linspace(-10, 20, 7), exponent + 1.5
    f = [fermi_integral(p - 1 + k, level) * (p + k) for k in range(3)]
    conductivity, s, lorenz = single_band(level, exponent)
    assert_allclose(conductivity, f[0], rtol=1e-10)
    assert_allclose(s, f[1] / f[0] - level, rtol=1e-9)
    assert_allclose(lorenz, f[2] / f[0] - (f[1] / f[0]) ** 2, rtol=1e-8)


# zT = s^2 / (l + 1/(B F_0)), Kang and Snyder 2017, arXiv 1710.06896.
def test_quality_factor_and_level_fix_the_figure_of_merit():
    s, rho, t, lattice = 210e-6, 1.4e-5, 350.0, 0.9
    reduced, seebeck, lorenz = single_band(level_from_seebeck(s))
    b = quality_factor(weighted_mobility(s, rho, t), t, lattice)
    expected = s**2 * t / rho / (lattice + lorenz * SEEBECK_UNIT**2 * t / rho)
    assert_allclose(seebeck**2 / (lorenz + 1 / (b * reduced)), expected, rtol=1e-9)


@pytest.mark.parametrize(
    ("ask", "words"),
    [
        (lambda: level_from_seebeck(0.0), "Seebeck coefficient in k/e is 0 but"),
        (lambda: level_from_seebeck([1e-4, np.nan]), "Seebeck coefficient in k/e is nan but"),
        (lambda: level_from_seebeck(0.06), r"is 0.06 V/K but must be below 0.05 V/K"),
        (lambda: weighted_mobility(1e-4, -1.0, 300.0), r"resistivity \[ohm m\] is -1 but"),
        (lambda: quality_factor(0.1, 300.0, 0.0), r"lattice_conductivity \[W/m/K\] is 0 but"),
        (lambda: fermi_integral(-1.0, 0.0), "order of a Fermi-Dirac integral is -1 but must lie above -1"),
        (lambda: fermi_integral(6, 0.0), "order of a Fermi-Dirac integral is 6 but must .* not above 5"),
        (lambda: fermi_integral(0.5, [0.0, np.inf]), "reduced level .* not finite"),
    ],
)
def test_questions_without_an_answer(ask, words):
    with pytest.raises(InputError, match=words):
        ask()


def test_fermi_integrals_keep_the_shape():
    assert fermi_integral(0.5, 1.0).shape == ()
    assert fermi_integral(0.5, np.zeros((2, 1, 700))).shape == (2, 1, 700)
    # F_0 = ln(1 + e^eta), closed form; far outside the range asked for too.
    level = np.array([-600.0, -100.0, 80.0, 1e4])
    assert_allclose(fermi_integral(0, level), np.logaddexp(0, level), rtol=1e-10)
