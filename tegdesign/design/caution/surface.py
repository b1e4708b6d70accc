"""Faces of the module: too hot to touch, or cold enough for dew."""

from __future__ import annotations

from collections.abc import Iterator

from tegdesign.design.caution.common import PRACTICE, caution
from tegdesign.design.rating import Caution, Rating
from tegdesign.design.wording import both, celsius, kelvin

# Accessible metal, class TS1, at 25 degC ambient [K]; plastics and class TS2 have higher figures.
TOUCH_METAL = (
    (321.15, "contact of more than 1 min"),
    (324.15, "contact of 10 s to 1 min"),
    (333.15, "contact of 1 s to 10 s"),
    (343.15, "contact of less than 1 s"),
)
TOUCH_SOURCE = (
    "IEC 62368-1, table 42, metal, class TS1 at 25 degC ambient, as reproduced by a certification body; it "
    "builds on ISO 13732-1:2006, which gives burn thresholds and sets no limits"
)
ROOM = 293.15


def touch(rating: Rating) -> Iterator[Caution]:
    """Warn of an outer face above the touch temperatures of metal, in the state in which it is hottest."""
    for side in ("hot", "cold"):
        state = max(rating.states, key=lambda s: getattr(s, f"T_{side}_face_K"))
        face = getattr(state, f"T_{side}_face_K")
        passed = [(limit, words) for limit, words in TOUCH_METAL if face > limit]
        if passed:
            listed = ", ".join(
                f"{celsius(limit)} for {words} by {kelvin(face - limit)}" for limit, words in passed
            )
            yield caution(
                f"touchable-{side}-face",
                f"The {side} face burns when touched",
                f"{both(face)} ({state.name})",
                f"{celsius(passed[0][0])} for {passed[0][1]}",
                f"The {side} face exceeds {listed}. Metal joined to it is as hot, and parts nearer to the "
                "source are hotter: guard or insulate what can be reached, mark it, and let it cool before "
                "work.",
                TOUCH_SOURCE,
            )


def condensation(rating: Rating) -> Iterator[Caution]:
    """Warn of a cold face below a room of 20 degC, on which moisture may condense."""
    state = min(rating.states, key=lambda s: s.T_cold_face_K)
    if state.T_cold_face_K < ROOM:
        yield caution(
            "condensation",
            "Water may condense on the cold side",
            f"{both(state.T_cold_face_K)} ({state.name})",
            f"{celsius(ROOM)} room",
            f"The cold face is {kelvin(ROOM - state.T_cold_face_K)} below a room of 20 degC. Where it is "
            "below the dew point of the air around it, water bridges the legs and corrodes the joints: seal "
            "the module or keep it dry.",
            PRACTICE,
        )
