"""Report of a sizing: the verdict on the brief and what binds, then the rating of the design."""

from __future__ import annotations

from tegdesign.design.rating import Check
from tegdesign.design.size import Sizing
from tegdesign.sheet.legs import making
from tegdesign.sheet.margin import mending
from tegdesign.sheet.table import table_text
from tegdesign.sheet.text import INDENT, WIDTH, fold, rating_report, section_text

AIM_UNIT = {"power": "W", "efficiency": "%", "power per footprint": "W/m2", "power per material mass": "W/kg"}


def missed(check: Check) -> str:
    """Return in words by how much a limit is missed."""
    unit = "" if check.unit == "1" else f" {check.unit}"
    word = "above" if check.sense == "most" else "below"
    return (
        f"{check.name} ({check.state}): {check.value:.5g}{unit} is {abs(check.margin):.4g}{unit} {word} the limit of "
        f"{check.limit:.5g}{unit}"
    )


def verdict(sizing: Sizing) -> str:
    """Return the first lines: whether the brief is met, and if not what fails and by how much."""
    if sizing.met:
        return f"BRIEF MET: {sizing.brief.title}"
    lines = [f"BRIEF NOT MET: {sizing.brief.title}", *(f"  {missed(c)}" for c in sizing.failed)]
    lines += [fold(said, WIDTH, INDENT, INDENT * 2) for said in mending(sizing.rating, sizing.brief.limits)]
    return "\n".join([*lines, "  The design below is the best found within the limits."])


def sizing_report(sizing: Sizing) -> str:
    """Return the report that ``tegdesign size`` prints."""
    unit = AIM_UNIT[sizing.brief.aim]
    factor = 100.0 if unit == "%" else 1.0
    of_all = sizing.brief.aim == "efficiency" and sizing.brief.source.given_heat is not None
    basis = " on all the heat given" if of_all else ""
    cost = 1 - sizing.objective / sizing.objective_before_rounding
    aim = (
        f"Aim: {sizing.brief.aim}{basis}, {sizing.objective * factor:.5g} {unit}; "
        f"{sizing.objective_before_rounding * factor:.5g} {unit} before rounding to workshop steps "
        f"({-100 * cost:+.2f} %)"
    )
    binding = "Nothing binds: the optimum lies inside all limits."
    if sizing.binding:
        rows = [[b.name, b.value, b.limit] for b in sizing.binding]
        binding = "What binds (more would need this to give way)\n" + table_text(
            ["limit", "here", "bound"], rows
        )
    made = [] if sizing.making is None else [section_text(making(sizing.making))]
    parts = [verdict(sizing), aim, binding, *made, rating_report(sizing.rating).rstrip()]
    if sizing.assumed_limits:
        rows = [[key, _value(value)] for key, value in sizing.assumed_limits.items()]
        parts.append(
            "LIMITS AND STEPS OF THE BRIEF TAKEN FROM DEFAULTS\n" + table_text(["key", "value"], rows)
        )
    return "\n\n".join(parts)


def _value(value: object) -> str:
    return " to ".join(map(str, value)) if isinstance(value, (list, tuple)) else str(value)
