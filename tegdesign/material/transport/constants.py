"""Constants of nature in SI units, from the CODATA values that scipy carries."""

from __future__ import annotations

from scipy import constants

BOLTZMANN = constants.k  # J/K, exact
CHARGE = constants.e  # C, exact
PLANCK = constants.h  # J s, exact
HBAR = constants.hbar  # J s
ELECTRON_MASS = constants.m_e  # kg
VACUUM_PERMITTIVITY = constants.epsilon_0  # F/m
SEEBECK_UNIT = BOLTZMANN / CHARGE  # V/K, 86.17 uV/K
