import pytest

from tegdesign.material.transport.band import Band
from tegdesign.material.transport.bands import Bands
from tegdesign.material.transport.constants import CHARGE
from tegdesign.material.transport.law import Linear
from tegdesign.material.transport.scattering.acoustic import Acoustic
from tegdesign.material.transport.scattering.alloy import Alloy
from tegdesign.material.transport.scattering.grain import GrainBoundary
from tegdesign.material.transport.scattering.ionised import IonisedImpurity
from tegdesign.material.transport.scattering.polar import PolarOptical


@pytest.fixture
def narrow_gap():
    """Kane electrons with every mechanism, light Kane holes, heavy parabolic holes that come nearer when hot."""
    eV = CHARGE
    return Bands(
        (
            Band(
                "electron",
                0.10,
                (
                    Acoustic(20 * eV, 7e10),
                    Alloy(1.1 * eV, 0.2, 3.3e-29),
                    IonisedImpurity(120.0),
                    PolarOptical(120.0, 30.0),
                    GrainBoundary(1e-6),
                ),
                inertial_mass=0.08,
                degeneracy=4,
                kane_gap=Linear(0.18 * eV, 4e-4 * eV),
                name="L",
            ),
            Band(
                "hole",
                0.11,
                (Acoustic(25 * eV, 7e10), PolarOptical(120.0, 30.0)),
                degeneracy=4,
                kane_gap=0.3 * eV,
            ),
            Band("hole", 0.40, (Acoustic(25 * eV, 7e10),), degeneracy=12, offset=Linear(0.15 * eV, -2e-4 * eV)),
        ),
        gap=Linear(0.18 * eV, 4e-4 * eV),
    )
