"""Constants of nature in SI units: SI Brochure, 9th edition (2019); CODATA 2022 for the measured two
(memory).
"""

from __future__ import annotations

from math import pi

BOLTZMANN = 1.380649e-23  # J/K, exact
CHARGE = 1.602176634e-19  # C, exact
PLANCK = 6.62607015e-34  # J s, exact
HBAR = PLANCK / (2 * pi)  # J s
ELECTRON_MASS = 9.1093837139e-31  # kg
VACUUM_PERMITTIVITY = 8.8541878188e-12  # F/m
SEEBECK_UNIT = BOLTZMANN / CHARGE  # V/K, 86.17 uV/K
