"""An oven wall and its ratings with numbers changed, for the tests of cautions."""

from dataclasses import replace

from tegdesign.design.caution import cautions
from tegdesign.design.design import Design

MATERIALS = {"n": "bismuth-telluride-n-se0.3", "p": "bismuth-telluride-p-sb1.58", "hold_outside_data": "30 K"}


def design(**changes):
    data = {
        "title": "oven wall",
        "source": {"kind": "film", "temperature": "200 degC", "coefficient": "900 W/m2/K"},
        "sink": {"kind": "film", "temperature": "40 degC", "coefficient": "3000 W/m2/K"},
        "materials": MATERIALS,
        "module": {
            "columns": 6,
            "rows": 6,
            "leg_length": "1.6 mm",
            "leg_side_n": "1.4 mm",
            "leg_side_p": "1.4 mm",
            "pitch": "2.4 mm",
        },
    }
    return Design.model_validate(data | changes)


def found(rating):
    return {c.id: c for c in cautions(rating)}


def with_states(rating, *names, **values):
    """Return the rating with numbers of some states (all when none is named) changed."""
    changed = [replace(s, **values) if not names or s.name in names else s for s in rating.states]
    return replace(rating, states=tuple(changed))


def with_design(rating, **changes):
    return replace(rating, design=design(**changes))


def with_materials(rating, **values):
    """Return the rating with both materials changed."""
    return replace(rating, materials=tuple(replace(m, **values) for m in rating.materials))
