"""Absolute Seebeck coefficients from measurements against lead wires."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike

from tegdesign.material.curve import Array

# Measured through the Thomson effect at 300 K, +-0.2e-6 V/K (2 sigma): AIP Advances 9, 065312 (2019).
PLATINUM_AT_300_K = -4.8e-6  # V/K


def absolute_seebeck(relative: ArrayLike, lead: ArrayLike = PLATINUM_AT_300_K) -> Array:
    """Return sample values [V/K] from values measured against leads of Seebeck coefficient ``lead`` [V/K].

    S_sample = S_measured + S_lead. The default lead is platinum at 300 K; at other temperatures give its
    value there.
    """
    return np.asarray(np.asarray(relative, dtype=float) + np.asarray(lead, dtype=float))
