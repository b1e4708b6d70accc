"""Putting it together: clamping, slender legs."""

from __future__ import annotations

from collections.abc import Iterator

from tegdesign.design.caution.common import PRACTICE, caution
from tegdesign.design.rating import Caution, Rating
from tegdesign.design.wording import millimetres, number

PRESSURE = (1.0e6, 1.5e6)
SLENDER = 5.0


def clamping(rating: Rating) -> Iterator[Caution]:
    """Warn of interfaces that keep their resistance only under pressure."""
    design = rating.design
    if not (design.stack.hot.interface or design.stack.cold.interface):
        return
    area = design.module.width * design.module.depth
    low, high = (pressure * area for pressure in PRESSURE)
    more = ""
    if design.module.modules > 1:
        more = " Modules under one plate must agree in height within 0.025 mm, or each needs its own spring."
    yield caution(
        "clamping",
        "The interfaces need a spring-loaded clamp",
        f"{number(low, 3)} N to {number(high, 3)} N on each module",
        f"{PRESSURE[0] / 1e6:.1f} MPa to {PRESSURE[1] / 1e6:.1f} MPa of plate area",
        "Pressed interfaces keep the resistance assumed here only under even pressure: clamp through "
        "springs that follow the expansion, on plates thicker than 3 mm and flat within 0.025 mm, tightened "
        "in turns." + more,
        PRACTICE,
    )


def slender_legs(rating: Rating) -> Iterator[Caution]:
    """Warn of legs that are long for their side and stand free."""
    g = rating.design.module
    slenderness = g.leg_length / min(g.leg_side_n, g.leg_side_p)
    if slenderness > SLENDER:
        yield caution(
            "slender-legs",
            "Long slender legs",
            f"{number(slenderness, 3)} times as long as wide "
            f"({millimetres(g.leg_length)} by {millimetres(min(g.leg_side_n, g.leg_side_p))})",
            f"{SLENDER:g} times",
            "Free-standing brittle legs of this shape break in dicing, handling, clamping and shocks: "
            "support them with a filler or a frame, and count the heat that it carries.",
            PRACTICE,
        )
