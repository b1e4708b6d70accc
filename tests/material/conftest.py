import pytest

GOOD = """\
kind = "table"
name = "home-made-n"
composition = "Mg2Si0.4Sn0.6"
polarity = "n"
service_limit = "450 degC"
service_limit_basis = "our furnace test"
density = "3.1 g/cm3"
points = \"\"\"
temperature [degC], seebeck_coefficient [uV/K], resistivity [mohm cm], thermal_conductivity [W/m/K]
               100,                       -120,                  0.80,                          2.4
               200,                       -140,                  0.95,                          2.3
               300,                       -160,                  1.10,                          2.2
               400,                       -180,                  1.25,                          2.2
\"\"\"

[source]
citation = "our laboratory, series 7"
"""


@pytest.fixture
def user_file(tmp_path):
    """Write the good file with changes (old text -> new text) and return its path."""

    def write(*changes, name="home-made-n.toml"):
        text = GOOD
        for old, new in changes:
            assert text.count(old) == 1, old
            text = text.replace(old, new)
        path = tmp_path / name
        path.write_text(text)
        return path

    return write
