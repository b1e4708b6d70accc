"""What passes between the plates beside the legs: filler or gas, and radiation."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.material.curve import Array

STEFAN_BOLTZMANN = 5.670374419e-8  # W/m^2/K^4, CODATA 2018


class Filler(NamedTuple):
    """A filler of conductivity k300 (T/300 K)^exponent [W/m/K]; ``transparent`` lets thermal radiation through."""

    conductivity: float
    exponent: float
    transparent: bool


# Gases at about one bar. Values are fits of k(T) from 300 K to 900 K, within 2 % of the CoolProp property library
# (tests/outside/test_gap.py). Natural convection is nil at leg lengths of millimetres (Bjork et al. 2014,
# Int. J. Therm. Sci. 85, 12). The powders and blankets are typical trade figures, (memory).
FILLERS: dict[str, Filler] = {
    "vacuum": Filler(0.0, 0.0, True),
    "air": Filler(0.0267, 0.78, True),
    "nitrogen": Filler(0.0263, 0.76, True),
    "argon": Filler(0.0181, 0.74, True),
    "aerogel": Filler(0.020, 0.5, False),
    "fibre": Filler(0.050, 0.8, False),
}


def conduction(
    hot: ArrayLike, cold: ArrayLike, conductivity: ArrayLike, exponent: ArrayLike
) -> tuple[Array, Array, Array]:
    """Return the integral of k dT from cold to hot [W/m] and its derivatives by hot and cold temperature.

    k = k300 (T/300 K)^n, exact for the power law; negative when hot is below cold.
    """
    h, c, k, n = (np.asarray(v, dtype=float) for v in (hot, cold, conductivity, exponent))
    with np.errstate(invalid="ignore", over="ignore"):  # iterations may wander; the solver judges what it gets
        kh, kc = k * (h / 300.0) ** n, k * (c / 300.0) ** n
    return np.asarray((kh * h - kc * c) / (n + 1)), np.asarray(kh), np.asarray(-kc)


def radiation(
    hot: ArrayLike, cold: ArrayLike, emittance_hot: ArrayLike, emittance_cold: ArrayLike
) -> tuple[Array, Array, Array]:
    """Return sigma (Th^4 - Tc^4) / (1/e_h + 1/e_c - 1) [W/m^2] and its derivatives by hot and cold temperature.

    Grey parallel plates: an upper bound, since the leg walls between them only send heat back.
    """
    h, c, eh, ec = (np.asarray(v, dtype=float) for v in (hot, cold, emittance_hot, emittance_cold))
    black = STEFAN_BOLTZMANN / (1 / eh + 1 / ec - 1)
    return np.asarray(black * (h**4 - c**4)), np.asarray(4 * black * h**3), np.asarray(-4 * black * c**3)
