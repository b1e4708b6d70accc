import copy

import pytest

from tegdesign.design.brief import Brief
from tegdesign.design.design import Design

POWER = {
    "title": "duct wall",
    "source": {
        "kind": "film",
        "temperature": "260 degC",
        "coefficient": "250 W/m2/K",
        "area_enlargement": 6,
        "fin_efficiency": 0.8,
    },
    "sink": {"kind": "film", "temperature": "30 degC", "coefficient": "2500 W/m2/K"},
    "materials": {
        "n": "bismuth-telluride-n-se0.3",
        "p": "bismuth-telluride-p-sb1.58",
        "hold_outside_data": "40 K",
    },
    "limits": {"footprint": ["40 mm", "40 mm"]},
    "stack": {"filler": "aerogel"},
}
HEAT = {
    "title": "burner",
    "aim": "efficiency",
    "source": {
        "kind": "heat",
        "heat": "200 W",
        "leak_conductance": "0.04 W/K",
        "ambient_temperature": "10 degC",
    },
    "sink": {
        "kind": "film",
        "temperature": "10 degC",
        "coefficient": "40 W/m2/K",
        "area": "900 cm2",
        "area_enlargement": 9,
        "fin_efficiency": 0.8,
    },
    "materials": {"n": "lead-telluride-n", "p": "lead-telluride-p", "hold_outside_data": "20 K"},
    "limits": {
        "footprint": ["45 mm", "45 mm"],
        "leg_length": ["2 mm", "15 mm"],
        "leg_side": ["1.5 mm", "6 mm"],
        "slenderness": 6,
    },
    "stack": {"filler": "fibre"},
}
BUILT = {key: POWER[key] for key in ("title", "source", "sink", "materials", "stack")} | {
    "module": {
        "columns": 12,
        "rows": 12,
        "leg_length": "1.4 mm",
        "leg_side_n": "2.4 mm",
        "leg_side_p": "2.9 mm",
        "pitch": "3.15 mm",
        "modules_in_series": 2,
    }
}


def changed(data, changes):
    """Return a copy with dotted keys set."""
    out = copy.deepcopy(data)
    for key, value in changes.items():
        *tables, last = key.split(".")
        place = out
        for table in tables:
            place = place.setdefault(table, {})
        place[last] = value
    return out


@pytest.fixture(scope="session")
def power_brief():
    return lambda **changes: Brief.model_validate(changed(POWER, changes.get("keys", {})))


@pytest.fixture(scope="session")
def heat_brief():
    return lambda **changes: Brief.model_validate(changed(HEAT, changes.get("keys", {})))


@pytest.fixture(scope="session")
def design():
    return lambda **changes: Design.model_validate(changed(BUILT, changes.get("keys", {})))
