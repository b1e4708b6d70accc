"""The constants against those that scipy carries (CODATA 2018 or 2022, whichever its version has)."""

from numpy.testing import assert_allclose
from scipy import constants as reference

from tegdesign.material.transport import constants


def test_constants():
    for name, value, digits in (
        ("BOLTZMANN", reference.k, 1e-15),
        ("CHARGE", reference.e, 1e-15),
        ("PLANCK", reference.h, 1e-15),
        ("HBAR", reference.hbar, 1e-15),
        ("ELECTRON_MASS", reference.m_e, 1e-9),
        ("VACUUM_PERMITTIVITY", reference.epsilon_0, 1e-8),
    ):
        assert_allclose(getattr(constants, name), value, rtol=digits)
