"""Constants of nature in SI units: exact by the definition of the SI, the others of CODATA 2022.

Written out because importing them from ``scipy.constants`` takes longer than sizing a generator; tests compare.
CODATA 2022: Mohr, Newell, Taylor and Tiesinga 2025, Rev. Mod. Phys. 97, 025002, doi 10.1103/RevModPhys.97.025002.
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
