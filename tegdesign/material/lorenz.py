"""The share of the electrons in a measured thermal conductivity, by a published rule."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.material.curve import Array


def lorenz_rule(seebeck: ArrayLike) -> Array:
    """Return the Lorenz number [W ohm/K^2] from the Seebeck coefficient [V/K] by a published rule of thumb.

    L = (1.5 + exp(-|S| / 116 uV/K)) 1e-8, within 5 % for one parabolic band with acoustic scattering, 20 % for
    PbSe, PbS, PbTe and SiGe; the bipolar part is not in it. Kim et al. 2015, APL Mater. 3, 041506,
    doi 10.1063/1.4908244.
    """
    return np.asarray((1.5 + np.exp(-np.abs(np.asarray(seebeck, dtype=float)) / 116e-6)) * 1e-8)
