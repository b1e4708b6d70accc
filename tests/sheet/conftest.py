import pytest

from tegdesign.design.design import Design
from tegdesign.design.rate import rate

PLAIN = {
    "title": "Tunnel kiln wall, sensor cabinet",
    "revision": "B2",
    "source": {"kind": "film", "temperature": "300 degC", "coefficient": "800 W/m2/K"},
    "sink": {"kind": "film", "temperature": "40 degC", "coefficient": "3000 W/m2/K"},
    "materials": {
        "n": "bismuth-telluride-n-se0.3",
        "p": "bismuth-telluride-p-sb1.58",
        "hold_outside_data": "30 K",
    },
    "module": {
        "columns": 16,
        "rows": 16,
        "leg_length": "1.6 mm",
        "leg_side_n": "1.4 mm",
        "leg_side_p": "1.3 mm",
        "pitch": "2.4 mm",
    },
}
# many modules, many cautions, limits missed, a long title with marks that drawing programs take for formulae
HEAVY = PLAIN | {
    "title": "Generator on the exhaust duct of the second glass melting furnace, north hall, with $battery$ "
    "buffer_x and a_very_long_word_" + "without_end_" * 12,
    "revision": "draft 17, after the meeting of the thermal group, not yet released for manufacture",
    "source": {
        "kind": "stream",
        "inlet_temperature": "560 degC",
        "mass_flow": "900 g/s",
        "heat_capacity": "1100 J/kg/K",
        "coefficient": "90 W/m2/K",
        "area_enlargement": 18,
        "fin_efficiency": 0.7,
    },
    "sink": {
        "kind": "stream",
        "inlet_temperature": "8 degC",
        "mass_flow": "1.2 kg/s",
        "heat_capacity": "4186 J/kg/K",
        "coefficient": "6000 W/m2/K",
    },
    "require": {
        "power": "2 kW",
        "voltage": ["24 V", "48 V"],
        "open_circuit_voltage": "60 V",
        "efficiency": 0.2,
        "hot_junction": "350 degC",
        "cold_junction": "20 degC",
    },
    "materials": {"n": "lead-telluride-n", "p": "tin-selenide-p", "hold_outside_data": "100 K"},
    "losses": {"radiation": False, "leads": False},
    "module": {
        "columns": 9,
        "rows": 14,
        "leg_length": "0.5 mm",
        "leg_side_n": "2.2 mm",
        "leg_side_p": "1.7 mm",
        "pitch": "2.6 mm",
        "modules_in_series": 24,
        "modules_in_parallel": 3,
    },
}
# one couple, one column, fixed heat, no hot plate, load far from matched
TINY = PLAIN | {
    "title": "One couple",
    "source": {"kind": "heat", "heat": "0.11 W", "leak_conductance": "0.1 mW/K"},
    "sink": {"kind": "surface", "temperature": "15 degC"},
    "load": {"kind": "resistance", "resistance": "60 mohm"},
    "stack": {
        "hot": {"interface": "0 m2 K/W", "substrate_thickness": "0 mm"},
        "cold": {"interface": "0 m2 K/W"},
    },
    "module": {
        "columns": 1,
        "rows": 2,
        "leg_length": "12 mm",
        "leg_side_n": "1.1 mm",
        "leg_side_p": "0.9 mm",
        "pitch": "1.4 mm",
        "edge_margin": "0 mm",
    },
    "materials": PLAIN["materials"] | {"hold_outside_data": "60 K"},
}
# states of every sort behind a converter that keeps some power
STATES = PLAIN | {
    "title": "Kiln wall in eight states",
    "load": {
        "kind": "converter", "running_voltage": ["1 V", "4 V"], "start_voltage": "2 V", "input_voltage_limit": "30 V",
        "efficiency": 0.9, "standby_power": "50 mW",
    },
    "materials": PLAIN["materials"] | {"hold_outside_data": "60 K"},
    "require": {"power": "2 W", "hot_junction": "240 degC", "short_time_hot_junction": "280 degC"},
    "states": [
        {"name": "winter", "sink": {"temperature": "5 degC"}, "source": {"coefficient": "700 W/m2/K"}},
        {"name": "over-fired for a while after the charge", "source": {"temperature": "340 degC"}, "duration": "20 min",
         "holds": []},
        {"name": "unplugged", "load": "open"},
        {"name": "shorted", "load": "short"},
        {"name": "start of the week", "source": {"temperature": "60 degC"}, "holds": ["voltage"]},
        {"name": "other converter", "load": {"efficiency": 0.8}},
        {"name": "by water", "sink": {"kind": "surface", "temperature": "45 degC"}},
    ],
}  # fmt: skip
# computed materials, one of them graded, heat by light
COMPUTED = PLAIN | {
    "title": "Sunlit couple of computed materials",
    "source": {
        "kind": "irradiance", "irradiance": "1 kW/m2", "aperture": "1600 cm2", "concentration": 40,
        "transmittance": 0.9, "absorptance": 0.95, "emittance": 0.05,
    },
    "materials": {
        "n": "lead-telluride-n-bands", "p": "lead-telluride-p-bands", "hold_outside_data": "30 K",
        "make_n": {"doping": "1e19 1/cm3", "doping_hot": "2e19 1/cm3", "graded_between": ["50 degC", "250 degC"]},
        "make_p": {"doping": "4e19 1/cm3", "grain_size": "800 nm"},
    },
}  # fmt: skip
CASES = {"plain": PLAIN, "heavy": HEAVY, "tiny": TINY, "states": STATES, "computed": COMPUTED}


@pytest.fixture(scope="session")
def ratings():
    """Return the ratings of all cases."""
    return {name: rate(Design.model_validate(data)) for name, data in CASES.items()}


@pytest.fixture(scope="session", params=list(CASES))
def rating(request, ratings):
    """Return the rating of each case in turn."""
    return ratings[request.param]


@pytest.fixture(scope="session")
def plain(ratings):
    """Return the rating of the plain case."""
    return ratings["plain"]
