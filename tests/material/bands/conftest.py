import pytest

# A made-up crystal, of the size of lead telluride, with every kind of law and scattering; not a real material.
TEXT = """\
kind = "bands"
name = "made-up-p"
composition = "none"
polarity = "p"
service_limit = "850 K"
density = "8160 kg/m^3"
temperatures = ["300 K", "850 K"]
doping = "5e19 1/cm^3"
doping_bounds = ["1e18 1/cm^3", "2e20 1/cm^3"]
grain_size = "2 um"
grain_size_bounds = ["50 nm", "100 um"]

[gap]
kind = "linear"
value = "0.18 eV"
slope = "0.4 meV/K"

[[bands]]
name = "light"
carrier = "hole"
mass = { kind = "power", value = 0.1, exponent = 0.5 }
degeneracy = 4
kane_gap = { kind = "linear", value = "0.18 eV", slope = "0.4 meV/K" }
[[bands.scattering]]
kind = "acoustic"
deformation_potential = "22 eV"
elastic_constant = "71 GPa"
[[bands.scattering]]
kind = "grain boundary"

[[bands]]
name = "heavy"
carrier = "hole"
mass = 0.4
degeneracy = 12
offset = { kind = "table", temperatures = ["300 K", "500 K", "850 K"], values = ["0.14 eV", "0.08 eV", "0.02 eV"] }
[[bands.scattering]]
kind = "acoustic"
deformation_potential = "20 eV"
elastic_constant = "71 GPa"

[[bands]]
name = "conduction"
carrier = "electron"
mass = 0.06
degeneracy = 4
[[bands.scattering]]
kind = "mobility"
mobility = "400 cm^2/V/s"
temperature_exponent = -2

[lattice]
kind = "debye-callaway"
[[lattice.branches]]
velocity = "1770 m/s"
upper = "136 K"
[[lattice.branches.scattering]]
kind = "umklapp"
coefficient = "1.5e-17 s/K"
[[lattice.branches.scattering]]
kind = "grain boundary"
"""


@pytest.fixture
def made_up(tmp_path):
    """Return a writer of the crystal with changes ``(old, new)``, as a path."""

    def write(*changes):
        text = TEXT
        for old, new in changes:
            assert old in text
            text = text.replace(old, new, 1)
        path = tmp_path / "made-up-p.toml"
        path.write_text(text)
        return path

    return write
