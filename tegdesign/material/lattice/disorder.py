"""How strongly atoms that differ in mass and size scatter phonons."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from tegdesign.errors import InputError
from tegdesign.material.transport.law import above_zero


def disorder(
    fractions: Sequence[float],
    masses: Sequence[float],
    radii: Sequence[float] | None = None,
    strain: float = 0.0,
) -> float:
    """Return the disorder parameter Gamma (no unit) of one lattice site shared by several kinds of atoms.

    Gamma = sum c_i [(1 - M_i/M)^2 + strain (1 - r_i/r)^2], M and r the averages; masses and radii in any one
    unit, ``strain`` the dimensionless strain parameter. Klemens 1955, Proc. Phys. Soc. A 68, 1113, doi
    10.1088/0370-1298/68/12/303; Abeles 1963, Phys. Rev. 131, 1906, doi 10.1103/PhysRev.131.1906.

    Raises
    ------
    InputError
        Lists of unequal length, fractions that do not add to 1, a mass or radius that is not above 0, or a
        strain parameter without radii.
    """
    c, m = np.asarray(fractions, dtype=float), np.asarray(masses, dtype=float)
    r = np.ones_like(m) if radii is None else np.asarray(radii, dtype=float)
    if not c.shape == m.shape == r.shape:
        raise InputError(
            f"disorder needs equal lists, got {c.size} fractions, {m.size} masses, {r.size} radii; "
            "give one of each an atom"
        )
    if np.any(c < 0) or abs(c.sum() - 1) > 1e-9:
        raise InputError(f"fractions of the disorder add to {c.sum():.9g} but must be 0 or above and add to 1")
    above_zero(m, "mass of an atom")
    above_zero(r, "radius of an atom")
    if strain < 0 or (strain > 0 and radii is None):
        raise InputError(f"strain of the disorder is {strain:g} but must be 0 or above, and needs radii")
    parts = (1 - m / (c @ m)) ** 2 + strain * (1 - r / (c @ r)) ** 2
    return float(c @ parts)
