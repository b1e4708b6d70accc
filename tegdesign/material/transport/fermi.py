"""Fermi-Dirac integrals of real order."""

from __future__ import annotations

from math import gamma

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.errors import InputError
from tegdesign.material.curve import Array
from tegdesign.material.transport.window import blocks, fermi_window, half_power


def fermi_integral(order: float, level: ArrayLike, normalised: bool = False) -> Array:
    """Return the complete Fermi-Dirac integral F_j of one real order -1 < j <= 5 at reduced levels of any shape.

    ``F_j(eta) = integral_0^inf z^j / (1 + exp(z - eta)) dz``, divided by Gamma(j + 1) if ``normalised``;
    without unit. Integrated by parts it is the Fermi window over z^(j+1) / (j+1). Right to 1e-10 relative
    for levels -40..60 and orders -0.99..5, tested; goes on outside, 0 below about -700 where it
    underflows. Definition: NIST Digital Library of Mathematical Functions, section 25.12(iii).

    Raises
    ------
    InputError
        The order is out of bounds (from -1 down the integral does not exist) or a level is not finite.
    """
    if not -1 < order <= 5:
        raise InputError(f"order of a Fermi-Dirac integral is {order:g} but must lie above -1 and not above 5")
    eta = np.asarray(level, dtype=float)
    if not np.all(np.isfinite(eta)):
        raise InputError("reduced level of a Fermi-Dirac integral is not finite; give numbers")
    flat = eta.ravel()
    result = np.empty_like(flat)
    for part in blocks(flat.size):
        window = fermi_window(flat[part])
        result[part] = window.integral(half_power(window.energy, order + 1))
    return result.reshape(eta.shape) / (gamma(order + 2) if normalised else order + 1)
